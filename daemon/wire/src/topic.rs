//! Topics under `<root>/<site>/`: names of ours, and what an inbound one means.
//!
//! In: ids and topic text. Out: topic text, subscription filters, or the asset and point a topic names.
//! MQTT 3.1.1 rules (OASIS standard, section 4.7) from memory: `+` is one level, a last `#` is the level above
//! and everything below, and neither may occur in the name of a published topic.

use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use core::fmt;

use crate::id::{Id, IdFault};

/// Longest topic root, in bytes; leaves room for six levels of ids in any broker's limit.
pub const MAX_ROOT: usize = 128;

/// Kinds of outbound topic with the number of ids below each.
const OUTBOUND: [(&str, usize); 6] = [
    ("status", 1),
    ("alarm", 2),
    ("event", 1),
    ("evidence", 2),
    ("gateway", 1),
    ("reply", 2),
];

/// The topic names of one site.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Topics {
    prefix: String,
}

/// What an inbound topic names.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub enum Inbound {
    /// `block/<asset>/<point>`.
    Block {
        /// The asset.
        asset: Id,
        /// The measuring point.
        point: Id,
    },
    /// `speed/<asset>`.
    Speed {
        /// The asset.
        asset: Id,
    },
    /// `process/<asset>`.
    Process {
        /// The asset.
        asset: Id,
    },
    /// `command/<sender>/<asset>`.
    Command {
        /// Who sent it, as vouched for by the broker's access rules.
        sender: Id,
        /// The asset.
        asset: Id,
    },
}

/// Why a root, filter or topic cannot be used.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum TopicFault {
    /// No text at all.
    Empty,
    /// More bytes than allowed.
    TooLong {
        /// Bytes read.
        length: usize,
        /// Bytes allowed.
        allowed: usize,
    },
    /// Two slashes in a row, or one at either end.
    EmptyLevel {
        /// The level, counted from 1.
        level: usize,
    },
    /// A `+`, `#`, NUL or control character where none may be.
    Character {
        /// The character.
        character: char,
        /// Its byte position.
        position: usize,
    },
    /// The root starts with `$`, which brokers keep for themselves.
    Reserved,
    /// The topic is not below our root and site.
    Outside {
        /// What it should start with.
        prefix: String,
    },
    /// The first level below the site is none of `block`, `speed`, `process`, `command`.
    Kind {
        /// The level read.
        kind: String,
    },
    /// Too few or too many levels after the kind.
    Levels {
        /// Levels read after the kind.
        read: usize,
        /// Levels expected.
        expected: usize,
    },
    /// A level is not an id.
    Level {
        /// The level, counted from 1 in the whole topic.
        level: usize,
        /// What is wrong with it.
        fault: IdFault,
    },
}

impl Topics {
    /// Names topics below `<root>/<site>/`; the usual root is `humward/v1`.
    ///
    /// # Errors
    /// A root with a wildcard, a control character, an empty level, a leading `$` or more than [`MAX_ROOT`] bytes.
    pub fn new(root: &str, site: &Id) -> Result<Topics, TopicFault> {
        if root.is_empty() {
            return Err(TopicFault::Empty);
        }
        if root.len() > MAX_ROOT {
            return Err(TopicFault::TooLong {
                length: root.len(),
                allowed: MAX_ROOT,
            });
        }
        if root.starts_with('$') {
            return Err(TopicFault::Reserved);
        }
        characters(root, |c| matches!(c, '+' | '#'))?;
        if let Some(level) = root.split('/').position(str::is_empty) {
            return Err(TopicFault::EmptyLevel { level: level + 1 });
        }
        Ok(Topics {
            prefix: format!("{root}/{site}/"),
        })
    }

    /// `<root>/<site>/`, with which every topic of ours starts.
    #[must_use]
    pub fn prefix(&self) -> &str {
        &self.prefix
    }

    /// Topic of a point's blocks.
    #[must_use]
    pub fn block(&self, asset: &Id, point: &Id) -> String {
        format!("{}block/{asset}/{point}", self.prefix)
    }

    /// Topic of an asset's speed.
    #[must_use]
    pub fn speed(&self, asset: &Id) -> String {
        format!("{}speed/{asset}", self.prefix)
    }

    /// Topic of an asset's process values.
    #[must_use]
    pub fn process(&self, asset: &Id) -> String {
        format!("{}process/{asset}", self.prefix)
    }

    /// Topic of one sender's commands to an asset.
    #[must_use]
    pub fn command(&self, sender: &Id, asset: &Id) -> String {
        format!("{}command/{sender}/{asset}", self.prefix)
    }

