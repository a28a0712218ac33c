//! JSON Schemas of the outbound messages, generated from their types.
//!
//! JSON Schema 2020-12. They describe what is sent: every key is always there, `null` where there is no value.
//! Kept as files in `schema/` and held by `tests/contract/schemas.rs`; refresh with `HUMWARD_BLESS=1 cargo test -p
//! humward-wire`. Evidence travels as CBOR: its schema describes the same map, values being one typed array there.

use alloc::vec;
use alloc::vec::Vec;

use schemars::generate::SchemaSettings;
use serde_json::{Value, json};

use crate::out::{Alarm, Event, Evidence, Gateway, GatewayEvent, Message, Reply, Status};

/// Every outbound message's file stem and schema.
#[must_use]
pub fn schemas() -> Vec<(&'static str, Value)> {
    vec![
        ("status", of::<Status>()),
        ("alarm", of::<Alarm>()),
        ("event", of::<Event>()),
        ("evidence", of::<Evidence>()),
        ("gateway", of::<Gateway>()),
        ("gateway-event", of::<GatewayEvent>()),
        ("reply", of::<Reply>()),
    ]
}

fn of<M: Message>() -> Value {
    let settings = SchemaSettings::draft2020_12().for_serialize();
    let mut schema = settings
        .into_generator()
        .into_root_schema_for::<M>()
        .to_value();
    if let Some(name) = schema.pointer_mut("/properties/schema") {
        *name = json!({"const": M::SCHEMA, "description": "Name and version of this schema."});
    }
    schema
}
