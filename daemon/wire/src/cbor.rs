//! Reading CBOR (RFC 8949) item by item, with the exact byte of whatever is wrong.
//!
//! Lengths are checked against the bytes left before anything is touched or allocated. Indefinite lengths are
//! refused everywhere: a sensor knows how many samples it sends, and a stated length is checked at once.
//! Half, single and double floats, and tag 0 (RFC 3339 text), are read; other tags only where a caller asks.

mod write;

use alloc::borrow::Cow;

pub(crate) use write::Writer;

use crate::field::{Entry, MAX_DEPTH, Take, Value};
use crate::refusal::{Reason, Refusal};

/// A position in a CBOR payload.
#[derive(Clone, Debug)]
pub(crate) struct Cursor<'a> {
    bytes: &'a [u8],
    at: usize,
    /// Position of `bytes` in the whole payload.
    base: usize,
}

/// The head of an item: major type, additional information, argument.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Head {
    pub(crate) at: usize,
    pub(crate) major: u8,
    pub(crate) info: u8,
    pub(crate) argument: u64,
}

impl<'a> Cursor<'a> {
    pub(crate) fn new(bytes: &'a [u8], base: usize) -> Cursor<'a> {
        Cursor { bytes, at: 0, base }
    }

    /// Position in the whole payload.
    pub(crate) fn position(&self) -> usize {
        self.base + self.at
    }

    pub(crate) fn at_end(&self) -> bool {
        self.at == self.bytes.len()
    }

    fn truncated(&self) -> Refusal {
        Refusal::at(Reason::Truncated, self.base + self.bytes.len())
    }

    /// The next `count` bytes.
    pub(crate) fn take(&mut self, count: u64) -> Result<&'a [u8], Refusal> {
        let end = usize::try_from(count)
            .ok()
            .and_then(|count| self.at.checked_add(count));
        let taken = end
            .and_then(|end| self.bytes.get(self.at..end))
            .ok_or_else(|| self.truncated())?;
        self.at += taken.len();
        Ok(taken)
    }

    /// The next `N` bytes.
    fn chunk<const N: usize>(&mut self) -> Result<[u8; N], Refusal> {
        match self.bytes.get(self.at..).and_then(<[u8]>::first_chunk) {
            Some(chunk) => {
                self.at += N;
                Ok(*chunk)
            }
            None => Err(self.truncated()),
        }
    }

    /// The head of the next item; refuses reserved and indefinite ones.
    pub(crate) fn head(&mut self) -> Result<Head, Refusal> {
        let at = self.position();
        let [first] = self.chunk()?;
        let (major, info) = (first >> 5, first & 0x1f);
        let argument = match info {
            0..=23 => u64::from(info),
            24 => u64::from(u8::from_be_bytes(self.chunk()?)),
            25 => u64::from(u16::from_be_bytes(self.chunk()?)),
            26 => u64::from(u32::from_be_bytes(self.chunk()?)),
            27 => u64::from_be_bytes(self.chunk()?),
            31 if (2..=5).contains(&major) => {
                return Err(Refusal::at(Reason::IndefiniteLength, at));
            }
            _ => return Err(Refusal::at(Reason::BadSyntax, at)),
        };
        if major == 7 && info == 24 && argument < 32 {
            return Err(Refusal::at(Reason::BadSyntax, at));
        }
        Ok(Head {
            at,
            major,
            info,
            argument,
        })
    }

    /// Text of a head already read.
    pub(crate) fn text(&mut self, head: Head) -> Result<&'a str, Refusal> {
        let start = self.position();
        let bytes = self.take(head.argument)?;
        core::str::from_utf8(bytes)
            .map_err(|fault| Refusal::at(Reason::InvalidText, start + fault.valid_up_to()))
    }

    /// Passes over a whole number or float in one step; false, and nothing done, when the next item is another.
    fn skip_number(&mut self) -> bool {
        let size = match self.bytes.get(self.at) {
            Some(0x00..=0x17 | 0x20..=0x37) => 1,
            Some(0x18 | 0x38) => 2,
            Some(0x19 | 0x39 | 0xf9) => 3,
            Some(0x1a | 0x3a | 0xfa) => 5,
            Some(0x1b | 0x3b | 0xfb) => 9,
            Some(_) | None => return false,
        };
        let there = self.bytes.len() - self.at >= size;
        self.at += if there { size } else { 0 };
        there
    }

    /// Passes over the content of a head already read, at most `left` levels deeper.
    pub(crate) fn pass(&mut self, head: Head, left: usize) -> Result<(), Refusal> {
        let items = match head.major {
            2 => return self.take(head.argument).map(drop),
            3 => return self.text(head).map(drop),
            4 => head.argument,
            5 => head.argument.saturating_mul(2),
            6 => 1,
            _ => return Ok(()),
        };
        let left = left
            .checked_sub(1)
            .ok_or(Refusal::at(Reason::TooDeep, head.at))?;
        // Every item takes at least one byte, so a count that lies ends at the payload's end.
        for _ in 0..items {
            if !self.skip_number() {
                let inner = self.head()?;
                self.pass(inner, left)?;
            }
        }
        Ok(())
    }

    /// The next item as a value, with its position.
    pub(crate) fn value(&mut self) -> Result<(usize, Value<'a>), Refusal> {
        let head = self.head()?;
        let value = match (head.major, head.info) {
            (0, _) => Value::Int(i128::from(head.argument)),
            (1, _) => Value::Int(-1 - i128::from(head.argument)),
            (3, _) => {
                let start = self.position();
                Value::Text {
                    text: Cow::Borrowed(self.text(head)?),
                    raw_at: Some(start),
                }
            }
            (4, _) => {
                let (from, start) = (self.at, self.position());
                self.pass(head, MAX_DEPTH)?;
                let items = self.bytes.get(from..self.at).unwrap_or_default();
                Value::CborArray {
                    items,
                    start,
                    count: head.argument,
                }
            }
            (5, _) => {
                let (from, start) = (self.at, self.position());
                self.pass(head, MAX_DEPTH)?;
                let items = self.bytes.get(from..self.at).unwrap_or_default();
                Value::CborMap {
                    items,
                    start,
                    count: head.argument,
                }
            }
            (6, _) => return Ok((head.at, self.tagged(head)?)),
            (7, 20) => Value::Bool(false),
            (7, 21) => Value::Bool(true),
            (7, 22 | 23) => Value::Null,
            (7, 25..=27) => Value::Float(number(head)),
            (_, _) => {
                self.pass(head, MAX_DEPTH)?;
                Value::Other
            }
        };
        Ok((head.at, value))
    }

    /// The item below a tag: text below tag 0, a byte string below any other; the rest has no use here.
    fn tagged(&mut self, tag: Head) -> Result<Value<'a>, Refusal> {
        let inner = self.head()?;
        let start = self.position();
        match (tag.argument, inner.major) {
            (0, 3) => Ok(Value::Text {
                text: Cow::Borrowed(self.text(inner)?),
                raw_at: Some(start),
            }),
            (_, 2) => Ok(Value::Typed {
                tag: tag.argument,
                bytes: self.take(inner.argument)?,
                start,
            }),
            (_, _) => {
                self.pass(inner, MAX_DEPTH - 1)?;
                Ok(Value::Other)
            }
        }
    }
}

