//! Squared-envelope spectrum of a band, from the shared FFT.
//!
//! In: rectangular spectra of frames, m/s², and a band \[f1, f2\]. Out: power spectrum of the squared
//! envelope, bins of rate/n, averaged over frames in `f64`; amplitudes in (m/s²)².
//! Per frame: the band's bins, its edges tapered over [`EDGE_BINS`] bins inside, shifted to 0 Hz and
//! transformed back short give the analytic band signal; |·|², mean removed, periodic Hann, real FFT.
//! The Hann on the squared envelope is not optional: without it a strong line below the band, whose
//! leakage piles up at the frame's ends, buries the bearing's.
//! Source: Randall and Antoni, MSSP 25 (2011), squared envelope of a one-sided band (ideal filter).
//! Known error: spectrum within 1e-4 of the same steps by scipy's `hilbert`.
//! The short length is at least 1.5 × the band's bins, so lines are clean up to half the band's width
//! ([`EnvelopePlan::reach_hz`]). What a line says is in [`LineSearch`].
//! Checked by `tests/accuracy/envelope.rs`.

mod lines;

use alloc::sync::Arc;
use alloc::vec;
use alloc::vec::Vec;
use core::f64::consts::PI;
use core::fmt;

use realfft::num_complex::Complex;
use realfft::{ComplexToReal, RealFftPlanner, RealToComplex};

use crate::frame::{FrameFault, Scratch, check, grow};
use crate::psd::hann_power;
pub use lines::{EnvelopeLine, LineFamily, LineSearch};

/// Bins over which each edge of the band rises from 0 to 1.
pub const EDGE_BINS: usize = 4;
/// Fewest bins a band may have.
pub const FEWEST_BINS: usize = 32;

/// Why an envelope cannot be planned.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum EnvelopeFault {
    /// The frame itself cannot be planned.
    Frame(FrameFault),
    /// The band is inverted or outside 0 Hz to half the rate.
    Band {
        /// Lower edge stated, Hz.
        f1_hz: f64,
        /// Upper edge stated, Hz.
        f2_hz: f64,
        /// Half the rate, Hz.
        half_rate_hz: f64,
    },
    /// The band has too few bins to have an envelope.
    TooNarrow {
        /// Width stated, Hz.
        width_hz: f64,
        /// Least width at this resolution, Hz.
        least_hz: f64,
    },
}

impl fmt::Display for EnvelopeFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            EnvelopeFault::Frame(fault) => fault.fmt(f),
            EnvelopeFault::Band {
                f1_hz,
                f2_hz,
                half_rate_hz,
            } => write!(
                f,
                "envelope band {f1_hz} to {f2_hz} Hz does not lie within 0 to {half_rate_hz} Hz; lower edge first, below half the rate"
            ),
            EnvelopeFault::TooNarrow { width_hz, least_hz } => {
                write!(
                    f,
                    "envelope band is {width_hz} Hz wide; widen it to {least_hz} Hz or take longer frames"
                )
            }
        }
    }
}

impl core::error::Error for EnvelopeFault {
    fn source(&self) -> Option<&(dyn core::error::Error + 'static)> {
        match self {
            EnvelopeFault::Frame(fault) => Some(fault),
            EnvelopeFault::Band { .. } | EnvelopeFault::TooNarrow { .. } => None,
        }
    }
}

impl From<FrameFault> for EnvelopeFault {
    fn from(fault: FrameFault) -> Self {
        EnvelopeFault::Frame(fault)
    }
}

/// The envelope of one band at one frame length and rate.
#[derive(Clone)]
pub struct EnvelopePlan {
    n: usize,
    rate_hz: f64,
    centre: usize,
    weights: Vec<f32>,
    short: usize,
    reach: usize,
    inverse: Arc<dyn ComplexToReal<f32>>,
    forward: Arc<dyn RealToComplex<f32>>,
}

impl fmt::Debug for EnvelopePlan {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_struct("EnvelopePlan")
            .field("n", &self.n)
            .field("rate_hz", &self.rate_hz)
            .field("band_hz", &self.band_hz())
            .finish_non_exhaustive()
    }
}

