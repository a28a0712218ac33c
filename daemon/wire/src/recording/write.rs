//! Writing a recording, item by item.

use alloc::vec::Vec;

use super::{FORMAT, Header, Record, VERSION};
use crate::cbor::Writer;

/// The header of a recording.
#[must_use]
pub fn header(header: &Header) -> Vec<u8> {
    let mut w = Writer::with_capacity(128);
    let texts = [
        ("root", &header.root),
        ("config_hash", &header.config_hash),
        ("truth", &header.truth),
    ];
    let there = texts.iter().filter(|(_, text)| text.is_some()).count();
    w.map(3 + there + usize::from(header.epoch.is_some()));
    w.text("format");
    w.text(FORMAT);
    w.text("version");
    w.unsigned(VERSION);
    w.text("site");
    w.text(header.site.as_str());
    for (key, text) in texts {
        if let Some(text) = text {
            w.text(key);
            w.text(text);
        }
    }
    if let Some(epoch) = header.epoch {
        w.text("epoch");
        w.unsigned(epoch);
    }
    w.into_bytes()
}

/// One record, to be appended.
#[must_use]
pub fn record(record: &Record<'_>) -> Vec<u8> {
    let mut w = Writer::default();
    match record {
        Record::Message {
            arrival,
            topic,
            payload,
        } => {
            w = Writer::with_capacity(payload.len() + topic.len() + 24);
            w.array(3);
            w.integer(*arrival);
            w.text(topic);
            w.bytes(payload);
        }
        Record::Started { arrival } => {
            w.map(1);
            stamp(&mut w, "started", *arrival);
        }
        Record::Plan {
            arrival,
            config_hash,
        } => {
            w.map(2);
            stamp(&mut w, "plan", *arrival);
            w.text("config_hash");
            w.text(config_hash);
        }
        Record::Gap {
            arrival,
            topic,
            reason,
            blocks,
        } => {
            w.map(3 + usize::from(blocks.is_some()));
            stamp(&mut w, "gap", *arrival);
            w.text("topic");
            w.text(topic);
            w.text("reason");
            w.text(reason);
            if let Some(blocks) = blocks {
                w.text("blocks");
                w.unsigned(*blocks);
            }
        }
        Record::Link { arrival, up } => {
            w.map(2);
            stamp(&mut w, "link", *arrival);
            w.text("up");
            w.boolean(*up);
        }
        Record::ClockStep { arrival, by } => {
            w.map(2);
            stamp(&mut w, "clock_step", *arrival);
            w.text("by");
            w.integer(*by);
        }
    }
    w.into_bytes()
}

fn stamp(w: &mut Writer, key: &str, arrival: i64) {
    w.text(key);
    w.integer(arrival);
}
