//! Second-order filter sections, and what they do to white noise in closed form.
//!
//! Butterworth low- and high-pass by the bilinear transform with the corner pre-warped: the same coefficients as
//! `scipy.signal.butter(2, ...)`. A resonance is the exact sampled form of a damped mode. Checked by
//! `tests/physics.py` (`butterworth sections`).

use core::f64::consts::{PI, SQRT_2, TAU};

use num_complex::Complex64;

/// One section: `b` over `1, a1, a2`, and its state (transposed form II).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Biquad {
    b: [f64; 3],
    a: [f64; 2],
    state: [f64; 2],
}

impl Biquad {
    fn new(b: [f64; 3], a: [f64; 2]) -> Biquad {
        Biquad {
            b,
            a,
            state: [0.0; 2],
        }
    }

    /// Second-order Butterworth low-pass.
    #[must_use]
    pub fn low_pass(corner_hz: f64, rate_hz: f64) -> Biquad {
        let (k, norm) = warped(corner_hz, rate_hz);
        let b0 = k * k * norm;
        Biquad::new([b0, 2.0 * b0, b0], feedback(k, norm))
    }

    /// Second-order Butterworth high-pass.
    #[must_use]
    pub fn high_pass(corner_hz: f64, rate_hz: f64) -> Biquad {
        let (k, norm) = warped(corner_hz, rate_hz);
        Biquad::new([norm, -2.0 * norm, norm], feedback(k, norm))
    }

    /// A damped mode by bilinear transform with gain 1 at 0 Hz: a sensor's own resonance.
    #[must_use]
    pub fn mode(hz: f64, damping: f64, rate_hz: f64) -> Biquad {
        let k = (PI * hz / rate_hz).tan();
        let norm = 1.0 / (1.0 + 2.0 * damping * k + k * k);
        let b0 = k * k * norm;
        Biquad::new(
            [b0, 2.0 * b0, b0],
            [
                2.0 * (k * k - 1.0) * norm,
                (1.0 - 2.0 * damping * k + k * k) * norm,
            ],
        )
    }

    /// Coefficients `b0, b1, b2, a1, a2`.
    #[must_use]
    pub fn coefficients(&self) -> [f64; 5] {
        [self.b[0], self.b[1], self.b[2], self.a[0], self.a[1]]
    }

    /// Filters one sample.
    pub fn run(&mut self, x: f64) -> f64 {
        let y = self.b[0] * x + self.state[0];
        self.state[0] = self.b[1] * x - self.a[0] * y + self.state[1];
        self.state[1] = self.b[2] * x - self.a[1] * y;
        y
    }

    /// Filters samples in place.
    pub fn run_all(&mut self, samples: &mut [f64]) {
        // On a copy: its state stays in registers.
        let mut section = *self;
        for sample in samples {
            *sample = section.run(*sample);
        }
        *self = section;
    }

    /// Response at `hz`.
    #[must_use]
    pub fn response(&self, hz: f64, rate_hz: f64) -> Complex64 {
        let z1 = Complex64::from_polar(1.0, -TAU * hz / rate_hz);
        let z2 = z1 * z1;
        (self.b[0] + z1 * self.b[1] + z2 * self.b[2]) / (1.0 + z1 * self.a[0] + z2 * self.a[1])
    }
}

fn warped(corner_hz: f64, rate_hz: f64) -> (f64, f64) {
    let k = (PI * corner_hz / rate_hz).tan();
    (k, 1.0 / (1.0 + SQRT_2 * k + k * k))
}

fn feedback(k: f64, norm: f64) -> [f64; 2] {
    [
        2.0 * (k * k - 1.0) * norm,
        (1.0 - SQRT_2 * k + k * k) * norm,
    ]
}

/// Sections one after the other.
#[derive(Clone, Debug, PartialEq)]
pub struct Cascade {
    sections: Vec<Biquad>,
    rate_hz: f64,
}

impl Cascade {
    /// Sections for samples at `rate_hz`.
    #[must_use]
    pub fn new(sections: Vec<Biquad>, rate_hz: f64) -> Cascade {
        Cascade { sections, rate_hz }
    }

    /// Filters samples in place.
    pub fn run_all(&mut self, samples: &mut [f64]) {
        for section in &mut self.sections {
            section.run_all(samples);
        }
    }

    /// Power response at `hz`.
    #[must_use]
    pub fn power(&self, hz: f64) -> f64 {
        self.sections
            .iter()
            .map(|section| section.response(hz, self.rate_hz).norm_sqr())
            .product()
    }

    /// Mean square at the output for white noise of variance 1, weighted by `weight(hz)`, over `low_hz..high_hz`,
    /// no further than half the rate:
    /// the integral of 2/rate |H|² weight, Simpson's rule on a logarithmic grid of 2000 steps.
    #[must_use]
    pub fn noise_power(&self, low_hz: f64, high_hz: f64, weight: impl Fn(f64) -> f64) -> f64 {
        let steps = 2000;
        let ratio = (high_hz.min(0.5 * self.rate_hz) / low_hz).ln() / f64::from(steps);
        let density = |k: i32| {
            let hz = low_hz * (ratio * f64::from(k)).exp();
            2.0 / self.rate_hz * self.power(hz) * weight(hz) * hz
        };
        let inner: f64 = (1..steps)
            .map(|k| density(k) * if k % 2 == 1 { 4.0 } else { 2.0 })
            .sum();
        (density(0) + inner + density(steps)) * ratio / 3.0
    }
}
