//! Reading CBOR (RFC 8949) item by item, with the exact byte of whatever is wrong.
//!
//! The items are `minicbor`'s; added here are places in the payload, our reasons, and the bounds of the contract.
//! A string's length is checked against the bytes left before anything is touched; indefinite lengths are
//! refused everywhere: a sensor knows how many samples it sends, and a stated length is checked at once.
//! Half, single and double floats, and tag 0 (RFC 3339 text), are read; other tags only where a caller asks.

mod write;

use alloc::borrow::Cow;
use core::error::Error as _;
use core::str::Utf8Error;

use minicbor::data::Type;
use minicbor::decode::info::Size;
use minicbor::decode::{Decoder, Error};

pub(crate) use write::{Writer, Written, typed, write};

use crate::field::{Entry, MAX_DEPTH, Take, Value};
use crate::refusal::{Reason, Refusal};

/// A position in a CBOR payload.
#[derive(Clone, Debug)]
pub(crate) struct Cursor<'a> {
    decoder: Decoder<'a>,
    /// Position of the decoder's bytes in the whole payload.
    base: usize,
}

/// An item; of an array, a map or a tag the head alone.
#[derive(Clone, Copy, Debug)]
pub(crate) enum Item<'a> {
    Int(i128),
    Float(f64),
    Bytes(&'a [u8]),
    Text(&'a str),
    /// An array of so many items.
    Array(u64),
    /// A map of so many entries.
    Map(u64),
    Tag(u64),
    Bool(bool),
    /// Null, and undefined.
    Null,
    /// Any other simple value.
    Simple,
}

/// The next item, as the library reads it.
fn read<'a>(decoder: &mut Decoder<'a>) -> Result<Item<'a>, Error> {
    Ok(match decoder.datatype()? {
        Type::U8
        | Type::U16
        | Type::U32
        | Type::U64
        | Type::I8
        | Type::I16
        | Type::I32
        | Type::I64
        | Type::Int => Item::Int(decoder.int()?.into()),
        Type::F16 | Type::F32 | Type::F64 => Item::Float(decoder.f64()?),
        // The library refuses strings without a length itself, and reads arrays and maps without one.
        Type::Bytes | Type::BytesIndef => Item::Bytes(decoder.bytes()?),
        Type::String | Type::StringIndef => Item::Text(decoder.str()?),
        Type::Array | Type::ArrayIndef => Item::Array(stated(decoder.array()?)?),
        Type::Map | Type::MapIndef => Item::Map(stated(decoder.map()?)?),
        Type::Tag => Item::Tag(decoder.tag()?.as_u64()),
        Type::Bool => Item::Bool(decoder.bool()?),
        Type::Null => decoder.null().map(|()| Item::Null)?,
        Type::Undefined => decoder.undefined().map(|()| Item::Null)?,
        Type::Simple => {
            let start = decoder.position();
            let value = decoder.simple()?;
            // RFC 8949 section 3.3: in two bytes, values below 32 are not well formed; the library lets them pass.
            if decoder.position() - start > 1 && value < 32 {
                return Err(Error::type_mismatch(Type::Simple));
            }
            Item::Simple
        }
        kind @ (Type::Break | Type::Unknown(_)) => return Err(Error::type_mismatch(kind)),
    })
}

/// The count of an array or a map, which must be stated.
fn stated(count: Option<u64>) -> Result<u64, Error> {
    count.ok_or_else(|| Error::message("no stated length"))
}

