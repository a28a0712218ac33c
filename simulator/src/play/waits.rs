//! How long to wait before the next try to connect: 0.5 s doubling to 60 s, each shortened by up to half; anew after
//! a connection that held for 30 s; the longest at once when the broker refuses us by name.

use std::time::Duration;

use crate::random::Draw;

const SHORTEST: Duration = Duration::from_millis(500);
const LONGEST: Duration = Duration::from_secs(60);
const STABLE: Duration = Duration::from_secs(30);

/// The row of waits.
#[derive(Debug)]
pub(super) struct Waits {
    next: Duration,
    draw: Draw,
}

impl Waits {
    /// A new row; `seed` decides its jitter.
    pub(super) fn new(seed: u64) -> Waits {
        Waits {
            next: SHORTEST,
            draw: Draw::new(seed).part("waits"),
        }
    }

    /// The wait after a connection that held for `held`, or after one that the broker refused.
    pub(super) fn after(&mut self, held: Duration, refused: bool) -> Duration {
        if held >= STABLE {
            self.next = SHORTEST;
        }
        if refused {
            self.next = LONGEST;
        }
        let wait = self.next;
        self.next = (wait * 2).min(LONGEST);
        wait.mul_f64(self.draw.between(0.5, 1.0))
    }
}

#[cfg(test)]
mod tests {
    use std::time::Duration;

    use super::{LONGEST, SHORTEST, STABLE, Waits};

    #[test]
    fn waits_double_to_a_minute_and_begin_anew_after_a_connection_that_held() {
        let mut waits = Waits::new(7);
        let mut whole = SHORTEST;
        for _ in 0..12 {
            let wait = waits.after(Duration::ZERO, false);
            assert!(wait <= whole && wait * 2 >= whole, "{wait:?} of {whole:?}");
            whole = (whole * 2).min(LONGEST);
        }
        assert_eq!(whole, LONGEST);
        assert!(waits.after(STABLE, false) <= SHORTEST);
        assert!(waits.after(Duration::ZERO, true) * 2 >= LONGEST);
    }
}
