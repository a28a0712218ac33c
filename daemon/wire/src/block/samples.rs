//! Samples from bytes and arrays to 32-bit floats.
//!
//! The typed arrays of RFC 8746 (section 2.1: tag = 0b010, float, signed, byte order, size) are tight loops over
//! unaligned bytes; the finite check is one more pass over the result. Lengths are checked before allocating.

use alloc::vec::Vec;

use base64::engine::{DecodePaddingMode, GeneralPurpose, GeneralPurposeConfig};
use base64::{DecodeError, Engine, alphabet};

use super::packing::{ByteOrder, Packing, SampleType, unpack};
use super::{Limits, MAX_SCALED};
use crate::cbor::{Cursor, Item};
use crate::field::{Field, Value};
use crate::refusal::{Reason, Refusal};

/// Where samples came from, to find the byte of one of them again.
#[derive(Debug)]
pub(super) enum Origin<'a> {
    Bytes {
        bytes: &'a [u8],
        start: usize,
        packing: Packing,
    },
    Base64 {
        bytes: Vec<u8>,
        start: usize,
        packing: Packing,
        in_place: bool,
    },
    Cbor {
        items: &'a [u8],
        start: usize,
    },
    Json {
        text: &'a str,
        start: usize,
    },
}

impl Origin<'_> {
    /// Lowest and highest code of integer samples.
    pub(super) fn rail(&self) -> Option<(f32, f32)> {
        match self {
            Origin::Bytes { packing, .. } | Origin::Base64 { packing, .. } => packing.sample.rail(),
            Origin::Cbor { .. } | Origin::Json { .. } => None,
        }
    }

    /// Byte in the payload of the sample at `index`.
    fn place(&self, index: usize) -> usize {
        match self {
            Origin::Bytes { start, packing, .. } => start + index * packing.sample.bytes(),
            // Four characters hold three bytes.
            Origin::Base64 {
                start,
                packing,
                in_place: true,
                ..
            } => start + index * packing.sample.bytes() / 3 * 4,
            Origin::Base64 { start, .. } => *start,
            Origin::Cbor { items, start } => {
                let mut cursor = Cursor::new(items, *start);
                for _ in 0..index {
                    if cursor.item().is_err() {
                        break;
                    }
                }
                cursor.position()
            }
            Origin::Json { text, start } => JsonNumbers { text, at: 1 }
                .nth(index)
                .map_or(*start, |(at, _)| start + at),
        }
    }

    /// Whether the sample at `index` was finite before it became a 32-bit float.
    fn was_finite(&self, index: usize) -> bool {
        let (bytes, packing) = match self {
            Origin::Bytes { bytes, packing, .. } => (*bytes, packing),
            Origin::Base64 { bytes, packing, .. } => (bytes.as_slice(), packing),
            Origin::Cbor { .. } | Origin::Json { .. } => return true,
        };
        let Some(bytes) = bytes.as_chunks::<8>().0.get(index) else {
            return false;
        };
        packing.sample == SampleType::F64
            && match packing.order {
                ByteOrder::Little => f64::from_le_bytes(*bytes).is_finite(),
                ByteOrder::Big => f64::from_be_bytes(*bytes).is_finite(),
            }
    }
}

/// Fills `out` from the `samples` field; `encoding` is the packing of base64 text, where it stands.
pub(super) fn fill<'a>(
    out: &mut Vec<f32>,
    field: &Field<'a>,
    encoding: Option<Packing>,
    limits: &Limits,
) -> Result<Origin<'a>, Refusal> {
    out.clear();
    match &field.value {
        Value::Typed { tag, bytes, start } => {
            let packing = Packing::from_tag(*tag).ok_or(field.refuse(Reason::UnknownSamples))?;
            whole(bytes.len(), packing, field, limits, |left| {
                start + bytes.len() - left
            })?;
            unpack(out, bytes, packing);
            Ok(Origin::Bytes {
                bytes,
                start: *start,
                packing,
            })
        }
        Value::CborArray {
            items,
            start,
            count,
        } => {
            if *count > limits.max_samples as u64 {
                return Err(field.refuse(Reason::TooManySamples));
            }
            from_cbor(out, items, *start, *count, field)?;
            Ok(Origin::Cbor {
                items,
                start: *start,
            })
        }
        Value::JsonArray { text, start } => {
            from_json(out, text, *start, field, limits)?;
            Ok(Origin::Json {
                text,
                start: *start,
            })
        }
        Value::Text { text, raw_at } => {
            let packing = encoding.ok_or(Refusal::of(Reason::MissingKey, 0, "encoding"))?;
            // Four characters hold three bytes; one sample of slack for padding.
            if text.len() / 4 * 3 / packing.sample.bytes() > limits.max_samples.saturating_add(1) {
                return Err(field.refuse(Reason::TooManySamples));
            }
            let bytes = from_base64(text, *raw_at, field)?;
            whole(bytes.len(), packing, field, limits, |_| field.at)?;
            unpack(out, &bytes, packing);
            let start = raw_at.unwrap_or(field.at);
            Ok(Origin::Base64 {
                bytes,
                start,
                packing,
                in_place: raw_at.is_some(),
            })
        }
        Value::Null
        | Value::Bool(_)
        | Value::Int(_)
        | Value::Float(_)
        | Value::CborMap { .. }
        | Value::Other => Err(field.refuse(Reason::WrongType)),
    }
}

