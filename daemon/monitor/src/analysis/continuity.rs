//! Whether a block follows the one before it, leaves a gap, or comes too late to be used.
//!
//! With a counter (`seq`) the counter decides; without one the block's own time does, with half a block's
//! length as tolerance, so that stamping jitter is not taken for a lost block. A sensor whose clock was set
//! back would look late for ever: the third late block in a row that follows the one before it is believed,
//! unless they come faster than their samples were taken: that is a backlog sent once more.

use crate::time::{Arrival, SignalTime, Span};

/// How a block joins what came before it.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Joint {
    /// It is the first of its source.
    First,
    /// Its first sample follows the last one seen.
    Follows,
    /// Samples are missing before it, or the sensor began anew: about this long.
    AfterGap(Span),
    /// Its sensor's clock was set back, or the sensor began anew at an earlier time.
    ClockSetBack,
    /// It was seen already, or comes after a later one: not to be used.
    Late,
}

/// Blocks in a row that must look late before their clock is believed.
const LATE_BELIEVED: u32 = 3;

/// What the next block of a source is expected to be.
#[derive(Debug, Clone, PartialEq, Default)]
pub(super) struct Continuity {
    next: Option<Next>,
    late: Option<Late>,
}

/// Late blocks in a row, each following the one before.
#[derive(Debug, Clone, Copy, PartialEq)]
struct Late {
    next: SignalTime,
    count: u32,
    first: Arrival,
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

    /// Joins a block that begins at `at`, lasts `length`, may carry a counter, and came at `arrival`.
    pub(super) fn join(
        &mut self,
        at: SignalTime,
        length: Span,
        seq: Option<u64>,
        arrival: Arrival,
    ) -> Joint {
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
        let joint = if early && !self.clock_believed(at, length, tolerance, arrival) {
            return Joint::Late;
        } else if early {
            Joint::ClockSetBack
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

    fn clock_believed(
        &mut self,
        at: SignalTime,
        length: Span,
        tolerance: Span,
        arrival: Arrival,
    ) -> bool {
        let before = self
            .late
            .filter(|late| late.next.since(at) <= tolerance && at.since(late.next) <= tolerance);
        let late = Late {
            next: at.plus(length),
            count: before.map_or(1, |late| late.count.saturating_add(1)),
            first: before.map_or(arrival, |late| late.first),
        };
        self.late = Some(late);
        // Half the pace of the samples leaves room for jitter.
        let taken = length.times(i64::from(late.count) - 1);
        late.count >= LATE_BELIEVED && arrival.since(late.first).times(2) >= taken
    }

    fn expect(&mut self, at: SignalTime, length: Span, seq: Option<u64>) {
        self.next = Some(Next {
            at: at.plus(length),
            seq: seq.map(|seq| seq.wrapping_add(1)),
        });
        self.late = None;
    }
}

#[cfg(test)]
mod tests {
    use super::{Continuity, Joint};
    use crate::time::{Arrival, SignalTime, Span};

    extern crate std;
    use std::vec::Vec;

    /// Joints of blocks of 100 ms: their time in ms and counter; each arrives when its last sample is taken.
    fn joints(blocks: &[(i64, Option<u64>)]) -> Vec<Joint> {
        joints_paced(blocks, 100)
    }

    fn joints_paced(blocks: &[(i64, Option<u64>)], pace_ms: i64) -> Vec<Joint> {
        let mut continuity = Continuity::default();
        let ns = |ms: i64| ms * 1_000_000;
        let length = Span::from_ns(100_000_000);
        let arrivals = (0..).map(|k| Arrival::from_ns(ns(20_000 + pace_ms * k)));
        blocks
            .iter()
            .zip(arrivals)
            .map(|((at, seq), arrival)| {
                continuity.join(SignalTime::from_ns(ns(*at)), length, *seq, arrival)
            })
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
            [
                Joint::Late,
                Joint::Late,
                Joint::ClockSetBack,
                Joint::Follows
            ]
        );
    }

    #[test]
    fn a_backlog_sent_once_more_is_late_to_its_last_block() {
        let mut blocks: Vec<_> = (0..300).map(|k| (k * 100, None)).collect();
        blocks.extend_from_within(..);
        let seen = joints_paced(&blocks, 1);
        assert!(seen[300..].iter().all(|joint| *joint == Joint::Late));
    }

    #[test]
    fn a_wrapped_counter_costs_one_gap_and_no_block() {
        let seen = joints(&[(0, Some(255)), (100, Some(0)), (200, Some(1))]);
        assert_eq!(seen[1..], [gap(0), Joint::Follows]);
    }
}
