//! Ids of sites, assets, points, shafts, senders, occurrences and messages.
//!
//! In: text. Out: 1 to 64 of `A-Z a-z 0-9 . _ -`, so an id is a topic level and a file name everywhere.
//! An id made only of dots is refused, because it would name a folder.

use alloc::string::String;
use alloc::sync::Arc;
use alloc::{borrow::Cow, borrow::ToOwned};
use core::fmt;

use schemars::{JsonSchema, Schema, SchemaGenerator, json_schema};
use serde::{Deserialize, Deserializer, Serialize, Serializer};

/// Longest id, in characters.
pub const MAX_LENGTH: usize = 64;

/// A checked id; cheap to clone, ordered as its text.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Id(Arc<str>);

/// Why a text is not an id.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum IdFault {
    /// No characters.
    Empty,
    /// More than [`MAX_LENGTH`] bytes.
    TooLong {
        /// Bytes read.
        length: usize,
    },
    /// A character outside the allowed set.
    Character {
        /// The character.
        character: char,
        /// Its byte position in the text.
        position: usize,
    },
    /// Only dots.
    OnlyDots,
}

impl Id {
    /// Checks `text` and keeps a copy of it.
    ///
    /// # Errors
    /// [`IdFault`] names the first thing that is not allowed.
    pub fn new(text: &str) -> Result<Id, IdFault> {
        check(text)?;
        Ok(Id(Arc::from(text)))
    }

    /// The id as text.
    #[must_use]
    pub fn as_str(&self) -> &str {
        &self.0
    }
}

/// Checks that `text` is an id without keeping it.
///
/// # Errors
/// [`IdFault`] names the first thing that is not allowed.
pub fn check(text: &str) -> Result<(), IdFault> {
    if text.is_empty() {
        return Err(IdFault::Empty);
    }
    if let Some((position, character)) = text
        .char_indices()
        .find(|(_, c)| !(c.is_ascii_alphanumeric() || matches!(c, '.' | '_' | '-')))
    {
        return Err(IdFault::Character {
            character,
            position,
        });
    }
    if text.len() > MAX_LENGTH {
        return Err(IdFault::TooLong { length: text.len() });
    }
    if text.bytes().all(|b| b == b'.') {
        return Err(IdFault::OnlyDots);
    }
    Ok(())
}

impl fmt::Display for Id {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.0)
    }
}

impl AsRef<str> for Id {
    fn as_ref(&self) -> &str {
        &self.0
    }
}

impl core::borrow::Borrow<str> for Id {
    fn borrow(&self) -> &str {
        &self.0
    }
}

impl core::str::FromStr for Id {
    type Err = IdFault;

    fn from_str(text: &str) -> Result<Id, IdFault> {
        Id::new(text)
    }
}

impl Serialize for Id {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.serialize_str(&self.0)
    }
}

impl<'de> Deserialize<'de> for Id {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Id, D::Error> {
        let text = String::deserialize(deserializer)?;
        Id::new(&text).map_err(serde::de::Error::custom)
    }
}

impl JsonSchema for Id {
    fn inline_schema() -> bool {
        true
    }

    fn schema_name() -> Cow<'static, str> {
        "Id".into()
    }

    fn json_schema(_: &mut SchemaGenerator) -> Schema {
        json_schema!({"type": "string", "pattern": "^[A-Za-z0-9._-]{1,64}$".to_owned()})
    }
}

impl fmt::Display for IdFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            IdFault::Empty => f.write_str("the id is empty; give 1 to 64 characters"),
            IdFault::TooLong { length } => write!(
                f,
                "the id has {length} characters; shorten it to 64 or fewer"
            ),
            IdFault::Character {
                character,
                position,
            } => {
                write!(
                    f,
                    "the id has {character:?} at position {position}; use only A-Z a-z 0-9 . _ -"
                )
            }
            IdFault::OnlyDots => f.write_str(
                "the id has only dots, which would name a folder; add a letter or digit",
            ),
        }
    }
}

impl core::error::Error for IdFault {}

#[cfg(test)]
mod tests {
    use alloc::string::ToString;

    use super::{Id, IdFault};

    #[test]
    fn sixty_four_characters_are_an_id_and_sixty_five_are_not() {
        assert_eq!(Id::new(&"a".repeat(64)).unwrap().as_str().len(), 64);
        assert_eq!(
            Id::new(&"a".repeat(65)),
            Err(IdFault::TooLong { length: 65 })
        );
    }

    #[test]
    fn characters_that_break_a_topic_or_a_path_are_refused_with_their_place() {
        for (text, character, position) in [
            ("a/b", '/', 1),
            ("+", '+', 0),
            ("ab#", '#', 2),
            ("a b", ' ', 1),
            ("pümp", 'ü', 1),
            ("a\0", '\0', 1),
        ] {
            assert_eq!(
                Id::new(text),
                Err(IdFault::Character {
                    character,
                    position
                }),
                "{text:?}"
            );
        }
    }

    #[test]
    fn an_id_of_dots_only_is_refused_and_one_dot_among_letters_is_not() {
        assert_eq!(Id::new("."), Err(IdFault::OnlyDots));
        assert_eq!(Id::new(".."), Err(IdFault::OnlyDots));
        assert_eq!(Id::new(""), Err(IdFault::Empty));
        assert_eq!(
            Id::new("P-103A.motor_de").unwrap().to_string(),
            "P-103A.motor_de"
        );
    }
}
