//! Blocks to payloads, for simulators, players and tests.

use alloc::string::String;
use alloc::vec::Vec;
use core::fmt::Write;

use super::Block;
use super::packing::{ByteOrder, Packing, SampleType};
use crate::cbor::{self, Writer, Written};

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
    cbor::write(160 + block.samples.len() * 9, |w| {
        let optional = [
            block.at.is_some(),
            block.seq.is_some(),
            block.rpm.is_some(),
            block.bias.is_some(),
        ];
        w.map(5 + optional.iter().filter(|there| **there).count() as u64)?;
        if let Some(at) = block.at {
            w.str("at")?.i64(at)?;
        }
        if let Some(seq) = block.seq {
            w.str("seq")?.u64(seq)?;
        }
        w.str("rate")?.f64(block.rate_hz)?;
        w.str("unit")?.str(block.unit.text())?;
        w.str("scale")?.f64(block.scale)?;
        w.str("channels")?.u16(block.channels)?;
        for (key, value) in [("rpm", block.rpm), ("bias", block.bias)] {
            if let Some(value) = value {
                w.str(key)?.f64(value)?;
            }
        }
        w.str("samples")?;
        write_samples(w, &block.samples, encoding)
    })
}

fn write_samples(w: &mut Writer, samples: &[f32], encoding: SampleEncoding) -> Written {
    let count = samples.len();
    let whole = samples
        .iter()
        .map(|sample| f64::from(*sample) + if *sample < 0.0 { -0.5 } else { 0.5 });
    match encoding {
        // `as` cuts towards zero and holds the value within the integer's range.
        SampleEncoding::S16 => {
            let codes = whole.map(|s| (s as i16).to_le_bytes());
            cbor::typed(w, tag(SampleType::S16), count * 2, codes)
        }
        SampleEncoding::S32 => {
            let codes = whole.map(|s| (s as i32).to_le_bytes());
            cbor::typed(w, tag(SampleType::S32), count * 4, codes)
        }
        SampleEncoding::F32 => {
            let floats = samples.iter().map(|s| s.to_le_bytes());
            cbor::typed(w, tag(SampleType::F32), count * 4, floats)
        }
        SampleEncoding::F64 => {
            let floats = samples.iter().map(|s| f64::from(*s).to_le_bytes());
            cbor::typed(w, tag(SampleType::F64), count * 8, floats)
        }
        SampleEncoding::Plain => {
            w.array(count as u64)?;
            for sample in samples {
                w.f32(*sample)?;
            }
            Ok(())
        }
    }
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
