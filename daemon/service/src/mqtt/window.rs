//! Which of our messages a PubAck is for.
//!
//! The client gives a message its packet id only when it writes it, in the order it was handed over. So our
//! ids wait in a row; each `Outgoing::Publish(packet id)` takes the first of them, and the PubAck of
//! that packet id resolves it. Valid only for one connection: a new one begins with a new window.
//! The window also never lets a packet id be used twice at once: the span from the oldest unanswered message to
//! the newest stays below the number of packet ids in turn, whatever order the broker answers in.
//! An id met out of turn ends the connection: everything unanswered is sent again on the next.

use std::collections::{BTreeMap, VecDeque};

/// Messages on their way at once.
pub const WINDOW: usize = 16;
/// Packet ids in turn: twice the window.
pub const PACKET_IDS: u16 = 2 * WINDOW as u16;

/// The messages on their way on one connection.
#[derive(Debug, Default)]
pub struct Window {
    handed: VecDeque<u64>,
    written: BTreeMap<u16, (u64, u64)>,
    count: u64,
}

/// The client and the broker do not agree about a packet id.
#[derive(Debug, Clone, Copy, PartialEq, Eq, thiserror::Error)]
pub enum OutOfStep {
    /// A packet was written that we did not hand over.
    #[error("the client wrote packet {packet} that was not handed to it; connecting again")]
    Written {
        /// Its id.
        packet: u16,
    },
    /// A packet was written under an id still in use.
    #[error("packet id {packet} was used twice before it was acknowledged; connecting again")]
    Twice {
        /// Its id.
        packet: u16,
    },
    /// A packet was acknowledged that is not on its way.
    #[error("the broker acknowledged packet {packet} that was not on its way; connecting again")]
    Acknowledged {
        /// Its id.
        packet: u16,
    },
}

impl Window {
    /// Whether one more may be handed over.
    pub fn has_room(&self) -> bool {
        let oldest = self
            .written
            .values()
            .map(|(_, count)| *count)
            .min()
            .unwrap_or(self.count);
        let span = self.count - oldest + self.handed.len() as u64;
        self.handed.len() + self.written.len() < WINDOW && span + 1 < u64::from(PACKET_IDS)
    }

    /// Whether nothing is on its way.
    pub fn is_empty(&self) -> bool {
        self.handed.is_empty() && self.written.is_empty()
    }

    /// Our message `id` was handed to the client.
    pub fn handed(&mut self, id: u64) {
        self.handed.push_back(id);
    }

    /// The client wrote the next message as `packet`.
    ///
    /// # Errors
    /// [`OutOfStep`] when nothing was handed over or the id is in use.
    pub fn written(&mut self, packet: u16) -> Result<(), OutOfStep> {
        if self.written.contains_key(&packet) {
            return Err(OutOfStep::Twice { packet });
        }
        let id = self
            .handed
            .pop_front()
            .ok_or(OutOfStep::Written { packet })?;
        self.written.insert(packet, (id, self.count));
        self.count += 1;
        Ok(())
    }

    /// The broker took `packet`: our id of it.
    ///
    /// # Errors
    /// [`OutOfStep`] when no such packet is on its way.
    pub fn acknowledged(&mut self, packet: u16) -> Result<u64, OutOfStep> {
        self.written
            .remove(&packet)
            .map(|(id, _)| id)
            .ok_or(OutOfStep::Acknowledged { packet })
    }
}

#[cfg(test)]
mod tests {
    use super::{OutOfStep, PACKET_IDS, WINDOW, Window};

    #[test]
    fn acknowledgements_find_their_message_in_any_order() {
        let mut window = Window::default();
        for id in [70, 71, 72] {
            window.handed(id);
        }
        for packet in 1..=3 {
            assert_eq!(window.written(packet), Ok(()));
        }
        assert_eq!(
            [
                window.acknowledged(2),
                window.acknowledged(1),
                window.acknowledged(3)
            ],
            [Ok(71), Ok(70), Ok(72)]
        );
        assert!(window.is_empty());
    }

    #[test]
    fn one_message_left_unanswered_stops_the_window_before_its_packet_id_comes_round() {
        let mut window = Window::default();
        let mut packet = 0;
        let mut sent = 0_u64;
        while window.has_room() && sent < 1000 {
            window.handed(sent);
            packet = packet % PACKET_IDS + 1;
            assert_eq!(window.written(packet), Ok(()), "message {sent}");
            if packet != 1 {
                assert_eq!(window.acknowledged(packet), Ok(sent));
            }
            sent += 1;
        }
        assert_eq!(sent, u64::from(PACKET_IDS) - 1);
        assert_eq!(window.acknowledged(1), Ok(0));
        assert!(window.has_room());
    }

    #[test]
    fn no_more_than_the_window_is_on_its_way() {
        let mut window = Window::default();
        let mut handed = 0;
        while window.has_room() {
            window.handed(handed);
            handed += 1;
        }
        assert_eq!(handed, WINDOW as u64);
    }

    #[test]
    fn packets_that_were_never_handed_over_are_out_of_step() {
        let mut window = Window::default();
        assert_eq!(window.written(4), Err(OutOfStep::Written { packet: 4 }));
        assert_eq!(
            window.acknowledged(4),
            Err(OutOfStep::Acknowledged { packet: 4 })
        );
        window.handed(1);
        window.handed(2);
        assert_eq!(window.written(4), Ok(()));
        assert_eq!(window.written(4), Err(OutOfStep::Twice { packet: 4 }));
    }
}
