//! Lines to expect of a fault.

use serde::Serialize;

use crate::scenario::Asset;

/// Where a line is to be seen.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Seen {
    /// In the velocity spectrum.
    Velocity,
    /// In the spectrum of the squared envelope of a high band.
    Envelope,
    /// In the acceleration spectrum: a line or a mound.
    Acceleration,
}

/// One line to expect.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Expected {
    /// What it is, in the trade's words.
    pub line: String,
    /// Frequency at nominal speed, Hz.
    pub hz: f64,
    /// The same in orders of the shaft.
    pub order: f64,
    /// Where.
    pub seen: Seen,
    /// At full growth, nominal speed and rated load, before the path: mm/s rms, or m/s² for bursts; `None` where
    /// only its place is stated.
    pub level: Option<f64>,
}

impl Expected {
    /// A multiple of the shaft in the velocity spectrum, `level` mm/s rms.
    #[must_use]
    pub fn velocity(line: String, asset: &Asset, order: f64, level: f64) -> Expected {
        Expected {
            line,
            hz: order * asset.nominal_rpm() / 60.0,
            order,
            seen: Seen::Velocity,
            level: Some(level),
        }
    }
}
