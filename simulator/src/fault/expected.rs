//! Lines to expect of a fault.

use serde::Serialize;

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
