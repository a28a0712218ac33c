//! A length of time in a scenario: text in, seconds out.

use serde::{Deserialize, Deserializer, de::Error};

/// Seconds; in TOML a text such as `"90s"`, `"1.5h"` or `"2min 30s"`, not negative.
#[derive(Clone, Copy, Debug, PartialEq, PartialOrd, Default)]
pub struct Seconds(pub f64);

impl Seconds {
    /// Reads a text such as `90s`.
    ///
    /// # Errors
    /// What it is not, with an example of what it can be.
    pub fn parse(text: &str) -> Result<Seconds, String> {
        let wrong = |why: &str| {
            format!(
                "{text:?} is not a length of time: {why}; write it like \"90s\", \"10min\" or \"2h\""
            )
        };
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
        Seconds::parse(&String::deserialize(deserializer)?).map_err(D::Error::custom)
    }
}
