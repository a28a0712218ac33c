//! One real FFT per frame, planned once and shared by everything that reads a spectrum.
//!
//! In: `n` samples, m/s², with the run's pivot (its first sample) already subtracted.
//! Out: the unnormalised rectangular spectrum X\[k\] = Σ x\[i\] e^(−j2πki/n), k = 0..=n/2, left in the
//! [`Scratch`]; the Hann window is applied to it in frequency,
//! Y\[k\] = X\[k\]/2 − (X\[k−1\] + X\[k+1\])/4, which equals multiplying by the periodic Hann.
//! For the density X\[0\] is taken as zero, so the frame's mean is removed before the window.
//! Known error: `f32` arithmetic, 1e-6 of a line on a bin. Leaves out: overlap and block borders,
//! which belong to whoever cuts the frames.
//! Checked by `tests/accuracy/spectrum.rs`.

use alloc::sync::Arc;
use alloc::vec::Vec;
use core::fmt;

use realfft::num_complex::Complex;
use realfft::{RealFftPlanner, RealToComplex};

use crate::psd::Psd;

/// Smallest frame, samples.
pub const SMALLEST_FRAME: usize = 64;
/// Largest frame, samples.
pub const LARGEST_FRAME: usize = 1 << 20;

/// Why a frame cannot be planned or read.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum FrameFault {
    /// The frame length is odd, out of range, or has a prime factor above 5.
    Length {
        /// The length asked for, samples.
        n: usize,
    },
    /// The sample rate is not a positive finite number.
    Rate {
        /// The rate asked for, samples/s.
        rate_hz: f64,
    },
    /// The slice handed in does not hold one frame.
    Samples {
        /// Samples a frame holds.
        expected: usize,
        /// Samples handed in.
        given: usize,
    },
    /// The scratch or accumulator holds a spectrum of another frame length.
    Mismatch {
        /// Frame length of the plan, samples.
        expected: usize,
        /// Frame length found, samples; 0 when nothing has been transformed.
        found: usize,
    },
}

impl fmt::Display for FrameFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            FrameFault::Length { n } => write!(
                f,
                "frame of {n} samples cannot be planned; use an even product of 2, 3 and 5 from {SMALLEST_FRAME} to {LARGEST_FRAME}, such as 8192"
            ),
            FrameFault::Rate { rate_hz } => {
                write!(
                    f,
                    "sample rate {rate_hz} is not a positive number of samples/s; correct the rate"
                )
            }
            FrameFault::Samples { expected, given } => {
                write!(
                    f,
                    "frame holds {expected} samples but {given} were given; cut frames of {expected}"
                )
            }
            FrameFault::Mismatch { expected, found } => write!(
                f,
                "spectrum belongs to a frame of {found} samples, not {expected}; transform with the plan that reads it"
            ),
        }
    }
}

impl core::error::Error for FrameFault {}

/// Work space of one worker, reused by every plan and grown to the largest of them.
///
/// Holds the spectrum of the last frame transformed; allocates only when a larger plan comes.
#[derive(Debug, Default)]
pub struct Scratch {
    pub(crate) n: usize,
    pub(crate) wave: Vec<f32>,
    pub(crate) other_wave: Vec<f32>,
    pub(crate) spectrum: Vec<Complex<f32>>,
    pub(crate) short: Vec<Complex<f32>>,
    pub(crate) work: Vec<Complex<f32>>,
}

impl Scratch {
    /// An empty work space.
    pub fn new() -> Self {
        Scratch::default()
    }

    pub(crate) fn holds(&self, n: usize) -> Result<(), FrameFault> {
        if self.n == n {
            Ok(())
        } else {
            Err(FrameFault::Mismatch {
                expected: n,
                found: self.n,
            })
        }
    }
}

pub(crate) fn grow<T: Clone + Default>(buffer: &mut Vec<T>, len: usize) {
    if buffer.len() < len {
        buffer.resize(len, T::default());
    }
}

/// True when `n` is an even product of 2, 3 and 5 within the planned range.
pub(crate) fn plannable(n: usize) -> bool {
    if !n.is_multiple_of(2) || !(SMALLEST_FRAME..=LARGEST_FRAME).contains(&n) {
        return false;
    }
    smooth(n)
}

