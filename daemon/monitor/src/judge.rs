//! Readings of one asset to actions: operating state, watches, instrument alarms, status.
//!
//! What lasts is small: open occurrences, how far each persistence has come, the event number. A machine that
//! stands still or changes speed is not judged; what stands open then is suspended, not ended.

mod account;
mod counter;
mod message;
mod running;
mod sensor;
mod sentence;
mod share;
mod status;
mod tally;
#[cfg(test)]
pub(crate) mod testing;
mod watch;
mod words;

use alloc::{collections::BTreeMap, string::String, vec::Vec};

use humward_wire::{id::Id, refusal::Refusal};

pub use running::{Operating, SpeedTrack};

use crate::{
    action::Action,
    analysis::{Taken, Traces},
    input::{GapCause, Identity},
    plan::{AssetPlan, Measure},
    reading::{Doubt, Reading},
    time::{Arrival, SignalTime},
};
use running::RunningState;
use sensor::{Cause, SensorChange, SensorState};
use share::JudgedShare;
pub use tally::Tally;
use watch::{Change, WatchState};

/// Judged readings after a stop before what was suspended goes on. Common practice, no source.
const RESUME_READINGS: u8 = 2;

/// What every judgement needs to know besides its own state.
#[derive(Debug, Clone, Copy)]
pub struct Context<'a> {
    /// Who speaks.
    pub identity: &'a Identity,
    /// The asset's plan.
    pub plan: &'a AssetPlan,
    /// When the input arrived that is being judged.
    pub arrival: Arrival,
}

/// Whether open occurrences are being judged.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Judging {
    /// They are.
    On,
    /// The machine does not run; they are held.
    Suspended,
    /// It runs again; so many judged readings are still to come.
    Resuming(u8),
}

/// The lasting state of one asset.
#[derive(Debug, Clone)]
pub struct AssetJudge {
    n: u64,
    speeds: SpeedTrack,
    running: RunningState,
    judging: Judging,
    watches: Vec<WatchState>,
    sensors: Vec<SensorState>,
    latest: Vec<Option<Reading>>,
    last_running: Vec<Option<Reading>>,
    share: JudgedShare,
    tallies: Vec<Tally>,
    losses: BTreeMap<String, u64>,
    link_up: bool,
    status_due: Arrival,
    changed: bool,
}

impl AssetJudge {
    /// Nothing known yet; its first status is due at once.
    pub fn new(plan: &AssetPlan, now: Arrival) -> Self {
        let points = plan.spec().points.len();
        Self {
            n: 0,
            speeds: SpeedTrack::default(),
            running: RunningState::default(),
            judging: Judging::On,
            watches: alloc::vec![WatchState::default(); plan.spec().watches.len()],
            sensors: alloc::vec![SensorState::new(now); points],
            latest: alloc::vec![None; points],
            last_running: alloc::vec![None; points],
            share: JudgedShare::default(),
            tallies: alloc::vec![Tally::default(); points],
            losses: BTreeMap::new(),
            link_up: true,
            status_due: now,
            changed: true,
        }
    }

    /// The speeds reported so far.
    pub const fn speeds(&self) -> &SpeedTrack {
        &self.speeds
    }

    /// What became of the readings of each point, since the start of its plan.
    pub fn tallies(&self) -> &[Tally] {
        &self.tallies
    }

    /// A speed was reported, r/min.
    pub fn speed(
        &mut self,
        context: Context<'_>,
        at: SignalTime,
        rpm: f64,
        actions: &mut Vec<Action>,
    ) {
        self.speeds.report(at, rpm);
        // A late report of an earlier speed says nothing about now.
        if self
            .speeds
            .fresh(at, context.plan.spec().running.speed_valid)
            == Some(rpm)
            && self.running.by_speed(&context.plan.spec().running, at, rpm)
        {
            self.running_changed(context, actions);
        }
    }

    /// What became of a block of the point.
    pub fn block(&mut self, point: usize, taken: Taken, now: Arrival) {
        let cause = match taken {
            Taken::Whole => return self.sensors[point].block(now),
            Taken::Late => Cause::Late,
            Taken::Uncalibrated => Cause::Uncalibrated,
            Taken::NoChannel => Cause::NoChannel,
            Taken::RateUnusable => Cause::RateUnusable,
        };
        self.sensors[point].useless(cause);
        self.count(message::loss_of(taken), 1);
    }

