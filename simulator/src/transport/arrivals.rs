//! Messages on their way, in order of arrival.

use std::cmp::Reverse;
use std::collections::BinaryHeap;

use super::Delivery;

/// A message with its place among those that arrive at the same moment.
#[derive(Debug)]
struct Waiting {
    number: u64,
    delivery: Delivery,
}

impl Waiting {
    fn key(&self) -> (i64, u64) {
        (self.delivery.arrival_ns, self.number)
    }
}

impl PartialEq for Waiting {
    fn eq(&self, other: &Waiting) -> bool {
        self.key() == other.key()
    }
}

impl Eq for Waiting {}

impl PartialOrd for Waiting {
    fn partial_cmp(&self, other: &Waiting) -> Option<core::cmp::Ordering> {
        Some(self.cmp(other))
    }
}

impl Ord for Waiting {
    fn cmp(&self, other: &Waiting) -> core::cmp::Ordering {
        self.key().cmp(&other.key())
    }
}

/// Messages on their way; the earliest comes out first, of equals the one put in first.
#[derive(Debug, Default)]
pub struct Arrivals {
    heap: BinaryHeap<Reverse<Waiting>>,
    number: u64,
}

impl Arrivals {
    /// Puts a message in.
    pub fn push(&mut self, delivery: Delivery) {
        let number = self.number;
        self.number += 1;
        self.heap.push(Reverse(Waiting { number, delivery }));
    }

    /// Takes the earliest out, if it arrives at `until_ns` or before.
    pub fn pop_until(&mut self, until_ns: i64) -> Option<Delivery> {
        let first = self.heap.peek()?;
        if first.0.delivery.arrival_ns > until_ns {
            return None;
        }
        self.heap.pop().map(|waiting| waiting.0.delivery)
    }
}
