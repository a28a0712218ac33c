//! The sensor: what it makes of the acceleration at its foot.
//!
//! In: acceleration, m/s², in place. Out: what it sends, m/s². The way of a sample, in this order:
//!
//! 1. fallen off, if it is ([`fallen`]);
//! 2. own resonance: a damped mode with gain 1 at 0 Hz and 1 / (2 zeta) at its frequency;
//! 3. white noise of density n: sigma = n sqrt(rate / 2) (one-sided density, from memory);
//! 4. offset with its drift ([`drift`]); dead, if it is: noise alone;
//! 5. cable ([`cable`]);
//! 6. held within ± range; 16-bit samples are counted in steps of range / 32768 (2 x 16 g / 2^16 = 0.488 mg), so
//!    that their positive rail is one step lower;
//! 7. flat, if it is: the last sample over and over.
//!
//! Noise densities: MEMS 25-100, piezo 5-20 µg/√Hz (from memory). Checked by `tests/sensor.rs` against closed form.

mod cable;
mod chain;
mod drift;
mod fallen;

pub use cable::Cable;
pub use chain::Sensor;
pub use drift::{Drift, Noisier};

use core::fmt;

use serde::Deserialize;

use crate::scenario::{Seconds, Window, within};

/// Something wrong with a sensor.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(tag = "kind", rename_all = "kebab-case")]
pub enum SensorFault {
    /// The same code over and over.
    Flat(Span),
    /// No signal, no offset: its noise alone; its bias voltage is 0.
    Dead(Span),
    /// It hangs on its cable or lies beside the machine.
    FallenOff(Span),
    /// Its cable has contact only now and then.
    Cable(Cable),
    /// Its offset moves.
    Bias(Drift),
    /// It grows noisier.
    Noise(Noisier),
}

/// From when until when.
#[derive(Clone, Copy, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Span {
    /// When it begins.
    pub at: Seconds,
    /// When it ends; never if not given.
    #[serde(default)]
    pub until: Option<Seconds>,
}

impl fmt::Display for SensorFault {
    /// What it is and when, in one clause.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.name())?;
        match self {
            SensorFault::Flat(_) | SensorFault::Dead(_) | SensorFault::FallenOff(_) => {}
            SensorFault::Cable(cable) => write!(f, " {} times a minute", cable.per_minute)?,
            SensorFault::Bias(drift) => {
                write!(f, " off by {} g within {} s", drift.by_g, drift.over.0)?;
            }
            SensorFault::Noise(noisier) => write!(
                f,
                " to {} ug/rtHz within {} s",
                noisier.to_ug_rthz, noisier.over.0
            )?,
        }
        write!(f, ", {}", self.window())
    }
}

impl SensorFault {
    /// What people call it.
    #[must_use]
    pub fn name(&self) -> &'static str {
        match self {
            SensorFault::Flat(_) => "flat",
            SensorFault::Dead(_) => "dead",
            SensorFault::FallenOff(_) => "fallen off",
            SensorFault::Cable(_) => "cable",
            SensorFault::Bias(_) => "bias",
            SensorFault::Noise(_) => "noise",
        }
    }

    /// When it is there.
    #[must_use]
    pub fn window(&self) -> Window {
        let (at, until) = match self {
            SensorFault::Flat(span) | SensorFault::Dead(span) | SensorFault::FallenOff(span) => {
                (span.at, span.until)
            }
            SensorFault::Cable(cable) => (cable.at, cable.until),
            SensorFault::Bias(drift) => (drift.at, drift.until),
            SensorFault::Noise(noisier) => (noisier.at, noisier.until),
        };
        Window::new(at, until)
    }

    /// Adds what does not fit.
    pub fn check(&self, here: &str, faults: &mut Vec<String>) {
        let here = format!("{here}: sensor {}", self.name());
        self.window().check(&here, faults);
        let mut number = |key: &str, value: f64, low: f64, high: f64, unit: &str| {
            within(faults, &format!("{here}: {key}"), value, low, high, unit);
        };
        match self {
            SensorFault::Flat(_) | SensorFault::Dead(_) | SensorFault::FallenOff(_) => {}
            SensorFault::Cable(cable) => {
                number("per_minute", cable.per_minute, 0.01, 600.0, "per minute");
            }
            SensorFault::Bias(drift) => {
                number("by_g", drift.by_g, -2000.0, 2000.0, "g");
                number("volts", drift.volts.unwrap_or(0.0), -50.0, 50.0, "V");
            }
            SensorFault::Noise(noisier) => {
                number("to_ug_rthz", noisier.to_ug_rthz, 0.0, 1e6, "ug/rtHz");
            }
        }
    }
}