    /// A payload for the point was refused whole.
    pub fn refused(&mut self, point: usize, refusal: Refusal) {
        self.sensors[point].useless(Cause::Refused(refusal));
    }

    /// Counts something lost, by reason.
    pub fn count(&mut self, reason: &str, by: u64) {
        *self.losses.entry(reason.into()).or_default() += by;
        self.changed |= by > 0 && reason != "late";
    }

    /// Blocks were lost on our side.
    pub fn gap(&mut self, cause: GapCause, blocks: u64) {
        self.count(message::gap_of(cause), blocks.max(1));
    }

    /// The connection that brings the blocks came up or was lost.
    pub fn link(&mut self, up: bool, now: Arrival) {
        if up && !self.link_up {
            for sensor in &mut self.sensors {
                sensor.excuse(now);
            }
            self.gap(GapCause::LinkLost, 1);
        }
        self.changed |= self.link_up != up;
        self.link_up = up;
    }

    /// Judges one closed reading; `traces` gives its spectra and waveform if evidence is wanted.
    pub fn reading(
        &mut self,
        context: Context<'_>,
        point: usize,
        reading: Reading,
        traces: &dyn Fn() -> Option<Traces>,
        actions: &mut Vec<Action>,
    ) {
        self.level(context, &reading, actions);
        let after = context.plan.spec().sensor_after;
        if self.sensors[point].reading(&reading, after) == Some(SensorChange::Cleared) {
            self.sensor_changed(context, point, SensorChange::Cleared, actions);
        }
        let runs = self.running.ran_from(reading.start);
        let judged = runs && (reading.doubts.is_empty() || reading.doubts.only_clipped());
        self.share.reading(
            reading.end,
            reading.length(),
            judged && reading.doubts.is_empty(),
        );
        self.tallies[point].count(runs, judged);
        let was_good = self.latest[point].as_ref().map(|latest| latest.doubts);
        self.changed |= was_good != Some(reading.doubts);
        if judged && reading.doubts.is_empty() {
            self.last_running[point] = Some(reading.clone());
        }
        self.latest[point] = Some(reading.clone());
        if judged && self.judging_goes_on(context, actions) {
            for index in 0..self.watches.len() {
                if context.plan.spec().watches[index].spec().point == point
                    && let Some(change) =
                        self.watches[index].judge(&context.plan.spec().watches[index], &reading)
                {
                    self.watch_changed(context, index, &reading, change, traces, actions);
                }
            }
        }
    }

    /// The next instant at which something is due although nothing arrives.
    pub fn due(&self, plan: &AssetPlan) -> (Arrival, bool) {
        let sensors = self
            .sensors
            .iter()
            .filter_map(|sensor| sensor.due(plan.spec().sensor_after));
        match sensors.min().filter(|_| self.link_up) {
            Some(sensor) if sensor < self.status_due => (sensor, true),
            _ => (self.status_due, false),
        }
    }

    /// Does what is due at the context's arrival.
    pub fn deadline(&mut self, context: Context<'_>, actions: &mut Vec<Action>) {
        if self.link_up {
            for point in 0..self.sensors.len() {
                let after = context.plan.spec().sensor_after;
                if self.sensors[point]
                    .due(after)
                    .is_some_and(|due| due <= context.arrival)
                {
                    let change = self.sensors[point].raise(context.arrival, after);
                    self.sensor_changed(context, point, change, actions);
                }
            }
        }
        if self.status_due <= context.arrival {
            self.changed = true;
        }
    }

    /// Tells the status when something has changed since it was last told.
    pub fn tell_status(&mut self, context: Context<'_>, actions: &mut Vec<Action>) {
        if self.changed {
            self.changed = false;
            self.status_due = context.arrival.plus(context.plan.spec().status_every);
            actions.push(Action::Status(status::status(self, context)));
        }
    }

    /// Asks for a status with the next chance, whatever has changed.
    pub fn want_status(&mut self) {
        self.changed = true;
    }

