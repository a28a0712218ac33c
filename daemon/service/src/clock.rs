//! The one place of the daemon that knows the time.
//!
//! In: the machine's monotonic clock and its wall clock. Out: [`Arrival`] stamps in ns since 1970 UTC that
//! never decrease, steps of the wall clock, waits. A forward step of the wall clock moves the stamps forward with
//! it; after a backward step they run on, ahead of the wall by [`Stamp::ahead`], so no deadline is held back.
//! Deviations below [`STEP`] are left alone: the system disciplines both clocks alike.
//! A clock may run faster than true time by a factor, for demonstrations and tests only.

use std::time::{Duration, Instant, SystemTime, UNIX_EPOCH};

use humward_monitor::time::{Arrival, Span};

/// A wall clock this far off its expected reading was set, not slewed.
pub const STEP: Span = Span::from_ns(500_000_000);

/// One stamp.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Stamp {
    /// Now, as everything inside the daemon sees it.
    pub arrival: Arrival,
    /// How far the stamps run ahead of the wall clock, after it was set back.
    pub ahead: Span,
}

/// A step of the wall clock, to be told before the next stamp is used.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Step {
    /// When it was noticed: the last moment on the old time.
    pub arrival: Arrival,
    /// By how much the clock was set, ns; forward if positive.
    pub by_ns: i64,
}

/// The rule that makes stamps of two clocks; no clock itself.
#[derive(Debug)]
struct Rule {
    factor: f64,
    /// Arrival at monotonic zero, moved by forward steps.
    origin_ns: i64,
    /// What the wall clock reads at monotonic zero, moved by every step.
    wall_origin_ns: i64,
    ahead_ns: i64,
    last_ns: i64,
}

impl Rule {
    fn new(factor: f64, start_ns: i64, wall_ns: i64) -> Self {
        Self {
            factor,
            origin_ns: start_ns,
            wall_origin_ns: wall_ns,
            ahead_ns: 0,
            last_ns: start_ns,
        }
    }

    /// Stamps the moment `mono_ns` after the start, when the wall clock reads `wall_ns`.
    fn stamp(&mut self, mono_ns: i64, wall_ns: i64) -> (Option<Step>, Stamp) {
        let run = if self.factor == 1.0 {
            mono_ns
        } else {
            (mono_ns as f64 * self.factor) as i64
        };
        let now = self.origin_ns.saturating_add(run).max(self.last_ns);
        let off = wall_ns
            .saturating_sub(self.wall_origin_ns)
            .saturating_sub(mono_ns);
        let mut step = None;
        if off.unsigned_abs() >= STEP.ns().unsigned_abs() {
            step = Some(Step {
                arrival: Arrival::from_ns(now),
                by_ns: off,
            });
            self.wall_origin_ns = self.wall_origin_ns.saturating_add(off);
            let jump = off.saturating_sub(self.ahead_ns).max(0);
            self.ahead_ns = ahead_after(Span::from_ns(self.ahead_ns), off).ns();
            self.origin_ns = self.origin_ns.saturating_add(jump);
            self.last_ns = now.saturating_add(jump);
        } else {
            self.last_ns = now;
        }
        (
            step,
            Stamp {
                arrival: Arrival::from_ns(self.last_ns),
                ahead: Span::from_ns(self.ahead_ns),
            },
        )
    }
}

/// How far stamps run ahead of the wall clock once it was set by `by_ns`.
pub fn ahead_after(ahead: Span, by_ns: i64) -> Span {
    Span::from_ns(ahead.ns().saturating_sub(by_ns))
}

/// The daemon's clock.
#[derive(Debug)]
pub struct Clock {
    began: Instant,
    rule: Rule,
}

impl Clock {
    /// A clock that runs with true time, from the wall clock's present reading.
    pub fn new() -> Self {
        let wall = wall_ns();
        Self {
            began: Instant::now(),
            rule: Rule::new(1.0, wall, wall),
        }
    }

