//! Topics under `<root>/<site>/`: names of ours, and what an inbound one means.
//!
//! In: ids and topic text. Out: topic text, subscription filters, or the asset and point a topic names.
//! MQTT 3.1.1 rules (OASIS standard, section 4.7) from memory: `+` is one level, a last `#` is the level above
//! and everything below, and neither may occur in the name of a published topic.

mod fault;
mod filter;

use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;

pub use fault::TopicFault;
pub use filter::{check_filter, matches};

use crate::id::Id;
use filter::{characters, overlap};

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

#[cfg(test)]
mod tests;
