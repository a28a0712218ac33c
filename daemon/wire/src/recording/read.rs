//! Reading a recording from memory, record by record, without copying payloads.

use alloc::borrow::Cow;
use alloc::string::{String, ToString};

use super::{FORMAT, Header, Record, RecordingFault, VERSION};
use crate::cbor::{Cursor, Item};
use crate::field::{self, Field, Slot, Value};
use crate::refusal::{Reason, Refusal};

/// The records of a recording; each with the byte it starts at. Ends after the first fault.
#[derive(Clone, Debug)]
pub struct Reader<'a> {
    cursor: Cursor<'a>,
    last: i64,
    done: bool,
}

/// Opens a recording and reads its header.
///
/// # Errors
/// The bytes do not start with our header, or it is of another version.
pub fn open(bytes: &[u8]) -> Result<(Header, Reader<'_>), RecordingFault> {
    let mut cursor = Cursor::new(bytes, 0);
    let header = read_header(&mut cursor)?;
    Ok((
        header,
        Reader {
            cursor,
            last: i64::MIN,
            done: false,
        },
    ))
}

const HEADER: [&str; 7] = [
    "format",
    "version",
    "site",
    "root",
    "config_hash",
    "epoch",
    "truth",
];

fn read_header(cursor: &mut Cursor<'_>) -> Result<Header, RecordingFault> {
    let not_ours = |refusal: Refusal| RecordingFault::NotOurs {
        offset: refusal.offset,
    };
    let entries = cursor.map().map_err(not_ours)?;
    let entries = entries.ok_or(RecordingFault::NotOurs { offset: 0 })?;
    let slots = field::read_entries(cursor, entries, &HEADER).map_err(not_ours)?;
    let [format, version, site, root, config_hash, epoch, truth] = &slots;
    let written = field::text(format).map_err(not_ours)?;
    if written.is_none_or(|(text, _)| text != FORMAT) {
        return Err(RecordingFault::NotOurs {
            offset: written.map_or(0, |(_, field)| field.at),
        });
    }
    let number =
        field::required(field::counter(version).map_err(not_ours)?, "version").map_err(not_ours)?;
    if number != VERSION {
        let offset = version.as_ref().map_or(0, |field| field.at);
        return Err(RecordingFault::Version {
            version: number,
            offset,
        });
    }
    let string = |slot: Slot<'_, '_>| -> Result<Option<String>, RecordingFault> {
        Ok(field::text(slot)
            .map_err(not_ours)?
            .map(|(text, _)| text.to_string()))
    };
    Ok(Header {
        site: field::required(field::id(site).map_err(not_ours)?, "site").map_err(not_ours)?,
        root: string(root)?,
        config_hash: string(config_hash)?,
        epoch: field::counter(epoch).map_err(not_ours)?,
        truth: string(truth)?,
    })
}

impl<'a> Iterator for Reader<'a> {
    type Item = Result<(usize, Record<'a>), RecordingFault>;

    fn next(&mut self) -> Option<Self::Item> {
        if self.done || self.cursor.at_end() {
            return None;
        }
        let offset = self.cursor.position();
        let read = self.read(offset);
        self.done = read.is_err();
        Some(read.map(|record| (offset, record)))
    }
}

impl<'a> Reader<'a> {
    fn read(&mut self, offset: usize) -> Result<Record<'a>, RecordingFault> {
        let record = item(&mut self.cursor).map_err(|cause| match cause {
            Some(Refusal {
                reason: Reason::Truncated,
                ..
            }) => RecordingFault::Truncated { offset },
            Some(cause) => RecordingFault::Refused { offset, cause },
            None => RecordingFault::Record { offset },
        })?;
        let arrival = record.arrival();
        if arrival < self.last {
            return Err(RecordingFault::Order {
                offset,
                back: self.last.abs_diff(arrival),
            });
        }
        self.last = arrival;
        Ok(record)
    }
}

const KEYS: [&str; 11] = [
    "started",
    "plan",
    "gap",
    "link",
    "clock_step",
    "config_hash",
    "topic",
    "reason",
    "blocks",
    "up",
    "by",
];

/// One record; `None` as fault when the item is well formed but not ours.
fn item<'a>(cursor: &mut Cursor<'a>) -> Result<Record<'a>, Option<Refusal>> {
    match cursor.item()? {
        (_, Item::Array(3)) => message(cursor),
        (_, Item::Map(entries)) => {
            let slots = field::read_entries(cursor, entries, &KEYS)?;
            let [
                started,
                plan,
                gap,
                link,
                clock_step,
                config_hash,
                topic,
                reason,
                blocks,
                up,
                by,
            ] = &slots;
            let record = match (
                stamp(started),
                stamp(plan),
                stamp(gap),
                stamp(link),
                stamp(clock_step),
            ) {
                (Some(arrival), None, None, None, None) => Some(Record::Started { arrival }),
                (None, Some(arrival), None, None, None) => {
                    borrowed(config_hash).map(|config_hash| Record::Plan {
                        arrival,
                        config_hash,
                    })
                }
                (None, None, Some(arrival), None, None) => {
                    let blocks = field::counter(blocks)?;
                    borrowed(topic)
                        .zip(borrowed(reason))
                        .map(|(topic, reason)| Record::Gap {
                            arrival,
                            topic,
                            reason,
                            blocks,
                        })
                }
                (None, None, None, Some(arrival), None) => match up {
                    Some(Field {
                        value: Value::Bool(up),
                        ..
                    }) => Some(Record::Link { arrival, up: *up }),
                    Some(_) | None => None,
                },
                (None, None, None, None, Some(arrival)) => {
                    stamp(by).map(|by| Record::ClockStep { arrival, by })
                }
                (_, _, _, _, _) => None,
            };
            record.ok_or(None)
        }
        (at, other) => {
            cursor.pass(at, other, field::MAX_DEPTH)?;
            Err(None)
        }
    }
}

fn message<'a>(cursor: &mut Cursor<'a>) -> Result<Record<'a>, Option<Refusal>> {
    let (_, arrival) = cursor.value()?;
    let (_, topic) = cursor.value()?;
    let (at, payload) = cursor.item()?;
    cursor.pass(at, payload, field::MAX_DEPTH)?;
    match (arrival, topic, payload) {
        (
            Value::Int(arrival),
            Value::Text {
                text: Cow::Borrowed(topic),
                ..
            },
            Item::Bytes(payload),
        ) => {
            let arrival = i64::try_from(arrival).map_err(|_| None)?;
            Ok(Record::Message {
                arrival,
                topic,
                payload,
            })
        }
        (_, _, _) => Err(None),
    }
}

fn stamp(slot: Slot<'_, '_>) -> Option<i64> {
    match slot {
        Some(Field {
            value: Value::Int(stamp),
            ..
        }) => i64::try_from(*stamp).ok(),
        Some(_) | None => None,
    }
}

fn borrowed<'a>(slot: &Option<Field<'a>>) -> Option<&'a str> {
    match slot {
        Some(Field {
            value:
                Value::Text {
                    text: Cow::Borrowed(text),
                    ..
                },
            ..
        }) => Some(text),
        Some(_) | None => None,
    }
}
