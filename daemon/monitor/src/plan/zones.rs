//! Severity zones A to D of ISO 10816 and 20816, read from tables that carry their source.

use alloc::{format, string::String, vec::Vec};

use super::fault::{Code, Part, PlanFault};

/// A severity zone. A: newly commissioned; B: fit for long running; C: for a limited time; D: severe
/// enough to damage (ISO 10816-1, 5.3.1, from memory).
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Zone {
    /// As newly commissioned.
    A,
    /// Fit for unrestricted long running.
    B,
    /// Only for a limited time, until a remedy.
    C,
    /// Severe enough to damage.
    D,
}

impl Zone {
    /// Its letter.
    pub const fn letter(self) -> &'static str {
        match self {
            Self::A => "A",
            Self::B => "B",
            Self::C => "C",
            Self::D => "D",
        }
    }
}

/// The three borders of one class of one table, mm/s rms.
#[derive(Debug, Clone, PartialEq)]
pub struct ZoneLimits {
    class: String,
    source: String,
    borders: [f64; 3],
}

impl ZoneLimits {
    /// Checks and keeps the borders A/B, B/C, C/D in mm/s rms, with the class's name and the table's source.
    ///
    /// # Errors
    /// Borders that are not finite, above zero and rising; an empty source.
    pub fn new(class: &str, source: &str, borders: [f64; 3]) -> Result<Self, Vec<PlanFault>> {
        let mut faults = Vec::new();
        let [ab, bc, cd] = borders;
        if !(ab > 0.0 && bc > ab && cd > bc && cd.is_finite()) {
            faults.push(PlanFault {
                code: Code::OutOfRange,
                part: Part::Own,
                key: "borders",
                read: format!("{ab}, {bc}, {cd}"),
                allowed: "three rising numbers above 0, mm/s rms".into(),
            });
        }
        if source.trim().is_empty() {
            faults.push(PlanFault {
                code: Code::NotThere,
                part: Part::Own,
                key: "source",
                read: "nothing".into(),
                allowed: "where the table comes from".into(),
            });
        }
        if faults.is_empty() {
            Ok(Self {
                class: class.into(),
                source: source.into(),
                borders,
            })
        } else {
            Err(faults)
        }
    }

    /// The class's name in its table.
    pub fn class(&self) -> &str {
        &self.class
    }

    /// Where the table comes from.
    pub fn source(&self) -> &str {
        &self.source
    }

    /// Borders A/B, B/C, C/D, mm/s rms.
    pub const fn borders(&self) -> [f64; 3] {
        self.borders
    }

    /// The zone a velocity in mm/s rms lies in; a value on a border is still in the better zone.
    pub fn zone(&self, velocity_rms: f64) -> Zone {
        let [ab, bc, cd] = self.borders;
        match velocity_rms {
            v if v <= ab => Zone::A,
            v if v <= bc => Zone::B,
            v if v <= cd => Zone::C,
            _ => Zone::D,
        }
    }
}
