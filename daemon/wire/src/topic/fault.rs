//! What can be wrong with a topic, a root or a filter.

use alloc::string::String;
use core::fmt;

use crate::id::IdFault;

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
