//! Vane pass grown strong: A cos(2 pi Z f t) (1 + m cos 2 pi f t), so sidebands of m / 2 one shaft away.
//!
//! Severity: velocity of the added vane-pass line, mm/s rms. m is 0.1-0.5; the double is 0.2-0.4 of it. Grows off the
//! best point.

use core::f64::consts::{SQRT_2, TAU};

use serde::Deserialize;

use super::{Expected, Kind, Seat};
use crate::random::Draw;
use crate::scenario::Asset;
use crate::wave::{Growth, Law, Line, Lines, LoadLaw, Pitch, Sway, Wave};

/// An impeller whose vanes are heard.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct VanePass {
    /// mm/s rms of the added vane-pass line at nominal speed and rated load.
    pub growth: Growth,
    /// Depth m of the modulation by the shaft; drawn if not given.
    #[serde(default)]
    pub depth: Option<f64>,
}

impl VanePass {
    /// Name, order and acceleration as a share of the carrier's.
    fn lines(&self, vanes: f64, draw: &Draw) -> [(&'static str, f64, f64); 4] {
        let mut draw = draw.part("shares");
        let drawn = draw.between(0.1, 0.5);
        let depth = self.depth.unwrap_or(drawn);
        [
            ("vane pass", vanes, 1.0),
            ("vane pass - 1x", vanes - 1.0, depth / 2.0),
            ("vane pass + 1x", vanes + 1.0, depth / 2.0),
            ("2 x vane pass", 2.0 * vanes, 2.0 * draw.between(0.2, 0.4)),
        ]
    }
}

impl Kind for VanePass {
    fn growth(&self) -> &Growth {
        &self.growth
    }

    fn point(&self) -> Option<&str> {
        None
    }

    fn waves(&self, seat: &Seat<'_>) -> Vec<Box<dyn Wave>> {
        let mut local = seat.local.clone();
        let vanes = f64::from(seat.asset.vanes);
        let carrier = SQRT_2 * TAU * vanes * seat.asset.nominal_rpm() / 60.0 * 1e-3;
        let mut draw = seat.draw.clone();
        let (carried, turn) = (draw.angle(), draw.angle());
        let sway = Sway::drawn(&mut local);
        let law = Law {
            load: LoadLaw::OffBest { gain: 1.5 },
            ..Law::growing(self.growth, 2.0)
        };
        let lines = self
            .lines(vanes, &seat.draw)
            .into_iter()
            .map(|(_, order, share)| Line {
                pitch: Pitch::order(order),
                peak_ms2: carrier * share,
                phase: if order > vanes + 1.0 {
                    2.0 * carried
                } else {
                    carried + (order - vanes) * turn
                },
                law,
                sway,
            })
            .collect();
        vec![Box::new(Lines::new(lines, seat.path.clone()))]
    }

    fn expected(&self, asset: &Asset, _: f64, draw: &Draw) -> Vec<Expected> {
        let vanes = f64::from(asset.vanes);
        self.lines(vanes, draw)
            .into_iter()
            .map(|(name, order, share)| {
                Expected::velocity(
                    name.to_owned(),
                    asset,
                    order,
                    self.growth.to * share * vanes / order,
                )
            })
            .collect()
    }

    fn severity(&self) -> &'static str {
        "mm/s rms of the added vane-pass line"
    }

    fn check(&self, asset: &Asset, faults: &mut Vec<String>) {
        super::check_growth("vane-pass", asset, &self.growth, 0.0, 100.0, faults);
        if let Some(depth) = self.depth {
            let what = format!("asset {}: vane-pass: depth", asset.id);
            crate::scenario::within(faults, &what, depth, 0.0, 1.0, "");
        }
    }
}
