//! One group of assets: the unit of thread, order and replay. It only dispatches.

mod asset;

use alloc::{
    collections::{BTreeMap, BTreeSet},
    sync::Arc,
    vec::Vec,
};

use humward_signal::frame::Scratch;
use humward_wire::{
    block::Block,
    command::{Command, Verb},
    id::Id,
    out::{Header, Instant, Outcome, Reply},
    refusal::Refusal,
};

use crate::{
    action::Action,
    analysis::PointAnalysis,
    input::{DeadlineReason, GapCause, Identity, Input, Source},
    judge::{AssetJudge, Context, Tally},
    plan::{AssetPlan, GroupPlan},
    time::{Arrival, SignalTime, Span},
};
use asset::Asset;

/// Statuses due longer before an input than this are left out: a step's work stays bounded after a long silence.
const LONGEST_CATCH_UP: Span = Span::from_secs(86_400);

/// The state of a group, driven by [`Group::step`].
#[derive(Default)]
pub struct Group {
    identity: Option<Identity>,
    plan: Option<Arc<GroupPlan>>,
    assets: Vec<Asset>,
    /// How far stamps run ahead of the wall clock, after it was set back.
    ahead: Span,
    /// Event numbers of assets that left the plan, should they come back.
    numbers: BTreeMap<Id, u64>,
}

impl core::fmt::Debug for Group {
    fn fmt(&self, f: &mut core::fmt::Formatter<'_>) -> core::fmt::Result {
        let id = self.plan.as_ref().map(|plan| plan.id());
        f.debug_struct("Group")
            .field("id", &id)
            .field("assets", &self.assets.len())
            .finish_non_exhaustive()
    }
}

impl Group {
    /// A group that knows nothing: it takes [`Input::Started`] and [`Input::Plan`] before anything else counts.
    pub fn new() -> Self {
        Self::default()
    }

    /// Takes in one stamped input; what is to be done is appended to `actions` in order.
    ///
    /// First every deadline up to `arrival` is seen to, each stamped with itself; then the input. The result
    /// depends on the inputs and their stamps alone. Of the statuses due in a silence of more than a day only
    /// the last day's are told. `scratch` is working memory of the thread.
    pub fn step(
        &mut self,
        arrival: Arrival,
        input: &Input,
        scratch: &mut Scratch,
        actions: &mut Vec<Action>,
    ) {
        let from = arrival.minus(LONGEST_CATCH_UP);
        while let Some((due, reason)) = self.next_deadline().filter(|(due, _)| *due <= arrival) {
            if due < from && reason == DeadlineReason::StatusDue {
                self.each_asset(due, |asset, context| {
                    asset.judge.skip_statuses(context.plan, from)
                });
            } else {
                self.deadline(due, actions);
            }
        }
        match input {
            Input::Started(identity) => self.identity = Some(identity.clone()),
            Input::Plan(plan) => self.replan(arrival, plan, actions),
            Input::Block(source, block) => self.block(arrival, source, block, scratch, actions),
            Input::Speed(asset, speed) => {
                let at = speed
                    .at
                    .map_or(arrival.as_signal_time(), SignalTime::from_ns);
                self.with_asset(asset, arrival, |asset, context| {
                    if speed.shaft.is_none() {
                        asset.judge.speed(context, at, speed.rpm, actions);
                    } else {
                        // An asset has one shaft here: another's speed, or its 0, must not become its own.
                        asset.judge.count("other_shaft", 1);
                    }
                });
            }
            Input::Process(asset, process) => {
                let at = process
                    .at
                    .map_or(arrival.as_signal_time(), SignalTime::from_ns);
                self.with_asset(asset, arrival, |asset, context| {
                    asset.judge.process(context, at, process, actions);
                });
            }
            Input::Command(asset, sender, command) => {
                self.command(arrival, asset, sender, command, actions)
            }
            Input::Gap(Some(source), cause, blocks) => self.gap(arrival, source, *cause, *blocks),
            Input::Gap(None, cause, blocks) => self.gap_everywhere(arrival, *cause, *blocks),
            Input::Refused(source, refusal) => self.refused(arrival, source, *refusal),
            Input::Link(up) => self.link(arrival, *up),
            Input::ClockStep(by) => self.clock_step(*by),
            Input::Deadline(DeadlineReason::RecordingEnd) => self.close_all(arrival, actions),
            Input::Deadline(
                DeadlineReason::ReadingOverdue
                | DeadlineReason::SpeedStands
                | DeadlineReason::SensorOverdue
                | DeadlineReason::StatusDue,
            ) => {}
        }
        self.tell(arrival, actions);
    }

