//! A sensor that drifts: its offset steps or ramps away, its noise grows.
//!
//! Both go evenly from what the point has to what is stated, within `over` after `at`, and back to it at `until`.
//! The bias voltage of a block follows the offset by 0.1 V/g, the usual sensitivity of a piezo sensor with built-in
//! amplifier, or goes to `volts` if that is stated: an open cable shows the supply, a short 0 V (from memory).

use serde::Deserialize;

use crate::scenario::{Seconds, Window};

/// Volts of bias per g of offset.
pub(super) const VOLTS_PER_G: f64 = 0.1;

/// An offset that moves.
#[derive(Clone, Copy, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Drift {
    /// When it begins.
    pub at: Seconds,
    /// When it is gone again; never if not given.
    #[serde(default)]
    pub until: Option<Seconds>,
    /// How long it takes; a step if not given.
    #[serde(default)]
    pub over: Seconds,
    /// By how much in the end, g.
    pub by_g: f64,
    /// The bias voltage in the end, V.
    #[serde(default)]
    pub volts: Option<f64>,
}

impl Drift {
    fn progress(&self, at_s: f64) -> f64 {
        Window::new(self.at, self.until).progress(at_s, self.over)
    }

    /// What it adds to the offset, g.
    pub(super) fn offset_g(&self, at_s: f64) -> f64 {
        self.by_g * self.progress(at_s)
    }

    /// What it adds to a bias voltage that is `usual` without it, V.
    pub(super) fn volts(&self, at_s: f64, usual: f64) -> f64 {
        match self.volts {
            Some(volts) => (volts - usual) * self.progress(at_s),
            None => self.offset_g(at_s) * VOLTS_PER_G,
        }
    }
}

/// Noise that grows.
#[derive(Clone, Copy, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Noisier {
    /// When it begins.
    pub at: Seconds,
    /// When it is as before; never if not given.
    #[serde(default)]
    pub until: Option<Seconds>,
    /// How long it takes; at once if not given.
    #[serde(default)]
    pub over: Seconds,
    /// Density in the end, µg per square root of Hz.
    pub to_ug_rthz: f64,
}

impl Noisier {
    /// What it adds to a density that is `usual` without it.
    pub(super) fn more_ug_rthz(&self, at_s: f64, usual: f64) -> f64 {
        (self.to_ug_rthz - usual) * Window::new(self.at, self.until).progress(at_s, self.over)
    }
}
