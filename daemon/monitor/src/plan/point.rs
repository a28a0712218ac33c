//! One accelerometer axis at one place, and what is read off it.

use alloc::{format, string::String, vec::Vec};

use humward_signal::{
    bands::{Band, Base},
    bearing::BearingOrders,
    lowband::LOWEST_RATE_HZ,
};
use humward_wire::id::Id;

use super::{
    Quantity,
    fault::{Code, Part, PlanFault},
};

/// How raw sample units become m/s2 when a block's unit is `mV` or `count`.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Calibration {
    /// The block's unit is an acceleration already.
    FromUnit,
    /// Millivolts per g of the sensor.
    MillivoltPerG(f64),
    /// Counts per g of the sensor and its converter.
    CountPerG(f64),
}

/// The edges of a band.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Edges {
    /// Fixed, Hz.
    Hz(f64, f64),
    /// Multiples of the shaft speed, followed as it moves.
    Orders(f64, f64),
}

/// A band of the spectrum as asked for.
#[derive(Debug, Clone, PartialEq)]
pub struct BandSpec {
    /// Its name; a watch names it `band.<name>`.
    pub name: String,
    /// Its edges.
    pub edges: Edges,
    /// Velocity or acceleration, rms.
    pub quantity: Quantity,
}

/// A checked band.
#[derive(Debug, Clone, PartialEq)]
pub struct BandPlan {
    spec: BandSpec,
    band: Band,
}

impl BandPlan {
    /// Checks a band: rising edges above zero, velocity or acceleration rms.
    ///
    /// # Errors
    /// Edges that do not rise from above zero; a quantity a band cannot have.
    pub fn new(spec: BandSpec) -> Result<Self, Vec<PlanFault>> {
        let mut faults = Vec::new();
        let (key, base, (low, high)) = match spec.edges {
            Edges::Hz(low, high) => ("hz", Base::Hertz, (low, high)),
            Edges::Orders(low, high) => ("orders", Base::Shaft, (low, high)),
        };
        let band = Band::new(base, low, high).ok().filter(|_| low > 0.0);
        if band.is_none() {
            faults.push(PlanFault {
                code: Code::OutOfRange,
                part: Part::Own,
                key,
                read: format!("[{low}, {high}]"),
                allowed: "two rising numbers above 0".into(),
            });
        }
        if !matches!(
            spec.quantity,
            Quantity::VelocityRms | Quantity::AccelerationRms
        ) {
            faults.push(PlanFault {
                code: Code::Contradiction,
                part: Part::Own,
                key: "quantity",
                read: spec.quantity.unit().into(),
                allowed: "\"velocity\" or \"acceleration\"".into(),
            });
        }
        match band {
            Some(band) if faults.is_empty() => Ok(Self { spec, band }),
            _ => Err(faults),
        }
    }

    /// Its edges, to be resolved at a speed.
    pub const fn band(&self) -> &Band {
        &self.band
    }

    /// The band as it was asked for, now known to be sound.
    pub const fn spec(&self) -> &BandSpec {
        &self.spec
    }
}

/// A point as asked for.
#[derive(Debug, Clone, PartialEq)]
pub struct PointSpec {
    /// Its id in the asset.
    pub id: Id,
    /// What people call the place, such as "pump drive end".
    pub name: String,
    /// Which block topic feeds it; several points may share one that carries several channels.
    pub source: Id,
    /// Which channel of that block, from 0.
    pub channel: u16,
    /// The declared sample rate, Hz; `None`: the first block tells.
    pub rate_hz: Option<f64>,
    /// Samples under one FFT.
    pub frame: usize,
    /// What makes m/s2 of mV or counts.
    pub calibration: Calibration,
    /// Full range of the sensor, m/s2: samples at or beyond it are clipped. `None`: only an integer encoding's rails tell.
    pub range_ms2: Option<f64>,
    /// Noise density of the sensor, ug/sqrt(Hz).
    pub noise_ug_rthz: Option<f64>,
    /// Lower edge of the velocity band, Hz.
    pub velocity_from_hz: f64,
    /// The bearing there, as multiples of shaft speed.
    pub bearing: Option<BearingOrders>,
    /// The band whose envelope is taken, Hz.
    pub envelope_hz: Option<(f64, f64)>,
    /// Named bands.
    pub bands: Vec<BandPlan>,
}

