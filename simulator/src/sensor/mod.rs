//! The sensor: what it makes of the acceleration at its foot.

use serde::Deserialize;

use crate::random::Draw;
use crate::scenario::{Point, Seconds};

/// Something wrong with a sensor.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(tag = "kind", rename_all = "kebab-case", deny_unknown_fields)]
pub enum SensorFault {
    /// The same code over and over.
    Flat {
        /// When it begins.
        at: Seconds,
        /// When it ends; never if not given.
        #[serde(default)]
        until: Option<Seconds>,
    },
}

impl SensorFault {
    /// Adds what does not fit.
    pub fn check(&self, _here: &str, _faults: &mut Vec<String>) {}
}

/// A sensor on its way: acceleration in m/s² in, what it sends in m/s² out, in place.
#[derive(Clone, Debug)]
pub struct Sensor {
    _draw: Draw,
}

impl Sensor {
    /// The sensor of `point`.
    #[must_use]
    pub fn new(_point: &Point, draw: &Draw) -> Sensor {
        Sensor {
            _draw: draw.part("sensor"),
        }
    }

    /// Turns the acceleration of samples at `first_s`, `first_s + step_s`, … into what the sensor gives.
    pub fn sense(&mut self, _first_s: f64, _step_s: f64, _samples: &mut [f64]) {}
}
