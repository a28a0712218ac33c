//! Counts how long a condition has held, in the form its persistence asks for.
//!
//! Only judged readings are fed; a doubtful one is simply not, so it neither credits nor resets.

use crate::{
    plan::Persistence,
    reading::Reading,
    time::{SignalTime, Span},
};

/// Progress of one condition towards its persistence.
#[derive(Debug, Clone, PartialEq, Default)]
pub(super) struct Counter {
    in_row: u32,
    credit: Span,
    held: u32,
    /// The last 64 judged readings, the newest in bit 0.
    history: u64,
    since: Option<SignalTime>,
}

impl Counter {
    /// Forgets all progress.
    pub(super) fn reset(&mut self) {
        *self = Self::default();
    }

    /// Takes in one judged reading; `true` when the condition has now held long enough.
    ///
    /// Time is credited with the reading's own length, once, and only while readings hold in a row.
    pub(super) fn feed(
        &mut self,
        holds: bool,
        reading: &Reading,
        persistence: Persistence,
    ) -> bool {
        self.feed_part(holds, reading.start, reading.end, persistence)
    }

    /// As [`feed`](Self::feed), with the part of a reading from `from` to `to`.
    pub(super) fn feed_part(
        &mut self,
        holds: bool,
        from: SignalTime,
        to: SignalTime,
        persistence: Persistence,
    ) -> bool {
        self.history = self.history << 1 | u64::from(holds);
        if holds {
            self.in_row = self.in_row.saturating_add(1);
            self.credit = self.credit.plus(to.since(from));
            if self.since.is_none() {
                self.since = Some(from);
            }
        } else {
            self.in_row = 0;
            self.credit = Span::ZERO;
        }
        self.held = self.in_row;
        let met = match persistence {
            Persistence::Readings(count) => self.in_row >= u32::from(count),
            Persistence::Time(span) => self.credit >= span,
            Persistence::OutOf { needed, window } => {
                let seen = self.history & window_mask(window);
                if seen == 0 {
                    self.since = None;
                }
                self.held = seen.count_ones();
                self.held >= u32::from(needed)
            }
        };
        if !holds && !matches!(persistence, Persistence::OutOf { .. }) {
            self.since = None;
        }
        met && holds
    }

    /// When the condition that is now held began; `None` while it does not hold.
    pub(super) const fn since(&self) -> Option<SignalTime> {
        self.since
    }

    /// Readings on which it has held: those in a row, or those in the window looked back upon.
    pub(super) const fn held(&self) -> u32 {
        self.held
    }
}

const fn window_mask(window: u16) -> u64 {
    if window >= 64 {
        u64::MAX
    } else {
        (1 << window) - 1
    }
}

#[cfg(test)]
mod tests {
    use super::Counter;
    use crate::{
        judge::testing::reading,
        plan::Persistence,
        time::{SignalTime, Span},
    };

    fn fed(persistence: Persistence, holds: &[bool]) -> (Vec<bool>, Option<SignalTime>) {
        let mut counter = Counter::default();
        let met = holds
            .iter()
            .enumerate()
            .map(|(i, holds)| counter.feed(*holds, &reading(i as i64), persistence));
        (met.collect(), counter.since())
    }

    extern crate std;
    use std::vec::Vec;

    #[test]
    fn three_readings_means_three_in_a_row() {
        let (met, since) = fed(
            Persistence::Readings(3),
            &[true, true, false, true, true, true],
        );
        assert_eq!(met, [false, false, false, false, false, true]);
        assert_eq!(since, Some(reading(3).start));
    }

    #[test]
    fn time_is_credited_with_the_length_of_each_reading() {
        let (met, _) = fed(
            Persistence::Time(Span::from_secs(25)),
            &[true, true, true, false, true],
        );
        assert_eq!(met, [false, false, true, false, false]);
    }

    #[test]
    fn three_of_five_survives_two_quiet_readings() {
        let (met, since) = fed(
            Persistence::OutOf {
                needed: 3,
                window: 5,
            },
            &[true, false, true, false, true],
        );
        assert_eq!(met, [false, false, false, false, true]);
        assert_eq!(since, Some(reading(0).start));
        let (met, _) = fed(
            Persistence::OutOf {
                needed: 3,
                window: 5,
            },
            &[true, false, false, true, false, true],
        );
        assert!(met.iter().all(|met| !met));
    }
}
