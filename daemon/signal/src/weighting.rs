//! The frequency weighting of an r.m.s. velocity reading, as ISO 2954 asks.
//!
//! In: Hz. Out: gain, without unit. A third-order Butterworth high-pass and low-pass whose corners
//! lie a factor 10^0.1 outside the band: 7.94 and 1259 Hz for 10-1000 Hz. At the band edges it reads
//! 0.894, one decade outside 0.002, 60 dB a decade.
//! Source: ISO 2954:2012 (third order, band 10-1000 Hz) and the tolerance table of the 1975 edition;
//! the corner values are from memory, as is the table; neither was compared with a bought copy.
//! Checked by `tests/accuracy/weighting.rs`.

use core::f64::consts::TAU;
use core::fmt;

use realfft::num_complex::Complex;

/// Upper edge of the velocity band, Hz.
pub const UPPER_EDGE_HZ: f64 = 1000.0;
/// Lowest edge accepted, Hz: 0.4 × the speed of a machine at 30 r/min.
pub const LOWEST_EDGE_HZ: f64 = 0.2;
/// Highest lower edge accepted, Hz.
pub const HIGHEST_EDGE_HZ: f64 = 200.0;

/// Why a weighting cannot be built.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum WeightingFault {
    /// The lower edge lies outside the accepted range.
    LowerEdge {
        /// The edge asked for, Hz.
        lower_edge_hz: f64,
    },
}

impl fmt::Display for WeightingFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            WeightingFault::LowerEdge { lower_edge_hz } => write!(
                f,
                "lower edge of the velocity band {lower_edge_hz} Hz is outside {LOWEST_EDGE_HZ} to {HIGHEST_EDGE_HZ} Hz; use 10 Hz above 600 r/min, 2 Hz from 300"
            ),
        }
    }
}

impl core::error::Error for WeightingFault {}

/// High-pass and low-pass of a velocity band.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Weighting {
    high_pass_hz: f64,
    low_pass_hz: f64,
}

impl Weighting {
    /// The weighting of the band from `lower_edge_hz` to 1000 Hz; the edge between 0.2 and 200 Hz.
    pub fn velocity(lower_edge_hz: f64) -> Result<Self, WeightingFault> {
        if !(LOWEST_EDGE_HZ..=HIGHEST_EDGE_HZ).contains(&lower_edge_hz) {
            return Err(WeightingFault::LowerEdge { lower_edge_hz });
        }
        let outward = 10f64.powf(0.1);
        Ok(Weighting {
            high_pass_hz: lower_edge_hz / outward,
            low_pass_hz: UPPER_EDGE_HZ * outward,
        })
    }

    /// Corner of the high-pass, Hz, where it alone reads 0.707.
    pub fn high_pass_hz(&self) -> f64 {
        self.high_pass_hz
    }

    /// Corner of the low-pass, Hz, where it alone reads 0.707.
    pub fn low_pass_hz(&self) -> f64 {
        self.low_pass_hz
    }

    /// Gain at `frequency_hz`: a velocity of 1 reads this.
    pub fn magnitude(&self, frequency_hz: f64) -> f64 {
        self.high_pass_magnitude(frequency_hz) * self.low_pass_magnitude(frequency_hz)
    }

    /// Gain of the high-pass alone, r³/√(1 + r⁶), r = f / corner.
    pub fn high_pass_magnitude(&self, frequency_hz: f64) -> f64 {
        let r3 = (frequency_hz / self.high_pass_hz).powi(3);
        r3 / (1.0 + r3 * r3).sqrt()
    }

    /// Gain of the low-pass alone, 1/√(1 + r⁶).
    pub fn low_pass_magnitude(&self, frequency_hz: f64) -> f64 {
        let r3 = (frequency_hz / self.low_pass_hz).powi(3);
        1.0 / (1.0 + r3 * r3).sqrt()
    }

    /// The high-pass and one integration at angular frequency `omega`, s: s²/((s + w)(s² + ws + w²)).
    pub(crate) fn integrating_high_pass(&self, omega: f64) -> Complex<f64> {
        let w = TAU * self.high_pass_hz;
        let s = Complex::new(0.0, omega);
        s * s / ((s + w) * (s * s + s * w + w * w))
    }
}