impl EnvelopePlan {
    /// Plans the envelope of `f1_hz..f2_hz` in frames of `n` samples at `rate_hz`.
    ///
    /// The band keeps whole bins, an odd number of them, so an edge moves inwards by up to a bin.
    pub fn new(n: usize, rate_hz: f64, f1_hz: f64, f2_hz: f64) -> Result<Self, EnvelopeFault> {
        check(n, rate_hz)?;
        let (df, half_rate_hz) = (rate_hz / n as f64, 0.5 * rate_hz);
        if !(f1_hz > 0.0 && f1_hz < f2_hz && f2_hz <= half_rate_hz) {
            return Err(EnvelopeFault::Band {
                f1_hz,
                f2_hz,
                half_rate_hz,
            });
        }
        let first = ((f1_hz / df - 1e-9).ceil() as usize).max(1);
        let last = ((f2_hz / df + 1e-9).floor() as usize).min(n / 2 - 1);
        if last < first + FEWEST_BINS {
            let least_hz = (FEWEST_BINS + 2) as f64 * df;
            return Err(EnvelopeFault::TooNarrow {
                width_hz: f2_hz - f1_hz,
                least_hz,
            });
        }
        let side = (last - first) / 2;
        let bins = 2 * side + 1;
        // Analytic signal: twice the positive frequencies over n.
        let weights = (0..bins)
            .map(|i| (2.0 / n as f64 * edge(i, bins)) as f32)
            .collect();
        let short = quick_length(bins + side);
        let mut planner = RealFftPlanner::<f32>::new();
        Ok(EnvelopePlan {
            n,
            rate_hz,
            centre: first + side,
            weights,
            short,
            reach: short - bins,
            inverse: planner.plan_fft_inverse(short),
            forward: planner.plan_fft_forward(short),
        })
    }

    /// Samples per frame.
    pub fn n(&self) -> usize {
        self.n
    }

    /// First and last bin of the band, Hz, as kept.
    pub fn band_hz(&self) -> (f64, f64) {
        let side = self.weights.len() / 2;
        let df = self.resolution_hz();
        (
            (self.centre - side) as f64 * df,
            (self.centre + side) as f64 * df,
        )
    }

    /// Weight of bin `k` of the frame's spectrum, 0 outside the band, 1 inside.
    pub fn weight(&self, k: usize) -> f64 {
        let first = self.centre - self.weights.len() / 2;
        k.checked_sub(first)
            .and_then(|i| self.weights.get(i))
            .map_or(0.0, |w| f64::from(*w) * 0.5 * self.n as f64)
    }

    /// Spacing of the envelope's bins, Hz: rate / n.
    pub fn resolution_hz(&self) -> f64 {
        self.rate_hz / self.n as f64
    }

    /// Highest envelope frequency free of aliasing, Hz; half the band's width or a little more.
    pub fn reach_hz(&self) -> f64 {
        self.reach as f64 * self.resolution_hz()
    }

    /// An empty accumulator.
    pub fn spectrum(&self) -> EnvelopeSpectrum {
        EnvelopeSpectrum {
            short: self.short,
            resolution_hz: self.resolution_hz(),
            band_hz: self.band_hz(),
            frames: 0,
            sums: vec![0.0; self.reach.min(self.short / 2) + 1],
        }
    }

    /// Adds the envelope of the frame in `scratch` to `spectrum`.
    ///
    /// Fails when either belongs to another plan.
    pub fn accumulate(
        &self,
        scratch: &mut Scratch,
        spectrum: &mut EnvelopeSpectrum,
    ) -> Result<(), FrameFault> {
        scratch.holds(self.n)?;
        if spectrum.short != self.short || spectrum.band_hz != self.band_hz() {
            return Err(FrameFault::Mismatch {
                expected: self.short,
                found: spectrum.short,
            });
        }
        let (short, half, side) = (self.short, self.short / 2, self.weights.len() / 2);
        let work_len = self
            .inverse
            .get_scratch_len()
            .max(self.forward.get_scratch_len());
        grow(&mut scratch.short, half + 1);
        grow(&mut scratch.work, work_len);
        grow(&mut scratch.wave, short);
        grow(&mut scratch.other_wave, short);
        let refused = |_| FrameFault::Mismatch {
            expected: self.n,
            found: self.short,
        };
        // The analytic signal's real and imaginary part, each by a real inverse transform.
        for (part, wave) in [
            (Part::Real, &mut scratch.wave),
            (Part::Imaginary, &mut scratch.other_wave),
        ] {
            let bins = &mut scratch.short[..half + 1];
            self.fold(&scratch.spectrum, part, side, bins);
            let work = &mut scratch.work[..self.inverse.get_scratch_len()];
            self.inverse
                .process_with_scratch(bins, &mut wave[..short], work)
                .map_err(refused)?;
        }
        for (re, im) in scratch.wave[..short]
            .iter_mut()
            .zip(&scratch.other_wave[..short])
        {
            *re = *re * *re + im * im;
        }
        let work = &mut scratch.work[..self.forward.get_scratch_len()];
        self.forward
            .process_with_scratch(
                &mut scratch.wave[..short],
                &mut scratch.short[..half + 1],
                work,
            )
            .map_err(refused)?;
        hann_power(&scratch.short[..half + 1], &mut spectrum.sums);
        spectrum.frames += 1;
        Ok(())
    }

