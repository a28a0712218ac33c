//! What is watched: a measure of a point, its limits and how long they must be passed.

use alloc::{format, string::String, vec::Vec};

use humward_signal::bearing::BearingOrders;

use super::{
    BandPlan, Limits, Persistence, PointSpec,
    fault::{Code, Part, PlanFault},
};

/// A race or part of a rolling bearing whose defect has a rate of its own.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Race {
    /// Outer race, BPFO.
    Outer,
    /// Inner race, BPFI.
    Inner,
    /// Rolling element, twice its spin.
    Element,
    /// Cage, FTF.
    Cage,
}

impl Race {
    /// All four, in the order of their index.
    pub const ALL: [Self; 4] = [Self::Outer, Self::Inner, Self::Element, Self::Cage];

    /// Its place in [`Race::ALL`].
    pub const fn index(self) -> usize {
        self as usize
    }

    /// Its rate as a multiple of shaft speed.
    pub const fn order(self, bearing: &BearingOrders) -> f64 {
        match self {
            Self::Outer => bearing.outer,
            Self::Inner => bearing.inner,
            Self::Element => bearing.element,
            Self::Cage => bearing.cage,
        }
    }

    /// Its name in configuration and messages.
    pub const fn text(self) -> &'static str {
        match self {
            Self::Outer => "outer",
            Self::Inner => "inner",
            Self::Element => "element",
            Self::Cage => "cage",
        }
    }
}

/// One number of a reading.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Measure {
    /// Weighted velocity, mm/s rms.
    VelocityRms,
    /// True peak of the weighted velocity, mm/s.
    VelocityPeak,
    /// Acceleration over the whole band, mean removed, m/s2 rms.
    AccelerationRms,
    /// True peak of the acceleration, mean removed, m/s2.
    AccelerationPeak,
    /// Peak over rms of the acceleration.
    Crest,
    /// Kurtosis of the acceleration; Gaussian noise reads 3.
    Kurtosis,
    /// Acceleration from 1 kHz to 10 kHz or rate/2.56, m/s2 rms.
    HighBandRms,
    /// The point's band of this index.
    Band(u8),
    /// The envelope line of a bearing part, dB over the local floor.
    Bearing(Race),
}

/// What kind of number a measure or band is: its unit and detector.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Quantity {
    /// mm/s rms
    VelocityRms,
    /// mm/s peak
    VelocityPeak,
    /// m/s2 rms
    AccelerationRms,
    /// m/s2 peak
    AccelerationPeak,
    /// a pure number
    Ratio,
    /// dB over the local floor
    Decibel,
}

impl Quantity {
    /// Unit with detector, as it stands beside every value.
    pub const fn unit(self) -> &'static str {
        match self {
            Self::VelocityRms => "mm/s rms",
            Self::VelocityPeak => "mm/s peak",
            Self::AccelerationRms => "m/s2 rms",
            Self::AccelerationPeak => "m/s2 peak",
            Self::Ratio => "1",
            Self::Decibel => "dB",
        }
    }

    /// Whether a clipped signal can only read lower than the truth, so that the value is a lower bound.
    pub const fn clipping_only_lowers(self) -> bool {
        match self {
            Self::VelocityRms
            | Self::VelocityPeak
            | Self::AccelerationRms
            | Self::AccelerationPeak => true,
            Self::Ratio | Self::Decibel => false,
        }
    }
}

/// A watch as asked for.
#[derive(Debug, Clone, PartialEq)]
pub struct WatchSpec {
    /// Its name at the point, such as `velocity`; the full name adds the point's id.
    pub name: String,
    /// Index of the point in its asset.
    pub point: usize,
    /// What it watches.
    pub measure: Measure,
    /// Unit of that measure.
    pub quantity: Quantity,
    /// Limits in the measure's unit.
    pub limits: Limits,
    /// For a bearing line: it counts only at this strength or more, m/s2 rms in the envelope band.
    pub at_least_ms2: Option<f64>,
    /// How long the alert limit must be passed.
    pub alert_after: Persistence,
    /// How long the danger limit must be passed.
    pub danger_after: Persistence,
    /// How long the value must be back below a limit less its deadband.
    pub clear_after: Persistence,
    /// Where the limits come from, such as the zone table's source; empty when the site set them.
    pub source: String,
}

impl WatchSpec {
    /// The band it watches at its point; `None` when it watches another measure.
    pub fn band<'a>(&self, point: &'a PointSpec) -> Option<&'a BandPlan> {
        match self.measure {
            Measure::Band(index) => point.bands.get(usize::from(index)),
            Measure::VelocityRms
            | Measure::VelocityPeak
            | Measure::AccelerationRms
            | Measure::AccelerationPeak
            | Measure::Crest
            | Measure::Kurtosis
            | Measure::HighBandRms
            | Measure::Bearing(_) => None,
        }
    }
}

/// A checked watch.
#[derive(Debug, Clone, PartialEq)]
pub struct WatchPlan {
    spec: WatchSpec,
    full_name: String,
}

impl WatchPlan {
    /// Checks a watch against the point it is for, whose id is `point_id`.
    ///
    /// # Errors
    /// A full name over 64 characters; `at_least_ms2` on anything but a bearing line, or not finite and at least 0.
    pub fn new(spec: WatchSpec, point_id: &str) -> Result<Self, Vec<PlanFault>> {
        let mut faults = Vec::new();
        let full_name = format!("{}.{point_id}", spec.name);
        if full_name.len() > 64 {
            faults.push(PlanFault {
                code: Code::OutOfRange,
                part: Part::Own,
                key: "name",
                read: full_name.clone(),
                allowed: "watch name, dot and point id together at most 64 characters".into(),
            });
        }
        match (spec.at_least_ms2, spec.measure) {
            (Some(least), Measure::Bearing(_)) if !(least.is_finite() && least >= 0.0) => faults
                .push(PlanFault {
                    code: Code::OutOfRange,
                    part: Part::Own,
                    key: "at_least_ms2",
                    read: format!("{least}"),
                    allowed: "0 or more, m/s2 rms".into(),
                }),
            (None, _) | (Some(_), Measure::Bearing(_)) => {}
            (Some(least), _) => faults.push(PlanFault {
                code: Code::Contradiction,
                part: Part::Own,
                key: "at_least_ms2",
                read: format!("{least}"),
                allowed: "only beside a bearing measure".into(),
            }),
        }
        if faults.is_empty() {
            Ok(Self { spec, full_name })
        } else {
            Err(faults)
        }
    }

    /// `<watch>.<point>`: the name alarms carry and topics end in.
    pub fn full_name(&self) -> &str {
        &self.full_name
    }

    /// The watch as it was asked for, now known to be sound.
    pub const fn spec(&self) -> &WatchSpec {
        &self.spec
    }
}
