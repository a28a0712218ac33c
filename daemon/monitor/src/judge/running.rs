//! What a machine is doing: by its run signal when that is fresh, else by its speed, else by the level at its points.
//!
//! In: believed speeds ([`Trend`]), the run signal, levels; signal time. Out: the operating state and its beginning.
//! A machine starts when it leaves standstill or its speed rises, and coasts when its speed falls or has left the
//! range it runs in; either ends when the speed has held still as long as a reading lasts. The level alone tells
//! neither: a ramp is not seen in it.

use super::trend::{Direction, Report, Trend, WINDOW};
use crate::{
    plan::{AssetSpec, RunningRule},
    time::{Arrival, SignalTime, Span},
};

/// What a machine is doing.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Operating {
    /// Nothing is known yet.
    #[default]
    Unknown,
    /// It stands still.
    Stopped,
    /// Its speed rises, from standstill or to a higher one.
    Starting,
    /// It runs.
    Running,
    /// Its speed falls, to standstill or to a lower one.
    Coasting,
}

/// A level below this share of the running level means stopped. Common practice, no source.
const STOPPED_SHARE: f64 = 0.7;
/// Below this share of the lowest speed it does not run yet, or no more. Common practice, no source.
const IN_RANGE_SHARE: f64 = 0.9;
/// A machine on its way to standstill passes its resonances within this time; what changes for longer is no stop.
/// Common practice, no source.
const COASTS_LONG: Span = Span::from_secs(120);
/// A run signal that falls while the speed keeps its range is a drop-out until it has stood so long.
const SIGNAL_FALLS: Span = Span::from_secs(10);
/// Below that range a speed must hold still for at least so long: what coasts slowly does not.
const BELOW_RANGE_HOLDS: Span = Span::from_secs(60);

/// A part of a reading in which the machine turned and running limits may not hold.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Unsettled {
    /// What the machine was doing.
    pub(super) during: Operating,
    /// The part's beginning.
    pub(super) from: SignalTime,
    /// Its end.
    pub(super) to: SignalTime,
    /// It may be on its way to standstill: a resonance passed then is nothing to ring about.
    pub(super) passing: bool,
}

/// The operating state of one asset.
#[derive(Debug, Clone, PartialEq, Default)]
pub(super) struct RunningState {
    state: Operating,
    since: Option<SignalTime>,
    /// What it was doing before, and since when.
    before: Option<(Operating, SignalTime)>,
    /// Since when it has started or coasted without running or standing in between.
    changing: Option<SignalTime>,
    /// Since when the run signal says that it does not run.
    fell: Option<SignalTime>,
    trend: Trend,
}

impl RunningState {
    /// What the machine is doing.
    pub(super) const fn state(&self) -> Operating {
        self.state
    }

    /// Since when; `None` while nothing is known.
    pub(super) const fn since(&self) -> Option<SignalTime> {
        self.since
    }

    /// The speed believed last, r/min, if not older than `valid` at `now`.
    pub(super) fn rpm(&self, now: SignalTime, valid: Span) -> Option<f64> {
        let believed = self.trend.believed()?;
        (now.since(believed.at) <= valid).then_some(believed.rpm)
    }

    /// Whether it surely ran from `start` on without a break until now.
    pub(super) fn ran_from(&self, start: SignalTime) -> bool {
        self.state == Operating::Running
            && self.since.is_some_and(|since| since <= start)
            && !self.trend.unsure()
    }

    /// The part of `start` to `end` in which the machine turned and running limits may not hold: it was starting or
    /// coasting, or its speed moved or was not sure.
    pub(super) fn unsettled(&self, start: SignalTime, end: SignalTime) -> Option<Unsettled> {
        let since = self.since?;
        let (state, from) = match (self.state, self.before) {
            (Operating::Unknown | Operating::Stopped, _) => return None,
            (Operating::Running, Some((Operating::Starting, from))) if since > start => {
                (Operating::Starting, from)
            }
            (Operating::Starting | Operating::Coasting | Operating::Running, _) => {
                (self.state, since)
            }
        };
        let from = from.max(start);
        let long = self
            .changing
            .is_some_and(|began| end.since(began) >= COASTS_LONG);
        (from < end).then_some(Unsettled {
            during: state,
            from,
            to: end,
            passing: state == Operating::Coasting && !long,
        })
    }