    /// Topic of an asset's status.
    #[must_use]
    pub fn status(&self, asset: &Id) -> String {
        format!("{}status/{asset}", self.prefix)
    }

    /// Topic of the open occurrence of a watch.
    ///
    /// A character that may not be in a topic name becomes `_`: a broker ends the whole connection over one.
    #[must_use]
    pub fn alarm(&self, asset: &Id, watch: &str) -> String {
        format!("{}alarm/{asset}/{}", self.prefix, level(watch))
    }

    /// Topic of an asset's events.
    #[must_use]
    pub fn event(&self, asset: &Id) -> String {
        format!("{}event/{asset}", self.prefix)
    }

    /// Topic of the gateway's own events, `event/gateway.<id>`.
    #[must_use]
    pub fn event_gateway(&self, gateway: &Id) -> String {
        format!("{}event/gateway.{gateway}", self.prefix)
    }

    /// Topic of the evidence kept for an event; `event_id` is cleaned as [`Topics::alarm`] cleans a watch.
    #[must_use]
    pub fn evidence(&self, asset: &Id, event_id: &str) -> String {
        format!("{}evidence/{asset}/{}", self.prefix, level(event_id))
    }

    /// Topic of the gateway's own state.
    #[must_use]
    pub fn gateway(&self, id: &Id) -> String {
        format!("{}gateway/{id}", self.prefix)
    }

    /// Topic of answers to one sender's commands.
    #[must_use]
    pub fn reply(&self, sender: &Id, asset: &Id) -> String {
        format!("{}reply/{sender}/{asset}", self.prefix)
    }

    /// Filters for everything inbound of the site.
    #[must_use]
    pub fn inbound_filters(&self) -> Vec<String> {
        ["block/+/+", "speed/+", "process/+", "command/+/+"]
            .iter()
            .map(|f| format!("{}{f}", self.prefix))
            .collect()
    }

    /// Filters for everything inbound of one asset.
    #[must_use]
    pub fn asset_filters(&self, asset: &Id) -> Vec<String> {
        [
            format!("block/{asset}/+"),
            format!("speed/{asset}"),
            format!("process/{asset}"),
            format!("command/+/{asset}"),
        ]
        .iter()
        .map(|f| format!("{}{f}", self.prefix))
        .collect()
    }

    /// Reads what an inbound topic names.
    ///
    /// # Errors
    /// The topic is not below our prefix, is of another kind, or a level is missing, extra or not an id.
    pub fn parse_inbound(&self, topic: &str) -> Result<Inbound, TopicFault> {
        let rest = topic
            .strip_prefix(self.prefix.as_str())
            .ok_or_else(|| TopicFault::Outside {
                prefix: self.prefix.clone(),
            })?;
        let above = self.prefix.matches('/').count();
        let levels: Vec<&str> = rest.split('/').collect();
        let kind = levels.first().copied().unwrap_or_default();
        let expected = match kind {
            "block" | "command" => 2,
            "speed" | "process" => 1,
            other => {
                return Err(TopicFault::Kind {
                    kind: other.to_string(),
                });
            }
        };
        let mut ids = Vec::with_capacity(2);
        for (index, text) in levels.iter().enumerate().skip(1) {
            if ids.len() < expected {
                ids.push(Id::new(text).map_err(|fault| TopicFault::Level {
                    level: above + index + 1,
                    fault,
                })?);
            }
        }
        if levels.len() - 1 != expected {
            return Err(TopicFault::Levels {
                read: levels.len() - 1,
                expected,
            });
        }
        let mut ids = ids.into_iter();
        match (kind, ids.next(), ids.next()) {
            ("block", Some(asset), Some(point)) => Ok(Inbound::Block { asset, point }),
            ("command", Some(sender), Some(asset)) => Ok(Inbound::Command { sender, asset }),
            ("speed", Some(asset), None) => Ok(Inbound::Speed { asset }),
            ("process", Some(asset), None) => Ok(Inbound::Process { asset }),
            (_, _, _) => Err(TopicFault::Levels {
                read: levels.len() - 1,
                expected,
            }),
        }
    }

    /// Whether a topic or filter can match one of our outbound topics; such a one may not be mapped inbound,
    /// or the daemon would read its own words. A `$share/<group>/` in front is looked through.
    #[must_use]
    pub fn is_outbound(&self, filter: &str) -> bool {
        let filter = match filter.strip_prefix("$share/") {
            Some(shared) => shared.split_once('/').map_or("", |(_, rest)| rest),
            None => filter,
        };
        OUTBOUND.iter().any(|(kind, ids)| {
            let ours = format!("{}{kind}{}", self.prefix, "/+".repeat(*ids));
            overlap(filter, &ours)
        })
    }
}

