//! Readings of one asset to actions: operating state, watches, instrument alarms, status.
//!
//! What lasts is small: open occurrences, how far each persistence has come, the event number. A machine that
//! stands still or changes speed is not judged by running limits; what stands open then is suspended, not ended.
//! While it turns and running limits do not hold, danger stays armed at a multiple (`armed`).

mod account;
mod announce;
mod armed;
mod beside;
mod counter;
mod message;
mod replan;
mod running;
mod sensor;
mod sentence;
mod share;
mod speeds;
mod status;
mod stops;
mod tally;
#[cfg(test)]
pub(crate) mod testing;
mod trend;
mod watch;
mod words;

use alloc::{collections::BTreeMap, string::String, vec::Vec};

use humward_wire::{process::Process, refusal::Refusal};

pub use running::Operating;
pub use speeds::SpeedTrack;

use crate::{
    action::Action,
    analysis::{Taken, Traces},
    input::{DeadlineReason, GapCause, Identity},
    plan::AssetPlan,
    reading::Reading,
    time::{Arrival, SignalTime, Span},
};
use announce::Turn;
use running::RunningState;
use sensor::{Cause, SensorChange, SensorState};
use share::JudgedShare;
pub use tally::Tally;
use trend::Report;
use watch::WatchState;

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

/// Whether running limits are being judged by.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Judging {
    /// They are.
    On,
    /// The machine does not run.
    Suspended,
    /// It runs again; so many judged readings are still to come after the time already counted.
    Resuming { left: u8, until: Option<SignalTime> },
}

