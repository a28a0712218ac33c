//! The key tables: every key of the configuration, declared once.
//!
//! `site` holds the top level with `gateway` and `broker`, `asset` an asset with its points, `point`
//! what stands below a point, `watch` limits and zone tables.

mod asset;
mod point;
mod site;
mod watch;

pub(crate) use asset::{ASSET, POINT, SPEED};
pub(crate) use point::{BAND, BEARING, ENCODING, FIXED, JSON, RAW};
pub(crate) use site::{BROKER, GATEWAY, SITE};
pub(crate) use watch::{WATCH, ZONE_CLASS, ZONE_TABLE};

#[cfg(test)]
mod tests {
    use std::collections::BTreeSet;

    use super::super::keys::{KeyTable, Kind, Need};
    use super::super::node::Node;
    use super::super::source::Place;
    use super::super::verify::plain_value;
    use super::SITE;

    fn walk(keys: &'static KeyTable, seen: &mut Vec<*const KeyTable>) {
        if seen.contains(&std::ptr::from_ref(keys)) {
            return;
        }
        seen.push(keys);
        let names: BTreeSet<&str> = keys.keys.iter().map(|key| key.name).collect();
        assert_eq!(names.len(), keys.keys.len(), "a key twice among {names:?}");
        for key in keys.keys {
            assert!(key.about.ends_with('.'), "{}: {:?}", key.name, key.about);
            assert!(
                key.name
                    .chars()
                    .all(|c| c.is_ascii_lowercase() || c == '_' || c.is_ascii_digit()),
                "{}",
                key.name
            );
            if let Need::Default(text) = key.need {
                let node = Node::of_value(text, Place::BuiltIn).unwrap();
                let kind = if let Kind::Or(plain, _) = key.kind {
                    *plain
                } else {
                    key.kind
                };
                assert_eq!(
                    plain_value(&node.value, &kind),
                    Ok(()),
                    "default of {}: {text}",
                    key.name
                );
            }
            if let Some(below) = key.kind.below() {
                walk(below, seen);
            }
        }
    }

    #[test]
    fn every_default_is_a_value_its_own_key_would_accept() {
        let mut seen = Vec::new();
        walk(&SITE, &mut seen);
        assert_eq!(seen.len(), 15, "tables reached from the top");
    }
}
