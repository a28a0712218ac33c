//! One accelerometer axis of a scenario.

use serde::Deserialize;

use super::{Seconds, is_id, within};
use crate::sensor::SensorFault;
use crate::transport::TransportFault;

/// Largest block, bytes as sent: what one message of the daemon's inbound contract may have.
const MAX_BLOCK_BYTES: f64 = 1e6;

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
    /// Damping ratio of that resonance.
    #[serde(default = "resonance_damping")]
    pub resonance_damping: f64,
    /// Steady offset, g: gravity's share along the axis.
    #[serde(default)]
    pub offset_g: f64,
    /// Bias voltage told in each block, V; none if not given.
    #[serde(default)]
    pub bias_volts: Option<f64>,
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

fn resonance_damping() -> f64 {
    0.02
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

    /// Samples in a block.
    #[must_use]
    pub fn block_samples(&self) -> usize {
        (self.block.0 * self.rate_hz).round() as usize
    }

    /// One step of 16-bit samples, g: range / 32768.
    #[must_use]
    pub fn step_g(&self) -> f64 {
        self.range_g / 32768.0
    }

    /// Adds what does not fit.
    pub(crate) fn check(&self, asset: &str, faults: &mut Vec<String>) {
        let here = format!("point {asset}/{}", self.id);
        is_id(faults, &format!("asset {asset}: point id"), &self.id);
        let mut number = |key: &str, value: f64, low: f64, high: f64, unit: &str| {
            within(faults, &format!("{here}: {key}"), value, low, high, unit);
        };
        number("rate_hz", self.rate_hz, 500.0, 100_000.0, "Hz");
        number(
            "oscillator_percent",
            self.oscillator_percent,
            -5.0,
            5.0,
            "%",
        );
        let samples = self.block.0 * self.rate_hz;
        number("block x rate_hz", samples, 16.0, 262_144.0, "samples");
        let bytes = samples * self.encoding.bytes_per_sample();
        number("block in bytes", bytes, 0.0, MAX_BLOCK_BYTES, "bytes");
        if let Some(every) = self.burst_every {
            number("burst_every", every.0, self.block.0, 86_400.0, "s");
        }
        number("range_g", self.range_g, 0.1, 2000.0, "g");
        number("noise_ug_rthz", self.noise_ug_rthz, 0.0, 1e5, "ug/rtHz");
        number("offset_g", self.offset_g, -2.0, 2.0, "g");
        number(
            "bias_volts",
            self.bias_volts.unwrap_or(0.0),
            -50.0,
            50.0,
            "V",
        );
        number("share", self.share, 0.0, 10.0, "");
        if let Some(resonance) = self.resonance_hz {
            let highest = 0.45 * self.rate_hz;
            number("resonance_hz", resonance, 10.0, highest, "Hz");
            number("resonance_damping", self.resonance_damping, 0.001, 1.0, "");
        }
        if let Some(bearing) = self.bearing {
            number("bearing.balls", f64::from(bearing.balls), 3.0, 60.0, "");
            let (ball, pitch) = (bearing.ball_diameter_mm, bearing.pitch_diameter_mm);
            number("bearing.ball_diameter_mm", ball, 0.1, 1000.0, "mm");
            number("bearing.pitch_diameter_mm", pitch, 0.2, 10_000.0, "mm");
            let ratio = ball / pitch;
            number("ball over pitch diameter", ratio, 0.01, 0.6, "");
            number("bearing.angle_deg", bearing.angle_deg, 0.0, 60.0, "degrees");
        }
        for fault in &self.sensor_faults {
            fault.check(&here, faults);
        }
        for fault in &self.transport_faults {
            fault.check(&here, faults);
        }
    }
}

impl Encoding {
    /// What a sample takes at most: two or four bytes, or the text of a number with its comma.
    fn bytes_per_sample(self) -> f64 {
        match self {
            Encoding::CborS16 => 2.0,
            Encoding::CborF32 => 4.0,
            Encoding::Json => 16.0,
        }
    }
}
