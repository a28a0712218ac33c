//! Keys and values of an inbound map, whatever its encoding, each with its byte position.
//!
//! [`read`] fills one slot for each wanted key; keys that are not wanted are passed over. The typed getters below
//! refuse with the position of the value. A null counts as an absent key.

use alloc::borrow::Cow;
use alloc::string::String;
use core::ops::RangeInclusive;

use crate::id::Id;
use crate::refusal::{Form, Reason, Refusal};
use crate::{cbor, json, time};

/// Deepest nesting of arrays and maps that is passed over.
pub(crate) const MAX_DEPTH: usize = 16;
/// Longest free text, in characters.
const MAX_TEXT: usize = 200;

/// A value where it stands.
#[derive(Clone, Debug)]
pub(crate) struct Field<'a> {
    pub(crate) key: &'static str,
    pub(crate) at: usize,
    pub(crate) value: Value<'a>,
}

/// A key and its value as the encodings hand them over.
pub(crate) struct Entry<'k, 'a> {
    pub(crate) key: &'k str,
    pub(crate) key_at: usize,
    pub(crate) at: usize,
    pub(crate) value: Value<'a>,
}

/// Takes one entry.
pub(crate) type Take<'t, 'a> = &'t mut dyn FnMut(Entry<'_, 'a>) -> Result<(), Refusal>;

/// A value, opened only as far as a message needs.
#[derive(Clone, Debug)]
pub(crate) enum Value<'a> {
    Null,
    Bool(bool),
    Int(i128),
    Float(f64),
    /// Text; `raw_at` is the position of its first byte when it stands in the payload as it is.
    Text {
        text: Cow<'a, str>,
        raw_at: Option<usize>,
    },
    /// A plain CBOR array: its items, where they start, how many.
    CborArray {
        items: &'a [u8],
        start: usize,
        count: u64,
    },
    /// A CBOR map: its entries, where they start, how many.
    CborMap {
        items: &'a [u8],
        start: usize,
        count: u64,
    },
    /// A JSON array with its brackets, where it starts.
    JsonArray {
        text: &'a str,
        start: usize,
    },
    /// A tagged byte string, where its bytes start.
    Typed {
        tag: u64,
        bytes: &'a [u8],
        start: usize,
    },
    /// Objects, byte strings and other items no message has a use for.
    Other,
}

/// Reads the wanted keys of a CBOR map or a JSON object.
pub(crate) fn read<'a, const N: usize>(
    payload: &'a [u8],
    form: Form,
    keys: &[&'static str; N],
) -> Result<[Option<Field<'a>>; N], Refusal> {
    let mut slots = [const { None }; N];
    match form {
        Form::Cbor => cbor::map(payload, keys, &mut |entry| put(&mut slots, keys, entry))?,
        Form::Json | Form::Mapped | Form::Raw | Form::Undetected => {
            json::object(payload, keys, &mut |entry| put(&mut slots, keys, entry))?;
        }
    }
    Ok(slots)
}

/// Reads the wanted keys among the entries of a CBOR map inside another.
pub(crate) fn read_entries<'a, const N: usize>(
    cursor: &mut cbor::Cursor<'a>,
    count: u64,
    keys: &[&'static str; N],
) -> Result<[Option<Field<'a>>; N], Refusal> {
    let mut slots = [const { None }; N];
    for _ in 0..count {
        cbor::entry(cursor, keys, &mut |entry| put(&mut slots, keys, entry))?;
    }
    Ok(slots)
}

/// Keeps a wanted entry in its slot; a second one is refused at its key.
fn put<'a>(
    slots: &mut [Option<Field<'a>>],
    keys: &[&'static str],
    entry: Entry<'_, 'a>,
) -> Result<(), Refusal> {
    for (slot, key) in slots
        .iter_mut()
        .zip(keys)
        .filter(|(_, key)| **key == entry.key)
    {
        if slot.is_some() {
            return Err(Refusal::of(Reason::DuplicateKey, entry.key_at, key));
        }
        *slot = Some(Field {
            key,
            at: entry.at,
            value: entry.value.clone(),
        });
    }
    Ok(())
}

/// What the first byte says: a CBOR map, or JSON.
pub(crate) fn detect(payload: &[u8]) -> Result<Form, Refusal> {
    match payload.first() {
        None => Err(Refusal::at(Reason::Empty, 0)),
        Some(0xa0..=0xbf) => Ok(Form::Cbor),
        Some(b'{' | b' ' | b'\t' | b'\r' | b'\n') => Ok(Form::Json),
        Some(_) => Err(Refusal::at(Reason::UnknownEncoding, 0)),
    }
}

impl Field<'_> {
    pub(crate) fn refuse(&self, reason: Reason) -> Refusal {
        Refusal::of(reason, self.at, self.key)
    }
}

pub(crate) type Slot<'s, 'a> = &'s Option<Field<'a>>;

