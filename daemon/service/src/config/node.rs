//! The configuration as a tree of values, each knowing where it was written.

use toml::Spanned;
use toml::de::{DeTable, DeValue};

use super::source::Place;

/// A value and its place.
#[derive(Debug, Clone)]
pub(crate) struct Node {
    pub(crate) place: Place,
    pub(crate) value: Value,
}

/// A value of the configuration.
#[derive(Debug, Clone)]
pub(crate) enum Value {
    Text(String),
    Whole(i64),
    Number(f64),
    Bool(bool),
    /// A date or time of TOML, or a number that fits no type: no key takes one.
    Other,
    List(Vec<Node>),
    Table(Table),
    /// A value that was found faulty and told; nobody reads it again.
    Faulty,
}

/// A table, its entries in the order of the file.
#[derive(Debug, Clone, Default)]
pub(crate) struct Table {
    pub(crate) entries: Vec<Entry>,
}

/// One entry of a table.
#[derive(Debug, Clone)]
pub(crate) struct Entry {
    pub(crate) key: String,
    pub(crate) key_place: Place,
    pub(crate) node: Node,
}

impl Value {
    /// The text this is.
    pub(crate) fn text(&self) -> Option<&str> {
        if let Self::Text(text) = self {
            Some(text)
        } else {
            None
        }
    }

    /// The list this is; empty when it is none.
    pub(crate) fn list(&self) -> &[Node] {
        if let Self::List(items) = self {
            items
        } else {
            &[]
        }
    }

    /// The number this is, whole or not.
    pub(crate) fn number(&self) -> Option<f64> {
        if let Self::Whole(whole) = self {
            Some(*whole as f64)
        } else if let Self::Number(number) = self {
            Some(*number)
        } else {
            None
        }
    }
}

impl Table {
    /// The value of this key.
    pub(crate) fn get(&self, key: &str) -> Option<&Node> {
        self.entries
            .iter()
            .find(|entry| entry.key == key)
            .map(|entry| &entry.node)
    }
}

impl Node {
    /// An empty table at this place.
    pub(crate) fn empty_table(place: Place) -> Self {
        Self {
            place,
            value: Value::Table(Table::default()),
        }
    }

    /// The table this is.
    pub(crate) const fn table(&self) -> Option<&Table> {
        if let Value::Table(table) = &self.value {
            Some(table)
        } else {
            None
        }
    }

    /// The value of this key in the table this is.
    pub(crate) fn table_mut(&mut self, key: &str) -> Option<&mut Self> {
        let Value::Table(table) = &mut self.value else {
            return None;
        };
        table
            .entries
            .iter_mut()
            .find(|entry| entry.key == key)
            .map(|entry| &mut entry.node)
    }

    /// Makes every place in it that of what is shipped with the program.
    pub(crate) fn built_in(&mut self) {
        self.replace_places(Place::BuiltIn);
    }

    /// Whether it, or anything below it, was found faulty.
    pub(crate) fn faulty_within(&self) -> bool {
        if let Value::Table(table) = &self.value {
            table.entries.iter().any(|entry| entry.node.faulty_within())
        } else {
            matches!(self.value, Value::Faulty) || self.value.list().iter().any(Self::faulty_within)
        }
    }

    /// The tree of a parsed document, whose places are in file `file`.
    pub(crate) fn of_document(document: &Spanned<DeTable<'_>>, file: usize) -> Self {
        let span = document.span();
        let place = Place::File {
            file,
            start: span.start,
            end: span.end,
        };
        Self {
            place,
            value: Value::Table(table(document.get_ref(), file)),
        }
    }

    /// The value of one TOML value, such as a default's; `None` when it is not TOML.
    pub(crate) fn of_value(text: &str, place: Place) -> Option<Self> {
        let value = DeValue::parse(text).ok()?;
        let mut node = node(&value, 0);
        node.replace_places(place);
        Some(node)
    }

    fn replace_places(&mut self, place: Place) {
        self.place = place;
        if let Value::List(items) = &mut self.value {
            items.iter_mut().for_each(|item| item.replace_places(place));
        } else if let Value::Table(table) = &mut self.value {
            for entry in &mut table.entries {
                entry.key_place = place;
                entry.node.replace_places(place);
            }
        }
    }
}

fn node(spanned: &Spanned<DeValue<'_>>, file: usize) -> Node {
    let span = spanned.span();
    let value = match spanned.get_ref() {
        DeValue::String(text) => Value::Text(text.to_string()),
        DeValue::Integer(whole) => {
            i64::from_str_radix(whole.as_str(), whole.radix()).map_or(Value::Other, Value::Whole)
        }
        DeValue::Float(number) => number.as_str().parse().map_or(Value::Other, Value::Number),
        DeValue::Boolean(value) => Value::Bool(*value),
        DeValue::Datetime(_) => Value::Other,
        DeValue::Array(items) => Value::List(items.iter().map(|item| node(item, file)).collect()),
        DeValue::Table(entries) => Value::Table(table(entries, file)),
    };
    Node {
        place: Place::File {
            file,
            start: span.start,
            end: span.end,
        },
        value,
    }
}

fn table(entries: &DeTable<'_>, file: usize) -> Table {
    let mut entries: Vec<Entry> = entries
        .iter()
        .map(|(key, value)| {
            let span = key.span();
            Entry {
                key: key.get_ref().to_string(),
                key_place: Place::File {
                    file,
                    start: span.start,
                    end: span.end,
                },
                node: node(value, file),
            }
        })
        .collect();
    entries.sort_by_key(|entry| entry.key_place);
    Table { entries }
}