    /// The next instant at which something is due although nothing arrives, and why. At the end of time nothing is.
    pub fn next_deadline(&self) -> Option<(Arrival, DeadlineReason)> {
        self.identity.as_ref()?;
        let plan = self.plan.as_ref()?;
        let of_asset = |(asset, plan): (&Asset, &AssetPlan)| {
            let (due, reason) = asset.judge.due(plan);
            let overdue = asset.points.iter().filter_map(PointAnalysis::overdue).min();
            match overdue {
                Some(overdue) if overdue <= due => (overdue, DeadlineReason::ReadingOverdue),
                _ => (due, reason),
            }
        };
        let next = self.assets.iter().zip(plan.assets()).map(of_asset).min();
        next.filter(|(due, _)| due.ns() < i64::MAX)
    }

    /// What became of the readings so far: of each asset of the plan in order, of each of its points in order.
    pub fn tallies(&self) -> impl Iterator<Item = &[Tally]> {
        self.assets.iter().map(|asset| asset.judge.tallies())
    }

    fn deadline(&mut self, due: Arrival, actions: &mut Vec<Action>) {
        self.each_asset(due, |asset, context| {
            for point in 0..asset.points.len() {
                if asset.points[point]
                    .overdue()
                    .is_some_and(|overdue| overdue <= due)
                {
                    asset.close_overdue(context, point, actions);
                }
            }
            asset.judge.deadline(context, actions);
        });
        self.tell(due, actions);
    }

    fn block(
        &mut self,
        arrival: Arrival,
        source: &Source,
        block: &Block,
        scratch: &mut Scratch,
        actions: &mut Vec<Action>,
    ) {
        // A block without a time of its own ended when it arrived.
        let length = Span::from_secs_f64(block.frames() as f64 / block.rate_hz);
        let stamped = || arrival.as_signal_time().minus(length);
        let at = block.at.map_or_else(stamped, SignalTime::from_ns);
        self.with_asset(&source.asset, arrival, |asset, context| {
            if let Some(rpm) = block.rpm {
                asset.judge.speed(context, at, rpm, actions);
            }
            let mut losses = BTreeSet::new();
            for (point, plan) in context.plan.spec().points.iter().enumerate() {
                if plan.spec().source == source.source {
                    losses.extend(asset.push(context, point, block, at, scratch, actions));
                }
            }
            // Several points of one block lose it once.
            for loss in losses {
                asset.judge.count(loss, 1);
            }
        });
    }

    fn refused(&mut self, arrival: Arrival, source: &Source, refusal: Refusal) {
        self.with_source(source, arrival, |asset, point, _| {
            asset.judge.refused(point, refusal, arrival);
        });
        self.with_asset(&source.asset, arrival, |asset, _| {
            asset.judge.count(refusal.reason.code(), 1);
        });
    }

    fn gap(&mut self, arrival: Arrival, source: &Source, cause: GapCause, blocks: u64) {
        self.with_source(source, arrival, |asset, point, _| {
            asset.points[point].gap();
            asset.judge.our_gap(point);
        });
        self.with_asset(&source.asset, arrival, |asset, _| {
            asset.judge.gap(cause, blocks)
        });
    }

    fn gap_everywhere(&mut self, arrival: Arrival, cause: GapCause, blocks: u64) {
        self.each_asset(arrival, |asset, _| {
            for (point, analysis) in asset.points.iter_mut().enumerate() {
                analysis.gap();
                asset.judge.our_gap(point);
            }
            asset.judge.gap(cause, blocks);
        });
    }

    /// Stamps jump forward by what a step gains over steps back that came before; after a step back they run on.
    fn clock_step(&mut self, by: i64) {
        let jump = Span::from_ns(by.saturating_sub(self.ahead.ns()));
        self.ahead = Span::from_ns(self.ahead.ns().saturating_sub(by));
        for asset in &mut self.assets {
            for point in &mut asset.points {
                point.wall_clock_set(jump);
            }
            asset.judge.wall_clock_set(jump, by);
        }
    }

    fn link(&mut self, arrival: Arrival, up: bool) {
        if !up {
            self.break_runs();
        }
        for asset in &mut self.assets {
            asset.judge.link(up, arrival);
        }
    }

    fn break_runs(&mut self) {
        for point in self.assets.iter_mut().flat_map(|asset| &mut asset.points) {
            point.gap();
        }
    }

