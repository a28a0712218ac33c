//! One fault of a configuration, and all faults of one run.
//!
//! Each says where (file, line, column), which key, what was read, what is allowed and its stable
//! code, so that the person at the box can mend it without a manual.

use std::fmt;

use super::{Code, source::Told};

/// One fault.
#[derive(Debug, Clone, PartialEq, Eq, PartialOrd, Ord)]
pub struct Fault {
    /// Where it stands.
    pub place: Told,
    /// Its kind.
    pub code: Code,
    /// The key, from the top: `asset.P-103A.point.drive-end.frame`; empty when it is about a whole file.
    pub key: String,
    /// What was read.
    pub read: String,
    /// What is allowed, with its unit, or what to do.
    pub allowed: String,
}

impl fmt::Display for Fault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}:", self.place)?;
        if !self.key.is_empty() {
            write!(f, " {}", self.key)?;
        }
        write!(
            f,
            "\n    read:    {}\n    allowed: {}\n    code:    {}",
            self.read,
            self.allowed,
            self.code.text()
        )
    }
}

/// All faults of one run, in the order of their places; never empty.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub struct Faults {
    faults: Vec<Fault>,
}

impl Faults {
    /// The faults in the order of their places, `None` when there are none.
    pub(crate) fn of(mut faults: Vec<Fault>) -> Option<Self> {
        faults.sort();
        faults.dedup();
        (!faults.is_empty()).then_some(Self { faults })
    }

    /// This fault alone.
    pub(crate) fn one(fault: Fault) -> Self {
        Self {
            faults: vec![fault],
        }
    }

    /// The faults in the order of their places.
    pub fn list(&self) -> &[Fault] {
        &self.faults
    }
}

impl fmt::Display for Faults {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for fault in &self.faults {
            writeln!(f, "{fault}")?;
        }
        let count = self.faults.len();
        let plural = if count == 1 { "fault" } else { "faults" };
        write!(
            f,
            "{count} {plural}; `humward check --explain CODE` says more about a code"
        )
    }
}
