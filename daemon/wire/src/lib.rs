//! Bytes to messages and back: topics, blocks, speeds, commands, recordings and every outbound message.
//!
//! In: MQTT topics and payloads as they arrived. Out: checked values, or one [`refusal::Refusal`] with a
//! reason and the byte at fault; a payload is accepted whole or refused whole. Outbound messages are types
//! whose JSON Schema is generated from them ([`schema::schemas`]). Leaves out: sockets, clocks, files, and any
//! judgement about a value that is well formed. Times are nanoseconds since 1970 UTC.
//! Checked by `tests/contract/corpus.rs`, `tests/contract/malformed.rs`, `tests/contract/round_trip.rs` and `tests/contract/schemas.rs`.
#![no_std]

extern crate alloc;

pub mod block;
mod cbor;
pub mod command;
mod field;
pub mod id;
mod json;
pub mod out;
pub mod process;
pub mod recording;
pub mod refusal;
pub mod schema;
pub mod speed;
pub mod time;
pub mod topic;
