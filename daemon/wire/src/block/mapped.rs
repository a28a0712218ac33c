//! Foreign JSON: each of our keys read through a pointer (RFC 6901) or given as a fixed value.
//!
//! One walk over the payload serves all pointers; what no pointer leads to is passed over. A key counts twice, and
//! is refused, only where a pointer leads through it.

use alloc::borrow::{Cow, ToOwned};
use alloc::string::String;
use alloc::vec::Vec;
use core::fmt;

use serde_json::value::RawValue;

use super::fields::{NAMES, Rules, Slots, build};
use super::packing::Packing;
use super::{Block, Limits, Unit};
use crate::field::{Field, MAX_DEPTH};
use crate::json;
use crate::refusal::{Reason, Refusal};

/// A key of a block.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Key {
    /// Time of the first sample.
    At,
    /// The sensor's counter.
    Seq,
    /// Samples per second.
    Rate,
    /// Unit after scaling.
    Unit,
    /// Sample x scale = unit.
    Scale,
    /// The samples.
    Samples,
    /// Packing of base64 samples.
    Encoding,
    /// Interleaved axes.
    Channels,
    /// Shaft speed, r/min.
    Rpm,
    /// Bias voltage, V.
    Bias,
}

/// What a numeric time counts since 1970 UTC.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, Default)]
pub enum TimeUnit {
    /// Nanoseconds; must be whole.
    #[default]
    Nanoseconds,
    /// Microseconds.
    Microseconds,
    /// Milliseconds.
    Milliseconds,
    /// Seconds.
    Seconds,
}

/// Values for keys the foreign payload lacks.
#[derive(Clone, Debug, PartialEq, Default)]
pub struct Fixed {
    /// Samples per second and channel.
    pub rate_hz: Option<f64>,
    /// Unit after scaling.
    pub unit: Option<Unit>,
    /// Sample x scale = unit.
    pub scale: Option<f64>,
    /// Packing of base64 samples.
    pub encoding: Option<Packing>,
    /// Interleaved axes.
    pub channels: Option<u16>,
}

/// Where our keys are in a foreign payload.
#[derive(Clone, Debug, PartialEq)]
pub struct JsonMap {
    pointers: Vec<(usize, Vec<String>)>,
    fixed: Fixed,
    at_unit: TimeUnit,
    clockless: bool,
}

/// Why a mapping cannot be used.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum MapFault {
    /// A pointer that does not start with `/` or has a `~` without `0` or `1`.
    Pointer {
        /// The key it is for.
        key: Key,
        /// The pointer.
        pointer: String,
    },
    /// A pointer with more levels than are read.
    Deep {
        /// The key it is for.
        key: Key,
        /// Levels read.
        levels: usize,
    },
    /// Two pointers, or a pointer and a fixed value, for one key.
    Twice {
        /// The key.
        key: Key,
    },
    /// No pointer for a key that needs one.
    Missing {
        /// The key.
        key: Key,
    },
}

impl Key {
    /// Every key, in the order they are checked.
    pub const ALL: [Key; 10] = [
        Key::At,
        Key::Seq,
        Key::Rate,
        Key::Unit,
        Key::Scale,
        Key::Samples,
        Key::Encoding,
        Key::Channels,
        Key::Rpm,
        Key::Bias,
    ];

    /// The key as it stands in our own payloads.
    #[must_use]
    pub const fn name(self) -> &'static str {
        match self {
            Key::At => "at",
            Key::Seq => "seq",
            Key::Rate => "rate",
            Key::Unit => "unit",
            Key::Scale => "scale",
            Key::Samples => "samples",
            Key::Encoding => "encoding",
            Key::Channels => "channels",
            Key::Rpm => "rpm",
            Key::Bias => "bias",
        }
    }

    /// The key a name means.
    #[must_use]
    pub fn from_name(name: &str) -> Option<Key> {
        Key::ALL.into_iter().find(|key| key.name() == name)
    }
}

impl TimeUnit {
    /// Nanoseconds in the unit.
    #[must_use]
    pub const fn nanoseconds(self) -> i64 {
        match self {
            TimeUnit::Nanoseconds => 1,
            TimeUnit::Microseconds => 1_000,
            TimeUnit::Milliseconds => 1_000_000,
            TimeUnit::Seconds => 1_000_000_000,
        }
    }
}

impl JsonMap {
    /// Checks a mapping. Without a pointer for `at`, blocks are stamped on arrival.
    ///
    /// # Errors
    /// A malformed pointer, a key given twice, or no way to `samples`, `rate` or `unit`.
    pub fn new(
        pointers: &[(Key, &str)],
        fixed: Fixed,
        at_unit: TimeUnit,
    ) -> Result<JsonMap, MapFault> {
        let mut parsed: Vec<(usize, Vec<String>)> = Vec::with_capacity(pointers.len());
        for (key, pointer) in pointers {
            let key = *key;
            let place = key as usize;
            if parsed.iter().any(|(other, _)| *other == place) || given(&fixed, key) {
                return Err(MapFault::Twice { key });
            }
            let tokens = tokens(pointer).ok_or_else(|| MapFault::Pointer {
                key,
                pointer: (*pointer).to_owned(),
            })?;
            if tokens.len() > MAX_DEPTH {
                return Err(MapFault::Deep {
                    key,
                    levels: tokens.len(),
                });
            }
            parsed.push((place, tokens));
        }
        let has =
            |key: Key| parsed.iter().any(|(place, _)| *place == key as usize) || given(&fixed, key);
        if let Some(key) = [Key::Samples, Key::Rate, Key::Unit]
            .into_iter()
            .find(|key| !has(*key))
        {
            return Err(MapFault::Missing { key });
        }
        let clockless = !has(Key::At);
        Ok(JsonMap {
            pointers: parsed,
            fixed,
            at_unit,
            clockless,
        })
    }
}