/// The number of a float head: half, single or double precision.
pub(crate) fn number(head: Head) -> f64 {
    match head.info {
        25 => half(head.argument as u16),
        26 => f64::from(f32::from_bits(head.argument as u32)),
        _ => f64::from_bits(head.argument),
    }
}

/// IEEE 754 binary16; follows RFC 8949 appendix D.
fn half(bits: u16) -> f64 {
    let (exponent, fraction) = (u64::from(bits >> 10 & 0x1f), u64::from(bits & 0x3ff));
    let size = match exponent {
        0 => fraction as f64 / 16_777_216.0,
        31 if fraction == 0 => f64::INFINITY,
        31 => f64::NAN,
        // The same bits at their places in a double: exponent bias 1023 for 15, 52 fraction bits for 10.
        _ => f64::from_bits((exponent + 1008) << 52 | fraction << 42),
    };
    if bits & 0x8000 == 0 { size } else { -size }
}

/// Hands each text key of a map, and its value, to `take`; keys that are not text are passed over.
pub(crate) fn map<'a>(
    payload: &'a [u8],
    keys: &[&'static str],
    take: Take<'_, 'a>,
) -> Result<(), Refusal> {
    if payload.is_empty() {
        return Err(Refusal::at(Reason::Empty, 0));
    }
    let mut cursor = Cursor::new(payload, 0);
    let head = cursor.head()?;
    if head.major != 5 {
        return Err(Refusal::at(Reason::WrongType, 0));
    }
    for _ in 0..head.argument {
        entry(&mut cursor, keys, take)?;
    }
    if cursor.at_end() {
        Ok(())
    } else {
        Err(Refusal::at(Reason::TrailingBytes, cursor.position()))
    }
}

/// One key and its value.
pub(crate) fn entry<'a>(
    cursor: &mut Cursor<'a>,
    keys: &[&'static str],
    take: Take<'_, 'a>,
) -> Result<(), Refusal> {
    let key = cursor.head()?;
    if key.major != 3 {
        cursor.pass(key, MAX_DEPTH)?;
        let value = cursor.head()?;
        return cursor.pass(value, MAX_DEPTH);
    }
    let name = cursor.text(key)?;
    if keys.contains(&name) {
        let (at, value) = cursor.value()?;
        take(Entry {
            key: name,
            key_at: key.at,
            at,
            value,
        })
    } else {
        let value = cursor.head()?;
        cursor.pass(value, MAX_DEPTH)
    }
}

#[cfg(test)]
mod tests {
    use super::{Cursor, half, number};

    #[test]
    fn half_floats_read_as_the_examples_of_rfc_8949_appendix_a() {
        for (bits, value) in [
            (0x0000, 0.0),
            (0x3c00, 1.0),
            (0x3e00, 1.5),
            (0x7bff, 65504.0),
            (0x0001, 5.960_464_477_539_063e-8),
            (0x0400, 0.000_061_035_156_25),
            (0xc400, -4.0),
        ] {
            assert_eq!(half(bits), value, "{bits:04x}");
        }
        assert!(half(0x7e00).is_nan());
        assert_eq!(half(0xfc00), f64::NEG_INFINITY);
    }

    #[test]
    fn floats_of_every_width_read_as_the_examples_of_rfc_8949_appendix_a() {
        for (bytes, value) in [
            (&[0xf9, 0x3e, 0x00][..], 1.5),
            (&[0xfa, 0x47, 0xc3, 0x50, 0x00][..], 100_000.0),
            (
                &[0xfb, 0xc0, 0x10, 0x66, 0x66, 0x66, 0x66, 0x66, 0x66][..],
                -4.1,
            ),
        ] {
            assert_eq!(number(Cursor::new(bytes, 0).head().unwrap()), value);
        }
    }
}
