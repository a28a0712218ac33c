//! The schemas kept in `schema/` are those of the types; messages have exactly the keys their schema names.
//!
//! After an intended change: `HUMWARD_BLESS=1 cargo test -p humward-wire` writes the files anew.

use std::collections::BTreeSet;
use std::fmt::Debug;
use std::fs;
use std::path::PathBuf;

use humward_wire::out::{Event, Instant, Message};
use humward_wire::schema::schemas;
use serde_json::Value;

use crate::samples::{alarm, event, evidence, gateway, gateway_event, reply, status};

fn folder() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("schema")
}

#[test]
fn the_kept_schemas_are_those_of_the_types() {
    for (name, schema) in schemas() {
        let path = folder().join(format!("{name}.json"));
        let generated = format!("{}\n", serde_json::to_string_pretty(&schema).unwrap());
        if std::env::var_os("HUMWARD_BLESS").is_some() {
            fs::write(&path, &generated).unwrap();
        }
        let kept = fs::read_to_string(&path).unwrap_or_else(|e| panic!("{}: {e}", path.display()));
        assert_eq!(
            kept, generated,
            "{name}: run with HUMWARD_BLESS=1 if the change is meant"
        );
    }
    let kept: BTreeSet<String> = fs::read_dir(folder())
        .unwrap()
        .map(|e| e.unwrap().file_name().to_string_lossy().into_owned())
        .collect();
    let named: BTreeSet<String> = schemas()
        .iter()
        .map(|(name, _)| format!("{name}.json"))
        .collect();
    assert_eq!(kept, named);
}

/// Checks a sample against its schema as far as structure goes, and that it survives JSON.
fn holds<M: Message + PartialEq + Debug>(name: &str, message: &M) {
    let json = message.to_json();
    let value: Value = serde_json::from_slice(&json).unwrap();
    let schema = schemas()
        .into_iter()
        .find(|(stem, _)| *stem == name)
        .unwrap()
        .1;
    assert_eq!(
        schema["$schema"],
        "https://json-schema.org/draft/2020-12/schema"
    );
    assert_eq!(schema["properties"]["schema"]["const"], M::SCHEMA);
    same_keys(name, &value, &schema, &schema);
    let again = M::from_json(&json).unwrap();
    assert_eq!(
        again.to_json(),
        json,
        "{name} changes when it is read and written again"
    );
    let mut wider = value;
    wider
        .as_object_mut()
        .unwrap()
        .insert("a_later_key".into(), Value::from(1));
    assert_eq!(
        M::from_json(wider.to_string().as_bytes()).unwrap(),
        again,
        "{name} minds a key it does not know"
    );
}

/// Keys sent = keys named = keys required, here and in every object below.
fn same_keys(place: &str, value: &Value, schema: &Value, root: &Value) {
    let schema = match schema["$ref"].as_str() {
        Some(reference) => root.pointer(reference.trim_start_matches('#')).unwrap(),
        None => schema,
    };
    match value {
        Value::Object(entries) => {
            let schema = schema["anyOf"].get(0).unwrap_or(schema);
            if schema.get("$ref").is_some() {
                return same_keys(place, value, schema, root);
            }
            let sent: BTreeSet<&str> = entries.keys().map(String::as_str).collect();
            let named: BTreeSet<&str> = schema["properties"]
                .as_object()
                .unwrap()
                .keys()
                .map(String::as_str)
                .collect();
            let required: BTreeSet<&str> = schema["required"]
                .as_array()
                .unwrap()
                .iter()
                .map(|key| key.as_str().unwrap())
                .collect();
            assert_eq!(sent, named, "{place}");
            assert_eq!(named, required, "{place}");
            for (key, value) in entries {
                same_keys(
                    &format!("{place}/{key}"),
                    value,
                    &schema["properties"][key],
                    root,
                );
            }
        }
        Value::Array(items) => {
            for item in items {
                same_keys(place, item, &schema["items"], root);
            }
        }
        Value::Null | Value::Bool(_) | Value::Number(_) | Value::String(_) => {
            let words = schema.to_string();
            assert_ne!(words, "null", "{place} is not in the schema");
        }
    }
}

#[test]
fn every_message_has_exactly_the_keys_of_its_schema_and_survives_json() {
    holds("event", &event());
    holds("alarm", &alarm());
    holds("status", &status());
    holds("gateway", &gateway());
    holds("gateway-event", &gateway_event());
    holds("reply", &reply());
    holds("evidence", &evidence());
}

#[test]
fn an_event_is_written_as_the_contract_shows() {
    let value: Value = serde_json::from_slice(&event().to_json()).unwrap();
    for (pointer, expected) in [
        ("/schema", Value::from("humward/event/1")),
        ("/asset", Value::from("P-103A")),
        ("/at", Value::from("2026-12-01T03:08:00.250Z")),
        ("/epoch", Value::from(0)),
        ("/state", Value::from("UNACK")),
        ("/severity_code", Value::from(1)),
        ("/value/value", Value::from(24.312)),
        ("/value/unit", Value::from("dB")),
        ("/also/0/value", Value::from(0.213_46)),
        ("/also/0/zone", Value::from("A")),
        ("/lines/0/frequency_hz", Value::from(107.36)),
        ("/running/rpm", Value::from(1482.3)),
        ("/normal", Value::Null),
    ] {
        assert_eq!(value.pointer(pointer), Some(&expected), "{pointer}");
    }
    let first = String::from_utf8(event().to_json()).unwrap();
    assert!(first.starts_with(
        r#"{"schema":"humward/event/1","gateway":"north-gw-1","epoch":0,"site":"north","#
    ));
}

#[test]
fn a_word_we_do_not_send_is_no_event() {
    let json = String::from_utf8(event().to_json()).unwrap();
    assert!(Event::from_json(json.replace("raised", "rung").as_bytes()).is_err());
    let read = Event::from_json(json.as_bytes()).unwrap();
    assert_eq!(read.header.at, Instant(1_796_094_480_250_000_000));
}
