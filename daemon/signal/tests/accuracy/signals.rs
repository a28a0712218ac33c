//! Test signals: closed forms and a seeded generator, the same as `tests/reference/make.py` uses.

use std::f64::consts::TAU;

use humward_signal::envelope::{EnvelopePlan, EnvelopeSpectrum};
use humward_signal::frame::{FramePlan, Scratch};
use humward_signal::lowband::{LowBandPlan, Response};
use humward_signal::psd::Psd;

/// Uniform in −0.5..0.5, 24 bits, from a 64-bit congruential generator (Knuth's constants).
pub(crate) struct Noise(pub(crate) u64);

impl Noise {
    pub(crate) fn uniform(&mut self) -> f64 {
        self.0 = self
            .0
            .wrapping_mul(6_364_136_223_846_793_005)
            .wrapping_add(1_442_695_040_888_963_407);
        (self.0 >> 40) as f64 / (1u64 << 24) as f64 - 0.5
    }

    /// Standard normal by Box and Muller.
    pub(crate) fn gaussian(&mut self) -> f64 {
        let radius = (-2.0 * (self.uniform() + 0.5 + 1.0 / (1u64 << 25) as f64).ln()).sqrt();
        radius * (TAU * self.uniform()).cos()
    }
}

pub(crate) fn sampled(count: usize, rate_hz: f64, wave: impl Fn(f64) -> f64) -> Vec<f32> {
    (0..count)
        .map(|i| wave(i as f64 / rate_hz) as f32)
        .collect()
}

pub(crate) fn sine(amplitude: f64, hz: f64, phase: f64) -> impl Fn(f64) -> f64 {
    move |t| amplitude * (TAU * hz * t + phase).sin()
}

/// Calls `each` for the spectrum of every frame at 50 % overlap, first sample as pivot.
pub(crate) fn frames(plan: &FramePlan, samples: &[f32], mut each: impl FnMut(&mut Scratch)) {
    let mut scratch = Scratch::new();
    let (n, pivot) = (plan.n(), samples[0]);
    for start in (0..=samples.len() - n).step_by(n / 2) {
        plan.transform_about(&samples[start..start + n], pivot, &mut scratch)
            .unwrap();
        each(&mut scratch);
    }
}

pub(crate) fn psd_of(n: usize, rate_hz: f64, samples: &[f32]) -> Psd {
    let plan = FramePlan::new(n, rate_hz).unwrap();
    let mut psd = plan.psd();
    frames(&plan, samples, |scratch| {
        plan.accumulate_psd(scratch, &mut psd).unwrap()
    });
    psd
}

pub(crate) fn envelope_of(
    n: usize,
    rate_hz: f64,
    band_hz: (f64, f64),
    samples: &[f32],
) -> EnvelopeSpectrum {
    let plan = FramePlan::new(n, rate_hz).unwrap();
    let envelope = EnvelopePlan::new(n, rate_hz, band_hz.0, band_hz.1).unwrap();
    let mut spectrum = envelope.spectrum();
    frames(&plan, samples, |scratch| {
        envelope.accumulate(scratch, &mut spectrum).unwrap()
    });
    spectrum
}

/// The whole low band of `samples`, from its first sample on, with the plan.
pub(crate) fn low_band_of(
    n: usize,
    rate_hz: f64,
    response: Response,
    samples: &[f32],
) -> (LowBandPlan, Vec<f32>) {
    let plan = FramePlan::new(n, rate_hz).unwrap();
    let low = LowBandPlan::new(n, rate_hz, response).unwrap();
    let (mut state, mut out) = (low.start(), Vec::new());
    frames(&plan, samples, |scratch| {
        low.push_frame(scratch, &mut state, &mut out).unwrap()
    });
    (low, out)
}

/// Rms by straight `f64` sums, about zero.
pub(crate) fn rms(samples: &[f32]) -> f64 {
    (samples.iter().map(|x| f64::from(*x).powi(2)).sum::<f64>() / samples.len() as f64).sqrt()
}

#[track_caller]
pub(crate) fn close(id: &str, got: f64, expected: f64, tolerance: f64) {
    assert!(
        (got - expected).abs() <= tolerance,
        "{id}: {got} is not {expected} within {tolerance}"
    );
}