fn given(fixed: &Fixed, key: Key) -> bool {
    match key {
        Key::Rate => fixed.rate_hz.is_some(),
        Key::Unit => fixed.unit.is_some(),
        Key::Scale => fixed.scale.is_some(),
        Key::Encoding => fixed.encoding.is_some(),
        Key::Channels => fixed.channels.is_some(),
        Key::At | Key::Seq | Key::Samples | Key::Rpm | Key::Bias => false,
    }
}

/// The reference tokens of a pointer that names something inside the document.
fn tokens(pointer: &str) -> Option<Vec<String>> {
    pointer.strip_prefix('/')?.split('/').map(token).collect()
}

fn token(text: &str) -> Option<String> {
    let mut parts = text.split('~');
    let mut token = parts.next().unwrap_or_default().to_owned();
    for part in parts {
        let (character, rest) = match part.as_bytes().first() {
            Some(b'0') => ('~', part.get(1..)?),
            Some(b'1') => ('/', part.get(1..)?),
            Some(_) | None => return None,
        };
        token.push(character);
        token.push_str(rest);
    }
    Some(token)
}

pub(super) fn decode(
    block: &mut Block,
    payload: &[u8],
    map: &JsonMap,
    limits: &Limits,
) -> Result<(), Refusal> {
    let text = json::text(payload)?;
    let mut slots: Slots<'_> = [const { None }; Key::ALL.len()];
    let active: Vec<(usize, &[String])> = map
        .pointers
        .iter()
        .map(|(place, tokens)| (*place, tokens.as_slice()))
        .collect();
    walk(text, 0, &active, &mut slots)?;
    let rules = Rules {
        fixed: &map.fixed,
        per_unit: map.at_unit.nanoseconds(),
        clockless: map.clockless,
        base64: true,
    };
    build(block, &slots, limits, &rules)
}

/// Follows every pointer that leads into `text`, which stands at `base`; as deep as the longest pointer.
fn walk<'a>(
    text: &'a str,
    base: usize,
    active: &[(usize, &[String])],
    slots: &mut Slots<'a>,
) -> Result<(), Refusal> {
    let trimmed = text.trim_start_matches([' ', '\t', '\r', '\n']);
    if trimmed.starts_with('[') && base > 0 {
        let items: Vec<&'a RawValue> =
            serde_json::from_str(text).map_err(|error| json::refusal(&error, text, base))?;
        for (index, item) in items.iter().enumerate() {
            let at = json::place(text, base, item.get());
            follow(
                &alloc::format!("{index}"),
                at,
                item.get(),
                at,
                active,
                slots,
            )?;
        }
        return Ok(());
    }
    json::entries(text, base, &mut |key, key_at, raw, at| {
        follow(key, key_at, raw, at, active, slots)
    })
}

/// Hands one entry to the pointers that go through it.
fn follow<'a>(
    key: &str,
    key_at: usize,
    raw: &'a str,
    at: usize,
    active: &[(usize, &[String])],
    slots: &mut Slots<'a>,
) -> Result<(), Refusal> {
    let mut deeper: Vec<(usize, &[String])> = Vec::new();
    let mut used = false;
    for (place, tokens) in active {
        match tokens.split_first() {
            Some((first, rest)) if first == key && rest.is_empty() => {
                fill(*place, key_at, raw, at, slots)?;
                used = true;
            }
            Some((first, rest)) if first == key => deeper.push((*place, rest)),
            Some(_) | None => {}
        }
    }
    if !deeper.is_empty() && raw.starts_with(['{', '[']) {
        return walk(raw, at, &deeper, slots);
    }
    if used { Ok(()) } else { json::pass(raw, at) }
}

fn fill<'a>(
    place: usize,
    key_at: usize,
    raw: &'a str,
    at: usize,
    slots: &mut Slots<'a>,
) -> Result<(), Refusal> {
    match (slots.get_mut(place), NAMES.get(place)) {
        (Some(slot @ None), Some(key)) => {
            *slot = Some(Field {
                key,
                at,
                value: json::value(raw, at)?,
            });
            Ok(())
        }
        (Some(Some(_)), Some(key)) => Err(Refusal::of(Reason::DuplicateKey, key_at, key)),
        (_, _) => Ok(()),
    }
}

impl fmt::Display for MapFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let (key, rest): (Key, Cow<'_, str>) = match self {
            MapFault::Pointer { key, pointer } => (
                *key,
                alloc::format!("{pointer:?} is no JSON pointer; start with / and write ~ as ~0 and / in a name as ~1").into(),
            ),
            MapFault::Deep { key, levels } => {
                (*key, alloc::format!("the pointer has {levels} levels; {MAX_DEPTH} are read").into())
            }
            MapFault::Twice { key } => (*key, "given twice; keep one pointer or one fixed value".into()),
            MapFault::Missing { key } => (*key, "not given; add a pointer or a fixed value".into()),
        };
        write!(f, "mapping of key `{}`: {rest}", key.name())
    }
}

impl core::error::Error for MapFault {}

#[cfg(test)]
mod tests;
