//! Blocks: samples as a sensor sends them, in CBOR, JSON, foreign JSON or raw bytes.
//!
//! In: payload bytes and how they are written. Out: interleaved samples as 32-bit floats, not yet scaled
//! (value x `scale` = `unit`), with rate in Hz and the time of the first sample in ns since 1970 UTC. 32-bit
//! integers beyond 2^24 lose their lowest bits, below the noise of any sensor. Leaves out: whether the time is
//! near arrival, whether the rate is true, and any judgement of the signal.
//! Checked by `tests/contract/corpus.rs`, `tests/contract/malformed.rs`, `tests/contract/round_trip.rs`; typed arrays against RFC 8746.

mod encode;
mod fields;
mod mapped;
mod packing;
mod raw;
mod samples;

use alloc::vec::Vec;
use core::ops::RangeInclusive;

pub use encode::{SampleEncoding, encode_cbor, encode_json};
pub use mapped::{Fixed, JsonMap, Key, MapFault, TimeUnit};
pub use packing::{ByteOrder, Packing, SampleType};
pub use raw::{RawLayout, RawTime};

use crate::field;
use crate::refusal::{Form, Refusal};

/// Largest scaled sample, in any unit; beyond it byte order or sample type is wrong.
pub const MAX_SCALED: f64 = 1e12;
/// Fastest shaft taken, r/min.
pub const MAX_RPM: f64 = 1e6;

/// One block of samples.
#[derive(Clone, Debug, PartialEq)]
pub struct Block {
    /// Time of the first sample, ns since 1970 UTC; `None` when the configured layout has no time and the block
    /// is to be stamped on arrival.
    pub at: Option<i64>,
    /// The sensor's counter.
    pub seq: Option<u64>,
    /// Samples per second and channel, as declared.
    pub rate_hz: f64,
    /// Unit of a sample after scaling.
    pub unit: Unit,
    /// Sample x scale = unit; never 0.
    pub scale: f64,
    /// Interleaved axes.
    pub channels: u16,
    /// Shaft speed the sensor measured itself, r/min.
    pub rpm: Option<f64>,
    /// Bias voltage of the sensor, V.
    pub bias: Option<f64>,
    /// Interleaved samples, not scaled.
    pub samples: Vec<f32>,
    /// Lowest and highest code of an integer sample type, so that rails can be counted.
    pub integer_rail: Option<(f32, f32)>,
}

/// Unit of a scaled sample.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Unit {
    /// m/s2.
    MetrePerSecondSquared,
    /// Standard gravity, 9.80665 m/s2.
    G,
    /// Millivolt; needs the point's sensitivity.
    Millivolt,
    /// Converter count; needs the point's sensitivity.
    Count,
}

/// How a payload is written.
#[derive(Clone, Debug, PartialEq)]
pub enum Encoding {
    /// A CBOR map.
    Cbor,
    /// A JSON object with our keys.
    Json,
    /// Samples as bytes.
    Raw(RawLayout),
    /// Foreign JSON.
    JsonMapped(JsonMap),
}

/// What a block may not exceed.
#[derive(Clone, Debug, PartialEq)]
pub struct Limits {
    /// Most samples of all channels together; checked before anything is allocated.
    pub max_samples: usize,
    /// Most interleaved channels.
    pub max_channels: u16,
    /// Allowed rates, Hz.
    pub rate_hz: RangeInclusive<f64>,
}

impl Default for Limits {
    /// 262 144 samples, 16 channels, 1 Hz to 1 MHz.
    fn default() -> Limits {
        Limits {
            max_samples: 262_144,
            max_channels: 16,
            rate_hz: 1.0..=1e6,
        }
    }
}

impl Unit {
    /// Every unit.
    pub const ALL: [Unit; 4] = [
        Unit::MetrePerSecondSquared,
        Unit::G,
        Unit::Millivolt,
        Unit::Count,
    ];

    /// The unit as it stands in payloads.
    #[must_use]
    pub const fn text(self) -> &'static str {
        match self {
            Unit::MetrePerSecondSquared => "m/s2",
            Unit::G => "g",
            Unit::Millivolt => "mV",
            Unit::Count => "count",
        }
    }

    /// The unit a text names.
    #[must_use]
    pub fn from_text(text: &str) -> Option<Unit> {
        Unit::ALL.into_iter().find(|unit| unit.text() == text)
    }
}

impl Encoding {
    /// CBOR or JSON by the payload's first byte: a CBOR map starts 0xa0 to 0xbf, JSON with `{` or white space.
    ///
    /// # Errors
    /// An empty payload, or a first byte that is neither.
    pub fn detect(payload: &[u8]) -> Result<Encoding, Refusal> {
        Ok(if field::detect(payload)? == Form::Cbor {
            Encoding::Cbor
        } else {
            Encoding::Json
        })
    }

    /// The form, for counters and for the table of reasons.
    #[must_use]
    pub fn form(&self) -> Form {
        match self {
            Encoding::Cbor => Form::Cbor,
            Encoding::Json => Form::Json,
            Encoding::Raw(_) => Form::Raw,
            Encoding::JsonMapped(_) => Form::Mapped,
        }
    }
}

impl Block {
    /// An empty block to decode into.
    #[must_use]
    pub fn empty() -> Block {
        Block {
            at: None,
            seq: None,
            rate_hz: 1.0,
            unit: Unit::Count,
            scale: 1.0,
            channels: 1,
            rpm: None,
            bias: None,
            samples: Vec::new(),
            integer_rail: None,
        }
    }

    /// Samples of one channel.
    #[must_use]
    pub fn frames(&self) -> usize {
        self.samples.len() / usize::from(self.channels.max(1))
    }
}

/// Where the time of a payload that was read whole stands, for a refusal that only the receiver can make.
///
/// The byte of the value of `at`, in foreign JSON and without a time the payload's start.
#[must_use]
pub fn at_offset(payload: &[u8], encoding: &Encoding) -> usize {
    match encoding {
        Encoding::Cbor | Encoding::Json => field::read(payload, encoding.form(), &["at"])
            .ok()
            .and_then(|[at]| at)
            .map_or(0, |at| at.at),
        Encoding::Raw(layout) => layout.at.as_ref().map_or(0, |at| at.offset),
        Encoding::JsonMapped(_) => 0,
    }
}

/// Reads a block.
///
/// # Errors
/// The first thing that is wrong, with its byte; see [`Reason`](crate::refusal::Reason).
pub fn decode(payload: &[u8], encoding: &Encoding, limits: &Limits) -> Result<Block, Refusal> {
    let mut block = Block::empty();
    decode_into(&mut block, payload, encoding, limits)?;
    Ok(block)
}

/// Reads a block into one that is used again and again, keeping its sample memory.
///
/// # Errors
/// As [`decode`]; the block then has no samples.
pub fn decode_into(
    block: &mut Block,
    payload: &[u8],
    encoding: &Encoding,
    limits: &Limits,
) -> Result<(), Refusal> {
    let read = match encoding {
        Encoding::Cbor => fields::keyed(block, payload, Form::Cbor, limits),
        Encoding::Json => fields::keyed(block, payload, Form::Json, limits),
        Encoding::Raw(layout) => raw::decode(block, payload, layout, limits),
        Encoding::JsonMapped(map) => mapped::decode(block, payload, map, limits),
    };
    if read.is_err() {
        block.samples.clear();
    }
    read
}
