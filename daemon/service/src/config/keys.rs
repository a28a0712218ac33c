//! What a key table is made of: the one declaration of every key that the reader, the messages and the docs share.
//!
//! A [`Key`] states its kind with range and unit, whether it must be given, and its default as TOML
//! text. `verify` checks values against it, `view` reads them and falls back to the declared
//! default, so no default stands anywhere else. The tables themselves are in `tables`.

use std::fmt;

/// One table of the configuration.
#[derive(Debug)]
pub(crate) struct KeyTable {
    /// Its keys, in the order of a person's head.
    pub(crate) keys: &'static [Key],
}

/// One key.
#[derive(Debug)]
pub(crate) struct Key {
    /// Its name, snake_case.
    pub(crate) name: &'static str,
    /// What it takes.
    pub(crate) kind: Kind,
    /// Whether it must be given.
    pub(crate) need: Need,
    /// What it is for, one sentence.
    pub(crate) about: &'static str,
}

/// Whether a key must be given.
#[derive(Debug, Clone, Copy)]
pub(crate) enum Need {
    /// It must.
    Required,
    /// It need not; this TOML value stands for it.
    Default(&'static str),
    /// It need not; what stands for it depends on other keys, as told.
    Optional(&'static str),
}

/// What a key takes.
#[derive(Debug, Clone, Copy)]
pub(crate) enum Kind {
    /// An id: 1 to 64 of `A-Z a-z 0-9 . _ -`.
    Id,
    /// Any text of at least one and at most this many characters.
    Text(usize),
    /// A file, relative to the folder of the configuration file.
    File,
    /// An MQTT topic to subscribe to.
    Topic,
    /// `true` or `false`.
    Bool,
    /// A whole number in this range.
    Whole(Range),
    /// A number in this range.
    Number(Range),
    /// A text: whole number and unit, in this range of seconds.
    Span(i64, i64),
    /// A text: a time, a count of readings, or M of N.
    Persistence,
    /// One of these words.
    Word(&'static [&'static str]),
    /// Two rising numbers in this range.
    Pair(Range),
    /// Three rising numbers in this range.
    Three(Range),
    /// A list of ids.
    Ids,
    /// A list of these words.
    Words(&'static [&'static str]),
    /// The name of a measure.
    Measure,
    /// A JSON pointer, RFC 6901.
    Pointer,
    /// A table.
    Table(&'static KeyTable),
    /// An array of tables.
    Tables(&'static KeyTable),
    /// A plain value, or a table instead.
    Or(&'static Kind, &'static KeyTable),
}

/// A range of numbers with its unit.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Range {
    /// The lowest number.
    pub(crate) least: f64,
    /// Whether the lowest number itself is outside.
    pub(crate) open: bool,
    /// The highest number.
    pub(crate) most: f64,
    /// The unit; empty for a pure number.
    pub(crate) unit: &'static str,
}

impl Range {
    /// From `least` to `most`, both allowed.
    pub(crate) const fn new(least: f64, most: f64, unit: &'static str) -> Self {
        Self {
            least,
            open: false,
            most,
            unit,
        }
    }

    /// Above 0 up to `most`.
    pub(crate) const fn above_zero(most: f64, unit: &'static str) -> Self {
        Self {
            least: 0.0,
            open: true,
            most,
            unit,
        }
    }

    /// Whether a number lies in it; not-a-number never does.
    pub(crate) fn holds(&self, value: f64) -> bool {
        value <= self.most
            && if self.open {
                value > self.least
            } else {
                value >= self.least
            }
    }
}

impl fmt::Display for Range {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Self {
            least,
            open,
            most,
            unit,
        } = self;
        if *open {
            write!(f, "above {least} up to {most}")?
        } else {
            write!(f, "{least} to {most}")?
        }
        if unit.is_empty() {
            Ok(())
        } else {
            write!(f, " {unit}")
        }
    }
}

impl Kind {
    /// The keys of the table or tables it takes.
    pub(crate) const fn below(&self) -> Option<&'static KeyTable> {
        if let Self::Table(below) | Self::Tables(below) | Self::Or(_, below) = self {
            Some(below)
        } else {
            None
        }
    }
}

impl KeyTable {
    /// The key of this name.
    pub(crate) fn find(&self, name: &str) -> Option<&'static Key> {
        self.keys.iter().find(|key| key.name == name)
    }
}

