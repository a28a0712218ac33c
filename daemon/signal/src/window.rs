//! Periodic cosine windows: what they do to a line's height, to noise and to neighbours.
//!
//! In: offsets in bins. Out: gains without unit, widths in bins. w\[i\] = Σ (−1)^m a\[m\] cos(2πmi/n),
//! i = 0..n: the periodic form (denominator n), right for spectra.
//! Sources: Harris, Proc. IEEE 66 (1978), Table 1; flat tops: D'Antona and Ferrero (2006) p. 70,
//! ISO 18431-2, Heinzel, Rüdiger and Schilling (2002); coefficients from memory.
//! "Flat top" is not one window, so whoever quotes an amplitude quotes the coefficients too.
//! Checked by `tests/accuracy/windows.rs`. The crate's own spectra all use Hann.

use alloc::vec::Vec;
use core::f64::consts::{PI, TAU};

/// A window by its cosine coefficients, signs alternating.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Window {
    coefficients: &'static [f64],
}

/// No window at all.
pub const RECTANGULAR: Window = Window {
    coefficients: &[1.0],
};
/// Hann.
pub const HANN: Window = Window {
    coefficients: &[0.5, 0.5],
};
/// Hamming.
pub const HAMMING: Window = Window {
    coefficients: &[0.54, 0.46],
};
/// Blackman, three terms.
pub const BLACKMAN: Window = Window {
    coefficients: &[0.42, 0.5, 0.08],
};
/// Five-term flat top of D'Antona and Ferrero.
pub const FLAT_TOP: Window = Window {
    coefficients: &[
        0.21557895,
        0.41663158,
        0.277263158,
        0.083578947,
        0.006947368,
    ],
};
/// Five-term flat top of ISO 18431-2.
pub const FLAT_TOP_ISO_18431_2: Window = Window {
    coefficients: &[1.0, 1.933, 1.286, 0.388, 0.0322],
};
/// Flat top HFT70 of Heinzel.
pub const HFT70: Window = Window {
    coefficients: &[1.0, 1.90796, 1.07349, 0.18199],
};
/// Flat top HFT95 of Heinzel.
pub const HFT95: Window = Window {
    coefficients: &[1.0, 1.9383379, 1.3045202, 0.402827, 0.0350665],
};
/// Flat top HFT90D of Heinzel.
pub const HFT90D: Window = Window {
    coefficients: &[1.0, 1.942604, 1.340318, 0.440811, 0.043097],
};

impl Window {
    /// The cosine coefficients a\[0\], a\[1\], …, all positive; every second is subtracted.
    pub fn coefficients(&self) -> &'static [f64] {
        self.coefficients
    }

    /// The `n` samples of the periodic window.
    pub fn samples(&self, n: usize) -> Vec<f64> {
        (0..n)
            .map(|i| {
                let angle = TAU * i as f64 / n as f64;
                self.signed()
                    .map(|(m, a)| a * (m as f64 * angle).cos())
                    .sum()
            })
            .collect()
    }

    fn signed(&self) -> impl Iterator<Item = (usize, f64)> {
        self.coefficients
            .iter()
            .enumerate()
            .map(|(m, a)| (m, if m % 2 == 0 { *a } else { -a }))
    }

    /// Mean of the window: a\[0\]. A line divided by it reads its amplitude.
    pub fn coherent_gain(&self) -> f64 {
        self.coefficients[0]
    }

    /// Equivalent noise bandwidth n Σw² / (Σw)², bins: (a0² + Σ a\[m\]²/2) / a0².
    pub fn enbw_bins(&self) -> f64 {
        let squares: f64 = self.coefficients[1..].iter().map(|a| 0.5 * a * a).sum();
        1.0 + squares / (self.coefficients[0] * self.coefficients[0])
    }

    /// Factor that restores the amplitude of a line: 1 / coherent gain.
    pub fn amplitude_correction(&self) -> f64 {
        1.0 / self.coherent_gain()
    }

    /// Factor that restores the rms of a band: √(n / Σw²).
    pub fn energy_correction(&self) -> f64 {
        1.0 / (self.coherent_gain() * self.enbw_bins().sqrt())
    }

    /// Height of a unit line seen `bins` off its centre, relative to the centre.
    ///
    /// The limit of long frames, Σ a\[m\] (sinc(x − m) + sinc(x + m))/2 over a\[0\]: seen from the
    /// frame's middle all terms have one sign.
    pub fn response(&self, bins: f64) -> f64 {
        let terms = self.coefficients.iter().enumerate();
        let sum: f64 = terms
            .map(|(m, a)| {
                let m = m as f64;
                0.5 * a * (sinc(bins - m) + sinc(bins + m))
            })
            .sum();
        (sum / self.coefficients[0]).abs()
    }

    /// What a line half a bin off reads too low, dB, positive.
    pub fn scalloping_db(&self) -> f64 {
        -20.0 * self.response(0.5).log10()
    }
}

/// sin(πx)/(πx).
fn sinc(x: f64) -> f64 {
    if x.abs() < 1e-9 {
        1.0
    } else {
        (PI * x).sin() / (PI * x)
    }
}
