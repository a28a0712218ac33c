//! One accelerometer axis of a scenario.

use serde::Deserialize;

use super::Seconds;
use crate::sensor::SensorFault;
use crate::transport::TransportFault;

/// A sensor at a bearing and how its blocks travel.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Point {
    /// Id in the topics.
    pub id: String,
    /// Declared samples per second.
    #[serde(default = "rate_hz")]
    pub rate_hz: f64,
    /// How far the oscillator really runs off that, %; positive: faster.
    #[serde(default)]
    pub oscillator_percent: f64,
    /// Length of a block.
    #[serde(default = "second")]
    pub block: Seconds,
    /// Bursts instead of a stream: one block this often.
    #[serde(default)]
    pub burst_every: Option<Seconds>,
    /// How blocks are written.
    #[serde(default = "cbor_s16")]
    pub encoding: Encoding,
    /// Unit of the samples.
    #[serde(default = "metre")]
    pub unit: SampleUnit,
    /// Range, ± g: samples are held within it and counted in 32768 steps.
    #[serde(default = "range_g")]
    pub range_g: f64,
    /// Noise density, µg per square root of Hz.
    #[serde(default = "noise_ug_rthz")]
    pub noise_ug_rthz: f64,
    /// Own resonance, Hz; must lie below 0.45 x rate to be shown.
    #[serde(default)]
    pub resonance_hz: Option<f64>,
    /// Steady offset, g: gravity's share along the axis.
    #[serde(default)]
    pub offset_g: f64,
    /// Share of the machine's own vibration that this axis feels.
    #[serde(default = "one")]
    pub share: f64,
    /// The bearing here.
    #[serde(default)]
    pub bearing: Option<Bearing>,
    /// What goes wrong with the sensor.
    #[serde(rename = "sensor", default)]
    pub sensor_faults: Vec<SensorFault>,
    /// What goes wrong on the way.
    #[serde(rename = "transport", default)]
    pub transport_faults: Vec<TransportFault>,
}

fn rate_hz() -> f64 {
    12_800.0
}

fn second() -> Seconds {
    Seconds(1.0)
}

fn cbor_s16() -> Encoding {
    Encoding::CborS16
}

fn metre() -> SampleUnit {
    SampleUnit::MetrePerSecondSquared
}

fn range_g() -> f64 {
    16.0
}

fn noise_ug_rthz() -> f64 {
    60.0
}

fn one() -> f64 {
    1.0
}

/// How blocks are written.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Encoding {
    /// CBOR, 16-bit integers with a scale.
    CborS16,
    /// CBOR, 32-bit floats.
    CborF32,
    /// JSON numbers.
    Json,
}

/// Unit of samples.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Deserialize)]
pub enum SampleUnit {
    /// m/s².
    #[serde(rename = "m/s2")]
    MetrePerSecondSquared,
    /// g.
    #[serde(rename = "g")]
    G,
}

/// A rolling bearing by its geometry.
#[derive(Clone, Copy, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Bearing {
    /// Rolling elements.
    pub balls: u32,
    /// Their diameter, mm.
    pub ball_diameter_mm: f64,
    /// Pitch diameter, mm.
    pub pitch_diameter_mm: f64,
    /// Contact angle, degrees.
    #[serde(default)]
    pub angle_deg: f64,
}

impl Bearing {
    fn ratio(&self) -> f64 {
        self.ball_diameter_mm / self.pitch_diameter_mm * self.angle_deg.to_radians().cos()
    }

    /// Ball passes per turn over a place of the outer ring, Z/2 (1 - r). Source: Randall & Antoni 2011.
    #[must_use]
    pub fn outer(&self) -> f64 {
        f64::from(self.balls) / 2.0 * (1.0 - self.ratio())
    }

    /// Ball passes per turn over a place of the inner ring, Z/2 (1 + r). Source: Randall & Antoni 2011.
    #[must_use]
    pub fn inner(&self) -> f64 {
        f64::from(self.balls) / 2.0 * (1.0 + self.ratio())
    }
}

impl Point {
    /// What the oscillator really does, samples per second.
    #[must_use]
    pub fn true_rate_hz(&self) -> f64 {
        self.rate_hz * (1.0 + self.oscillator_percent / 100.0)
    }
}
