//! Every value against the declaration of its key: type, form and range, unknown and missing keys.
//!
//! A value found faulty is told once and marked, so that nothing after it stumbles over it again.

use humward_monitor::plan::{Persistence, parse_span};
use humward_monitor::time::Span;
use humward_wire::id::Id;

use super::Code;
use super::gather::Gather;
use super::keys::{KeyTable, Kind, Need, Range};
use super::measure::MeasureName;
use super::near::nearest;
use super::node::{Node, Table, Value};

/// Checks a table against its keys, and everything below it; `path` is the key it stands under.
pub(crate) fn table(node: &mut Node, keys: &'static KeyTable, path: &str, gather: &mut Gather<'_>) {
    let place = node.place;
    let Value::Table(table) = &mut node.value else {
        return;
    };
    table.entries.retain_mut(|entry| {
        let full = join(path, &entry.key);
        let Some(key) = keys.find(&entry.key) else {
            let known = nearest(&entry.key, keys.keys.iter().map(|key| key.name));
            let allowed = known.map_or_else(
                || format!("one of {}", names(keys)),
                |known| format!("did you mean {known}?"),
            );
            gather.add(
                Code::UnknownKey,
                entry.key_place,
                &full,
                entry.key.clone(),
                allowed,
            );
            return false;
        };
        value(&mut entry.node, &key.kind, &full, gather);
        true
    });
    for key in keys.keys {
        if matches!(key.need, Need::Required) && table.get(key.name).is_none() {
            let read = "nothing".to_owned();
            gather.add(
                Code::MissingKey,
                place,
                &join(path, key.name),
                read,
                key.kind.to_string(),
            );
        }
    }
}

/// Checks an array of tables, each against the same keys.
pub(crate) fn list(node: &mut Node, keys: &'static KeyTable, path: &str, gather: &mut Gather<'_>) {
    if let Value::List(items) = &mut node.value {
        tables(items, keys, path, gather);
    }
}

fn tables(items: &mut [Node], keys: &'static KeyTable, path: &str, gather: &mut Gather<'_>) {
    for (index, item) in items.iter_mut().enumerate() {
        let path = item_path(path, index, item);
        table(item, keys, &path, gather);
    }
}

/// The key path of the item `node`, number `index` from 0, in the array `path`: by its id or name where it has one.
pub(crate) fn item_path(path: &str, index: usize, node: &Node) -> String {
    let named = node
        .table()
        .and_then(|table| table.get("id").or_else(|| table.get("name")));
    match named.map(|node| &node.value) {
        Some(Value::Text(text)) if Id::new(text).is_ok() => join(path, text),
        _ => join(path, &format!("#{}", index + 1)),
    }
}

/// `path.key`, or `key` at the top.
pub(crate) fn join(path: &str, key: &str) -> String {
    if path.is_empty() {
        key.to_owned()
    } else {
        format!("{path}.{key}")
    }
}

fn names(keys: &KeyTable) -> String {
    let names: Vec<&str> = keys.keys.iter().map(|key| key.name).collect();
    names.join(", ")
}

fn value(node: &mut Node, kind: &'static Kind, path: &str, gather: &mut Gather<'_>) {
    match (kind, &mut node.value) {
        (Kind::Table(keys), Value::Table(_)) | (Kind::Or(_, keys), Value::Table(_)) => {
            table(node, keys, path, gather)
        }
        (Kind::Tables(keys), Value::List(items))
            if items
                .iter()
                .all(|item| matches!(item.value, Value::Table(_))) =>
        {
            tables(items, keys, path, gather);
        }
        (Kind::Or(plain, _), other) => {
            if let Err(code) = plain_value(other, plain) {
                gather.add(
                    code,
                    node.place,
                    path,
                    gather.written(node.place),
                    kind.to_string(),
                );
                node.value = Value::Faulty;
            }
        }
        (kind, other) => {
            if let Err(code) = plain_value(other, kind) {
                gather.add(
                    code,
                    node.place,
                    path,
                    gather.written(node.place),
                    kind.to_string(),
                );
                node.value = Value::Faulty;
            }
        }
    }
}

/// Whether a value is what its kind takes; the code says in which way it is not.
pub(crate) fn plain_value(value: &Value, kind: &Kind) -> Result<(), Code> {
    let form = |sound: bool| if sound { Ok(()) } else { Err(Code::WrongForm) };
    match (kind, value) {
        (Kind::Id, Value::Text(text)) => form(Id::new(text).is_ok()),
        (Kind::Text(most), Value::Text(text)) => {
            form((1..=*most).contains(&text.chars().count()) && !text.chars().any(char::is_control))
        }
        (Kind::File, Value::Text(text)) => form(!text.is_empty()),
        (Kind::Topic, Value::Text(text)) => form(!text.is_empty()),
        (Kind::Bool, Value::Bool(_)) => Ok(()),
        (Kind::Whole(range), Value::Whole(whole)) => within(range, *whole as f64),
        (Kind::Number(range), Value::Whole(whole)) => within(range, *whole as f64),
        (Kind::Number(range), Value::Number(number)) => within(range, *number),
        (Kind::Span(least, most), Value::Text(text)) => match parse_span(text) {
            None => Err(Code::WrongForm),
            Some(span) if (Span::from_secs(*least)..=Span::from_secs(*most)).contains(&span) => {
                Ok(())
            }
            Some(_) => Err(Code::OutOfRange),
        },
        (Kind::Persistence, Value::Text(text)) => form(Persistence::parse(text).is_ok()),
        (Kind::Word(words), Value::Text(text)) => form(words.contains(&text.as_str())),
        (Kind::Pair(range), Value::List(items)) => rising(range, items, 2),
        (Kind::Three(range), Value::List(items)) => rising(range, items, 3),
        (Kind::Ids, Value::List(items)) if !items.is_empty() => items
            .iter()
            .try_for_each(|item| plain_value(&item.value, &Kind::Id)),
        (Kind::Words(words), Value::List(items)) => items
            .iter()
            .try_for_each(|item| plain_value(&item.value, &Kind::Word(words))),
        (Kind::Measure, Value::Text(text)) => form(MeasureName::parse(text).is_some()),
        (Kind::Pointer, Value::Text(text)) => form(text.is_empty() || text.starts_with('/')),
        (_, Value::Faulty) => Ok(()),
        _ => Err(Code::WrongType),
    }
}

fn within(range: &Range, number: f64) -> Result<(), Code> {
    if range.holds(number) {
        Ok(())
    } else {
        Err(Code::OutOfRange)
    }
}

fn rising(range: &Range, items: &[Node], count: usize) -> Result<(), Code> {
    let numbers: Vec<f64> = items
        .iter()
        .filter_map(|item| item.value.number())
        .collect();
    if items.len() != count || numbers.len() != count {
        return Err(Code::WrongType);
    }
    numbers
        .iter()
        .try_for_each(|&number| within(range, number))?;
    if numbers.windows(2).all(|pair| pair[0] < pair[1]) {
        Ok(())
    } else {
        Err(Code::OutOfRange)
    }
}

/// The keys whose value, directly in the table, was found faulty.
pub(crate) fn faulty_keys(table: &Table) -> impl Iterator<Item = &str> {
    table
        .entries
        .iter()
        .filter(|entry| matches!(entry.node.value, Value::Faulty))
        .map(|entry| entry.key.as_str())
}
