//! A length of time in a scenario: text in, seconds out.

use core::fmt::{self, Display, Formatter};

use serde::de::{Error, Visitor};
use serde::{Deserialize, Deserializer};

/// Seconds; in TOML a text such as `"90s"`, `"1.5h"` or `"2min 30s"`, not negative.
#[derive(Clone, Copy, Debug, PartialEq, PartialOrd, Default)]
pub struct Seconds(pub f64);

impl Seconds {
    /// Reads a text such as `90s`.
    ///
    /// # Errors
    /// What it is not, with an example of what it can be.
    pub fn parse(text: &str) -> Result<Seconds, String> {
        let wrong = |why: &str| wrong(&format!("{text:?}"), why);
        let span: jiff::SignedDuration =
            text.parse().map_err(|_| wrong("no number with a unit"))?;
        if span.is_negative() {
            return Err(wrong("it is negative"));
        }
        Ok(Seconds(span.as_secs_f64()))
    }
}

impl<'de> Deserialize<'de> for Seconds {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Seconds, D::Error> {
        deserializer.deserialize_any(Text)
    }
}

fn wrong(what: &str, why: &str) -> String {
    format!("{what} is not a length of time: {why}; write it like \"90s\", \"10min\" or \"2h\"")
}

/// Takes a text; tells a bare number what it lacks.
struct Text;

fn bare<E: Error>(number: impl Display) -> Result<Seconds, E> {
    let why = "a number needs a unit and quotes";
    Err(E::custom(wrong(&number.to_string(), why)))
}

impl Visitor<'_> for Text {
    type Value = Seconds;

    fn expecting(&self, formatter: &mut Formatter<'_>) -> fmt::Result {
        formatter.write_str("a length of time like \"90s\", \"10min\" or \"2h\"")
    }

    fn visit_str<E: Error>(self, text: &str) -> Result<Seconds, E> {
        Seconds::parse(text).map_err(E::custom)
    }

    fn visit_i64<E: Error>(self, number: i64) -> Result<Seconds, E> {
        bare(number)
    }

    fn visit_u64<E: Error>(self, number: u64) -> Result<Seconds, E> {
        bare(number)
    }

    fn visit_f64<E: Error>(self, number: f64) -> Result<Seconds, E> {
        bare(number)
    }
}