impl<'a> Cursor<'a> {
    pub(crate) fn new(bytes: &'a [u8], base: usize) -> Cursor<'a> {
        let decoder = Decoder::new(bytes);
        Cursor { decoder, base }
    }

    /// Position in the whole payload.
    pub(crate) fn position(&self) -> usize {
        self.base + self.decoder.position()
    }

    pub(crate) fn at_end(&self) -> bool {
        self.decoder.position() == self.decoder.input().len()
    }

    /// The next item, with its position.
    pub(crate) fn item(&mut self) -> Result<(usize, Item<'a>), Refusal> {
        let start = self.decoder.position();
        match read(&mut self.decoder) {
            Ok(item) => Ok((self.base + start, item)),
            Err(fault) => Err(self.refusal(start, &fault)),
        }
    }

    /// Why the item at `start` could not be read, at which byte.
    #[cold]
    fn refusal(&self, start: usize, fault: &Error) -> Refusal {
        let bytes = self.decoder.input();
        let (at, end) = (self.base + start, self.base + bytes.len());
        if fault.is_end_of_input() {
            return Refusal::at(Reason::Truncated, end);
        }
        if let Some(text) = fault.source().and_then(|f| f.downcast_ref::<Utf8Error>()) {
            // The library tells the place within the text, and of the item only where it starts.
            let head = bytes.get(start).and_then(|first| Size::head(*first).ok());
            let place = at + head.unwrap_or_default() + text.valid_up_to();
            return Refusal::at(Reason::InvalidText, place);
        }
        let mut item = self.decoder.clone();
        item.set_position(start);
        match item.datatype() {
            Ok(Type::BytesIndef | Type::StringIndef | Type::ArrayIndef | Type::MapIndef) => {
                Refusal::at(Reason::IndefiniteLength, at)
            }
            // A length beyond what this machine can address.
            Ok(Type::Bytes | Type::String) => Refusal::at(Reason::Truncated, end),
            Ok(_) | Err(_) => Refusal::at(Reason::BadSyntax, at),
        }
    }

    /// Entries of the map that comes next; `None` when it is another item.
    pub(crate) fn map(&mut self) -> Result<Option<u64>, Refusal> {
        // A string is not read to its end: JSON taken for CBOR starts like a text that was cut.
        if let Ok(Type::Bytes | Type::String) = self.decoder.datatype() {
            return Ok(None);
        }
        match self.item()? {
            (_, Item::Map(entries)) => Ok(Some(entries)),
            (_, _) => Ok(None),
        }
    }

    /// Passes over the next item.
    fn skip(&mut self) -> Result<(), Refusal> {
        let (at, item) = self.item()?;
        self.pass(at, item, MAX_DEPTH)
    }

    /// Passes over what is inside an item already read, at most `left` levels deeper.
    pub(crate) fn pass(&mut self, at: usize, item: Item<'_>, left: usize) -> Result<(), Refusal> {
        let items = match item {
            Item::Array(items) => items,
            Item::Map(entries) => entries.saturating_mul(2),
            Item::Tag(_) => 1,
            Item::Int(_)
            | Item::Float(_)
            | Item::Bytes(_)
            | Item::Text(_)
            | Item::Bool(_)
            | Item::Null
            | Item::Simple => return Ok(()),
        };
        let left = left
            .checked_sub(1)
            .ok_or(Refusal::at(Reason::TooDeep, at))?;
        // Every item takes at least one byte, so a count that lies ends at the payload's end.
        for _ in 0..items {
            let (at, inner) = self.item()?;
            self.pass(at, inner, left)?;
        }
        Ok(())
    }

    /// Passes over what is inside an array or a map; its bytes and where they start.
    fn inside(&mut self, at: usize, item: Item<'a>) -> Result<(&'a [u8], usize), Refusal> {
        let (from, start) = (self.decoder.position(), self.position());
        self.pass(at, item, MAX_DEPTH)?;
        let inside = self.decoder.input().get(from..self.decoder.position());
        Ok((inside.unwrap_or_default(), start))
    }

    /// Text or bytes just read, where their first byte stands.
    fn start_of(&self, content: &[u8]) -> usize {
        self.position() - content.len()
    }

    /// The next item as a value, with its position.
    pub(crate) fn value(&mut self) -> Result<(usize, Value<'a>), Refusal> {
        let (at, item) = self.item()?;
        let value = match item {
            Item::Int(number) => Value::Int(number),
            Item::Float(number) => Value::Float(number),
            Item::Bool(value) => Value::Bool(value),
            Item::Null => Value::Null,
            Item::Text(text) => self.text(text),
            Item::Array(count) => {
                let (items, start) = self.inside(at, item)?;
                Value::CborArray {
                    items,
                    start,
                    count,
                }
            }
            Item::Map(count) => {
                let (items, start) = self.inside(at, item)?;
                Value::CborMap {
                    items,
                    start,
                    count,
                }
            }
            Item::Tag(tag) => self.tagged(tag)?,
            Item::Bytes(_) | Item::Simple => Value::Other,
        };
        Ok((at, value))
    }

    fn text(&self, text: &'a str) -> Value<'a> {
        Value::Text {
            text: Cow::Borrowed(text),
            raw_at: Some(self.start_of(text.as_bytes())),
        }
    }

    /// The item below a tag: text below tag 0, a byte string below any other; the rest has no use here.
    fn tagged(&mut self, tag: u64) -> Result<Value<'a>, Refusal> {
        match (tag, self.item()?) {
            (0, (_, Item::Text(text))) => Ok(self.text(text)),
            (_, (_, Item::Bytes(bytes))) => Ok(Value::Typed {
                tag,
                bytes,
                start: self.start_of(bytes),
            }),
            (_, (at, inner)) => {
                self.pass(at, inner, MAX_DEPTH - 1)?;
                Ok(Value::Other)
            }
        }
    }
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
    let entries = cursor.map()?.ok_or(Refusal::at(Reason::WrongType, 0))?;
    for _ in 0..entries {
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
    match cursor.item()? {
        (key_at, Item::Text(key)) if keys.contains(&key) => {
            let (at, value) = cursor.value()?;
            take(Entry {
                key,
                key_at,
                at,
                value,
            })
        }
        (at, key) => {
            cursor.pass(at, key, MAX_DEPTH)?;
            cursor.skip()
        }
    }
}
