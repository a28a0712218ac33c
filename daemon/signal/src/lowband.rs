//! The low band: the signal decimated, and velocity made from it, out of the shared FFT.
//!
//! In: the rectangular spectra of consecutive frames, 50 % overlapped, m/s², one pivot per run.
//! Out: a continuous waveform at the low rate, `rate / factor`, at least 2560 samples/s: acceleration
//! in m/s² ([`Response::Plain`]) or weighted velocity in mm/s ([`Response::Velocity`]).
//!
//! A periodic Hann at 50 % overlap sums to one. So each frame, windowed in frequency (X\[0\] kept),
//! cut to its low bins, multiplied by a smooth response and transformed back short, adds up with its
//! neighbours to the signal filtered by that response and decimated. For velocity the high-pass and
//! the integration, s²/((s + w)(s² + ws + w²)), run as two bilinear `f64` sections at the low rate,
//! and the response in frequency carries the rest: the zero-phase low-pass and what the bilinear
//! form bends. Its double zero at 0 Hz keeps gravity and drift out; there is no bare integrator.
//!
//! Flat to 0.4 of the low rate, zero from 0.5: with the velocity weighting that reaches past 1000 Hz.
//! Known error, plain, frames of 512 low-rate samples or more: 1e-5 of full scale for content up to
//! 0.3 of the low rate, 1e-4 up to 0.395, where a line's lobe meets the taper. Velocity of a sine,
//! 10-1000 Hz: 0.5 % promised, 0.02 % met.
//! Latency: a frame that starts at sample s gives the samples of \[s, s + n/2).
//! Checked by `tests/accuracy/low_band.rs` and `tests/accuracy/velocity.rs`.

mod response;
mod wave;

use alloc::sync::Arc;
use alloc::vec;
use alloc::vec::Vec;
use core::fmt;

use realfft::num_complex::Complex;
use realfft::{ComplexToReal, RealFftPlanner};

use crate::frame::{FrameFault, Scratch, check, grow};
use crate::weighting::{Weighting, WeightingFault};
use response::{Section, sections};
pub use wave::WaveStats;

/// Lowest low rate, samples/s: 2.56 × 1000 Hz.
pub const LOWEST_RATE_HZ: f64 = 2560.0;

/// What the low band carries.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Response {
    /// Acceleration, m/s², flat.
    Plain,
    /// Velocity, mm/s, weighted from `lower_edge_hz` to 1000 Hz ([`crate::weighting`]).
    Velocity {
        /// Lower edge of the band, Hz.
        lower_edge_hz: f64,
    },
}

/// Why a low band cannot be planned.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum LowBandFault {
    /// The frame itself cannot be planned.
    Frame(FrameFault),
    /// The sample rate is too low to carry 1000 Hz.
    TooSlow {
        /// The rate stated, samples/s.
        rate_hz: f64,
    },
    /// The velocity band cannot be weighted.
    Weighting(WeightingFault),
}

impl fmt::Display for LowBandFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            LowBandFault::Frame(fault) => fault.fmt(f),
            LowBandFault::TooSlow { rate_hz } => write!(
                f,
                "sample rate {rate_hz} cannot carry velocity to 1000 Hz; sample at {LOWEST_RATE_HZ} samples/s or faster"
            ),
            LowBandFault::Weighting(fault) => fault.fmt(f),
        }
    }
}

impl core::error::Error for LowBandFault {
    fn source(&self) -> Option<&(dyn core::error::Error + 'static)> {
        match self {
            LowBandFault::Frame(fault) => Some(fault),
            LowBandFault::Weighting(fault) => Some(fault),
            LowBandFault::TooSlow { .. } => None,
        }
    }
}

impl From<FrameFault> for LowBandFault {
    fn from(fault: FrameFault) -> Self {
        LowBandFault::Frame(fault)
    }
}

impl From<WeightingFault> for LowBandFault {
    fn from(fault: WeightingFault) -> Self {
        LowBandFault::Weighting(fault)
    }
}

/// The decimation for frames of `n` at `rate_hz`: the largest factor that divides n/2, leaves at least
/// 16 samples a frame, and keeps the low rate at 2560 samples/s or more.
///
/// 8 at 25.6 kHz, 4 at 12 kHz, 16 at 48 kHz for n = 8192. `None` below 2560 samples/s.
pub fn factor(n: usize, rate_hz: f64) -> Option<usize> {
    let most = (rate_hz / LOWEST_RATE_HZ * (1.0 + 1e-12))
        .floor()
        .min(n as f64) as usize;
    (1..=most)
        .rev()
        .find(|d| n.is_multiple_of(2 * d) && n / d >= 16)
}

/// Tail and filter memory of one point's low band.
#[derive(Debug, Clone, PartialEq)]
pub struct LowBandState {
    tail: Vec<f32>,
    memory: [[f64; 2]; 2],
}

