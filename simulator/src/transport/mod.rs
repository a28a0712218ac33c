//! The way of blocks, speeds and process values to the broker.
//!
//! In: what a sensor gave, sample by sample, and the machines' states. Out: [`Delivery`]s with the moment each
//! reaches the broker: the end of the block, or the moment of the value, and a latency drawn at 1 ms + an exponential
//! of 2 ms mean (common practice, no source). What one sensor sends arrives in order unless a fault says otherwise.
//!
//! A [`TransportFault`] concerns the blocks whose first sample lies in its time. The order in which faults are taken:
//! counter, clock, lost, doubled, late, reordered. Checked by `tests/transport.rs`.

mod arrivals;
mod blocks;
mod fault;
mod values;
mod way;

pub use arrivals::Arrivals;
pub use blocks::{Block, Blocks};
pub use fault::{Restart, Share, Shift, Slow, TransportFault};
pub use values::{SPEED_ERROR, Values};
pub use way::{DOUBLED_AFTER_S, Way};

use crate::random::Draw;

/// One message, as it arrives at the broker.
#[derive(Clone, Debug, PartialEq)]
pub struct Delivery {
    /// When, ns since 1970 UTC.
    pub arrival_ns: i64,
    /// Its topic.
    pub topic: String,
    /// Its bytes.
    pub payload: Vec<u8>,
}

/// A length of time in whole ns.
#[must_use]
pub fn ns(seconds: f64) -> i64 {
    (seconds * 1e9).round() as i64
}

/// How long a message takes to the broker, ns.
fn latency_ns(draw: &mut Draw) -> i64 {
    ns(1e-3 + 2e-3 * draw.exponential())
}
