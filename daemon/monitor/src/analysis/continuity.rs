//! Whether a block follows the one before it, leaves a gap, or comes too late to be used.
//!
//! With a counter (`seq`) the counter decides; without one the block's own time does, with half a block's
//! length as tolerance, so that stamping jitter is not taken for a lost block. A sensor whose clock was set
//! back would look late for ever: the third late block in a row that follows the one before it is believed.

use crate::time::{SignalTime, Span};

/// How a block joins what came before it.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Joint {
    /// It is the first of its source.
    First,
    /// Its first sample follows the last one seen.
    Follows,
    /// Samples are missing before it, or the sensor began anew: about this long.
    AfterGap(Span),
    /// It was seen already, or comes after a later one: not to be used.
    Late,
}

/// Blocks in a row that must look late before their clock is believed.
const LATE_BELIEVED: u8 = 3;

/// What the next block of a source is expected to be.
#[derive(Debug, Clone, PartialEq, Default)]
pub(super) struct Continuity {
    next: Option<Next>,
    late_next: Option<SignalTime>,
    late_in_row: u8,
}

#[derive(Debug, Clone, Copy, PartialEq)]
struct Next {
    at: SignalTime,
    seq: Option<u64>,
}

impl Continuity {
    /// Forgets what was expected: the next block is the first again.
    pub(super) fn reset(&mut self) {
        *self = Self::default();
    }

    /// Joins a block that begins at `at`, lasts `length` and may carry a counter.
    pub(super) fn join(&mut self, at: SignalTime, length: Span, seq: Option<u64>) -> Joint {
        let Some(next) = self.next else {
            self.expect(at, length, seq);
            return Joint::First;
        };
        let tolerance = Span::from_ns(length.ns() / 2);
        let early = next.at.since(at) > tolerance;
        let counted_on = match (next.seq, seq) {
            (Some(next), Some(seq)) => Some(next == seq),
            _ => None,
        };
        let joint = if early && !self.clock_believed(at, length, tolerance) {
            return Joint::Late;
        } else if early {
            Joint::AfterGap(Span::ZERO)
        } else if counted_on == Some(true) && at.since(next.at) <= length.times(2) {
            Joint::Follows
        } else if counted_on == Some(false) || at.since(next.at) > tolerance {
            Joint::AfterGap(at.since(next.at))
        } else {
            Joint::Follows
        };
        self.expect(at, length, seq);
        joint
    }

    fn clock_believed(&mut self, at: SignalTime, length: Span, tolerance: Span) -> bool {
        let follows = self
            .late_next
            .is_some_and(|next| next.since(at) <= tolerance && at.since(next) <= tolerance);
        self.late_in_row = if follows { self.late_in_row + 1 } else { 1 };
        self.late_next = Some(at.plus(length));
        self.late_in_row >= LATE_BELIEVED
    }

    fn expect(&mut self, at: SignalTime, length: Span, seq: Option<u64>) {
        self.next = Some(Next {
            at: at.plus(length),
            seq: seq.map(|seq| seq.wrapping_add(1)),
        });
        self.late_next = None;
        self.late_in_row = 0;
    }
}

#[cfg(test)]
mod tests {
    use super::{Continuity, Joint};
    use crate::time::{SignalTime, Span};

    extern crate std;
    use std::vec::Vec;

    fn joints(blocks: &[(i64, Option<u64>)]) -> Vec<Joint> {
        let mut continuity = Continuity::default();
        let ms = |ms: i64| SignalTime::from_ns(ms * 1_000_000);
        let length = Span::from_ns(100_000_000);
        blocks
            .iter()
            .map(|(at, seq)| continuity.join(ms(*at), length, *seq))
            .collect()
    }

    fn gap(ms: i64) -> Joint {
        Joint::AfterGap(Span::from_ns(ms * 1_000_000))
    }

    #[test]
    fn jitter_below_half_a_block_is_no_gap() {
        let seen = joints(&[(0, None), (140, None), (200, None)]);
        assert_eq!(seen, [Joint::First, Joint::Follows, Joint::Follows]);
    }

    #[test]
    fn a_lost_block_is_a_gap_by_time_or_by_counter() {
        assert_eq!(joints(&[(0, None), (200, None)])[1], gap(100));
        assert_eq!(joints(&[(0, Some(4)), (110, Some(6))])[1], gap(10));
    }

    #[test]
    fn a_doubled_or_reordered_block_is_late() {
        let seen = joints(&[
            (0, Some(1)),
            (100, Some(2)),
            (0, Some(1)),
            (100, Some(2)),
            (200, Some(3)),
        ]);
        assert_eq!(seen[2..], [Joint::Late, Joint::Late, Joint::Follows]);
    }

    #[test]
    fn a_clock_set_back_is_believed_at_the_third_block() {
        let seen = joints(&[
            (10_000, None),
            (0, None),
            (100, None),
            (200, None),
            (300, None),
        ]);
        assert_eq!(
            seen[1..],
            [Joint::Late, Joint::Late, gap(0), Joint::Follows]
        );
    }

    #[test]
    fn a_wrapped_counter_costs_one_gap_and_no_block() {
        let seen = joints(&[(0, Some(255)), (100, Some(0)), (200, Some(1))]);
        assert_eq!(seen[1..], [gap(0), Joint::Follows]);
    }
}
