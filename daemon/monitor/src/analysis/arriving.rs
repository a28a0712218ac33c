//! One block as it reaches a point, and what becomes of it.

use alloc::boxed::Box;

use humward_wire::block::Block;

use crate::{
    reading::{Reading, ShaftSpeed},
    time::{Arrival, SignalTime},
};

/// What became of a block.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Taken {
    /// Its samples were taken in.
    Whole,
    /// It was seen already or came too late, or its time lies outside 1970 to 2200: not used.
    Late,
    /// It holds no samples.
    Empty,
    /// Its unit needs a calibration the point does not have.
    Uncalibrated,
    /// It has no such channel.
    NoChannel,
    /// Its rate cannot serve the point.
    RateUnusable,
}

/// How far a block was taken in.
#[derive(Debug, Clone, PartialEq)]
pub enum Progress {
    /// Up to the end of this reading; there may be more of it.
    Closed(Box<Reading>),
    /// As far as it is of use.
    Done(Taken),
}

/// The speed that stands for a stretch of time, and whether it moved in it.
pub trait Speeds {
    /// From `start` to `end`.
    fn over(&self, start: SignalTime, end: SignalTime) -> (ShaftSpeed, bool);
}

/// One block as it reaches a point.
#[derive(Clone, Copy)]
pub struct Arriving<'a> {
    /// The block.
    pub block: &'a Block,
    /// Signal time of its first sample.
    pub at: SignalTime,
    /// When it arrived.
    pub arrival: Arrival,
    /// The speeds of the asset.
    pub speeds: &'a dyn Speeds,
}

impl core::fmt::Debug for Arriving<'_> {
    fn fmt(&self, f: &mut core::fmt::Formatter<'_>) -> core::fmt::Result {
        f.debug_struct("Arriving")
            .field("at", &self.at)
            .field("arrival", &self.arrival)
            .finish_non_exhaustive()
    }
}
