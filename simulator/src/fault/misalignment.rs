//! Misalignment of the coupling: 2x with 1x and 3x, more of it along the shaft.
//!
//! Severity: velocity of the added 2x, mm/s rms. 1x is 0.5-0.9 and 3x 0.2-0.4 of it; an axis drawn to be axial has
//! 0.5-1 of what the radial ones have at 1x and all of the 2x. 2x above half of 1x is suspicious (common practice, no
//! source); the forces are tied to the geometry, so velocity goes with speed.

use core::f64::consts::{SQRT_2, TAU};

use serde::Deserialize;

use super::{Expected, Kind, Seat};
use crate::random::Draw;
use crate::scenario::Asset;
use crate::wave::{Growth, Law, Line, Lines, Pitch, Sway, Wave};

/// Shafts that do not meet.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Misalignment {
    /// mm/s rms of the added 2x at nominal speed.
    pub growth: Growth,
}

/// 1x and 3x as shares of 2x: the fault's own draw.
fn shares(draw: &Draw) -> [(f64, f64); 3] {
    let mut draw = draw.part("shares");
    [
        (1.0, draw.between(0.5, 0.9)),
        (2.0, 1.0),
        (3.0, draw.between(0.2, 0.4)),
    ]
}

impl Kind for Misalignment {
    fn growth(&self) -> &Growth {
        &self.growth
    }

    fn point(&self) -> Option<&str> {
        None
    }

    fn waves(&self, seat: &Seat<'_>) -> Vec<Box<dyn Wave>> {
        let mut local = seat.local.clone();
        let axial = if local.happens(0.33) {
            local.between(0.5, 1.0)
        } else {
            1.0
        };
        let mut draw = seat.draw.clone();
        let lines = shares(&seat.draw)
            .into_iter()
            .map(|(order, share)| Line {
                pitch: Pitch::order(order),
                peak_ms2: SQRT_2 * TAU * order * seat.asset.nominal_rpm() / 60.0
                    * 1e-3
                    * share
                    * if order == 1.0 { axial } else { 1.0 },
                phase: draw.angle(),
                law: Law::growing(self.growth, 2.0),
                sway: Sway::drawn(&mut local),
            })
            .collect();
        vec![Box::new(Lines::new(lines, seat.path.clone()))]
    }

    fn expected(&self, asset: &Asset, _: f64, draw: &Draw) -> Vec<Expected> {
        shares(draw)
            .into_iter()
            .map(|(order, share)| {
                Expected::velocity(format!("{order}x"), asset, order, self.growth.to * share)
            })
            .collect()
    }

    fn severity(&self) -> &'static str {
        "mm/s rms of the added 2x"
    }

    fn check(&self, asset: &Asset, faults: &mut Vec<String>) {
        super::check_growth("misalignment", asset, &self.growth, 0.0, 100.0, faults);
    }
}
