//! The reported speeds of one asset, and the speed that stands for a stretch of time.
//!
//! In: reports as they come, r/min in signal time, late ones put in their place. What a machine does by them is
//! not decided here.

use alloc::vec::Vec;

use crate::{
    plan::AssetPlan,
    reading::ShaftSpeed,
    time::{SignalTime, Span},
};

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

#[cfg(test)]
mod tests {
    use super::SpeedTrack;
    use crate::time::{SignalTime, Span};

    fn at(s: i64) -> SignalTime {
        SignalTime::from_ns(s * 1_000_000_000)
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
