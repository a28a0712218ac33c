//! One group of assets: the unit of thread, order and replay. It only dispatches.

use alloc::{sync::Arc, vec::Vec};

use humward_signal::frame::Scratch;
use humward_wire::{
    block::Block,
    command::{Command, Verb},
    id::Id,
    out::{Header, Instant, Outcome, Reply},
};

use crate::{
    action::Action,
    analysis::{Arriving, PointAnalysis, Speeds},
    input::{DeadlineReason, GapCause, Identity, Input, Source},
    judge::{AssetJudge, Context, SpeedTrack, Tally},
    plan::{AssetPlan, GroupPlan},
    reading::ShaftSpeed,
    time::{Arrival, SignalTime},
};

/// One asset's state: what may be thrown away and what must last.
struct Asset {
    points: Vec<PointAnalysis>,
    judge: AssetJudge,
}

/// The speeds of one asset, as its analysis asks for them.
struct AssetSpeeds<'a> {
    plan: &'a AssetPlan,
    track: &'a SpeedTrack,
}

impl Speeds for AssetSpeeds<'_> {
    fn over(&self, start: SignalTime, end: SignalTime) -> (ShaftSpeed, bool) {
        self.track.over(start, end, self.plan)
    }
}

/// The state of a group, driven by [`Group::step`].
#[derive(Default)]
pub struct Group {
    identity: Option<Identity>,
    plan: Option<Arc<GroupPlan>>,
    assets: Vec<Asset>,
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
    /// depends on the inputs and their stamps alone. `scratch` is working memory of the thread.
    pub fn step(
        &mut self,
        arrival: Arrival,
        input: &Input,
        scratch: &mut Scratch,
        actions: &mut Vec<Action>,
    ) {
        while let Some((due, _)) = self.next_deadline().filter(|(due, _)| *due <= arrival) {
            self.deadline(due, actions);
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
                    asset.judge.speed(context, at, speed.rpm, actions)
                });
            }
            // Operating states by process values are told apart from here on; nothing is judged by them yet.
            Input::Process(asset, _) => self.with_asset(asset, arrival, |_, _| ()),
            Input::Command(asset, sender, command) => {
                self.command(arrival, asset, sender, command, actions)
            }
            Input::Gap(Some(source), cause, blocks) => self.gap(arrival, source, *cause, *blocks),
            Input::Gap(None, cause, blocks) => self.gap_everywhere(*cause, *blocks),
            Input::Refused(source, refusal) => {
                self.with_source(source, arrival, |asset, point, _| {
                    asset.judge.refused(point, *refusal);
                    asset.judge.count(refusal.reason.code(), 1);
                })
            }
            Input::Link(up) => self.link(arrival, *up),
            Input::ClockStep(_) => self.break_runs(),
            Input::Deadline(DeadlineReason::RecordingEnd) => self.close_all(arrival, actions),
            Input::Deadline(
                DeadlineReason::ReadingOverdue
                | DeadlineReason::SensorOverdue
                | DeadlineReason::StatusDue,
            ) => {}
        }
        self.tell(arrival, actions);
    }

    /// The next instant at which something is due although nothing arrives, and why.
    pub fn next_deadline(&self) -> Option<(Arrival, DeadlineReason)> {
        self.identity.as_ref()?;
        let plan = self.plan.as_ref()?;
        let of_asset = |(asset, plan): (&Asset, &AssetPlan)| {
            let (due, by_sensor) = asset.judge.due(plan);
            let reason = if by_sensor {
                DeadlineReason::SensorOverdue
            } else {
                DeadlineReason::StatusDue
            };
            let overdue = asset.points.iter().filter_map(PointAnalysis::overdue).min();
            match overdue {
                Some(overdue) if overdue <= due => (overdue, DeadlineReason::ReadingOverdue),
                _ => (due, reason),
            }
        };
        self.assets.iter().zip(plan.assets()).map(of_asset).min()
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
        let at = block
            .at
            .map_or(arrival.as_signal_time(), SignalTime::from_ns);
        self.with_asset(&source.asset, arrival, |asset, context| {
            if let Some(rpm) = block.rpm {
                asset.judge.speed(context, at, rpm, actions);
            }
            for (point, plan) in context.plan.spec().points.iter().enumerate() {
                if plan.spec().source == source.source {
                    asset.push(context, point, block, at, scratch, actions);
                }
            }
        });
    }

    fn gap(&mut self, arrival: Arrival, source: &Source, cause: GapCause, blocks: u64) {
        self.with_source(source, arrival, |asset, point, _| asset.points[point].gap());
        self.with_asset(&source.asset, arrival, |asset, _| {
            asset.judge.gap(cause, blocks)
        });
    }

    fn gap_everywhere(&mut self, cause: GapCause, blocks: u64) {
        self.break_runs();
        for asset in &mut self.assets {
            asset.judge.gap(cause, blocks);
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
                None => AssetJudge::new(new, arrival),
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

impl Asset {
    fn push(
        &mut self,
        context: Context<'_>,
        point: usize,
        block: &Block,
        at: SignalTime,
        scratch: &mut Scratch,
        actions: &mut Vec<Action>,
    ) {
        let plan = context.plan.spec().points[point].spec();
        let mut closed = Vec::new();
        let speeds = AssetSpeeds {
            plan: context.plan,
            track: self.judge.speeds(),
        };
        let arriving = Arriving {
            block,
            at,
            arrival: context.arrival,
            speeds: &speeds,
        };
        let taken = self.points[point].push(plan, arriving, scratch, &mut closed);
        self.judge.block(point, taken, context.arrival);
        for reading in closed {
            let analysis = &self.points[point];
            self.judge
                .reading(context, point, reading, &|| analysis.traces(), actions);
        }
    }

    fn close_overdue(&mut self, context: Context<'_>, point: usize, actions: &mut Vec<Action>) {
        let plan = context.plan.spec().points[point].spec();
        let speeds = AssetSpeeds {
            plan: context.plan,
            track: self.judge.speeds(),
        };
        let reading = self.points[point].close_overdue(plan, context.arrival, &speeds);
        if let Some(reading) = reading {
            let analysis = &self.points[point];
            self.judge
                .reading(context, point, reading, &|| analysis.traces(), actions);
        }
    }
}