    /// Goes over to another plan of the same asset: unchanged watches and points keep their state, an open
    /// occurrence whose watch is gone is withdrawn with an event and its alarm emptied.
    pub fn replan(&mut self, old: &AssetPlan, context: Context<'_>, actions: &mut Vec<Action>) {
        let kept = |plan: &AssetPlan, id: &Id| {
            plan.spec().points.iter().position(|point| point.id() == id)
        };
        for index in 0..self.watches.len() {
            let gone = !context
                .plan
                .spec()
                .watches
                .iter()
                .any(|watch| same_watch(old, context.plan, index, watch));
            if gone {
                self.withdraw(old, context, index, actions);
            }
        }
        let watches = context.plan.spec().watches.iter().map(|watch| {
            let before =
                (0..self.watches.len()).find(|index| same_watch(old, context.plan, *index, watch));
            before.map_or_else(WatchState::default, |index| self.watches[index].clone())
        });
        let watches = watches.collect();
        for (index, point) in old.spec().points.iter().enumerate() {
            if kept(context.plan, point.id()).is_none() && self.sensors[index].open().is_some() {
                self.sensor_withdrawn(old, context, index, actions);
            }
        }
        let points = context
            .plan
            .spec()
            .points
            .iter()
            .map(|point| kept(old, point.id()));
        let places: Vec<Option<usize>> = points.collect();
        let take = |place: &Option<usize>, from: &[Option<Reading>]| {
            place.and_then(|place| from[place].clone())
        };
        self.latest = places
            .iter()
            .map(|place| take(place, &self.latest))
            .collect();
        self.last_running = places
            .iter()
            .map(|place| take(place, &self.last_running))
            .collect();
        let sensor = |place: &Option<usize>| {
            place.map_or_else(
                || SensorState::new(context.arrival),
                |place| self.sensors[place].clone(),
            )
        };
        self.sensors = places.iter().map(sensor).collect();
        self.tallies = alloc::vec![Tally::default(); places.len()];
        self.watches = watches;
        self.changed = true;
    }

    /// The asset is no longer in the plan: everything open is withdrawn.
    pub fn retire(&mut self, context: Context<'_>, actions: &mut Vec<Action>) {
        for index in 0..self.watches.len() {
            self.withdraw(context.plan, context, index, actions);
        }
        for point in 0..self.sensors.len() {
            if self.sensors[point].open().is_some() {
                self.sensor_withdrawn(context.plan, context, point, actions);
            }
        }
    }

    fn level(&mut self, context: Context<'_>, reading: &Reading, actions: &mut Vec<Action>) {
        let rule = &context.plan.spec().running;
        let Some((velocity, _)) = reading.velocity else {
            return;
        };
        let believable = reading.doubts.is_empty() || reading.doubts.has(Doubt::SpeedMoving);
        if !believable || self.speeds.fresh(reading.end, rule.speed_valid).is_some() {
            return;
        }
        let recent = reading.end.minus(reading.length());
        let others = self
            .latest
            .iter()
            .flatten()
            .filter(|other| other.end >= recent);
        let strongest = others
            .filter_map(|other| other.value(Measure::VelocityRms))
            .fold(velocity, f64::max);
        if self.running.by_level(rule, reading.end, strongest) {
            self.running_changed(context, actions);
        }
    }

    fn running_changed(&mut self, context: Context<'_>, actions: &mut Vec<Action>) {
        self.changed = true;
        let runs = self.running.state() == Operating::Running;
        match self.judging {
            Judging::On | Judging::Resuming(_) if !runs => {
                let told = self.judging != Judging::On;
                self.judging = Judging::Suspended;
                if !told && self.any_open() {
                    self.asset_event(context, message::AssetChange::Suspended, actions);
                }
            }
            Judging::Suspended if runs => {
                self.judging = if self.any_open() {
                    Judging::Resuming(RESUME_READINGS)
                } else {
                    Judging::On
                };
            }
            Judging::On | Judging::Resuming(_) | Judging::Suspended => {}
        }
    }

    /// Counts a judged reading towards going on after a stop; `true` when watches are judged.
    fn judging_goes_on(&mut self, context: Context<'_>, actions: &mut Vec<Action>) -> bool {
        match self.judging {
            Judging::On => true,
            Judging::Suspended => false,
            Judging::Resuming(left) if left > 1 => {
                self.judging = Judging::Resuming(left - 1);
                false
            }
            Judging::Resuming(_) => {
                self.judging = Judging::On;
                self.asset_event(context, message::AssetChange::Resumed, actions);
                true
            }
        }
    }

    fn any_open(&self) -> bool {
        self.watches
            .iter()
            .any(|watch| watch.occurrence().is_some())
    }

