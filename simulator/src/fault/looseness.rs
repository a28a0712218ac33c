//! Looseness: a foot that lifts, so the displacement is cut on one side once per turn.
//!
//! x = min(cos theta, cos phi) has the Fourier coefficients of [`clipped_cosine`]; orders 1 to 10 follow them, half
//! orders up to 4.5 appear as the foot bounces, at 0.15-0.35 of the order below (one-sided stiffness, Ehrich and
//! Muszynska, from memory), and the floor of 10 Hz to 1 kHz rises with 0.3 of the 1x. Severity: velocity of the added
//! 1x, mm/s rms. Checked by `tests/physics.py` against the FFT of the cut cosine.

use core::f64::consts::{PI, SQRT_2, TAU};

use serde::Deserialize;

use super::{Expected, Kind, Seat};
use crate::random::Draw;
use crate::scenario::Asset;
use crate::wave::{Biquad, Cascade, Growth, Law, Line, Lines, Noise, Pitch, Sway, Voice, Wave};

/// A loose foot or bearing cap.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Looseness {
    /// mm/s rms of the added 1x at nominal speed.
    pub growth: Growth,
}

/// Fourier coefficient `k` >= 1 of min(cos theta, cos phi), theta over a turn, 0 < phi < pi.
#[must_use]
pub fn clipped_cosine(k: u32, phi: f64) -> f64 {
    let n = f64::from(k);
    let cut = phi.cos() * (n * phi).sin() / n;
    let rest = if k == 1 {
        (PI - phi) / 2.0 - (2.0 * phi).sin() / 4.0
    } else {
        -0.5 * (((n + 1.0) * phi).sin() / (n + 1.0) + ((n - 1.0) * phi).sin() / (n - 1.0))
    };
    2.0 / PI * (cut + rest)
}

/// Orders and their velocity as shares of the 1x.
fn shares(draw: &Draw) -> Vec<(f64, f64)> {
    let mut draw = draw.part("shares");
    let phi = draw.between(0.6, 1.1);
    let first = clipped_cosine(1, phi).abs();
    let whole: Vec<f64> = (1..=10)
        .map(|k| f64::from(k) * clipped_cosine(k, phi).abs() / first)
        .collect();
    let mut all: Vec<(f64, f64)> = Vec::new();
    for (index, share) in whole.into_iter().enumerate() {
        let order = index as f64 + 1.0;
        all.push((order, share));
        if index < 4 {
            all.push((order + 0.5, share * draw.between(0.15, 0.35)));
        }
    }
    all
}

impl Kind for Looseness {
    fn growth(&self) -> &Growth {
        &self.growth
    }

    fn point(&self) -> Option<&str> {
        None
    }

    fn waves(&self, seat: &Seat<'_>) -> Vec<Box<dyn Wave>> {
        let mut draw = seat.draw.clone();
        let mut local = seat.local.clone();
        let law = Law::growing(self.growth, 2.0);
        let lines = shares(&seat.draw)
            .into_iter()
            .map(|(order, share)| Line {
                pitch: Pitch::order(order),
                peak_ms2: SQRT_2 * TAU * order * seat.asset.nominal_rpm() / 60.0 * 1e-3 * share,
                phase: draw.angle(),
                law,
                sway: Sway::drawn(&mut local),
            })
            .collect();
        let rate_hz = seat.point.true_rate_hz();
        let floor = Cascade::new(
            vec![
                Biquad::high_pass(10.0, rate_hz),
                Biquad::low_pass((0.4 * rate_hz).min(1000.0), rate_hz),
            ],
            rate_hz,
        );
        vec![
            Box::new(Lines::new(lines, seat.path.clone())),
            Box::new(Noise::new(vec![Voice::with_velocity(
                floor,
                0.3e-3 * seat.path.gain(),
                law,
                seat.local.part("floor"),
            )])),
        ]
    }

    fn expected(&self, asset: &Asset, _: f64, draw: &Draw) -> Vec<Expected> {
        shares(draw)
            .into_iter()
            .map(|(order, share)| {
                Expected::velocity(format!("{order}x"), asset, order, self.growth.to * share)
            })
            .collect()
    }

    fn severity(&self) -> &'static str {
        "mm/s rms of the added 1x"
    }

    fn check(&self, asset: &Asset, faults: &mut Vec<String>) {
        super::check_growth("looseness", asset, &self.growth, 0.0, 100.0, faults);
    }
}

#[cfg(test)]
mod tests {
    use super::clipped_cosine;
    use core::f64::consts::TAU;

    /// Closed form against the definition of the coefficient, summed over 100 000 angles.
    #[test]
    fn the_coefficients_are_those_of_the_cut_cosine_within_1e_8() {
        let n = 100_000;
        for phi in [0.3_f64, 0.9, 1.57, 2.4] {
            for k in 1..=10 {
                let sum: f64 = (0..n)
                    .map(|i| TAU * f64::from(i) / f64::from(n))
                    .map(|theta| theta.cos().min(phi.cos()) * (f64::from(k) * theta).cos())
                    .sum();
                let numeric = 2.0 * sum / f64::from(n);
                assert!(
                    (clipped_cosine(k, phi) - numeric).abs() < 1e-8,
                    "k {k} phi {phi}"
                );
            }
        }
    }
}
