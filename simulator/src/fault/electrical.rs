//! An uneven air gap or an uneven rectifier: the motor's electrical lines grown strong.
//!
//! Severity: velocity added to the first electrical line at rated load, mm/s rms: twice line, twice drive output, or
//! the firing line of the rectifier with its multiples. They stop at once when the power is off.

use serde::Deserialize;

use super::{Expected, Kind, Seat, Seen};
use crate::machine::{electrical, electrical_tones, tone_hz};
use crate::random::Draw;
use crate::scenario::Asset;
use crate::wave::{Growth, Law, Wave};

/// Electrical lines grown strong.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Electrical {
    /// mm/s rms added to the first electrical line at rated load.
    pub growth: Growth,
}

impl Kind for Electrical {
    fn growth(&self) -> &Growth {
        &self.growth
    }

    fn point(&self) -> Option<&str> {
        None
    }

    fn waves(&self, seat: &Seat<'_>) -> Vec<Box<dyn Wave>> {
        let law = Law::growing(self.growth, 0.0);
        electrical(seat.asset, seat.line_hz, law, &seat.path, &seat.local)
    }

    fn expected(&self, asset: &Asset, line_hz: f64, _: &Draw) -> Vec<Expected> {
        let Some(motor) = asset.motor else {
            return Vec::new();
        };
        let tones = electrical_tones(&motor);
        let first_hz = tones
            .first()
            .map_or(1.0, |(_, pitch, _)| tone_hz(pitch, asset, line_hz));
        tones
            .into_iter()
            .map(|(line, pitch, share)| {
                let hz = tone_hz(&pitch, asset, line_hz);
                Expected {
                    line,
                    hz,
                    order: hz * 60.0 / asset.nominal_rpm(),
                    seen: Seen::Velocity,
                    level: Some(self.growth.to * share * first_hz / hz),
                }
            })
            .collect()
    }

    fn severity(&self) -> &'static str {
        "mm/s rms added to the first electrical line"
    }

    fn check(&self, asset: &Asset, faults: &mut Vec<String>) {
        super::check_growth("electrical", asset, &self.growth, 0.0, 100.0, faults);
        if asset.motor.is_none() {
            faults.push(format!(
                "asset {}: electrical: no motor; add [asset.motor] with its kind",
                asset.id
            ));
        }
    }
}
