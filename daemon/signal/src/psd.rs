//! Power spectral density averaged over frames, and what is read from it: lines and bands.
//!
//! In: rectangular spectra of frames at 50 % overlap ([`crate::frame`]). Out: one-sided density,
//! (m/s²)²/Hz, and from it line amplitudes (m/s² peak), band rms (m/s², mm/s).
//! Scaling: density = 2 mean|Y|²/(rate · S2), S2 = 3n/8; at 0 Hz and half the rate without the 2.
//! Source: Welch, IEEE Trans. AU-15 (1967); Heinzel, Rüdiger and Schilling (2002), sections 8-9;
//! formulas from memory, agreeing with scipy's `welch` to 1e-4 (`tests/accuracy/reference.rs`).
//! Known error: a sine half a bin off a bin reads 15.1 % low as a raw line, 2e-6 interpolated.
//! Leaves out: phase, confidence bounds. The overall velocity comes from [`crate::lowband`].

use alloc::vec;
use alloc::vec::Vec;
use core::f64::consts::TAU;

use realfft::num_complex::Complex;

use crate::peaks;

/// Equivalent noise bandwidth of the Hann window, bins. Source: Harris, Proc. IEEE 66 (1978), Table 1.
pub const HANN_ENBW_BINS: f64 = 1.5;

/// A tone found in a spectrum.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Line {
    /// Interpolated frequency, Hz.
    pub frequency_hz: f64,
    /// Interpolated amplitude, m/s² peak of a steady sine.
    pub amplitude: f64,
}

/// Sum of windowed power spectra over frames, in `f64`.
#[derive(Debug, Clone, PartialEq)]
pub struct Psd {
    n: usize,
    rate_hz: f64,
    frames: u32,
    sums: Vec<f64>,
}

impl Psd {
    pub(crate) fn sized(n: usize, rate_hz: f64) -> Self {
        Psd {
            n,
            rate_hz,
            frames: 0,
            sums: vec![0.0; n / 2 + 1],
        }
    }

    /// Adds |Y|² of one frame, Y by Hann in frequency with X\[0\] taken as zero.
    pub(crate) fn add(&mut self, x: &[Complex<f32>]) {
        hann_power(x, &mut self.sums);
        self.frames += 1;
    }

    /// Forgets all frames; keeps its size.
    pub fn clear(&mut self) {
        self.frames = 0;
        self.sums.fill(0.0);
    }

    /// Samples per frame.
    pub fn n(&self) -> usize {
        self.n
    }

    /// Sample rate, samples/s.
    pub fn rate_hz(&self) -> f64 {
        self.rate_hz
    }

    /// Frames averaged so far.
    pub fn frames(&self) -> u32 {
        self.frames
    }

    /// Number of bins: n/2 + 1, from 0 Hz to half the rate.
    pub fn bins(&self) -> usize {
        self.sums.len()
    }

    /// Spacing of the bins, Hz.
    pub fn resolution_hz(&self) -> f64 {
        self.rate_hz / self.n as f64
    }

    /// Equivalent noise bandwidth of one line, Hz: 1.5 bins of the Hann window.
    pub fn noise_bandwidth_hz(&self) -> f64 {
        HANN_ENBW_BINS * self.resolution_hz()
    }

    /// Mean |Y|² of bin `k`; zero before the first frame and past the last bin.
    fn power(&self, k: usize) -> f64 {
        match self.sums.get(k) {
            Some(sum) if self.frames > 0 => sum / f64::from(self.frames),
            Some(_) | None => 0.0,
        }
    }

    fn sides(&self, k: usize) -> f64 {
        if k == 0 || k == self.n / 2 { 1.0 } else { 2.0 }
    }

    /// One-sided density of bin `k`, (m/s²)²/Hz; zero past the last bin.
    pub fn density(&self, k: usize) -> f64 {
        self.sides(k) * self.power(k) / (self.rate_hz * 0.375 * self.n as f64)
    }

    /// All densities, (m/s²)²/Hz, 0 Hz first.
    pub fn densities(&self) -> Vec<f64> {
        (0..self.bins()).map(|k| self.density(k)).collect()
    }

    /// Amplitude a steady sine centred on bin `k` would have, m/s² peak: √(mean|Y|²) · 2/(n/2).
    pub fn line_amplitude(&self, k: usize) -> f64 {
        self.sides(k) * self.power(k).sqrt() / (0.5 * self.n as f64)
    }

    /// Mean square of the part of bin `k`'s cell inside `f1_hz..f2_hz`, (m/s²)²; cells end half a bin
    /// either side, so those at 0 Hz and half the rate are half as wide.
    fn share(&self, k: usize, f1_hz: f64, f2_hz: f64) -> Option<f64> {
        let df = self.resolution_hz();
        let low = ((k as f64 - 0.5) * df).max(0.0);
        let high = ((k as f64 + 0.5) * df).min(0.5 * self.rate_hz);
        let inside = high.min(f2_hz) - low.max(f1_hz);
        (inside > 0.0).then(|| self.density(k) * df * inside / (high - low))
    }