    fn watch_changed(
        &mut self,
        context: Context<'_>,
        index: usize,
        reading: &Reading,
        change: Change,
        traces: &dyn Fn() -> Option<Traces>,
        actions: &mut Vec<Action>,
    ) {
        self.n += 1;
        self.changed = true;
        let id = message::event_id(context.identity, self.n);
        if matches!(change, Change::Raised(_)) {
            self.watches[index].name_occurrence(id.clone());
        }
        let event = message::watch_event(self, context, index, reading, change, id.clone());
        let closed = self.watches[index].take_closed().is_some();
        let full_name = context.plan.spec().watches[index].full_name();
        let open = (!closed).then(|| message::alarm_of(&event));
        actions.push(Action::Event(event));
        actions.push(Action::Alarm {
            asset: context.plan.id().clone(),
            watch: full_name.into(),
            open,
        });
        if matches!(change, Change::Raised(_) | Change::Worsened)
            && let Some(traces) = traces()
        {
            actions.push(Action::Evidence(message::evidence(
                context, index, reading, id, traces,
            )));
        }
    }

    fn sensor_changed(
        &mut self,
        context: Context<'_>,
        point: usize,
        change: SensorChange,
        actions: &mut Vec<Action>,
    ) {
        self.n += 1;
        self.changed = true;
        let id = message::event_id(context.identity, self.n);
        if matches!(change, SensorChange::Raised(_)) {
            self.sensors[point].name_occurrence(id.clone());
        }
        let event = message::sensor_event(self, context, point, change, id);
        if change == SensorChange::Cleared {
            self.sensors[point].take_closed();
        }
        self.push_sensor_event(
            context.plan,
            context.plan.spec().points[point].id(),
            event,
            actions,
        );
    }

    fn push_sensor_event(
        &self,
        plan: &AssetPlan,
        point: &Id,
        event: humward_wire::out::Event,
        actions: &mut Vec<Action>,
    ) {
        let stands = event.finding.standing.severity() != humward_wire::out::Severity::None;
        let open = stands.then(|| message::alarm_of(&event));
        actions.push(Action::Event(event));
        actions.push(Action::Alarm {
            asset: plan.id().clone(),
            watch: message::sensor_watch(point),
            open,
        });
    }

    fn asset_event(
        &mut self,
        context: Context<'_>,
        change: message::AssetChange,
        actions: &mut Vec<Action>,
    ) {
        self.n += 1;
        let id = message::event_id(context.identity, self.n);
        actions.push(Action::Event(message::asset_event(
            self,
            context,
            change,
            id.clone(),
        )));
        for index in 0..self.watches.len() {
            if let Some(alarm) = message::held_alarm(self, context, index, change, id.clone()) {
                let watch = context.plan.spec().watches[index].full_name().into();
                actions.push(Action::Alarm {
                    asset: context.plan.id().clone(),
                    watch,
                    open: Some(alarm),
                });
            }
        }
    }

    fn withdraw(
        &mut self,
        old: &AssetPlan,
        context: Context<'_>,
        index: usize,
        actions: &mut Vec<Action>,
    ) {
        if let Some(closed) = self.watches[index].withdraw() {
            self.n += 1;
            let id = message::event_id(context.identity, self.n);
            let watch = old.spec().watches[index].full_name();
            actions.push(Action::Event(message::withdrawn_event(
                self, context, watch, closed.id, id,
            )));
            actions.push(Action::Alarm {
                asset: old.id().clone(),
                watch: watch.into(),
                open: None,
            });
        }
    }

    fn sensor_withdrawn(
        &mut self,
        old: &AssetPlan,
        context: Context<'_>,
        point: usize,
        actions: &mut Vec<Action>,
    ) {
        if let Some(closed) = self.sensors[point].take_closed() {
            self.n += 1;
            let id = message::event_id(context.identity, self.n);
            let watch = message::sensor_watch(old.spec().points[point].id());
            actions.push(Action::Event(message::withdrawn_event(
                self, context, &watch, closed.id, id,
            )));
            actions.push(Action::Alarm {
                asset: old.id().clone(),
                watch,
                open: None,
            });
        }
    }
}

/// Whether `watch` of the new plan is the old plan's watch `index`, unchanged.
fn same_watch(
    old: &AssetPlan,
    new: &AssetPlan,
    index: usize,
    watch: &crate::plan::WatchPlan,
) -> bool {
    let before = &old.spec().watches[index];
    let point = |plan: &AssetPlan, watch: &crate::plan::WatchPlan| {
        let point = &plan.spec().points[watch.spec().point];
        (
            point.clone(),
            watch.spec().limits,
            watch.spec().measure,
            watch.spec().at_least_ms2,
        )
    };
    before.full_name() == watch.full_name() && point(old, before) == point(new, watch)
}
