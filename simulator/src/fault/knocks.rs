//! Knocks on the housing: a trolley, a wrench, a valve that slams. No defect.
//!
//! One-sided half sines of 0.3-1 ms at listed times or by chance; severity: their height, g. All points of the asset
//! feel them, those away from `point` weaker.

use serde::Deserialize;

use super::{Expected, Kind, Seat};
use crate::random::Draw;
use crate::scenario::{Asset, Seconds};
use crate::wave::{G0, Gate, Growth, HalfSines, Law, Strength, Strikes, Timing, Wave};

/// Isolated knocks.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Knocks {
    /// Height, g.
    pub growth: Growth,
    /// Where it is knocked.
    pub point: String,
    /// When, from the start of the scenario, in order.
    #[serde(default)]
    pub times: Vec<Seconds>,
    /// By chance, so often.
    #[serde(default)]
    pub per_hour: Option<f64>,
}

fn g_to_ms2(g: f64) -> f64 {
    g * G0
}

impl Kind for Knocks {
    fn growth(&self) -> &Growth {
        &self.growth
    }

    fn point(&self) -> Option<&str> {
        Some(&self.point)
    }

    fn waves(&self, seat: &Seat<'_>) -> Vec<Box<dyn Wave>> {
        if seat.impact_gain == 0.0 {
            return Vec::new();
        }
        let law = Law {
            shape: g_to_ms2,
            gate: Gate::Always,
            ..Law::growing(
                Growth {
                    to: self.growth.to * seat.impact_gain,
                    from: self.growth.from * seat.impact_gain,
                    ..self.growth
                },
                0.0,
            )
        };
        let timing = match self.per_hour {
            Some(per_hour) => Timing::Chance {
                hz: per_hour / 3600.0,
                order: 0.0,
                depth: 0.0,
            },
            None => Timing::Listed(self.times.iter().map(|at| at.0).collect()),
        };
        let strikes = Strikes::new(
            timing,
            Strength::Scattered { sigma: 0.0 },
            law,
            seat.draw.part("strikes"),
        );
        let width_s = seat.draw.part("width").between(3e-4, 1e-3);
        vec![Box::new(HalfSines::new(strikes, width_s))]
    }

    fn expected(&self, _: &Asset, _: f64, _: &Draw) -> Vec<Expected> {
        Vec::new()
    }

    fn severity(&self) -> &'static str {
        "g, height of a knock"
    }

    fn check(&self, asset: &Asset, faults: &mut Vec<String>) {
        super::check_growth("knocks", asset, &self.growth, 0.0, 500.0, faults);
        super::check_point("knocks", asset, &self.point, faults);
        let here = format!("asset {}: knocks", asset.id);
        match (self.times.is_empty(), self.per_hour) {
            (true, None) => faults.push(format!(
                "{here}: neither times nor per_hour; give one of them"
            )),
            (false, Some(_)) => {
                faults.push(format!("{here}: times and per_hour; give one of them"))
            }
            (true, Some(per_hour)) => {
                crate::scenario::within(
                    faults,
                    &format!("{here}: per_hour"),
                    per_hour,
                    0.01,
                    36_000.0,
                    "",
                );
            }
            (false, None) => {}
        }
        if self.times.windows(2).any(|pair| pair[0] >= pair[1]) {
            faults.push(format!("{here}: times go back; list them in order"));
        }
    }
}
