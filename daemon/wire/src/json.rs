//! Reading a JSON object key by key, each value with its place in the payload.
//!
//! The grammar (RFC 8259) is the library's; values are left as text until a message asks, so that a refusal can
//! name the byte of the value at fault. Nesting is bounded for values that are passed over. Numbers: those without
//! `.` and exponent are integers. Text is borrowed unless it has escapes.

use alloc::borrow::Cow;
use alloc::string::String;
use core::fmt;

use serde::Deserialize;
use serde::de::{Deserializer as _, Error as _, MapAccess, Visitor};
use serde_json::de::StrRead;
use serde_json::value::RawValue;

use crate::field::{Entry, MAX_DEPTH, Take, Value};
use crate::refusal::{Reason, Refusal};

/// Takes a key, where it stands, the value's text, and where that stands.
pub(crate) type TakeRaw<'t, 'a> =
    &'t mut dyn FnMut(&str, usize, &'a str, usize) -> Result<(), Refusal>;

/// Hands each wanted key of an object, and its value, to `take`.
pub(crate) fn object<'a>(
    payload: &'a [u8],
    keys: &[&'static str],
    take: Take<'_, 'a>,
) -> Result<(), Refusal> {
    let text = text(payload)?;
    entries(text, 0, &mut |key, key_at, raw, at| {
        if keys.contains(&key) {
            take(Entry {
                key,
                key_at,
                at,
                value: value(raw, at)?,
            })
        } else {
            pass(raw, at)
        }
    })
}

/// The payload as text.
pub(crate) fn text(payload: &[u8]) -> Result<&str, Refusal> {
    if payload.is_empty() {
        return Err(Refusal::at(Reason::Empty, 0));
    }
    core::str::from_utf8(payload)
        .map_err(|fault| Refusal::at(Reason::InvalidText, fault.valid_up_to()))
}

/// Hands every entry of the object in `text` to `take`; `base` is the position of `text` in the payload.
pub(crate) fn entries<'a>(
    text: &'a str,
    base: usize,
    take: TakeRaw<'_, 'a>,
) -> Result<(), Refusal> {
    let mut fault = None;
    let mut reader = serde_json::Deserializer::from_str(text);
    let entries = Entries {
        text,
        base,
        take,
        fault: &mut fault,
    };
    let read = (&mut reader).deserialize_map(entries);
    match (fault, read) {
        (Some(fault), _) => Err(fault),
        (None, Ok(())) => end(&mut reader, text, base),
        (None, Err(error)) => Err(refusal(&error, text, base)),
    }
}

/// Refuses whatever follows the value just read.
fn end<'a>(
    reader: &mut serde_json::Deserializer<StrRead<'a>>,
    text: &'a str,
    base: usize,
) -> Result<(), Refusal> {
    let Err(error) = reader.end() else {
        return Ok(());
    };
    if cut_number(text) {
        return Err(Refusal::at(Reason::Truncated, base + text.len()));
    }
    Err(Refusal::at(
        Reason::TrailingBytes,
        base + place_of(&error, text),
    ))
}

struct Entries<'t, 'a> {
    text: &'a str,
    base: usize,
    take: TakeRaw<'t, 'a>,
    fault: &'t mut Option<Refusal>,
}

impl<'a> Visitor<'a> for Entries<'_, 'a> {
    type Value = ();

    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("an object")
    }

    fn visit_map<A: MapAccess<'a>>(self, mut map: A) -> Result<(), A::Error> {
        while let Some(key) = map.next_key::<&'a RawValue>()? {
            let value = map.next_value::<&'a RawValue>()?.get();
            let (key, key_at) = (key.get(), place(self.text, self.base, key.get()));
            let name = unquoted(key).ok_or(Refusal::at(Reason::InvalidText, key_at));
            let taken = name.and_then(|name| {
                (self.take)(&name, key_at, value, place(self.text, self.base, value))
            });
            if let Err(fault) = taken {
                *self.fault = Some(fault);
                return Err(A::Error::custom("refused"));
            }
        }
        Ok(())
    }
}

/// Position in the payload of a part of `text`, which itself stands at `base`.
pub(crate) fn place(text: &str, base: usize, part: &str) -> usize {
    base + (part.as_ptr() as usize).saturating_sub(text.as_ptr() as usize)
}

