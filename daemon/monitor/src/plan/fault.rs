//! What is wrong with a specification: a closed list of codes, each fault naming its key.

use alloc::string::String;
use core::fmt;

/// What kind of fault it is; whoever shows faults gives each kind its stable text.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Code {
    /// A number or a size outside what is allowed.
    OutOfRange,
    /// Two keys that contradict each other.
    Contradiction,
    /// Something named that is not there.
    NotThere,
    /// The same name given twice.
    Twice,
    /// A resolution, rate or record length with which the answer cannot be had.
    CannotResolve,
    /// A limit below what the sensor's own noise reads.
    BelowNoise,
}

/// Which part of an asset a fault is about.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Part {
    /// What was being made itself: the point, watch, band or asset whose constructor told it.
    Own,
    /// The asset's point of this index.
    Point(usize),
    /// The band of the point: point index, band index.
    Band(usize, usize),
    /// The asset's watch of this index.
    Watch(usize),
}

/// One fault of a specification.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct PlanFault {
    /// Its kind.
    pub code: Code,
    /// Which part it is about.
    pub part: Part,
    /// The key it is about, as the specification's field is called in the configuration.
    pub key: &'static str,
    /// What was read.
    pub read: String,
    /// What is allowed, with its unit, or what would do instead.
    pub allowed: String,
}

impl fmt::Display for PlanFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "{}: read {}; allowed: {}",
            self.key, self.read, self.allowed
        )
    }
}