/// The low band of one frame length, rate and response.
#[derive(Clone)]
pub struct LowBandPlan {
    n: usize,
    rate_hz: f64,
    factor: usize,
    gains: Vec<Complex<f32>>,
    sections: Option<[Section; 2]>,
    settle: usize,
    inverse: Arc<dyn ComplexToReal<f32>>,
}

impl fmt::Debug for LowBandPlan {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_struct("LowBandPlan")
            .field("n", &self.n)
            .field("rate_hz", &self.rate_hz)
            .field("factor", &self.factor)
            .finish_non_exhaustive()
    }
}

impl LowBandPlan {
    /// Plans the low band of frames of `n` samples at `rate_hz`.
    pub fn new(n: usize, rate_hz: f64, response: Response) -> Result<Self, LowBandFault> {
        check(n, rate_hz)?;
        let factor = factor(n, rate_hz).ok_or(LowBandFault::TooSlow { rate_hz })?;
        let short = n / factor;
        let low_rate_hz = rate_hz / factor as f64;
        let (gains, sections, settling_s) = match response {
            Response::Plain => (response::plain(n, short), None, 0.0),
            Response::Velocity { lower_edge_hz } => {
                let weighting = Weighting::velocity(lower_edge_hz)?;
                (
                    response::velocity(n, short, low_rate_hz, &weighting),
                    Some(sections(&weighting, low_rate_hz)),
                    response::settling_s(&weighting),
                )
            }
        };
        let settle = short / 2 + (settling_s * low_rate_hz).ceil() as usize;
        let inverse = RealFftPlanner::<f32>::new().plan_fft_inverse(short);
        Ok(LowBandPlan {
            n,
            rate_hz,
            factor,
            gains,
            sections,
            settle,
            inverse,
        })
    }

    /// Samples per frame.
    pub fn n(&self) -> usize {
        self.n
    }

    /// Original samples per low-rate sample.
    pub fn factor(&self) -> usize {
        self.factor
    }

    /// Low rate, samples/s.
    pub fn low_rate_hz(&self) -> f64 {
        self.rate_hz / self.factor as f64
    }

    /// Low-rate samples each frame gives: n / (2 factor).
    pub fn samples_per_frame(&self) -> usize {
        self.n / self.factor / 2
    }

    /// Low-rate samples at the start of a run that are not to be used.
    ///
    /// The first half frame, which only one window covers, and for velocity the high-pass: a step of
    /// 9.81 m/s² and a ramp of 1 m/s² a second together leave at most 0.02 mm/s after it.
    /// 0.37 s beyond the half frame for a lower edge of 10 Hz, 2.20 s for 2 Hz.
    pub fn settle_samples(&self) -> usize {
        self.settle
    }

    /// State for the start of a run.
    pub fn start(&self) -> LowBandState {
        LowBandState {
            tail: vec![0.0; self.samples_per_frame()],
            memory: [[0.0; 2]; 2],
        }
    }

    /// Takes the frame in `scratch` and appends the low-rate samples of its first half to `out`.
    ///
    /// Frames come in order, each n/2 samples after the last; after a gap begin with [`LowBandPlan::start`].
    /// The i-th sample since the start belongs to the run's sample i · factor.
    /// Fails when the scratch or the state belongs to another plan.
    pub fn push_frame(
        &self,
        scratch: &mut Scratch,
        state: &mut LowBandState,
        out: &mut Vec<f32>,
    ) -> Result<(), FrameFault> {
        scratch.holds(self.n)?;
        let hop = self.samples_per_frame();
        if state.tail.len() != hop {
            return Err(FrameFault::Mismatch {
                expected: self.n,
                found: state.tail.len() * 2 * self.factor,
            });
        }
        let work_len = self.inverse.get_scratch_len();
        grow(&mut scratch.short, hop + 1);
        grow(&mut scratch.wave, 2 * hop);
        grow(&mut scratch.work, work_len);
        let x = &scratch.spectrum;
        let short = &mut scratch.short[..hop + 1];
        short[0] = Complex::new((x[0].re - x[1].re) * 0.5 * self.gains[0].re, 0.0);
        for ((y, w), gain) in short[1..hop]
            .iter_mut()
            .zip(x.windows(3))
            .zip(&self.gains[1..])
        {
            *y = (w[1] * 0.5 - (w[0] + w[2]) * 0.25) * gain;
        }
        short[hop] = Complex::new(0.0, 0.0);
        let done = self.inverse.process_with_scratch(
            short,
            &mut scratch.wave[..2 * hop],
            &mut scratch.work[..work_len],
        );
        // Lengths are the plan's own and both end bins are real: nothing is left to refuse.
        done.map_err(|_| FrameFault::Mismatch {
            expected: self.n,
            found: scratch.n,
        })?;
        let from = out.len();
        out.extend(
            scratch.wave[..hop]
                .iter()
                .zip(&state.tail)
                .map(|(y, tail)| y + tail),
        );
        state.tail.copy_from_slice(&scratch.wave[hop..2 * hop]);
        if let Some(sections) = &self.sections {
            response::run(sections, &mut state.memory, &mut out[from..]);
        }
        Ok(())
    }
}
