//! The canonical text of a configuration and its hash.
//!
//! Every declared key in the order of its table with its value or default, numbers in one form, so
//! that only a change of meaning changes the text. FNV-1a, 64 bits: offset basis cbf29ce484222325,
//! prime 100000001b3 (Fowler, Noll and Vo; RFC 9923); it tells configurations apart, it protects nothing.

use std::fmt::Write as _;

use super::keys::{KeyTable, Kind, Need};
use super::node::{Node, Value};
use super::source::Place;

/// The hash of a tree read with `keys`, as 16 hexadecimal digits.
pub(crate) fn hash(tree: &Node, keys: &'static KeyTable) -> String {
    let mut text = String::new();
    write_table(Some(tree), keys, "", &mut text);
    format!("{:016x}", fnv1a(text.as_bytes()))
}

fn write_table(node: Option<&Node>, keys: &'static KeyTable, path: &str, out: &mut String) {
    for key in keys.keys {
        let path = format!("{path}/{}", key.name);
        let given = node
            .and_then(Node::table)
            .and_then(|table| table.get(key.name));
        let default = match key.need {
            Need::Default(text) if given.is_none() => Node::of_value(text, Place::BuiltIn),
            Need::Default(_) | Need::Required | Need::Optional(_) => None,
        };
        let Some(value) = given.or(default.as_ref()) else {
            continue;
        };
        match (&key.kind, &value.value) {
            (Kind::Table(below) | Kind::Or(_, below), Value::Table(_)) => {
                write_table(Some(value), below, &path, out)
            }
            (Kind::Tables(below), Value::List(items)) => {
                for (index, item) in items.iter().enumerate() {
                    write_table(Some(item), below, &format!("{path}/{index}"), out);
                }
            }
            (_, plain) => {
                out.push_str(&path);
                out.push('=');
                write_plain(plain, out);
                out.push('\n');
            }
        }
    }
}

fn write_plain(value: &Value, out: &mut String) {
    let written = match value {
        Value::Text(text) => write!(out, "{text:?}"),
        Value::Whole(whole) => write!(out, "{}", *whole as f64),
        Value::Number(number) => write!(out, "{number}"),
        Value::Bool(value) => write!(out, "{value}"),
        Value::List(items) => {
            out.push('[');
            for item in items {
                write_plain(&item.value, out);
                out.push(',');
            }
            write!(out, "]")
        }
        Value::Table(_) | Value::Other | Value::Faulty => write!(out, "?"),
    };
    debug_assert!(written.is_ok(), "writing into a String cannot fail");
}

/// FNV-1a over bytes, 64 bits.
pub(crate) fn fnv1a(bytes: &[u8]) -> u64 {
    bytes.iter().fold(0xcbf2_9ce4_8422_2325, |hash, &byte| {
        (hash ^ u64::from(byte)).wrapping_mul(0x0100_0000_01b3)
    })
}

#[cfg(test)]
mod tests {
    use super::fnv1a;

    /// Test vectors of the authors' reference code (from memory).
    #[test]
    fn the_hash_gives_the_published_vectors() {
        assert_eq!(fnv1a(b""), 0xcbf2_9ce4_8422_2325);
        assert_eq!(fnv1a(b"a"), 0xaf63_dc4c_8601_ec8c);
        assert_eq!(fnv1a(b"foobar"), 0x8594_4171_f739_67e8);
    }
}