    /// Bins 0..=half of the real part, (Z\[q\] + Z*\[−q\])/2, or of the imaginary, (Z\[q\] − Z*\[−q\])/2j,
    /// where Z\[q\] is the weighted bin `q` away from the band's centre.
    fn fold(&self, x: &[Complex<f32>], part: Part, side: usize, bins: &mut [Complex<f32>]) {
        let above = &x[self.centre..=self.centre + side];
        let below = &x[self.centre - side..=self.centre];
        let (w_above, w_below) = (&self.weights[side..], &self.weights[..=side]);
        let pairs = above
            .iter()
            .zip(w_above)
            .zip(below.iter().rev().zip(w_below.iter().rev()));
        for (bin, ((a, wa), (b, wb))) in bins.iter_mut().zip(pairs) {
            let (a, b) = (a * (0.5 * wa), b.conj() * (0.5 * wb));
            *bin = match part {
                Part::Real => a + b,
                Part::Imaginary => Complex::new(a.im - b.im, b.re - a.re),
            };
        }
        bins[0].im = 0.0;
        bins[side + 1..].fill(Complex::new(0.0, 0.0));
    }
}

#[derive(Clone, Copy)]
enum Part {
    Real,
    Imaginary,
}

/// The shortest length from `least` on that transforms quickly: a power of two times 1, 3, 5, 9 or 15.
///
/// 16 at least; so it is even, and no more than a quarter above `least`.
fn quick_length(least: usize) -> usize {
    let lengths = [1, 3, 5, 9, 15].into_iter().map(|odd| {
        let mut length = 16 * odd;
        while length < least {
            length *= 2;
        }
        length
    });
    lengths.min().unwrap_or(least)
}

/// Raised cosine over the outermost bins; symmetric, so the envelope is not skewed.
fn edge(i: usize, bins: usize) -> f64 {
    let from_edge = i.min(bins - 1 - i);
    if from_edge >= EDGE_BINS {
        return 1.0;
    }
    0.5 - 0.5 * (PI * (from_edge as f64 + 1.0) / (EDGE_BINS as f64 + 1.0)).cos()
}

/// Power spectrum of the squared envelope, summed over frames.
#[derive(Debug, Clone, PartialEq)]
pub struct EnvelopeSpectrum {
    short: usize,
    resolution_hz: f64,
    band_hz: (f64, f64),
    frames: u32,
    sums: Vec<f64>,
}

impl EnvelopeSpectrum {
    /// Forgets all frames.
    pub fn clear(&mut self) {
        self.frames = 0;
        self.sums.fill(0.0);
    }

    /// Frames averaged so far.
    pub fn frames(&self) -> u32 {
        self.frames
    }

    /// Bins kept, from 0 Hz to the plan's reach.
    pub fn bins(&self) -> usize {
        self.sums.len()
    }

    /// Spacing of the bins, Hz.
    pub fn resolution_hz(&self) -> f64 {
        self.resolution_hz
    }

    /// Band the envelope was taken from, Hz.
    pub fn band_hz(&self) -> (f64, f64) {
        self.band_hz
    }

    /// Power of bin `k`: the squared peak amplitude a line centred on it would have, (m/s²)⁴.
    pub fn power(&self, k: usize) -> f64 {
        let scale = 4.0 / self.short as f64;
        match self.sums.get(k) {
            Some(sum) if self.frames > 0 => sum / f64::from(self.frames) * scale * scale,
            Some(_) | None => 0.0,
        }
    }

    /// Amplitude of the squared envelope at bin `k`, (m/s²)² peak.
    pub fn amplitude(&self, k: usize) -> f64 {
        self.power(k).sqrt()
    }

    /// All powers, (m/s²)⁴, 0 Hz first.
    pub fn powers(&self) -> Vec<f64> {
        (0..self.bins()).map(|k| self.power(k)).collect()
    }
}
