//! The environment over the files: `HUMWARD_SITE`, `HUMWARD_BROKER__HOST`.
//!
//! Single values of the top level, `gateway` and `broker` can be set so; a variable that names no such
//! key is a fault. Values are texts and are read as their key takes them: a number, `true`, a text.

use std::collections::BTreeMap;

use config::{Environment, Source as _};

use super::Code;
use super::gather::Gather;
use super::keys::{Key, KeyTable, Kind};
use super::near::nearest;
use super::node::{Entry, Node, Table, Value};
use super::source::{Place, Sources};
use super::tables::SITE;

/// The beginning of every variable of ours.
pub const PREFIX: &str = "HUMWARD_";

/// Variables with our prefix that are not configuration: the log filter, and those only test runs read.
pub const NOT_CONFIGURATION: [&str; 5] = [
    "HUMWARD_LOG",
    "HUMWARD_RECORDINGS",
    "HUMWARD_BLESS",
    "HUMWARD_LONG",
    "HUMWARD_NOT_RUN",
];

/// Keeps those of `variables` that are ours in `sources`, in name order.
pub(crate) fn keep(variables: &[(String, String)], sources: &mut Sources) {
    let ours: BTreeMap<&String, &String> = variables
        .iter()
        .filter(|(name, _)| name.starts_with(PREFIX) && !NOT_CONFIGURATION.contains(&name.as_str()))
        .map(|(name, value)| (name, value))
        .collect();
    for (name, value) in ours {
        sources.add_variable(name, value);
    }
}

/// Lays the kept variables over the tree.
pub(crate) fn overlay(tree: &mut Node, gather: &mut Gather<'_>) {
    let sources = gather.sources;
    for (index, (name, value)) in sources.variables().iter().enumerate() {
        let place = Place::Variable(index);
        match key_path(name, value) {
            Some(path) => match find(&path) {
                Some(key) => set(tree, &path, node(value, &key.kind, place)),
                None => unknown(name, place, gather),
            },
            None => unknown(name, place, gather),
        }
    }
}

/// The key a variable names: `HUMWARD_BROKER__HOST` is `broker.host`.
fn key_path(name: &str, value: &str) -> Option<Vec<String>> {
    let one = [(name.to_owned(), value.to_owned())].into_iter().collect();
    let source = Environment::with_prefix("HUMWARD")
        .prefix_separator("_")
        .separator("__")
        .source(Some(one));
    let read = source.collect().ok()?;
    read.keys()
        .next()
        .map(|path| path.split('.').map(str::to_owned).collect())
}

fn find(path: &[String]) -> Option<&'static Key> {
    let (last, tables) = path.split_last()?;
    let mut keys: &'static KeyTable = &SITE;
    for table in tables {
        let Kind::Table(below) = keys.find(table)?.kind else {
            return None;
        };
        keys = below;
    }
    keys.find(last).filter(|key| single(&key.kind))
}

/// Whether a kind is one value, as a variable can hold.
const fn single(kind: &Kind) -> bool {
    !matches!(
        kind,
        Kind::Table(_)
            | Kind::Tables(_)
            | Kind::Or(..)
            | Kind::Ids
            | Kind::Words(_)
            | Kind::Pair(_)
            | Kind::Three(_)
    )
}

fn unknown(name: &str, place: Place, gather: &mut Gather<'_>) {
    let known = settable();
    let allowed = nearest(name, known.iter().map(String::as_str)).map_or_else(
        || format!("one of {}", known.join(", ")),
        |near| format!("did you mean {near}?"),
    );
    gather.add(Code::UnknownVariable, place, "", name.into(), allowed);
}

/// Every variable that names a key.
pub(crate) fn settable() -> Vec<String> {
    let mut names = Vec::new();
    for key in SITE.keys {
        let name = key.name.to_uppercase();
        if single(&key.kind) {
            names.push(format!("{PREFIX}{name}"));
        } else if let Kind::Table(below) = key.kind {
            let inner = below.keys.iter().filter(|inner| single(&inner.kind));
            names.extend(
                inner.map(|inner| format!("{PREFIX}{name}__{}", inner.name.to_uppercase())),
            );
        }
    }
    names
}

/// The value of a variable as its key takes it; what does not read so stays a text, for `verify` to tell.
fn node(text: &str, kind: &Kind, place: Place) -> Node {
    let value = if matches!(kind, Kind::Bool) {
        text.parse().map(Value::Bool).ok()
    } else if matches!(kind, Kind::Whole(_)) {
        text.parse().map(Value::Whole).ok()
    } else if matches!(kind, Kind::Number(_)) {
        text.parse().map(Value::Number).ok()
    } else {
        None
    };
    Node {
        place,
        value: value.unwrap_or_else(|| Value::Text(text.into())),
    }
}

fn set(tree: &mut Node, path: &[String], node: Node) {
    let Value::Table(table) = &mut tree.value else {
        return;
    };
    let Some((first, rest)) = path.split_first() else {
        return;
    };
    let place = node.place;
    let entry = entry(table, first, place);
    if rest.is_empty() {
        entry.node = node;
    } else {
        set(&mut entry.node, rest, node);
    }
}

fn entry<'t>(table: &'t mut Table, key: &str, place: Place) -> &'t mut Entry {
    let index = table
        .entries
        .iter()
        .position(|entry| entry.key == key)
        .unwrap_or_else(|| {
            table.entries.push(Entry {
                key: key.into(),
                key_place: place,
                node: Node::empty_table(place),
            });
            table.entries.len() - 1
        });
    &mut table.entries[index]
}