    fn bins_touching(&self, f1_hz: f64, f2_hz: f64) -> core::ops::Range<usize> {
        let df = self.resolution_hz();
        let first = (f1_hz / df - 0.5).floor().max(0.0) as usize;
        let last = (f2_hz / df + 0.5).ceil().max(0.0) as usize;
        first..(last + 1).min(self.bins())
    }

    /// Acceleration rms in `f1_hz..f2_hz`, m/s²; edge bins count by the part inside.
    ///
    /// Edges beyond 0 Hz and half the rate are cut there; an empty band reads 0.
    /// A tone within two bins of an edge is split by the window's lobe.
    pub fn band_rms(&self, f1_hz: f64, f2_hz: f64) -> f64 {
        self.bins_touching(f1_hz, f2_hz)
            .filter_map(|k| self.share(k, f1_hz, f2_hz))
            .sum::<f64>()
            .sqrt()
    }

    /// Velocity rms in `f1_hz..f2_hz`, mm/s, unweighted: each bin over (2πf)² at its centre.
    ///
    /// A sine m bins from zero reads high by 50 %/m² (0.8 % at 8 bins, 0.05 % at 32): the window's
    /// lobe leans on the slope. Bins 0 and 1 are left out, for there the mean's removal shows.
    /// For named bands around lines; the overall velocity, weighted, comes from [`crate::lowband`],
    /// for a tone near a sharp band edge is split here.
    /// Source: omega arithmetic, ISO 18431-2 (from memory).
    pub fn velocity_band_rms(&self, f1_hz: f64, f2_hz: f64) -> f64 {
        let df = self.resolution_hz();
        let sum: f64 = self
            .bins_touching(f1_hz, f2_hz)
            .filter(|&k| k >= 2)
            .filter_map(|k| Some(self.share(k, f1_hz, f2_hz)? / (k as f64 * df).powi(2)))
            .sum();
        sum.sqrt() * 1e3 / TAU
    }

    /// The `count` largest lines in `f1_hz..=f2_hz`, largest first, interpolated.
    ///
    /// A line is a local peak, which a stronger line's skirt is not; noise has peaks too, so judge
    /// them against a floor. Alone from bin 4: within 0.001 bin and 0.023 %; with an equal
    /// neighbour at 4, 6, 8 bins within 0.012, 0.003, 0.0012 bin and 0.33, 0.08, 0.03 %; with one ten
    /// times stronger at 8 bins within 0.012 bin and 0.28 %.
    pub fn lines(&self, f1_hz: f64, f2_hz: f64, count: usize) -> Vec<Line> {
        let df = self.resolution_hz();
        let power: Vec<f64> = (0..self.bins()).map(|k| self.power(k)).collect();
        peaks::strongest(&power, f1_hz / df, f2_hz / df, count)
            .into_iter()
            .map(|peak| Line {
                frequency_hz: peak.bin * df,
                amplitude: peak.power.sqrt() * 4.0 / self.n as f64,
            })
            .collect()
    }

    /// Median density in `f1_hz..=f2_hz`, (m/s²)²/Hz: the floor beneath the lines. `None` when no bin lies there.
    pub fn median_density(&self, f1_hz: f64, f2_hz: f64) -> Option<f64> {
        let df = self.resolution_hz();
        let mut inside: Vec<f64> = (0..self.bins())
            .filter(|&k| (f1_hz..=f2_hz).contains(&(k as f64 * df)))
            .map(|k| self.density(k))
            .collect();
        peaks::median(&mut inside)
    }

    /// Statistically independent averages in this many frames at 50 % overlap.
    ///
    /// K / (1 + 2 (1 − 1/K)/36); the random error of a density is 1/√ of it.
    /// Source: Welch 1967; overlap correlation of the Hann window 1/6, Harris 1978, Table 1.
    pub fn effective_averages(&self) -> f64 {
        let k = f64::from(self.frames);
        if self.frames == 0 {
            0.0
        } else {
            k / (1.0 + 2.0 * (1.0 - 1.0 / k) / 36.0)
        }
    }
}

/// Adds |Y\[k\]|² to `sums`, Y\[k\] = X\[k\]/2 − (X\[k−1\] + X\[k+1\])/4 with X\[0\] taken as zero.
///
/// `sums` may be shorter than `x` (low bins only); `x` holds bins 0..=half.
pub(crate) fn hann_power(x: &[Complex<f32>], sums: &mut [f64]) {
    let half = x.len() - 1;
    if half < 3 {
        return;
    }
    let wanted = sums.len().min(half);
    for (k, sum) in sums.iter_mut().enumerate().take(2) {
        // X[-1] is the conjugate of X[1]; X[0] counts as zero.
        let y = if k == 0 {
            Complex::new(-0.5 * x[1].re, 0.0)
        } else {
            x[1] * 0.5 - x[2] * 0.25
        };
        *sum += f64::from(y.norm_sqr());
    }
    if wanted > 2 {
        for (sum, w) in sums[2..wanted].iter_mut().zip(x[1..].windows(3)) {
            let re = 2.0 * w[1].re - (w[0].re + w[2].re);
            let im = 2.0 * w[1].im - (w[0].im + w[2].im);
            *sum += f64::from(re * re + im * im) * 0.0625;
        }
    }
    if sums.len() > half {
        let y = 0.5 * (x[half].re - x[half - 1].re);
        sums[half] += f64::from(y * y);
    }
}