/// The lasting state of one asset.
#[derive(Debug, Clone)]
pub struct AssetJudge {
    n: u64,
    speeds: SpeedTrack,
    /// Values of the run signal, kept as speeds are.
    run_signals: SpeedTrack,
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
            run_signals: SpeedTrack::default(),
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
        // A late report of an earlier speed says nothing about now.
        if self.speeds.report(at, rpm) {
            let signal = self.run_signal(context, at);
            let (spec, report) = (context.plan.spec(), Report { at, rpm });
            if self.running.speed(spec, report, context.arrival, signal) {
                self.running_changed(context, actions);
            }
        }
    }

    /// A process value was reported; only the one that tells whether the machine runs is judged by.
    pub fn process(
        &mut self,
        context: Context<'_>,
        at: SignalTime,
        process: &Process,
        actions: &mut Vec<Action>,
    ) {
        let tells = context.plan.spec().run_signal.as_ref() == Some(&process.name);
        if tells
            && self.run_signals.report(at, process.value)
            && self
                .running
                .by_signal(context.plan.spec(), at, says_it_runs(process.value))
        {
            self.running_changed(context, actions);
        }
    }

    /// What a run signal not older than a speed may be says at `at`.
    fn run_signal(&self, context: Context<'_>, at: SignalTime) -> Option<bool> {
        let valid = context.plan.spec().running.speed_valid;
        self.run_signals.fresh(at, valid).map(says_it_runs)
    }

    /// What became of a block of the point; the loss it counts under, if any.
    pub fn block(&mut self, point: usize, taken: Taken, now: Arrival) -> Option<&'static str> {
        let cause = match taken {
            Taken::Whole => {
                self.sensors[point].block(now);
                return None;
            }
            Taken::Empty => Cause::Empty,
            Taken::Late => Cause::Late,
            Taken::Uncalibrated => Cause::Uncalibrated,
            Taken::NoChannel => Cause::NoChannel,
            Taken::RateUnusable => Cause::RateUnusable,
        };
        self.sensors[point].useless(now, cause);
        message::loss_of(taken)
    }

    /// A payload for the point was refused whole.
    pub fn refused(&mut self, point: usize, refusal: Refusal, now: Arrival) {
        self.sensors[point].useless(now, Cause::Refused(refusal));
    }

    /// Counts something lost, by reason. The first of its kind is told at once, the number with the next status.
    pub fn count(&mut self, reason: &str, by: u64) {
        let lost = self.losses.entry(reason.into()).or_default();
        self.changed |= *lost == 0 && by > 0;
        *lost = lost.saturating_add(by);
    }

    /// Blocks were lost on our side.
    pub fn gap(&mut self, cause: GapCause, blocks: u64) {
        self.count(message::gap_of(cause), blocks.max(1));
    }

    /// Samples of the point are missing by our own doing.
    pub fn our_gap(&mut self, point: usize) {
        self.sensors[point].our_gap();
    }

    /// Our own clock was set and stamps jumped by `jump`: nothing becomes older by that.
    ///
    /// It was set by `by` ns. Set back, clocks that follow ours tell earlier times from now on: what was reported
    /// before moves with them.
    pub fn wall_clock_set(&mut self, jump: Span, by: i64) {
        let (forward, back) = (Span::from_ns(by), Span::from_ns(by.saturating_neg()));
        for sensor in &mut self.sensors {
            sensor.wall_clock_set(jump);
            sensor.our_gap();
        }
        self.speeds.set_back(back);
        self.running.wall_clock_set(forward, back);
        for reading in self
            .latest
            .iter_mut()
            .chain(&mut self.last_running)
            .flatten()
        {
            reading.closed = reading.closed.plus(jump);
        }
        self.status_due = self.status_due.plus(jump);
    }

    /// The connection that brings the blocks came up or was lost.
    pub fn link(&mut self, up: bool, now: Arrival) {
        if up && !self.link_up {
            for sensor in &mut self.sensors {
                sensor.excuse(now);
            }
            self.gap(GapCause::LinkLost, 1);
        }
        for sensor in &mut self.sensors {
            sensor.our_gap();
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
        self.level(context, point, &reading, actions);
        let after = context.plan.spec().sensor_after;
        let stands_still = self.running.state() == Operating::Stopped;
        if self.sensors[point].reading(&reading, after, stands_still) == Some(SensorChange::Cleared)
        {
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
        if judged && self.judging_goes_on(context, &reading, actions) {
            for index in 0..self.watches.len() {
                let here = context.plan.spec().watches[index].spec().point == point;
                if here {
                    self.watches[index].disarm();
                }
                if here
                    && let Some(change) =
                        self.watches[index].judge(&context.plan.spec().watches[index], &reading)
                {
                    let turn = Turn {
                        change,
                        armed: None,
                    };
                    self.watch_changed(context, index, &reading, turn, traces, actions);
                }
            }
        } else {
            self.judge_armed(context, point, &reading, traces, actions);
        }
    }

    /// The next instant at which something is due although nothing arrives.
    pub fn due(&self, plan: &AssetPlan) -> (Arrival, DeadlineReason) {
        let after = plan.spec().sensor_after;
        let sensors = self.sensors.iter().filter_map(|sensor| sensor.due(after));
        let sensor = sensors.min().filter(|_| self.link_up);
        let sensor = sensor.map(|due| (due, DeadlineReason::SensorOverdue));
        let speed = self
            .running
            .due()
            .map(|due| (due, DeadlineReason::SpeedStands));
        let status = (self.status_due, DeadlineReason::StatusDue);
        [speed, sensor].into_iter().flatten().fold(status, Ord::min)
    }

    /// Does what is due at the context's arrival.
    pub fn deadline(&mut self, context: Context<'_>, actions: &mut Vec<Action>) {
        let spec = context.plan.spec();
        let signals = &self.run_signals;
        let signal = |at| {
            let fresh = signals.fresh(at, spec.running.speed_valid);
            fresh.map(says_it_runs)
        };
        if self.running.overdue(spec, context.arrival, signal) {
            self.running_changed(context, actions);
        }
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

    /// Leaves out the statuses that were due before `from`: nobody was there to be told.
    pub fn skip_statuses(&mut self, plan: &AssetPlan, from: Arrival) {
        let every = plan.spec().status_every.ns().max(1);
        let behind = from.since(self.status_due).ns();
        if behind > 0 {
            let periods = behind / every + i64::from(behind % every != 0);
            self.status_due = self
                .status_due
                .plus(plan.spec().status_every.times(periods));
        }
    }

    /// The number of its last event.
    pub const fn last_n(&self) -> u64 {
        self.n
    }

    /// Events count on from `n`: the asset was here before.
    pub const fn count_on_from(&mut self, n: u64) {
        self.n = n;
    }

    /// Asks for a status with the next chance, whatever has changed.
    pub fn want_status(&mut self) {
        self.changed = true;
    }
}

/// What a value of the run signal says.
fn says_it_runs(value: f64) -> bool {
    value >= 0.5
}