/// The library's error as a refusal at its byte.
pub(crate) fn refusal(error: &serde_json::Error, text: &str, base: usize) -> Refusal {
    let start = text.len() - text.trim_start_matches([' ', '\t', '\r', '\n']).len();
    if error.is_eof() {
        return Refusal::at(Reason::Truncated, base + text.len());
    }
    if error.is_data() {
        // Only the outermost value is asked to be an object.
        return Refusal::at(Reason::WrongType, base + start);
    }
    if cut_number(text) {
        return Refusal::at(Reason::Truncated, base + text.len());
    }
    Refusal::at(Reason::BadSyntax, base + place_of(error, text))
}

/// Byte of the library's line and column.
fn place_of(error: &serde_json::Error, text: &str) -> usize {
    let lines = error.line().saturating_sub(1);
    let before = text
        .split_inclusive('\n')
        .take(lines)
        .map(str::len)
        .sum::<usize>();
    (before + error.column().saturating_sub(1)).min(text.len())
}

/// Whether the text ends inside a number: one more digit would make it one.
fn cut_number(text: &str) -> bool {
    let number = |c: char| c.is_ascii_digit() || matches!(c, '-' | '+' | '.' | 'e' | 'E');
    let tail = text
        .get(text.trim_end_matches(number).len()..)
        .unwrap_or_default();
    let whole = |number: &str| serde_json::from_str::<&RawValue>(number).is_ok();
    !tail.is_empty() && !whole(tail) && whole(&alloc::format!("{tail}0"))
}

/// The one value a text holds, without white space around it.
pub(crate) fn single(text: &str) -> Result<&str, Refusal> {
    let mut reader = serde_json::Deserializer::from_str(text);
    let value = <&RawValue>::deserialize(&mut reader).map_err(|error| refusal(&error, text, 0))?;
    end(&mut reader, text, 0)?;
    Ok(value.get())
}

/// A value from its text, which is well formed.
pub(crate) fn value(raw: &str, at: usize) -> Result<Value<'_>, Refusal> {
    match raw.as_bytes().first() {
        Some(b'"') => {
            let text = unquoted(raw).ok_or(Refusal::at(Reason::InvalidText, at))?;
            let raw_at = matches!(text, Cow::Borrowed(_)).then_some(at + 1);
            Ok(Value::Text { text, raw_at })
        }
        Some(b't') => Ok(Value::Bool(true)),
        Some(b'f') => Ok(Value::Bool(false)),
        Some(b'n') => Ok(Value::Null),
        Some(b'[') => Ok(Value::JsonArray {
            text: raw,
            start: at,
        }),
        Some(b'-' | b'0'..=b'9') => Ok(number(raw)),
        Some(_) | None => Ok(Value::Other),
    }
}

/// A number from its text: an integer unless it has a fraction, an exponent or more digits than i128 holds.
pub(crate) fn number(raw: &str) -> Value<'static> {
    match raw.parse() {
        Ok(integer) => Value::Int(integer),
        Err(_) => raw.parse().map_or(Value::Other, Value::Float),
    }
}

/// Text without its quotes and escapes; `None` when an escape is no character.
fn unquoted(raw: &str) -> Option<Cow<'_, str>> {
    if raw.contains('\\') {
        return serde_json::from_str::<String>(raw).ok().map(Cow::Owned);
    }
    raw.get(1..raw.len().saturating_sub(1)).map(Cow::Borrowed)
}

/// Refuses a value that is passed over when it is nested too deep.
pub(crate) fn pass(raw: &str, at: usize) -> Result<(), Refusal> {
    let (mut depth, mut quoted, mut escaped) = (0usize, false, false);
    for (place, byte) in raw.bytes().enumerate() {
        match byte {
            _ if escaped => escaped = false,
            b'\\' if quoted => escaped = true,
            b'"' => quoted = !quoted,
            b'[' | b'{' if !quoted => {
                depth += 1;
                if depth > MAX_DEPTH {
                    return Err(Refusal::at(Reason::TooDeep, at + place));
                }
            }
            b']' | b'}' if !quoted => depth = depth.saturating_sub(1),
            _ => {}
        }
    }
    Ok(())
}
