//! When a message is due: simulated time against the machine's monotonic clock.

use std::time::{Duration, Instant};

/// How simulated time goes.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Pace {
    /// Simulated time at `began`, ns since 1970 UTC.
    pub start_ns: i64,
    /// Simulated seconds in a second; above 0.
    pub factor: f64,
    /// The moment at which simulated time is `start_ns`.
    pub began: Instant,
}

impl Pace {
    /// From `start_ns` on, `factor` times as fast as true time, beginning now.
    #[must_use]
    pub fn now(start_ns: i64, factor: f64) -> Pace {
        Pace {
            start_ns,
            factor,
            began: Instant::now(),
        }
    }

    /// When simulated time is `at_ns`; what lies before the beginning is due at once.
    #[must_use]
    pub fn due(&self, at_ns: i64) -> Instant {
        let since_s = at_ns.saturating_sub(self.start_ns) as f64 * 1e-9 / self.factor;
        let since = Duration::try_from_secs_f64(since_s.max(0.0)).unwrap_or(Duration::MAX);
        self.began
            .checked_add(since)
            .unwrap_or_else(|| self.began + CENTURY)
    }
}

/// Further than any play goes.
const CENTURY: Duration = Duration::from_secs(100 * 365 * 86_400);

#[cfg(test)]
mod tests {
    use std::time::Duration;

    use super::{CENTURY, Pace};

    #[test]
    fn at_forty_times_the_speed_a_minute_takes_one_and_a_half_seconds() {
        let pace = Pace::now(1_000, 40.0);
        assert_eq!(
            pace.due(60_000_001_000) - pace.began,
            Duration::from_millis(1500)
        );
        assert_eq!(pace.due(0), pace.began);
        assert!(Pace::now(0, 1e-9).due(i64::MAX) - pace.began > CENTURY / 2);
    }
}
