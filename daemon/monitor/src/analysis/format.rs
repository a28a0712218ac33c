//! From raw sample values to m/s2, and where the converter clips.

use humward_signal::{statistics::Rails, units};
use humward_wire::block::{Block, Unit};

use crate::plan::{Calibration, PointSpec};

/// How the samples of a block become m/s2.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Format {
    /// m/s2 per raw value.
    pub(super) gain: f32,
    /// Raw values at which the converter clips.
    pub(super) rails: Option<(f32, f32)>,
}

impl Format {
    /// The format of a block at a point; `None` when the block's unit needs a calibration the point does not have.
    pub(super) fn of(block: &Block, point: &PointSpec) -> Option<Self> {
        let per_unit = match (block.unit, point.calibration) {
            (Unit::MetrePerSecondSquared, _) => 1.0,
            (Unit::G, _) => units::g_to_m_s2(1.0),
            (Unit::Millivolt, Calibration::MillivoltPerG(per_g))
            | (Unit::Count, Calibration::CountPerG(per_g)) => units::g_to_m_s2(1.0) / per_g,
            (Unit::Millivolt | Unit::Count, _) => return None,
        };
        Some(Self {
            gain: (block.scale * per_unit) as f32,
            rails: block.integer_rail,
        })
    }

    /// One raw value in m/s2 about `pivot`.
    pub(super) fn convert(&self, raw: f32, pivot: f32) -> f32 {
        raw * self.gain - pivot
    }

    /// The rails in m/s2 about `pivot`: the tighter of the encoding's and the sensor's range.
    ///
    /// Converted as the samples are, so that a sample at the rail equals it exactly.
    pub(super) fn rails_about(&self, pivot: f32, range_ms2: Option<f64>) -> Option<Rails> {
        let coded = self.rails.map(|(low, high)| {
            let (a, b) = (self.convert(low, pivot), self.convert(high, pivot));
            (a.min(b), a.max(b))
        });
        let ranged = range_ms2.map(|range| (-(range as f32) - pivot, range as f32 - pivot));
        let (low, high) = match (coded, ranged) {
            (Some(a), Some(b)) => (a.0.max(b.0), a.1.min(b.1)),
            (Some(only), None) | (None, Some(only)) => only,
            (None, None) => return None,
        };
        Some(Rails { low, high })
    }
}
