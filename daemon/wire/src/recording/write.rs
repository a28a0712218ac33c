//! Writing a recording, item by item.

use alloc::vec::Vec;

use super::{FORMAT, Header, Record, VERSION};
use crate::cbor::{self, Writer, Written};

/// The header of a recording.
#[must_use]
pub fn header(header: &Header) -> Vec<u8> {
    let texts = [
        ("root", &header.root),
        ("config_hash", &header.config_hash),
        ("truth", &header.truth),
    ];
    let there = texts.iter().filter(|(_, text)| text.is_some()).count();
    cbor::write(128, |w| {
        w.map((3 + there + usize::from(header.epoch.is_some())) as u64)?;
        w.str("format")?.str(FORMAT)?;
        w.str("version")?.u64(VERSION)?;
        w.str("site")?.str(header.site.as_str())?;
        for (key, text) in texts {
            if let Some(text) = text {
                w.str(key)?.str(text)?;
            }
        }
        if let Some(epoch) = header.epoch {
            w.str("epoch")?.u64(epoch)?;
        }
        Ok(())
    })
}

/// One record, to be appended.
#[must_use]
pub fn record(record: &Record<'_>) -> Vec<u8> {
    let capacity = match record {
        Record::Message { topic, payload, .. } => payload.len() + topic.len() + 24,
        Record::Started { .. }
        | Record::Plan { .. }
        | Record::Gap { .. }
        | Record::Link { .. }
        | Record::ClockStep { .. } => 64,
    };
    cbor::write(capacity, |w| write(w, record))
}

fn write(w: &mut Writer, record: &Record<'_>) -> Written {
    match record {
        Record::Message {
            arrival,
            topic,
            payload,
        } => {
            w.array(3)?.i64(*arrival)?.str(topic)?.bytes(payload)?;
        }
        Record::Started { arrival } => {
            w.map(1)?.str("started")?.i64(*arrival)?;
        }
        Record::Plan {
            arrival,
            config_hash,
        } => {
            w.map(2)?.str("plan")?.i64(*arrival)?;
            w.str("config_hash")?.str(config_hash)?;
        }
        Record::Gap {
            arrival,
            topic,
            reason,
            blocks,
        } => {
            w.map(3 + u64::from(blocks.is_some()))?;
            w.str("gap")?.i64(*arrival)?;
            w.str("topic")?.str(topic)?;
            w.str("reason")?.str(reason)?;
            if let Some(blocks) = blocks {
                w.str("blocks")?.u64(*blocks)?;
            }
        }
        Record::Link { arrival, up } => {
            w.map(2)?.str("link")?.i64(*arrival)?;
            w.str("up")?.bool(*up)?;
        }
        Record::ClockStep { arrival, by } => {
            w.map(2)?.str("clock_step")?.i64(*arrival)?;
            w.str("by")?.i64(*by)?;
        }
    }
    Ok(())
}
