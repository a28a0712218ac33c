//! Whether a machine runs: by its speed when that is fresh, else by the level at its points.

use alloc::vec::Vec;

use crate::{
    plan::{AssetPlan, RunningRule},
    reading::ShaftSpeed,
    time::{SignalTime, Span},
};

/// What a machine is doing.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Operating {
    /// Nothing is known yet.
    #[default]
    Unknown,
    /// It stands still.
    Stopped,
    /// It runs.
    Running,
}

/// A level below this share of the running level means stopped. Common practice, no source.
const STOPPED_SHARE: f64 = 0.7;
/// Speeds that differ by more than this share of their mean within a reading are moving. Common practice, no source.
const SPEED_MOVING_SHARE: f64 = 0.03;
/// Speeds kept; at one a second a reading of 2 min is covered.
const SPEEDS_KEPT: usize = 128;

/// The reported speeds of one asset, newest last.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct SpeedTrack {
    reports: Vec<(SignalTime, f64)>,
}

impl SpeedTrack {
    /// Takes in one report, r/min; one older than what is there is put in its place. `true` when it is the newest.
    pub fn report(&mut self, at: SignalTime, rpm: f64) -> bool {
        let place = self.reports.partition_point(|(earlier, _)| *earlier <= at);
        let newest = place == self.reports.len();
        if place > 0 && self.reports[place - 1] == (at, rpm) {
            return newest;
        }
        if self.reports.len() == SPEEDS_KEPT {
            if place == 0 {
                return newest;
            }
            self.reports.remove(0);
            self.reports.insert(place - 1, (at, rpm));
        } else {
            self.reports.insert(place, (at, rpm));
        }
        newest
    }

    /// Moves all reports to `back` earlier: the clock they were made by was set back.
    pub fn set_back(&mut self, back: Span) {
        for (at, _) in &mut self.reports {
            *at = at.minus(back);
        }
    }

    /// The newest report, if not older than `valid` at `now`.
    pub fn latest(&self, now: SignalTime, valid: Span) -> Option<f64> {
        let (at, rpm) = *self.reports.last()?;
        (now.since(at) <= valid).then_some(rpm)
    }

    /// The latest report at or before `at`, if not older than `valid`.
    pub fn fresh(&self, at: SignalTime, valid: Span) -> Option<f64> {
        let place = self.reports.partition_point(|(earlier, _)| *earlier <= at);
        let (reported, rpm) = *self.reports.get(place.checked_sub(1)?)?;
        (at.since(reported) <= valid).then_some(rpm)
    }

    /// The speed that stands for `start` to `end`, and whether it moved in between.
    ///
    /// The mean of the reports in that time; without one, the last fresh report; else the nominal speed.
    pub fn over(&self, start: SignalTime, end: SignalTime, plan: &AssetPlan) -> (ShaftSpeed, bool) {
        let from = self.reports.partition_point(|(at, _)| *at < start);
        let to = self.reports.partition_point(|(at, _)| *at <= end);
        let within = self.reports.get(from..to).unwrap_or_default();
        let before = self.fresh(start, plan.spec().running.speed_valid);
        if within.is_empty() {
            return match before {
                Some(rpm) => (ShaftSpeed::Reported(rpm), false),
                None => (ShaftSpeed::Nominal(plan.spec().speed.nominal), false),
            };
        }
        let mean = within.iter().map(|(_, rpm)| rpm).sum::<f64>() / within.len() as f64;
        let all = within.iter().map(|(_, rpm)| *rpm).chain(before);
        let (low, high) = all.fold((f64::INFINITY, 0.0f64), |(low, high), rpm| {
            (low.min(rpm), high.max(rpm))
        });
        (
            ShaftSpeed::Reported(mean),
            high - low > SPEED_MOVING_SHARE * mean,
        )
    }
}

/// The operating state of one asset.
#[derive(Debug, Clone, PartialEq, Default)]
pub(super) struct RunningState {
    state: Operating,
    since: Option<SignalTime>,
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

    /// Whether it ran from `start` on without a break until now.
    pub(super) fn ran_from(&self, start: SignalTime) -> bool {
        self.state == Operating::Running && self.since.is_some_and(|since| since <= start)
    }

    /// Moves its beginning to `back` earlier: the clock it was told by was set back.
    pub(super) fn set_back(&mut self, back: Span) {
        self.since = self.since.map(|since| since.minus(back));
    }

    /// A speed was reported; `true` when the state changed by it.
    pub(super) fn by_speed(&mut self, rule: &RunningRule, at: SignalTime, rpm: f64) -> bool {
        self.turn(
            if rpm >= rule.from_rpm && rpm > 0.0 {
                Operating::Running
            } else {
                Operating::Stopped
            },
            at,
        )
    }

    /// The run signal was reported; `true` when the state changed by it.
    pub(super) fn by_signal(&mut self, at: SignalTime, value: f64) -> bool {
        self.turn(
            if value >= 0.5 {
                Operating::Running
            } else {
                Operating::Stopped
            },
            at,
        )
    }

    /// A level was read and no fresh speed is known, mm/s rms; `true` when the state changed by it.
    pub(super) fn by_level(
        &mut self,
        rule: &RunningRule,
        at: SignalTime,
        velocity_rms: f64,
    ) -> bool {
        if velocity_rms >= rule.from_mm_s {
            self.turn(Operating::Running, at)
        } else if velocity_rms < STOPPED_SHARE * rule.from_mm_s || self.state == Operating::Unknown
        {
            self.turn(Operating::Stopped, at)
        } else {
            false
        }
    }

    fn turn(&mut self, to: Operating, at: SignalTime) -> bool {
        let changed = self.state != to;
        if changed {
            self.state = to;
            self.since = Some(at);
        }
        changed
    }
}

#[cfg(test)]
mod tests {
    use super::{Operating, RunningState, SpeedTrack};
    use crate::{
        plan::RunningRule,
        time::{SignalTime, Span},
    };

    const RULE: RunningRule = RunningRule {
        from_rpm: 300.0,
        from_mm_s: 1.0,
        speed_valid: Span::from_secs(60),
    };

    fn at(s: i64) -> SignalTime {
        SignalTime::from_ns(s * 1_000_000_000)
    }

    #[test]
    fn a_level_between_the_two_borders_leaves_the_state_as_it_was() {
        let mut running = RunningState::default();
        assert!(running.by_level(&RULE, at(1), 1.2));
        assert!(!running.by_level(&RULE, at(2), 0.8));
        assert_eq!(running.state(), Operating::Running);
        assert!(running.by_level(&RULE, at(3), 0.6));
        assert!(!running.by_level(&RULE, at(4), 0.8));
        assert_eq!(running.state(), Operating::Stopped);
        assert!(!running.ran_from(at(4)));
    }

    #[test]
    fn a_speed_report_goes_stale() {
        let mut speeds = SpeedTrack::default();
        assert!(speeds.report(at(10), 1480.0));
        assert_eq!(speeds.fresh(at(70), Span::from_secs(60)), Some(1480.0));
        assert_eq!(speeds.fresh(at(71), Span::from_secs(60)), None);
        assert_eq!(speeds.fresh(at(9), Span::from_secs(60)), None);
    }

    #[test]
    fn a_late_report_is_put_in_its_place() {
        let mut speeds = SpeedTrack::default();
        let newest = [30, 10, 20, 20].map(|s| speeds.report(at(s), s as f64));
        assert_eq!(newest, [true, false, false, false]);
        assert_eq!(speeds.fresh(at(25), Span::from_secs(60)), Some(20.0));
        assert_eq!(speeds.reports.len(), 3);
    }
}