    /// A clock that starts at `start` and runs `factor` times as fast as true time.
    ///
    /// For demonstrations and tests; the gateway message shows the factor.
    pub fn scaled(factor: f64, start: Arrival) -> Self {
        Self {
            began: Instant::now(),
            rule: Rule::new(factor, start.ns(), wall_ns()),
        }
    }

    /// How much faster than true time this clock runs.
    pub const fn factor(&self) -> f64 {
        self.rule.factor
    }

    /// The stamp of now, and the step of the wall clock that was noticed on the way.
    pub fn stamp(&mut self) -> (Option<Step>, Stamp) {
        let mono = i64::try_from(self.began.elapsed().as_nanos()).unwrap_or(i64::MAX);
        self.rule.stamp(mono, wall_ns())
    }
}

impl Default for Clock {
    fn default() -> Self {
        Self::new()
    }
}

fn wall_ns() -> i64 {
    let since = SystemTime::now()
        .duration_since(UNIX_EPOCH)
        .unwrap_or(Duration::ZERO);
    i64::try_from(since.as_nanos()).unwrap_or(i64::MAX)
}

/// A moment of true time, for measuring waits and work; it is no stamp and enters no message.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub struct Moment(Instant);

impl Moment {
    /// Now.
    pub fn now() -> Self {
        Self(Instant::now())
    }

    /// How long ago it was.
    pub fn elapsed(self) -> Duration {
        self.0.elapsed()
    }
}

/// Waits so long in true time.
pub async fn pause(time: Duration) {
    tokio::time::sleep(time).await;
}

/// Waits until `moment` is `time` ago.
pub async fn pause_until(moment: Moment, time: Duration) {
    tokio::time::sleep_until((moment.0 + time).into()).await;
}

#[cfg(test)]
mod tests {
    use super::{Rule, STEP};

    const S: i64 = 1_000_000_000;

    #[test]
    fn stamps_follow_the_monotonic_clock_and_ignore_slewing_below_the_step() {
        let mut rule = Rule::new(1.0, 1000 * S, 1000 * S);
        let (step, stamp) = rule.stamp(10 * S, 1010 * S + STEP.ns() - 1);
        assert_eq!(
            (step, stamp.arrival.ns(), stamp.ahead.ns()),
            (None, 1010 * S, 0)
        );
    }

    #[test]
    fn a_forward_step_is_told_on_the_old_time_and_moves_the_stamps() {
        let mut rule = Rule::new(1.0, 1000 * S, 1000 * S);
        let (step, stamp) = rule.stamp(10 * S, 4610 * S);
        let step = step.expect("an hour forward is a step");
        assert_eq!((step.arrival.ns(), step.by_ns), (1010 * S, 3600 * S));
        assert_eq!((stamp.arrival.ns(), stamp.ahead.ns()), (4610 * S, 0));
        assert_eq!(rule.stamp(11 * S, 4611 * S).1.arrival.ns(), 4611 * S);
    }

    #[test]
    fn a_backward_step_never_takes_a_stamp_back_and_the_next_forward_one_is_set_off() {
        let mut rule = Rule::new(1.0, 1000 * S, 1000 * S);
        let (step, stamp) = rule.stamp(10 * S, 410 * S);
        assert_eq!(step.map(|s| s.by_ns), Some(-600 * S));
        assert_eq!((stamp.arrival.ns(), stamp.ahead.ns()), (1010 * S, 600 * S));
        assert_eq!(rule.stamp(20 * S, 420 * S).1.arrival.ns(), 1020 * S);
        let (step, stamp) = rule.stamp(30 * S, 1230 * S);
        assert_eq!(step.map(|s| s.by_ns), Some(800 * S));
        assert_eq!((stamp.arrival.ns(), stamp.ahead.ns()), (1230 * S, 0));
    }

    #[test]
    fn a_factor_of_sixty_stamps_a_minute_per_second_without_seeing_a_step() {
        let mut rule = Rule::new(60.0, 5 * S, 1000 * S);
        let (step, stamp) = rule.stamp(10 * S, 1010 * S);
        assert_eq!((step, stamp.arrival.ns()), (None, 605 * S));
    }
}