/// The field, unless absent or null.
pub(crate) fn present<'s, 'a>(slot: Slot<'s, 'a>) -> Option<&'s Field<'a>> {
    slot.as_ref()
        .filter(|field| !matches!(field.value, Value::Null))
}

pub(crate) fn required<T>(value: Option<T>, key: &'static str) -> Result<T, Refusal> {
    value.ok_or(Refusal::of(Reason::MissingKey, 0, key))
}

/// A number within `range`; integers count as numbers.
pub(crate) fn float(
    slot: Slot<'_, '_>,
    range: &RangeInclusive<f64>,
) -> Result<Option<f64>, Refusal> {
    let Some(field) = present(slot) else {
        return Ok(None);
    };
    let number = match field.value {
        Value::Int(i) => i as f64,
        Value::Float(f) => f,
        Value::Null
        | Value::Bool(_)
        | Value::Text { .. }
        | Value::CborArray { .. }
        | Value::CborMap { .. }
        | Value::JsonArray { .. }
        | Value::Typed { .. }
        | Value::Other => return Err(field.refuse(Reason::WrongType)),
    };
    if range.contains(&number) {
        Ok(Some(number))
    } else {
        Err(field.refuse(Reason::OutOfRange))
    }
}

/// A whole number within `range`.
pub(crate) fn integer(
    slot: Slot<'_, '_>,
    range: RangeInclusive<i128>,
) -> Result<Option<i128>, Refusal> {
    let Some(field) = present(slot) else {
        return Ok(None);
    };
    match field.value {
        Value::Int(i) if range.contains(&i) => Ok(Some(i)),
        Value::Int(_) => Err(field.refuse(Reason::OutOfRange)),
        Value::Null
        | Value::Bool(_)
        | Value::Float(_)
        | Value::Text { .. }
        | Value::CborArray { .. }
        | Value::CborMap { .. }
        | Value::JsonArray { .. }
        | Value::Typed { .. }
        | Value::Other => Err(field.refuse(Reason::WrongType)),
    }
}

/// A counter: 0 to 2^64-1.
pub(crate) fn counter(slot: Slot<'_, '_>) -> Result<Option<u64>, Refusal> {
    let number = integer(slot, 0..=i128::from(u64::MAX))?;
    Ok(number.and_then(|n| u64::try_from(n).ok()))
}

pub(crate) fn text<'s>(slot: Slot<'s, '_>) -> Result<Option<(&'s str, &'s Field<'s>)>, Refusal> {
    let Some(field) = present(slot) else {
        return Ok(None);
    };
    match &field.value {
        Value::Text { text, .. } => Ok(Some((text, field))),
        Value::Null
        | Value::Bool(_)
        | Value::Int(_)
        | Value::Float(_)
        | Value::CborArray { .. }
        | Value::CborMap { .. }
        | Value::JsonArray { .. }
        | Value::Typed { .. }
        | Value::Other => Err(field.refuse(Reason::WrongType)),
    }
}

pub(crate) fn id(slot: Slot<'_, '_>) -> Result<Option<Id>, Refusal> {
    text(slot)?
        .map(|(text, field)| Id::new(text).map_err(|_| field.refuse(Reason::BadId)))
        .transpose()
}

/// Free text of 1 to 200 characters without control characters.
pub(crate) fn words(slot: Slot<'_, '_>) -> Result<Option<String>, Refusal> {
    let Some((text, field)) = text(slot)? else {
        return Ok(None);
    };
    if text.is_empty() || text.chars().count() > MAX_TEXT || text.chars().any(char::is_control) {
        return Err(field.refuse(Reason::BadText));
    }
    Ok(Some(String::from(text)))
}

/// A time: integer `per_unit`-nanosecond units since 1970 UTC, or RFC 3339 text; 2000 to 2199.
pub(crate) fn instant(slot: Slot<'_, '_>, per_unit: i64) -> Result<Option<i64>, Refusal> {
    let Some(field) = present(slot) else {
        return Ok(None);
    };
    let ns = match &field.value {
        Value::Int(units) => units
            .checked_mul(i128::from(per_unit))
            .and_then(|ns| i64::try_from(ns).ok()),
        // Fractions of a coarser unit; whole nanoseconds must come as integers, a float would lose them.
        Value::Float(units) if per_unit > 1 => Some((units * per_unit as f64) as i64),
        Value::Text { text, .. } => Some(time::parse(text).ok_or(field.refuse(Reason::BadTime))?),
        Value::Float(_)
        | Value::Null
        | Value::Bool(_)
        | Value::CborArray { .. }
        | Value::CborMap { .. }
        | Value::JsonArray { .. }
        | Value::Typed { .. }
        | Value::Other => return Err(field.refuse(Reason::WrongType)),
    };
    ns.filter(|ns| time::plausible(*ns))
        .map(Some)
        .ok_or(field.refuse(Reason::TimeOutOfRange))
}