/// A checked point.
#[derive(Debug, Clone, PartialEq)]
pub struct PointPlan {
    spec: PointSpec,
}

impl PointPlan {
    /// Checks a point's own figures: frame size, rate, band edges below half the rate, calibration.
    ///
    /// # Errors
    /// Every figure that is out of range or that the declared rate cannot resolve.
    pub fn new(spec: PointSpec) -> Result<Self, Vec<PlanFault>> {
        let faults = check(&spec);
        if faults.is_empty() {
            Ok(Self { spec })
        } else {
            Err(faults)
        }
    }

    /// The point as it was asked for, now known to be sound.
    pub const fn spec(&self) -> &PointSpec {
        &self.spec
    }

    /// Its id.
    pub const fn id(&self) -> &Id {
        &self.spec.id
    }
}

fn check(spec: &PointSpec) -> Vec<PlanFault> {
    let mut faults = Vec::new();
    let mut fault = |code, key, read: String, allowed: String| {
        faults.push(PlanFault {
            code,
            part: Part::Own,
            key,
            read,
            allowed,
        });
    };
    let mut rest = spec.frame;
    for prime in [2, 3, 5] {
        while rest > 1 && rest.is_multiple_of(prime) {
            rest /= prime;
        }
    }
    if !(4096..=65_536).contains(&spec.frame) || rest != 1 || !spec.frame.is_multiple_of(4) {
        fault(
            Code::OutOfRange,
            "frame",
            format!("{}", spec.frame),
            "4096 to 65536 samples, a multiple of 4 with no prime factor above 5, such as 8192"
                .into(),
        );
    }
    if let Some(rate) = spec.rate_hz
        && !(LOWEST_RATE_HZ..=1_000_000.0).contains(&rate)
    {
        fault(
            Code::OutOfRange,
            "rate_hz",
            format!("{rate}"),
            format!(
                "{LOWEST_RATE_HZ} to 1000000 samples/s: velocity to 1000 Hz needs at least {LOWEST_RATE_HZ}"
            ),
        );
    }
    let figure = match spec.calibration {
        Calibration::FromUnit => None,
        Calibration::MillivoltPerG(value) => Some(("millivolt_per_g", value)),
        Calibration::CountPerG(value) => Some(("count_per_g", value)),
    };
    let figures = [
        figure,
        spec.range_ms2.map(|v| ("range_g", v)),
        spec.noise_ug_rthz.map(|v| ("noise_ug_rthz", v)),
    ];
    for (key, value) in figures.into_iter().flatten() {
        if !(value.is_finite() && value > 0.0) {
            fault(
                Code::OutOfRange,
                key,
                format!("{value}"),
                "a number above 0".into(),
            );
        }
    }
    if !(0.5..=100.0).contains(&spec.velocity_from_hz) {
        fault(
            Code::OutOfRange,
            "velocity_from_hz",
            format!("{}", spec.velocity_from_hz),
            "0.5 to 100 Hz".into(),
        );
    }
    let half = spec.rate_hz.map(|rate| rate / 2.0);
    if let Some((low, high)) = spec.envelope_hz {
        let top = half.unwrap_or(f64::INFINITY);
        if !(low > 0.0 && high > low && high <= top) {
            let allowed = half.map_or_else(
                || "two rising numbers above 0, Hz".into(),
                |half| format!("two rising numbers above 0, up to half the rate, {half} Hz"),
            );
            fault(
                Code::OutOfRange,
                "envelope_hz",
                format!("[{low}, {high}]"),
                allowed,
            );
        }
    }
    faults
}
