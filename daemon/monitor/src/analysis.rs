//! Blocks of one point to its readings. State here may be thrown away: a restart costs the reading in progress.
//!
//! In: decoded blocks and the asset's speeds. Out: closed [`Reading`]s, which end on absolute multiples of
//! their length. Samples go to m/s2 in `f32`; frames of the plan's size overlap by half and run across block
//! borders; a gap ends the run of frames, not the reading. Statistics take every sample once, by its own time;
//! a frame belongs to the reading in which its last sample lies, and brings with it the velocity of its first
//! half, so velocity lags by half a frame.

mod arriving;
mod continuity;
mod evidence;
mod format;
mod machinery;
mod plans;
mod point;
mod sums;

pub use arriving::{Arriving, Progress, Speeds, Taken};
pub use evidence::Traces;
pub use point::PointAnalysis;