/// Checks a subscription filter: `+` and `#` alone in their level, `#` only last, no control characters.
///
/// # Errors
/// [`TopicFault`] with the place.
pub fn check_filter(filter: &str) -> Result<(), TopicFault> {
    if filter.is_empty() {
        return Err(TopicFault::Empty);
    }
    if filter.len() > usize::from(u16::MAX) {
        return Err(TopicFault::TooLong {
            length: filter.len(),
            allowed: usize::from(u16::MAX),
        });
    }
    characters(filter, |_| false)?;
    let mut position = 0;
    let count = filter.split('/').count();
    for (index, level) in filter.split('/').enumerate() {
        for (at, character) in level.char_indices() {
            let misplaced = match character {
                '+' => level.len() > 1,
                '#' => level.len() > 1 || index + 1 < count,
                _ => false,
            };
            if misplaced {
                return Err(TopicFault::Character {
                    character,
                    position: position + at,
                });
            }
        }
        position += level.len() + 1;
    }
    Ok(())
}

/// Whether a topic is matched by a filter, as a broker would.
#[must_use]
pub fn matches(filter: &str, topic: &str) -> bool {
    if topic.starts_with('$') && filter.starts_with(['+', '#']) {
        return false;
    }
    overlap(filter, topic)
}

/// Whether some topic is matched by both filters.
fn overlap(a: &str, b: &str) -> bool {
    let (mut a, mut b) = (a.split('/'), b.split('/'));
    loop {
        match (a.next(), b.next()) {
            (Some("#"), _) | (_, Some("#")) | (None, None) => return true,
            (Some(x), Some(y)) if x == y || x == "+" || y == "+" => {}
            (Some(_), Some(_)) | (Some(_), None) | (None, Some(_)) => return false,
        }
    }
}

fn characters(text: &str, refused: impl Fn(char) -> bool) -> Result<(), TopicFault> {
    match text
        .char_indices()
        .find(|(_, c)| c.is_control() || refused(*c))
    {
        Some((position, character)) => Err(TopicFault::Character {
            character,
            position,
        }),
        None => Ok(()),
    }
}

fn level(text: &str) -> String {
    text.chars()
        .map(|c| {
            if c.is_control() || matches!(c, '/' | '+' | '#') {
                '_'
            } else {
                c
            }
        })
        .collect()
}

impl fmt::Display for TopicFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            TopicFault::Empty => f.write_str("the topic is empty; give at least one level"),
            TopicFault::TooLong { length, allowed } => {
                write!(
                    f,
                    "the topic has {length} bytes; shorten it to {allowed} or fewer"
                )
            }
            TopicFault::EmptyLevel { level } => {
                write!(
                    f,
                    "level {level} of the topic is empty; remove the extra slash"
                )
            }
            TopicFault::Character {
                character,
                position,
            } => write!(
                f,
                "the topic has {character:?} at byte {position}; leave out wildcards and control characters there"
            ),
            TopicFault::Reserved => {
                f.write_str("the topic starts with $, which the broker keeps; choose another root")
            }
            TopicFault::Outside { prefix } => {
                write!(
                    f,
                    "the topic is not below {prefix}; publish there or map the topic in the configuration"
                )
            }
            TopicFault::Kind { kind } => {
                write!(
                    f,
                    "{kind:?} is no inbound kind; use block, speed, process or command"
                )
            }
            TopicFault::Levels { read, expected } => {
                write!(
                    f,
                    "the topic has {read} levels after its kind; give {expected}"
                )
            }
            TopicFault::Level { level, fault } => write!(f, "level {level} of the topic: {fault}"),
        }
    }
}

impl core::error::Error for TopicFault {
    fn source(&self) -> Option<&(dyn core::error::Error + 'static)> {
        match self {
            TopicFault::Level { fault, .. } => Some(fault),
            TopicFault::Empty
            | TopicFault::TooLong { .. }
            | TopicFault::EmptyLevel { .. }
            | TopicFault::Character { .. }
            | TopicFault::Reserved
            | TopicFault::Outside { .. }
            | TopicFault::Kind { .. }
            | TopicFault::Levels { .. } => None,
        }
    }
}

#[cfg(test)]
mod tests;