    /// Our clock was set, `forward` or `back`: what was told by clocks that follow it moves back with it.
    pub(super) fn wall_clock_set(&mut self, forward: Span, back: Span) {
        self.since = self.since.map(|since| since.minus(back));
        self.before = self.before.map(|(state, since)| (state, since.minus(back)));
        self.changing = self.changing.map(|since| since.minus(back));
        self.fell = self.fell.map(|since| since.minus(back));
        self.trend.wall_clock_set(forward, back);
    }

    /// A speed newer than all before was reported; `signal` is what a fresh run signal says. `true` when the state
    /// changed by it.
    pub(super) fn speed(
        &mut self,
        spec: &AssetSpec,
        report: Report,
        arrival: Arrival,
        signal: Option<bool>,
    ) -> bool {
        let RunningRule {
            from_rpm,
            speed_valid,
            ..
        } = spec.running;
        let believed = self.trend.report(report, arrival, from_rpm, speed_valid);
        let mut changed = false;
        for report in believed.into_iter().flatten() {
            changed |= self.believe(spec, report, signal);
        }
        changed
    }

    /// When a report is believed because no other came.
    pub(super) fn due(&self) -> Option<Arrival> {
        self.trend.due()
    }

    /// Believes the report that was due by `now`; `true` when the state changed by it.
    pub(super) fn overdue(
        &mut self,
        spec: &AssetSpec,
        now: Arrival,
        signal: impl Fn(SignalTime) -> Option<bool>,
    ) -> bool {
        let report = self.trend.overdue(now);
        report.is_some_and(|report| self.believe(spec, report, signal(report.at)))
    }

    /// The run signal was reported; `true` when the state changed by it.
    ///
    /// It rises from standstill, or is seen for the first time and nothing else tells that the machine runs already:
    /// a start, since a ramp may be unseen.
    pub(super) fn by_signal(&mut self, spec: &AssetSpec, at: SignalTime, runs: bool) -> bool {
        if !runs {
            let rpm = self.rpm(at, spec.running.speed_valid);
            return self.unpowered(spec, at, rpm.unwrap_or_default());
        }
        self.fell = None;
        match self.state {
            Operating::Unknown | Operating::Stopped => self.turn(Operating::Starting, at),
            Operating::Starting | Operating::Running | Operating::Coasting => {
                self.settle(spec, at, Some(true)).unwrap_or_default()
            }
        }
    }

    /// Time has come to `now`, the end of a reading: what has stood or held long enough counts.
    ///
    /// `Some(true)` when the state changed by it, `None` when neither run signal nor speed is fresh.
    pub(super) fn settle(
        &mut self,
        spec: &AssetSpec,
        now: SignalTime,
        signal: Option<bool>,
    ) -> Option<bool> {
        let mut changed = false;
        if let Some(report) = self.trend.stood(now) {
            changed = self.believe(spec, report, signal);
        }
        let valid = spec.running.speed_valid;
        let fresh = self
            .trend
            .believed()
            .filter(|report| now.since(report.at) <= valid);
        match fresh {
            Some(_) if self.trend.unsure() || self.trend.adrift() => {}
            Some(report) => changed |= self.by_speed(spec, report.rpm, now, signal),
            None if signal == Some(true) => changed |= self.by_signal_alone(spec, now),
            None if signal.is_none() => return None,
            None => changed |= self.turn(Operating::Stopped, now),
        }
        Some(changed)
    }

    /// A level was read and nothing better is known, mm/s rms; `true` when the state changed by it.
    ///
    /// Between the borders it stays as it was; what was starting runs, what was coasting stands.
    pub(super) fn by_level(
        &mut self,
        rule: &RunningRule,
        at: SignalTime,
        velocity_rms: f64,
    ) -> bool {
        if velocity_rms >= rule.from_mm_s {
            return self.turn(Operating::Running, at);
        }
        if velocity_rms < STOPPED_SHARE * rule.from_mm_s {
            return self.turn(Operating::Stopped, at);
        }
        match self.state {
            Operating::Unknown | Operating::Coasting => self.turn(Operating::Stopped, at),
            Operating::Starting => self.turn(Operating::Running, at),
            Operating::Stopped | Operating::Running => false,
        }
    }

