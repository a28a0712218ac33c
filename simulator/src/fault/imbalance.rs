//! Imbalance: a force at the shaft's speed that goes with its square, F = m e omega² (ISO 21940-11, from memory).
//!
//! Severity: velocity of the added 1x at nominal speed, mm/s rms. The radial axis across has it a quarter turn
//! later; which axis a point is is drawn.

use core::f64::consts::{FRAC_PI_2, SQRT_2, TAU};

use serde::Deserialize;

use super::{Expected, Kind, Seat, Seen};
use crate::random::Draw;
use crate::scenario::Asset;
use crate::wave::{Growth, Law, Line, Lines, Pitch, Sway, Wave};

/// Imbalance of the rotor.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Imbalance {
    /// mm/s rms of the added 1x at nominal speed.
    pub growth: Growth,
}

impl Kind for Imbalance {
    fn growth(&self) -> &Growth {
        &self.growth
    }

    fn point(&self) -> Option<&str> {
        None
    }

    fn waves(&self, seat: &Seat<'_>) -> Vec<Box<dyn Wave>> {
        let mut draw = seat.draw.clone();
        let mut local = seat.local.clone();
        let across = if local.happens(0.5) { FRAC_PI_2 } else { 0.0 };
        let line = Line {
            pitch: Pitch::order(1.0),
            peak_ms2: SQRT_2 * TAU * seat.asset.nominal_rpm() / 60.0 * 1e-3,
            phase: draw.angle() - across,
            law: Law::growing(self.growth, 2.0),
            sway: Sway::drawn(&mut local),
        };
        vec![Box::new(Lines::new(vec![line], seat.path.clone()))]
    }

    fn expected(&self, asset: &Asset, _: f64, _: &Draw) -> Vec<Expected> {
        vec![Expected {
            line: "1x".to_owned(),
            hz: asset.nominal_rpm() / 60.0,
            order: 1.0,
            seen: Seen::Velocity,
            level: Some(self.growth.to),
        }]
    }

    fn severity(&self) -> &'static str {
        "mm/s rms of the added 1x"
    }

    fn check(&self, asset: &Asset, faults: &mut Vec<String>) {
        super::check_growth("imbalance", asset, &self.growth, 0.0, 100.0, faults);
    }
}
