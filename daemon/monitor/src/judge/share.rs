//! What share of the last day a machine was judged, in hours of signal time.

use crate::time::{SECOND, SignalTime, Span};

const HOUR_NS: i64 = 3600 * SECOND;
const HOURS: usize = 24;

/// Judged time of the last 24 hours, an hour a place.
#[derive(Debug, Clone, PartialEq, Default)]
pub(super) struct JudgedShare {
    judged: [i64; HOURS],
    hour: Option<i64>,
    first: Option<SignalTime>,
    last: Option<SignalTime>,
}

impl JudgedShare {
    /// A reading of `length` ended at `end`; `judged` when its limits were.
    pub(super) fn reading(&mut self, end: SignalTime, length: Span, judged: bool) {
        let hour = hour_of(end);
        if self.first.is_none() {
            self.first = Some(end.minus(length));
        }
        let newest = self.hour.map_or(hour, |newest| newest.max(hour));
        if let Some(before) = self.hour {
            for passed in before + 1..=newest.min(before + HOURS as i64) {
                self.judged[place(passed)] = 0;
            }
        }
        self.hour = Some(newest);
        self.last = Some(self.last.map_or(end, |last| last.max(end)));
        if judged && newest - hour < HOURS as i64 {
            self.judged[place(hour)] = self.judged[place(hour)].saturating_add(length.ns());
        }
    }

    /// Judged time over watched time up to `now`, at most the last 24 hours of it; `points` share one clock.
    /// `None` in the first hour.
    pub(super) fn share(&self, points: usize, now: SignalTime) -> Option<f64> {
        let first = self.first?;
        let now = self.last?.max(now);
        if now.since(first).ns() < HOUR_NS {
            return None;
        }
        let newest = self.hour?;
        let (this_hour, first_hour) = (hour_of(now), hour_of(first));
        // The oldest hour is only partly in the window: it is left out, with its time.
        let hours = (HOURS as i64 - 1).min(this_hour - first_hour);
        let judged: i64 = (0..=hours)
            .map(|ago| this_hour - ago)
            .filter(|hour| (newest - HOURS as i64 + 1..=newest).contains(hour))
            .map(|hour| self.judged[place(hour)])
            .sum();
        let begin = Ord::max(first.ns(), (this_hour - hours).saturating_mul(HOUR_NS));
        let window = now.since(SignalTime::from_ns(begin)).ns();
        Some((judged as f64 / window as f64 / points.max(1) as f64).clamp(0.0, 1.0))
    }
}

/// The hour an instant lies in, or ends.
const fn hour_of(instant: SignalTime) -> i64 {
    instant.ns().saturating_sub(1).div_euclid(HOUR_NS)
}

const fn place(hour: i64) -> usize {
    hour.rem_euclid(HOURS as i64) as usize
}

#[cfg(test)]
mod tests {
    use super::{HOUR_NS, JudgedShare};
    use crate::time::{SECOND, SignalTime, Span};

    #[test]
    fn half_the_readings_judged_is_a_share_of_one_half_on_any_day() {
        let mut share = JudgedShare::default();
        let ten = Span::from_secs(10);
        for k in 1..=30 * 360 {
            let end = SignalTime::from_ns(7 * HOUR_NS + 123 * SECOND + k * 10 * SECOND);
            share.reading(end, ten, k % 2 == 0);
            if k == 300 {
                assert_eq!(share.share(1, end), None, "less than an hour is no share");
            }
            if k % 500 == 0 && k > 500 {
                let read = share.share(1, end).unwrap();
                assert!((read - 0.5).abs() < 0.005, "{k}: {read}");
            }
        }
    }

    #[test]
    fn a_day_of_silence_leaves_nothing_of_the_day_before() {
        let mut share = JudgedShare::default();
        let ten = Span::from_secs(10);
        for k in 1..=720 {
            share.reading(SignalTime::from_ns(k * 10 * SECOND), ten, true);
        }
        assert!(share.share(1, SignalTime::from_ns(2 * HOUR_NS)).unwrap() > 0.99);
        let half = share.share(1, SignalTime::from_ns(4 * HOUR_NS)).unwrap();
        assert!((half - 0.5).abs() < 0.001, "two silent hours count: {half}");
        share.reading(SignalTime::from_ns(60 * HOUR_NS), ten, false);
        assert_eq!(share.share(1, SignalTime::from_ns(60 * HOUR_NS)), Some(0.0));
    }
}