    fn believe(&mut self, spec: &AssetSpec, report: Report, signal: Option<bool>) -> bool {
        self.trend.believe(report);
        self.by_speed(spec, report.rpm, report.at, signal)
    }

    fn by_speed(
        &mut self,
        spec: &AssetSpec,
        rpm: f64,
        now: SignalTime,
        signal: Option<bool>,
    ) -> bool {
        let turns = rpm >= spec.running.from_rpm && rpm > 0.0;
        match (signal, turns) {
            (Some(false), _) => return self.unpowered(spec, now, rpm),
            (Some(true), false) => return self.by_signal_alone(spec, now),
            (None, false) => return self.turn(Operating::Stopped, now),
            (Some(true) | None, true) => {}
        }
        let below_range = rpm < IN_RANGE_SHARE * spec.speed.lowest;
        let least = if below_range {
            BELOW_RANGE_HOLDS
        } else {
            WINDOW
        };
        let from = match self.state {
            Operating::Starting | Operating::Coasting => self.since,
            Operating::Unknown | Operating::Stopped | Operating::Running => None,
        };
        let from = from.unwrap_or(SignalTime::from_ns(i64::MIN));
        let held = self.trend.held(from, now, spec.reading_every.max(least));
        match (self.state, held, self.trend.direction()) {
            (Operating::Unknown, ..) if below_range => self.turn(Operating::Starting, now),
            (Operating::Unknown, ..) => self.turn(Operating::Running, now),
            (Operating::Stopped, ..) => self.turn(Operating::Starting, now),
            (Operating::Starting | Operating::Coasting, Some(held), _) => {
                self.turn(Operating::Running, held)
            }
            // What has held still for that long neither rises nor falls, whatever came before it.
            (Operating::Running, Some(_), _) => false,
            (Operating::Running, None, Direction::Steady) if below_range => {
                self.turn(Operating::Coasting, now)
            }
            (_, _, Direction::Rising) => self.turn(Operating::Starting, now),
            (_, _, Direction::Falling) => self.turn(Operating::Coasting, now),
            (_, _, Direction::Steady) => false,
        }
    }

    /// The run signal says it does not run: what still turns coasts until it stands. A signal that drops out while the
    /// speed keeps its range must have fallen for [`SIGNAL_FALLS`]; what stood and turns below its range, by the flow,
    /// stays so, what turns in its range does not stand, whatever the signal says.
    fn unpowered(&mut self, spec: &AssetSpec, now: SignalTime, rpm: f64) -> bool {
        let fell = *self.fell.get_or_insert(now);
        let turns = rpm >= spec.running.from_rpm && rpm > 0.0;
        let in_range = turns && rpm >= IN_RANGE_SHARE * spec.speed.lowest;
        let drop_out = self.state == Operating::Running && now.since(fell) < SIGNAL_FALLS;
        let stood = self.state == Operating::Stopped;
        if (drop_out && in_range) || (stood && !in_range) {
            return false;
        }
        let to = if turns {
            Operating::Coasting
        } else {
            Operating::Stopped
        };
        self.turn(to, now)
    }

    /// The run signal says it runs and no speed tells how: what changes does so for the time the plan states.
    fn by_signal_alone(&mut self, spec: &AssetSpec, now: SignalTime) -> bool {
        let over = self
            .since
            .map(|since| since.plus(spec.starting.signal_for))
            .filter(|over| *over <= now);
        match (self.state, over) {
            (Operating::Unknown | Operating::Stopped, _) => self.turn(Operating::Starting, now),
            (Operating::Starting | Operating::Coasting, Some(over)) => {
                self.turn(Operating::Running, over)
            }
            (Operating::Starting | Operating::Coasting | Operating::Running, _) => false,
        }
    }

    fn turn(&mut self, to: Operating, at: SignalTime) -> bool {
        let changed = self.state != to;
        if changed {
            match to {
                Operating::Unknown | Operating::Stopped | Operating::Running => {
                    self.changing = None;
                }
                Operating::Starting | Operating::Coasting => {
                    self.changing.get_or_insert(at);
                }
            }
            self.before = self.since.map(|since| (self.state, since));
            self.state = to;
            self.since = Some(at);
        }
        changed
    }
}

#[cfg(test)]
mod tests;
