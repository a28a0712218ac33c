//! How long to wait before the next try to connect.
//!
//! 0.5 s doubling to 60 s, each wait shortened by up to half so that gateways which lost the same broker do
//! not come back as one. A connection that held for [`STABLE`] starts the row anew. Refused
//! credentials wait the longest at once: trying faster only fills the broker's log.

use std::time::Duration;

/// The first wait.
pub const SHORTEST: Duration = Duration::from_millis(500);
/// The longest wait.
pub const LONGEST: Duration = Duration::from_secs(60);
/// A connection that held this long was a good one.
pub const STABLE: Duration = Duration::from_secs(30);

/// The row of waits of one connection.
#[derive(Debug)]
pub struct Backoff {
    next: Duration,
    random: fastrand::Rng,
}

impl Backoff {
    /// A new row; `seed` decides its jitter.
    pub fn new(seed: u64) -> Self {
        Self {
            next: SHORTEST,
            random: fastrand::Rng::with_seed(seed),
        }
    }

    /// The wait after a connection that held for `held`, zero if none came about.
    pub fn after(&mut self, held: Duration) -> Duration {
        if held >= STABLE {
            self.next = SHORTEST;
        }
        let wait = self.next;
        self.next = (wait * 2).min(LONGEST);
        self.jitter(wait)
    }

    /// The wait after the broker refused us by name.
    pub fn refused(&mut self) -> Duration {
        self.next = LONGEST;
        self.jitter(LONGEST)
    }

    fn jitter(&mut self, wait: Duration) -> Duration {
        wait.mul_f64(1.0 - 0.5 * self.random.f64())
    }
}

#[cfg(test)]
mod tests {
    use std::time::Duration;

    use super::{Backoff, LONGEST, SHORTEST, STABLE};

    #[test]
    fn waits_double_from_half_a_second_to_a_minute_within_their_jitter() {
        let mut backoff = Backoff::new(7);
        let mut whole = SHORTEST;
        for _ in 0..12 {
            let wait = backoff.after(Duration::ZERO);
            assert!(wait <= whole && wait * 2 >= whole, "{wait:?} of {whole:?}");
            whole = (whole * 2).min(LONGEST);
        }
        assert_eq!(whole, LONGEST);
    }

    #[test]
    fn a_connection_that_held_starts_the_row_anew_and_a_short_one_does_not() {
        let mut backoff = Backoff::new(7);
        for _ in 0..8 {
            backoff.after(Duration::ZERO);
        }
        assert!(backoff.after(STABLE - Duration::from_millis(1)) > SHORTEST);
        assert!(backoff.after(STABLE) <= SHORTEST);
    }

    #[test]
    fn refused_credentials_wait_the_longest_at_once() {
        let wait = Backoff::new(7).refused();
        assert!(wait >= LONGEST / 2 && wait <= LONGEST, "{wait:?}");
    }

    #[test]
    fn two_gateways_do_not_wait_alike() {
        assert_ne!(
            Backoff::new(1).after(Duration::ZERO),
            Backoff::new(2).after(Duration::ZERO)
        );
    }
}