pub(crate) fn smooth(mut n: usize) -> bool {
    for factor in [2, 3, 5] {
        while n > 0 && n.is_multiple_of(factor) {
            n /= factor;
        }
    }
    n == 1
}

pub(crate) fn check(n: usize, rate_hz: f64) -> Result<(), FrameFault> {
    if !plannable(n) {
        return Err(FrameFault::Length { n });
    }
    if !(rate_hz.is_finite() && rate_hz > 0.0) {
        return Err(FrameFault::Rate { rate_hz });
    }
    Ok(())
}

/// The FFT of one frame length and rate.
#[derive(Clone)]
pub struct FramePlan {
    n: usize,
    rate_hz: f64,
    fft: Arc<dyn RealToComplex<f32>>,
}

impl fmt::Debug for FramePlan {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_struct("FramePlan")
            .field("n", &self.n)
            .field("rate_hz", &self.rate_hz)
            .finish_non_exhaustive()
    }
}

impl FramePlan {
    /// Plans frames of `n` samples at `rate_hz`.
    ///
    /// `n` is an even product of 2, 3 and 5, from 64 to 1 048 576; 4096 to 65 536 is usual.
    pub fn new(n: usize, rate_hz: f64) -> Result<Self, FrameFault> {
        check(n, rate_hz)?;
        Ok(FramePlan {
            n,
            rate_hz,
            fft: RealFftPlanner::<f32>::new().plan_fft_forward(n),
        })
    }

    /// Samples per frame.
    pub fn n(&self) -> usize {
        self.n
    }

    /// Sample rate, samples/s.
    pub fn rate_hz(&self) -> f64 {
        self.rate_hz
    }

    /// Spacing of the bins, Hz: rate / n.
    pub fn resolution_hz(&self) -> f64 {
        self.rate_hz / self.n as f64
    }

    /// Transforms one frame and leaves its rectangular spectrum in `scratch`.
    ///
    /// `samples`: exactly `n`, m/s², pivot already subtracted, all finite. Fails on another length.
    pub fn transform(&self, samples: &[f32], scratch: &mut Scratch) -> Result<(), FrameFault> {
        self.transform_about(samples, 0.0, scratch)
    }

    /// Like [`FramePlan::transform`], subtracting `pivot` (m/s²) on the way in, at no extra cost.
    ///
    /// Keep one pivot for a whole run: the low band joins frames and would see a step.
    pub fn transform_about(
        &self,
        samples: &[f32],
        pivot: f32,
        scratch: &mut Scratch,
    ) -> Result<(), FrameFault> {
        let n = self.n;
        if samples.len() != n {
            return Err(FrameFault::Samples {
                expected: n,
                given: samples.len(),
            });
        }
        scratch.n = 0;
        grow(&mut scratch.wave, n);
        grow(&mut scratch.spectrum, n / 2 + 1);
        let work_len = self.fft.get_scratch_len();
        grow(&mut scratch.work, work_len);
        for (to, from) in scratch.wave[..n].iter_mut().zip(samples) {
            *to = from - pivot;
        }
        let done = self.fft.process_with_scratch(
            &mut scratch.wave[..n],
            &mut scratch.spectrum[..n / 2 + 1],
            &mut scratch.work[..work_len],
        );
        // The three lengths are the plan's own, the only thing this call can refuse.
        done.map_err(|_| FrameFault::Samples {
            expected: n,
            given: samples.len(),
        })?;
        scratch.n = n;
        Ok(())
    }

    /// An empty accumulator for this plan's densities.
    pub fn psd(&self) -> Psd {
        Psd::sized(self.n, self.rate_hz)
    }

    /// Adds the frame in `scratch`, Hann-windowed and with its mean removed, to `psd`.
    ///
    /// Fails when either belongs to another frame length.
    pub fn accumulate_psd(&self, scratch: &Scratch, psd: &mut Psd) -> Result<(), FrameFault> {
        scratch.holds(self.n)?;
        if psd.n() != self.n {
            return Err(FrameFault::Mismatch {
                expected: self.n,
                found: psd.n(),
            });
        }
        psd.add(&scratch.spectrum[..self.n / 2 + 1]);
        Ok(())
    }
}
