//! Raw blocks: a header of fixed length, then interleaved samples to the end of the payload.
//!
//! Everything but the samples, and perhaps the time, comes from the configuration; without a time field the block
//! is stamped on arrival.

use super::fields::counts;
use super::mapped::{Key, TimeUnit};
use super::packing::{self, Packing};
use super::samples::{self, Origin};
use super::{Block, Limits, Unit};
use crate::field::{Field, Value};
use crate::refusal::{Reason, Refusal};
use crate::time;

/// How raw samples are laid out.
#[derive(Clone, Debug, PartialEq)]
pub struct RawLayout {
    /// Sample type and byte order.
    pub packing: Packing,
    /// Bytes before the first sample.
    pub header_bytes: usize,
    /// Time of the first sample inside the header; `None`: stamped on arrival.
    pub at: Option<RawTime>,
    /// Samples per second and channel.
    pub rate_hz: f64,
    /// Unit after scaling.
    pub unit: Unit,
    /// Sample x scale = unit.
    pub scale: f64,
    /// Interleaved axes.
    pub channels: u16,
}

/// An unsigned 64-bit time inside a raw header, in the byte order of the samples.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct RawTime {
    /// Its first byte.
    pub offset: usize,
    /// What it counts since 1970 UTC.
    pub unit: TimeUnit,
}

pub(super) fn decode(
    block: &mut Block,
    payload: &[u8],
    layout: &RawLayout,
    limits: &Limits,
) -> Result<(), Refusal> {
    if payload.is_empty() {
        return Err(Refusal::at(Reason::Empty, 0));
    }
    let start = layout.header_bytes;
    let bytes = payload
        .get(start..)
        .ok_or(Refusal::at(Reason::Truncated, payload.len()))?;
    block.at = match layout.at {
        Some(time) => Some(read_time(payload, time, layout.packing)?),
        None => None,
    };
    block.seq = None;
    block.rate_hz = layout.rate_hz;
    block.unit = layout.unit;
    block.scale = layout.scale;
    block.channels = layout.channels;
    block.rpm = None;
    block.bias = None;
    block.integer_rail = layout.packing.sample.rail();
    let field = Field {
        key: Key::Samples.name(),
        at: start,
        value: Value::Other,
    };
    samples::whole(bytes.len(), layout.packing, &field, limits, |left| {
        payload.len() - left
    })?;
    block.samples.clear();
    packing::unpack(&mut block.samples, bytes, layout.packing);
    counts(block, start)?;
    samples::check(
        &block.samples,
        block.scale,
        &Origin::Bytes {
            bytes,
            start,
            packing: layout.packing,
        },
    )
}

fn read_time(payload: &[u8], time: RawTime, packing: Packing) -> Result<i64, Refusal> {
    let bytes: Option<[u8; 8]> = payload
        .get(time.offset..)
        .and_then(|rest| rest.first_chunk().copied());
    let bytes = bytes.ok_or(Refusal::of(
        Reason::Truncated,
        payload.len(),
        Key::At.name(),
    ))?;
    let units = match packing.order {
        packing::ByteOrder::Little => u64::from_le_bytes(bytes),
        packing::ByteOrder::Big => u64::from_be_bytes(bytes),
    };
    i64::try_from(units)
        .ok()
        .and_then(|units| units.checked_mul(time.unit.nanoseconds()))
        .filter(|ns| time::plausible(*ns))
        .ok_or(Refusal::of(
            Reason::TimeOutOfRange,
            time.offset,
            Key::At.name(),
        ))
}
