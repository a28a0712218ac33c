//! Blocks to payloads, for simulators, players and tests.

use alloc::string::String;
use alloc::vec::Vec;
use core::fmt::Write;

use super::Block;
use super::packing::{ByteOrder, Packing, SampleType};
use crate::cbor::Writer;

/// How samples are written in CBOR.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum SampleEncoding {
    /// Typed array, tag 77: 16-bit integers; samples are rounded and held within the type.
    S16,
    /// Typed array, tag 78: 32-bit integers; samples are rounded and held within the type.
    S32,
    /// Typed array, tag 85: 32-bit floats.
    F32,
    /// Typed array, tag 86: 64-bit floats.
    F64,
    /// Plain array of 32-bit floats.
    Plain,
}

impl SampleEncoding {
    /// Every way to write samples.
    pub const ALL: [SampleEncoding; 5] = [
        SampleEncoding::S16,
        SampleEncoding::S32,
        SampleEncoding::F32,
        SampleEncoding::F64,
        SampleEncoding::Plain,
    ];
}

fn tag(sample: SampleType) -> u64 {
    Packing {
        sample,
        order: ByteOrder::Little,
    }
    .tag()
}

/// Writes a block as a CBOR map. A block without `at` is written without it, and will not be read as CBOR.
#[must_use]
pub fn encode_cbor(block: &Block, encoding: SampleEncoding) -> Vec<u8> {
    let samples = &block.samples;
    let mut w = Writer::with_capacity(160 + samples.len() * 9);
    let optional = [
        block.at.is_some(),
        block.seq.is_some(),
        block.rpm.is_some(),
        block.bias.is_some(),
    ];
    w.map(5 + optional.iter().filter(|there| **there).count());
    if let Some(at) = block.at {
        w.text("at");
        w.integer(at);
    }
    if let Some(seq) = block.seq {
        w.text("seq");
        w.unsigned(seq);
    }
    w.text("rate");
    w.float(block.rate_hz);
    w.text("unit");
    w.text(block.unit.text());
    w.text("scale");
    w.float(block.scale);
    w.text("channels");
    w.unsigned(u64::from(block.channels));
    for (key, value) in [("rpm", block.rpm), ("bias", block.bias)] {
        if let Some(value) = value {
            w.text(key);
            w.float(value);
        }
    }
    w.text("samples");
    let whole = samples
        .iter()
        .map(|sample| f64::from(*sample) + if *sample < 0.0 { -0.5 } else { 0.5 });
    match encoding {
        // `as` cuts towards zero and holds the value within the integer's range.
        SampleEncoding::S16 => {
            w.typed(
                tag(SampleType::S16),
                samples.len() * 2,
                whole.map(|s| (s as i16).to_le_bytes()),
            );
        }
        SampleEncoding::S32 => {
            w.typed(
                tag(SampleType::S32),
                samples.len() * 4,
                whole.map(|s| (s as i32).to_le_bytes()),
            );
        }
        SampleEncoding::F32 => {
            w.typed(
                tag(SampleType::F32),
                samples.len() * 4,
                samples.iter().map(|s| s.to_le_bytes()),
            );
        }
        SampleEncoding::F64 => {
            w.typed(
                tag(SampleType::F64),
                samples.len() * 8,
                samples.iter().map(|s| f64::from(*s).to_le_bytes()),
            );
        }
        SampleEncoding::Plain => {
            w.array(samples.len());
            for sample in samples {
                w.single(*sample);
            }
        }
    }
    w.into_bytes()
}

/// Writes a block as a JSON object with plain numbers; samples read back to the same 32-bit floats.
#[must_use]
pub fn encode_json(block: &Block) -> Vec<u8> {
    let mut text = String::with_capacity(160 + block.samples.len() * 12);
    text.push('{');
    // Rust writes finite floats as JSON numbers, the shortest that read back the same; writing to a String succeeds.
    let mut put = |key: &str, value: &dyn core::fmt::Display| {
        let comma = if text.len() > 1 { "," } else { "" };
        write!(text, "{comma}\"{key}\":{value}").is_ok()
    };
    if let Some(at) = block.at {
        put("at", &at);
    }
    if let Some(seq) = block.seq {
        put("seq", &seq);
    }
    put("rate", &block.rate_hz);
    put("unit", &alloc::format!("\"{}\"", block.unit.text()));
    put("scale", &block.scale);
    put("channels", &block.channels);
    if let Some(rpm) = block.rpm {
        put("rpm", &rpm);
    }
    if let Some(bias) = block.bias {
        put("bias", &bias);
    }
    let samples: Vec<String> = block
        .samples
        .iter()
        .map(|sample| alloc::format!("{sample}"))
        .collect();
    put("samples", &alloc::format!("[{}]", samples.join(",")));
    text.push('}');
    text.into_bytes()
}