/// Checks that bytes are whole samples and not too many; `cut` gives the place of a cut sample.
pub(super) fn whole(
    length: usize,
    packing: Packing,
    field: &Field<'_>,
    limits: &Limits,
    cut: impl Fn(usize) -> usize,
) -> Result<(), Refusal> {
    let size = packing.sample.bytes();
    if length / size > limits.max_samples {
        return Err(field.refuse(Reason::TooManySamples));
    }
    match length % size {
        0 => Ok(()),
        left => Err(Refusal::of(Reason::PartialSample, cut(left), field.key)),
    }
}

/// Refuses samples that are not finite or, scaled, larger than [`MAX_SCALED`]; in one pass when all is well.
pub(super) fn check(samples: &[f32], scale: f64, origin: &Origin<'_>) -> Result<(), Refusal> {
    if let Some((low, _)) = origin.rail()
        && f64::from(low).abs() * scale.abs() <= MAX_SCALED
    {
        // No code of the type reaches the bound.
        return Ok(());
    }
    // Without its sign bit a float orders as an integer, and infinities and NaN come last.
    let largest = samples.iter().fold(0, |most: i32, sample| {
        most.max((sample.to_bits() & 0x7fff_ffff) as i32)
    });
    let largest = f64::from(f32::from_bits(largest as u32));
    if largest.is_finite() && largest * scale.abs() <= MAX_SCALED {
        return Ok(());
    }
    let index = samples
        .iter()
        .position(|sample| {
            !sample.is_finite() || f64::from(*sample).abs() * scale.abs() > MAX_SCALED
        })
        .unwrap_or(0);
    let finite =
        samples.get(index).is_some_and(|sample| sample.is_finite()) || origin.was_finite(index);
    let reason = if finite {
        Reason::SampleOutOfRange
    } else {
        Reason::SampleNotFinite
    };
    Err(Refusal::of(reason, origin.place(index), "samples"))
}

fn from_cbor(
    out: &mut Vec<f32>,
    items: &[u8],
    start: usize,
    count: u64,
    field: &Field<'_>,
) -> Result<(), Refusal> {
    let mut cursor = Cursor::new(items, start);
    // Every item takes at least one byte, so the count is no larger than the payload.
    out.reserve(count as usize);
    for _ in 0..count {
        let (at, value) = match cursor.item()? {
            (at, Item::Int(number)) => (at, number as f64),
            (at, Item::Float(number)) => (at, number),
            (at, _) => return Err(Refusal::of(Reason::WrongType, at, field.key)),
        };
        let sample = value as f32;
        if !sample.is_finite() {
            let reason = if value.is_finite() {
                Reason::SampleOutOfRange
            } else {
                Reason::SampleNotFinite
            };
            return Err(Refusal::of(reason, at, field.key));
        }
        out.push(sample);
    }
    Ok(())
}

fn from_json(
    out: &mut Vec<f32>,
    text: &str,
    start: usize,
    field: &Field<'_>,
    limits: &Limits,
) -> Result<(), Refusal> {
    for (at, number) in (JsonNumbers { text, at: 1 }) {
        if out.len() >= limits.max_samples {
            return Err(field.refuse(Reason::TooManySamples));
        }
        let refuse = |reason| Refusal::of(reason, start + at, field.key);
        // The text is well formed, so what does not start as a number is of another type.
        if !number.starts_with(|c: char| c == '-' || c.is_ascii_digit()) {
            return Err(refuse(Reason::WrongType));
        }
        let sample: f32 = number.parse().map_err(|_| refuse(Reason::WrongType))?;
        if !sample.is_finite() {
            return Err(refuse(Reason::SampleOutOfRange));
        }
        out.push(sample);
    }
    Ok(())
}

/// The items of a well-formed JSON array of numbers, each with its place; `at` is just behind the bracket.
struct JsonNumbers<'a> {
    text: &'a str,
    at: usize,
}

impl<'a> Iterator for JsonNumbers<'a> {
    type Item = (usize, &'a str);

    fn next(&mut self) -> Option<(usize, &'a str)> {
        let bytes = self.text.as_bytes();
        while bytes
            .get(self.at)
            .is_some_and(|b| matches!(b, b',' | b' ' | b'\t' | b'\r' | b'\n'))
        {
            self.at += 1;
        }
        let start = self.at;
        if bytes.get(start).is_none_or(|b| *b == b']') {
            return None;
        }
        while bytes
            .get(self.at)
            .is_some_and(|b| !matches!(b, b',' | b']' | b' ' | b'\t' | b'\r' | b'\n'))
        {
            self.at += 1;
        }
        self.text.get(start..self.at).map(|number| (start, number))
    }
}

/// Standard alphabet of RFC 4648; padding may be left out.
const BASE64: GeneralPurpose = GeneralPurpose::new(
    &alphabet::STANDARD,
    GeneralPurposeConfig::new().with_decode_padding_mode(DecodePaddingMode::Indifferent),
);

fn from_base64(text: &str, raw_at: Option<usize>, field: &Field<'_>) -> Result<Vec<u8>, Refusal> {
    BASE64.decode(text).map_err(|fault| {
        let place = match fault {
            DecodeError::InvalidByte(place, _) | DecodeError::InvalidLastSymbol(place, _) => place,
            DecodeError::InvalidLength(_) | DecodeError::InvalidPadding => text.len(),
        };
        Refusal::of(
            Reason::BadBase64,
            raw_at.map_or(field.at, |start| start + place),
            field.key,
        )
    })
}
