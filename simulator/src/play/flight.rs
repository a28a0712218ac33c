//! Messages handed to the client and not yet acknowledged, on one connection.
//!
//! The client numbers packets 1 to [`PACKETS`] in turn and stands still for ever when it comes round to a number that
//! is still unanswered. So the span from the oldest unanswered message to the newest stays below that number, whatever
//! order the broker answers in.

use std::collections::VecDeque;

/// Packet ids in turn.
pub(super) const PACKETS: u16 = 100;
/// Messages on their way at once.
const ON_THE_WAY: usize = 40;

/// A message written under a packet id.
#[derive(Debug)]
struct Written {
    packet: u16,
    answered: bool,
}

/// What is on its way.
#[derive(Debug, Default)]
pub(super) struct Flight {
    /// Handed over, not yet written.
    handed: usize,
    /// Written, from the oldest unanswered one on.
    written: VecDeque<Written>,
}

impl Flight {
    /// Whether one more may be handed over.
    pub(super) fn has_room(&self) -> bool {
        self.handed + self.written.len() < usize::from(PACKETS) - 1
            && self.unanswered() < ON_THE_WAY as u64
    }

    /// Messages handed over and not answered.
    pub(super) fn unanswered(&self) -> u64 {
        let written = self.written.iter().filter(|written| !written.answered);
        (self.handed + written.count()) as u64
    }

    /// One more was handed over.
    pub(super) fn handed(&mut self) {
        self.handed += 1;
    }

    /// The client wrote the next one as `packet`.
    pub(super) fn written(&mut self, packet: u16) {
        self.handed = self.handed.saturating_sub(1);
        self.written.push_back(Written {
            packet,
            answered: false,
        });
    }

    /// The broker took `packet`; whether that was one of ours on its way.
    pub(super) fn acknowledged(&mut self, packet: u16) -> bool {
        let mut open = self.written.iter_mut().filter(|written| !written.answered);
        let Some(written) = open.find(|written| written.packet == packet) else {
            return false;
        };
        written.answered = true;
        while self.written.front().is_some_and(|first| first.answered) {
            self.written.pop_front();
        }
        true
    }
}

#[cfg(test)]
mod tests {
    use super::{Flight, ON_THE_WAY, PACKETS};

    #[test]
    fn no_more_than_forty_messages_are_on_their_way() {
        let mut flight = Flight::default();
        while flight.has_room() {
            flight.handed();
        }
        assert_eq!(flight.unanswered(), ON_THE_WAY as u64);
    }

    #[test]
    fn a_message_left_unanswered_stops_the_flight_before_its_packet_id_comes_round() {
        let mut flight = Flight::default();
        let mut packet = 0;
        let mut sent = 0;
        while flight.has_room() && sent < 1000 {
            flight.handed();
            packet = packet % PACKETS + 1;
            flight.written(packet);
            sent += 1;
            assert_eq!(packet != 1 && flight.acknowledged(packet), packet != 1);
        }
        assert_eq!(sent, i32::from(PACKETS) - 1);
        assert!(flight.acknowledged(1));
        assert!(flight.has_room());
        assert_eq!(flight.unanswered(), 0);
    }

    #[test]
    fn an_answer_to_what_was_never_sent_counts_for_nothing() {
        let mut flight = Flight::default();
        flight.handed();
        flight.written(7);
        assert!(!flight.acknowledged(8));
        assert!(flight.acknowledged(7) && !flight.acknowledged(7));
    }
}
