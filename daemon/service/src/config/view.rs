//! Typed reading of a verified table: the value given, else the default its key declares.

use std::path::PathBuf;

use humward_monitor::plan::{Persistence, parse_span};
use humward_monitor::time::Span;
use humward_wire::id::Id;

use super::keys::{KeyTable, Need};
use super::node::{Node, Table, Value};
use super::source::Place;
use super::verify::faulty_keys;

/// A table with the declaration of its keys. A value found faulty reads as absent without a default.
#[derive(Debug, Clone, Copy)]
pub(crate) struct View<'t> {
    node: Option<&'t Node>,
    keys: &'static KeyTable,
}

static NO_TABLE: Table = Table {
    entries: Vec::new(),
};

impl<'t> View<'t> {
    /// The table `node`; `None` reads as an empty one.
    pub(crate) const fn new(node: Option<&'t Node>, keys: &'static KeyTable) -> Self {
        Self { node, keys }
    }

    fn table(&self) -> &'t Table {
        self.node.and_then(Node::table).unwrap_or(&NO_TABLE)
    }

    /// Where the table begins.
    pub(crate) fn place(&self) -> Place {
        self.node.map_or(Place::BuiltIn, |node| node.place)
    }

    /// Where the value of this key stands, or where the table begins when it is not given.
    pub(crate) fn place_of(&self, key: &str) -> Place {
        self.table()
            .get(key)
            .map_or_else(|| self.place(), |node| node.place)
    }

    /// Whether the key was given, soundly or not.
    pub(crate) fn given(&self, key: &str) -> bool {
        self.table().get(key).is_some()
    }

    /// Whether any value directly in it was found faulty.
    pub(crate) fn faulty(&self) -> bool {
        faulty_keys(self.table()).next().is_some()
    }

    /// Whether anything in the value of this key, at any depth, was found faulty.
    pub(crate) fn faulty_within(&self, key: &str) -> bool {
        self.table().get(key).is_some_and(Node::faulty_within)
    }

    /// Whether the value of this key was found faulty.
    pub(crate) fn is_faulty(&self, key: &str) -> bool {
        faulty_keys(self.table()).any(|faulty| faulty == key)
    }

    /// The value given for this key.
    pub(crate) fn raw(&self, key: &str) -> Option<&'t Node> {
        self.table().get(key)
    }

    fn read<T>(&self, key: &str, convert: impl Fn(&Value) -> Option<T>) -> Option<T> {
        if let Some(node) = self.table().get(key) {
            return convert(&node.value);
        }
        match self.keys.find(key)?.need {
            Need::Default(text) => convert(&Node::of_value(text, Place::BuiltIn)?.value),
            Need::Required | Need::Optional(_) => None,
        }
    }

    /// A text.
    pub(crate) fn text(&self, key: &str) -> Option<String> {
        self.read(key, |value| value.text().map(str::to_owned))
    }

    /// An id.
    pub(crate) fn id(&self, key: &str) -> Option<Id> {
        self.read(key, |value| Id::new(value.text()?).ok())
    }

    /// A list of texts, each with its place; empty when not given.
    pub(crate) fn texts(&self, key: &str) -> Vec<(String, Place)> {
        let item = |item: &Node| Some((item.value.text()?.to_owned(), item.place));
        self.read(key, |value| {
            Some(value.list().iter().filter_map(item).collect())
        })
        .unwrap_or_default()
    }

    /// A number.
    pub(crate) fn number(&self, key: &str) -> Option<f64> {
        self.read(key, Value::number)
    }

    /// A whole number that is not negative.
    pub(crate) fn whole(&self, key: &str) -> Option<u64> {
        self.read(key, |value| {
            if let Value::Whole(whole) = value {
                u64::try_from(*whole).ok()
            } else {
                None
            }
        })
    }

    /// True or false.
    pub(crate) fn bool(&self, key: &str) -> Option<bool> {
        self.read(key, |value| {
            if let Value::Bool(value) = value {
                Some(*value)
            } else {
                None
            }
        })
    }

    /// A length of time.
    pub(crate) fn span(&self, key: &str) -> Option<Span> {
        self.read(key, |value| parse_span(value.text()?))
    }

    /// A persistence.
    pub(crate) fn persistence(&self, key: &str) -> Option<Persistence> {
        self.read(key, |value| Persistence::parse(value.text()?).ok())
    }

    /// So many numbers.
    pub(crate) fn numbers<const N: usize>(&self, key: &str) -> Option<[f64; N]> {
        self.read(key, |value| {
            let numbers: Option<Vec<f64>> = value
                .list()
                .iter()
                .map(|item| item.value.number())
                .collect();
            numbers?.try_into().ok()
        })
    }

    /// The path of a file, from `folder` when it is relative.
    pub(crate) fn file(&self, key: &str, folder: PathBuf) -> Option<PathBuf> {
        self.text(key).map(|path| folder.join(path))
    }

    /// The table under this key; empty when not given.
    pub(crate) fn table_of(&self, key: &str, keys: &'static KeyTable) -> View<'t> {
        View::new(
            self.table().get(key).filter(|node| node.table().is_some()),
            keys,
        )
    }

    /// The tables of the array under this key.
    pub(crate) fn tables_of(&self, key: &str, keys: &'static KeyTable) -> Vec<View<'t>> {
        let items = self
            .table()
            .get(key)
            .map_or(&[][..], |node| node.value.list());
        items
            .iter()
            .map(|item| View::new(Some(item), keys))
            .collect()
    }

    /// The node of the table itself.
    pub(crate) const fn node(&self) -> Option<&'t Node> {
        self.node
    }
}