    fn close_all(&mut self, arrival: Arrival, actions: &mut Vec<Action>) {
        self.each_asset(arrival, |asset, context| {
            for point in 0..asset.points.len() {
                asset.close_overdue(context, point, actions);
            }
        });
    }

    fn tell(&mut self, arrival: Arrival, actions: &mut Vec<Action>) {
        self.each_asset(arrival, |asset, context| {
            asset.judge.tell_status(context, actions)
        });
    }

    fn replan(&mut self, arrival: Arrival, plan: &Arc<GroupPlan>, actions: &mut Vec<Action>) {
        let Some(identity) = &self.identity else {
            return;
        };
        let mut before: Vec<(AssetPlan, Asset)> = match &self.plan {
            Some(old) => old
                .assets()
                .iter()
                .cloned()
                .zip(self.assets.drain(..))
                .collect(),
            None => Vec::new(),
        };
        for new in plan.assets() {
            let context = Context {
                identity,
                plan: new,
                arrival,
            };
            let judge = match before.iter().position(|(old, _)| old.id() == new.id()) {
                Some(place) => {
                    let (old, mut asset) = before.remove(place);
                    asset.judge.replan(&old, context, actions);
                    asset.judge
                }
                None => {
                    let mut judge = AssetJudge::new(new, arrival);
                    judge.count_on_from(self.numbers.remove(new.id()).unwrap_or_default());
                    judge
                }
            };
            let spec = new.spec();
            let points = spec
                .points
                .iter()
                .map(|_| PointAnalysis::new(spec.reading_every, spec.speed.lowest))
                .collect();
            self.assets.push(Asset { points, judge });
        }
        for (old, mut asset) in before {
            asset.judge.retire(
                Context {
                    identity,
                    plan: &old,
                    arrival,
                },
                actions,
            );
            self.numbers.insert(old.id().clone(), asset.judge.last_n());
        }
        self.plan = Some(Arc::clone(plan));
    }

    fn command(
        &mut self,
        arrival: Arrival,
        asset: &Id,
        sender: &Id,
        command: &Command,
        actions: &mut Vec<Action>,
    ) {
        self.with_asset(asset, arrival, |state, context| {
            let expired = command
                .expires
                .is_some_and(|expires| expires <= arrival.ns());
            let (outcome, reason) = if expired {
                (
                    Outcome::Expired,
                    Some("it came after its own expires".into()),
                )
            } else if command.verb == Verb::Status {
                state.judge.want_status();
                (Outcome::Ok, None)
            } else {
                (
                    Outcome::Refused,
                    Some("this version answers status only".into()),
                )
            };
            let Context { identity, plan, .. } = context;
            let at = Instant(arrival.ns());
            let header = Header::new::<Reply>(
                identity.gateway.clone(),
                identity.epoch,
                identity.site.clone(),
                Some(plan.id().clone()),
                at,
            );
            let reply = Reply {
                header,
                id: Some(command.id.clone()),
                outcome,
                outcome_code: outcome.code(),
                reason,
                offset: None,
                occurrence: command.occurrence.clone(),
                event: None,
            };
            actions.push(Action::Reply {
                asset: plan.id().clone(),
                sender: sender.clone(),
                reply,
            });
        });
    }

    fn each_asset(&mut self, arrival: Arrival, mut act: impl FnMut(&mut Asset, Context<'_>)) {
        let (Some(identity), Some(plan)) = (&self.identity, &self.plan) else {
            return;
        };
        for (asset, plan) in self.assets.iter_mut().zip(plan.assets()) {
            act(
                asset,
                Context {
                    identity,
                    plan,
                    arrival,
                },
            );
        }
    }

    fn with_asset(&mut self, id: &Id, arrival: Arrival, act: impl FnOnce(&mut Asset, Context<'_>)) {
        let (Some(identity), Some(plan)) = (&self.identity, &self.plan) else {
            return;
        };
        if let Some(place) = plan.assets().iter().position(|asset| asset.id() == id)
            && let Some(asset) = self.assets.get_mut(place)
        {
            act(
                asset,
                Context {
                    identity,
                    plan: &plan.assets()[place],
                    arrival,
                },
            );
        }
    }

    fn with_source(
        &mut self,
        source: &Source,
        arrival: Arrival,
        mut act: impl FnMut(&mut Asset, usize, Context<'_>),
    ) {
        self.with_asset(&source.asset, arrival, |asset, context| {
            for (point, plan) in context.plan.spec().points.iter().enumerate() {
                if plan.spec().source == source.source {
                    act(asset, point, context);
                }
            }
        });
    }
}