impl fmt::Display for Kind {
    /// What is allowed, as it stands in a fault.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Id => f.write_str("an id: 1 to 64 of A-Z a-z 0-9 . _ - in quotes, not only dots"),
            Self::Text(most) => write!(f, "a text in quotes, 1 to {most} characters"),
            Self::File => f.write_str("the path of a file, in quotes"),
            Self::Topic => f.write_str("an MQTT topic in quotes, without + and #"),
            Self::Bool => f.write_str("true or false, without quotes"),
            Self::Whole(range) => write!(f, "a whole number, {range}"),
            Self::Number(range) => write!(f, "a number, {range}"),
            Self::Span(least, most) => {
                write!(f, "a time such as \"30s\" (ms, s, min, h or d), {} to {}", span_text(*least), span_text(*most))
            }
            Self::Persistence => {
                f.write_str("a time such as \"30s\" up to \"30d\", a count such as \"3 readings\", or \"3 of 5\"")
            }
            Self::Word(words) => f.write_str(&quoted(words)),
            Self::Pair(range) => write!(f, "two rising numbers in brackets, {range}"),
            Self::Three(range) => write!(f, "three rising numbers in brackets, {range}"),
            Self::Ids => f.write_str("a list of ids, such as [\"P-103A\", \"P-103B\"]"),
            Self::Words(words) => write!(f, "a list of {}", quoted(words)),
            Self::Measure => f.write_str(
                "one of \"velocity_rms\", \"velocity_peak\", \"acceleration_rms\", \"acceleration_peak\", \"crest\", \
                 \"kurtosis\", \"high_band_rms\", \"band.<name>\", \"bearing.outer\", \"bearing.inner\", \
                 \"bearing.element\", \"bearing.cage\", \"bearing.any\"",
            ),
            Self::Pointer => f.write_str("a JSON pointer (RFC 6901) such as \"/data/values\""),
            Self::Table(_) => f.write_str("a table"),
            Self::Tables(_) => f.write_str("tables, each begun with double brackets"),
            Self::Or(kind, _) => write!(f, "{kind}, or a table"),
        }
    }
}

fn quoted(words: &[&str]) -> String {
    let quoted: Vec<String> = words.iter().map(|word| format!("{word:?}")).collect();
    quoted.join(" or ")
}

/// Every key of a table and of those below it, a line or two each; `path` is the key it stands under.
pub(crate) fn describe(table: &'static KeyTable, path: &str, out: &mut String) {
    for key in table.keys {
        let path = if path.is_empty() {
            key.name.to_owned()
        } else {
            format!("{path}.{}", key.name)
        };
        let need = match key.need {
            Need::Required => "required".to_owned(),
            Need::Default(text) => format!("default {text}"),
            Need::Optional(text) => format!("without it: {text}"),
        };
        out.push_str(&format!(
            "{path}\n    {}\n    {}; {need}\n",
            key.about, key.kind
        ));
        if let Some(below) = key.kind.below() {
            describe(below, &path, out);
        }
    }
}

/// Seconds with the largest unit that leaves a whole number.
pub(crate) fn span_text(seconds: i64) -> String {
    for (unit, length) in [("d", 86_400), ("h", 3600), ("min", 60)] {
        if seconds >= length && seconds % length == 0 {
            return format!("{}{unit}", seconds / length);
        }
    }
    format!("{seconds}s")
}

#[cfg(test)]
mod tests {
    use super::{Range, span_text};

    #[test]
    fn an_open_range_leaves_its_lowest_number_out() {
        let range = Range::above_zero(10.0, "Hz");
        assert!(!range.holds(0.0) && range.holds(1e-9) && range.holds(10.0) && !range.holds(10.1));
        assert!(!range.holds(f64::NAN) && !range.holds(f64::INFINITY));
        assert_eq!(range.to_string(), "above 0 up to 10 Hz");
        assert!(Range::new(0.0, 1.0, "").holds(0.0));
    }

    #[test]
    fn spans_are_told_in_their_largest_whole_unit() {
        let told: Vec<String> = [1, 60, 90, 3600, 2_592_000]
            .into_iter()
            .map(span_text)
            .collect();
        assert_eq!(told, ["1s", "1min", "90s", "1h", "30d"]);
    }
}
