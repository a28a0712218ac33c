//! The low band's response: a smooth taper in frequency, and two sections at the low rate.
//!
//! Velocity wants H(jω) · |LP(f)| with H(s) = s²/((s + w)(s² + ws + w²)) · 1000, mm/s out of m/s².
//! The sections are H by the bilinear transform, H(j (2/T) tan(ωT/2)); the gains in frequency are
//! taper · |LP| · H(jω)/H(j (2/T) tan(ωT/2)), a smooth correction that tends to 1 at 0 Hz. So the
//! product is the wanted response, whatever the low rate.

use alloc::vec::Vec;
use core::f64::consts::{PI, TAU};

use realfft::num_complex::Complex;

use crate::weighting::Weighting;

/// Flat up to this part of the low rate; zero from a half.
const FLAT_TO: f64 = 0.4;

/// One second-order section, transposed direct form II.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Section {
    b: [f64; 3],
    a: [f64; 2],
}

/// Falls from 1 at `FLAT_TO` to 0 at a half of the low rate, three derivatives continuous.
fn taper(part_of_rate: f64) -> f64 {
    let t = ((0.5 - part_of_rate) / (0.5 - FLAT_TO)).clamp(0.0, 1.0);
    t * t * t * t * (35.0 - t * (84.0 - t * (70.0 - 20.0 * t)))
}

fn narrow(value: Complex<f64>, n: usize) -> Complex<f32> {
    // Both transforms are unnormalised: one over the long frame's length restores the scale.
    Complex::new((value.re / n as f64) as f32, (value.im / n as f64) as f32)
}

/// Gains of the bins below half of the short frame: the taper alone.
pub(super) fn plain(n: usize, short: usize) -> Vec<Complex<f32>> {
    (0..short / 2)
        .map(|k| narrow(Complex::new(taper(k as f64 / short as f64), 0.0), n))
        .collect()
}

/// Gains of the bins below half of the short frame for velocity.
pub(super) fn velocity(
    n: usize,
    short: usize,
    low_rate_hz: f64,
    weighting: &Weighting,
) -> Vec<Complex<f32>> {
    (0..short / 2)
        .map(|k| {
            if k == 0 {
                return narrow(Complex::new(1.0, 0.0), n);
            }
            let part = k as f64 / short as f64;
            let hz = part * low_rate_hz;
            let bent = 2.0 * low_rate_hz * (PI * part).tan();
            let correction =
                weighting.integrating_high_pass(TAU * hz) / weighting.integrating_high_pass(bent);
            narrow(
                correction * (taper(part) * weighting.low_pass_magnitude(hz)),
                n,
            )
        })
        .collect()
}

/// The high-pass with one integration, bilinear at the low rate, times 1000 (m/s to mm/s).
pub(super) fn sections(weighting: &Weighting, low_rate_hz: f64) -> [Section; 2] {
    let w = TAU * weighting.high_pass_hz();
    let k = 2.0 * low_rate_hz;
    let first = k + w;
    let second = k * k + k * w + w * w;
    [
        Section {
            b: [k / first, -k / first, 0.0],
            a: [(w - k) / first, 0.0],
        },
        Section {
            b: [1e3 * k / second, 0.0, -1e3 * k / second],
            a: [
                2.0 * (w * w - k * k) / second,
                (k * k - k * w + w * w) / second,
            ],
        },
    ]
}

/// Runs both sections over `samples` in place.
pub(super) fn run(sections: &[Section; 2], memory: &mut [[f64; 2]; 2], samples: &mut [f32]) {
    let [first, second] = sections;
    let [[mut p, _], [mut q, mut r]] = *memory;
    for sample in samples {
        let x = f64::from(*sample);
        let y = first.b[0] * x + p;
        p = first.b[1] * x - first.a[0] * y;
        let z = second.b[0] * y + q;
        q = r - second.a[0] * z;
        r = second.b[2] * y - second.a[1] * z;
        *sample = z as f32;
    }
    *memory = [[p, 0.0], [q, r]];
}

/// Seconds after which a step of 9.81 m/s² and a ramp of 1 m/s² a second have decayed to 0.02 mm/s.
///
/// Partial fractions of H(s)/s and H(s)/s²: the step leaves no more than
/// (g/w)(1.155 e^(−wt/2) + e^(−wt)) m/s, the ramp the same over w.
pub(super) fn settling_s(weighting: &Weighting) -> f64 {
    let w = TAU * weighting.high_pass_hz();
    let start = 1e3 * (crate::units::STANDARD_GRAVITY / w + 1.0 / (w * w));
    let left = |t: f64| start * (1.155 * (-0.5 * w * t).exp() + (-w * t).exp());
    let mut t = 0.0;
    while left(t) > 0.02 {
        t += 0.1 / w;
    }
    t
}
