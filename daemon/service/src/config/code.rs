//! What kinds of configuration fault there are: a closed list of stable codes, each explained.
//!
//! People search for a code and scripts match on it, so a text never changes its meaning.
//! `humward check --explain CODE` prints the explanation.

use humward_monitor::plan;

/// One kind of configuration fault.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Code {
    /// A file or folder cannot be read.
    Unreadable,
    /// A file is not TOML.
    Syntax,
    /// A key that does not exist.
    UnknownKey,
    /// An environment variable that names no key.
    UnknownVariable,
    /// A key that has to be given is not.
    MissingKey,
    /// A value of another type than the key takes.
    WrongType,
    /// A text that has not the form the key takes.
    WrongForm,
    /// A number or size outside what is allowed.
    OutOfRange,
    /// The same thing given twice.
    Twice,
    /// Two keys that contradict each other.
    Contradiction,
    /// Something named that is not there.
    NotThere,
    /// A topic that cannot be used.
    Topic,
    /// A resolution, rate or record length with which the answer cannot be had.
    CannotResolve,
    /// A limit below what the sensor's own noise reads.
    BelowNoise,
}

impl Code {
    /// Every code, once.
    pub const ALL: [Self; 14] = [
        Self::Unreadable,
        Self::Syntax,
        Self::UnknownKey,
        Self::UnknownVariable,
        Self::MissingKey,
        Self::WrongType,
        Self::WrongForm,
        Self::OutOfRange,
        Self::Twice,
        Self::Contradiction,
        Self::NotThere,
        Self::Topic,
        Self::CannotResolve,
        Self::BelowNoise,
    ];

    /// The stable text.
    pub const fn text(self) -> &'static str {
        match self {
            Self::Unreadable => "cfg-unreadable",
            Self::Syntax => "cfg-syntax",
            Self::UnknownKey => "cfg-unknown-key",
            Self::UnknownVariable => "cfg-unknown-variable",
            Self::MissingKey => "cfg-missing-key",
            Self::WrongType => "cfg-wrong-type",
            Self::WrongForm => "cfg-wrong-form",
            Self::OutOfRange => "cfg-out-of-range",
            Self::Twice => "cfg-twice",
            Self::Contradiction => "cfg-contradiction",
            Self::NotThere => "cfg-not-there",
            Self::Topic => "cfg-topic",
            Self::CannotResolve => "cfg-cannot-resolve",
            Self::BelowNoise => "cfg-below-noise",
        }
    }

    /// The code of this text.
    pub fn find(text: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|code| code.text() == text)
    }

    /// What the code means and what to do, in a few sentences.
    pub const fn explanation(self) -> &'static str {
        match self {
            Self::Unreadable => {
                "A file or folder named in the configuration or on the command line cannot be read: it is not there, \
                 may not be read by this user, is not UTF-8, or the folder holds no file ending in .toml. Nothing \
                 falls back to defaults. Correct the path or the permissions."
            }
            Self::Syntax => {
                "The file is not valid TOML at the line and column told. Common causes: a missing quote, a missing \
                 bracket, a key given twice in one table. The other files were still checked, except for what may \
                 depend on this one."
            }
            Self::UnknownKey => {
                "The key does not exist in its table. Nothing is ignored, because a misspelt limit would be a limit \
                 that never rings. The nearest known key is suggested; otherwise compare with config/example.toml."
            }
            Self::UnknownVariable => {
                "An environment variable beginning with HUMWARD_ names no key that may be set from the environment. \
                 Only single values of the top level, `gateway` and `broker` may: HUMWARD_SITE, HUMWARD_BROKER__HOST \
                 (two underscores between table and key). Correct it or unset it."
            }
            Self::MissingKey => {
                "The key has no default and must be given in the table that begins at the line told."
            }
            Self::WrongType => {
                "The value has another TOML type than the key takes. Numbers are written without quotes, texts and \
                 times with them; no value is converted silently."
            }
            Self::WrongForm => {
                "The text is not of the form the key takes. Ids are 1 to 64 letters, digits, dots, dashes and \
                 underscores; times are a whole number and a unit such as \"30s\"; persistence is a time, a count \
                 such as \"3 readings\", or \"3 of 5\"."
            }
            Self::OutOfRange => {
                "The number or size lies outside what is allowed; the allowed range is told with its unit."
            }
            Self::Twice => {
                "The same thing is given twice: a value in two files, two assets or points of one id, two watches of \
                 one name at the same point, or two sources on one topic. Remove or rename one of the two."
            }
            Self::Contradiction => {
                "Two keys cannot hold together, such as a danger limit that is not above the alert limit, or a raw \
                 layout and a JSON map on one source. Change one of the two."
            }
            Self::NotThere => {
                "Something is named that does not exist: an asset, a point, a band, a zone class, a bearing where \
                 none is given. A watch that would watch nothing is a fault too: silence must not be mistaken for \
                 health."
            }
            Self::Topic => {
                "The topic cannot be used for incoming values: it is not a valid MQTT topic, holds a wildcard, is one \
                 on which humward itself publishes, or is a command topic."
            }
            Self::CannotResolve => {
                "With this frame, rate, speed or reading length the answer asked for cannot be had: a bearing line \
                 closer to 0 Hz than four spectral lines, a band beyond half the sample rate, a reading shorter than \
                 one frame. The text says what would do."
            }
            Self::BelowNoise => {
                "The limit is less than three times what the sensor's own noise reads in that band, so it would ring \
                 for the sensor and not for the machine. Raise the limit, narrow the band or fit a quieter sensor."
            }
        }
    }
}

impl From<plan::Code> for Code {
    fn from(code: plan::Code) -> Self {
        match code {
            plan::Code::OutOfRange => Self::OutOfRange,
            plan::Code::Contradiction => Self::Contradiction,
            plan::Code::NotThere => Self::NotThere,
            plan::Code::Twice => Self::Twice,
            plan::Code::CannotResolve => Self::CannotResolve,
            plan::Code::BelowNoise => Self::BelowNoise,
        }
    }
}

#[cfg(test)]
mod tests {
    use std::collections::BTreeSet;

    use super::Code;

    #[test]
    fn every_code_is_listed_once_and_found_by_its_text() {
        let texts: BTreeSet<&str> = Code::ALL.into_iter().map(Code::text).collect();
        assert_eq!(texts.len(), Code::ALL.len());
        for code in Code::ALL {
            assert!(code.text().starts_with("cfg-"), "{}", code.text());
            assert_eq!(Code::find(code.text()), Some(code));
            assert!(
                code.explanation().ends_with('.') && code.explanation().len() > 60,
                "{}",
                code.text()
            );
        }
        assert_eq!(Code::find("cfg-"), None);
    }
}
