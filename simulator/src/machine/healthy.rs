//! A healthy pump set: residual imbalance, vanes, flow, bearings rolling.
//!
//! Velocity 0.8-2.0 mm/s rms for a new machine and 0.05-0.3 g rms of acceleration at 1-10 kHz (reference levels:
//! ISO 10816-7 zone A, from memory; the spread is common practice, no source). Forces of mass go with speed squared,
//! flow with speed squared (affinity of pressure), rolling noise with speed.

use core::f64::consts::{SQRT_2, TAU};
use std::sync::Arc;

use super::Path;
use crate::random::Draw;
use crate::scenario::{Asset, Point};
use crate::wave::{Biquad, Cascade, Law, Line, Lines, LoadLaw, Noise, Pitch, Sway, Voice, Wave};

/// Shares of the velocity rms: orders 1, 2, 3 of the shaft, vane pass and its double, its two sidebands, flow noise.
/// Their squares sum to 1.
const SHARES: [f64; 7] = [0.72, 0.24, 0.10, 0.42, 0.14, 0.05, 0.461_519];

/// The waves of a healthy machine at one point.
#[must_use]
pub fn healthy(asset: &Asset, point: &Point, path: &Arc<Path>, draw: &Draw) -> Vec<Box<dyn Wave>> {
    let mut draw = draw.part("healthy");
    let rate_hz = point.true_rate_hz();
    let shaft_hz = asset.nominal_rpm() / 60.0;
    let velocity_m_s = asset.velocity_mm_s * 1e-3;
    let vanes = f64::from(asset.vanes);
    let mass = Law::steady(2.0);
    let vane = Law {
        load: LoadLaw::OffBest { gain: 1.5 },
        ..Law::steady(2.0)
    };
    let tones = [
        (1.0, SHARES[0], mass),
        (2.0, SHARES[1], mass),
        (3.0, SHARES[2], mass),
        (vanes, SHARES[3], vane),
        (2.0 * vanes, SHARES[4], vane),
        (vanes - 1.0, SHARES[5], vane),
        (vanes + 1.0, SHARES[5], vane),
    ];
    let lines = tones
        .into_iter()
        .map(|(order, share, law)| Line {
            pitch: Pitch::order(order),
            peak_ms2: SQRT_2 * TAU * order * shaft_hz * velocity_m_s * share * draw.gain_db(2.0),
            phase: draw.angle(),
            law,
            sway: Sway::drawn(&mut draw),
        })
        .collect();
    let flow = Cascade::new(
        vec![
            Biquad::high_pass(draw.log_between(12.0, 20.0), rate_hz),
            Biquad::low_pass(draw.log_between(150.0, 350.0).min(0.3 * rate_hz), rate_hz),
        ],
        rate_hz,
    );
    let highest = (0.42 * rate_hz).min(9000.0);
    let rolling = Cascade::new(
        vec![
            Biquad::high_pass(draw.log_between(700.0, 1100.0).min(0.5 * highest), rate_hz),
            Biquad::low_pass(draw.between(0.7, 1.0) * highest, rate_hz),
        ],
        rate_hz,
    );
    let rolling_ms2 = draw.log_between(0.5, 1.5) * path.gain();
    let flow_m_s = velocity_m_s * SHARES[6] * path.gain();
    vec![
        Box::new(Lines::new(lines, Arc::clone(path))),
        Box::new(Noise::new(vec![
            Voice::with_velocity(flow, flow_m_s, vane, draw.part("flow")),
            Voice::with_rms(
                rolling,
                rate_hz,
                rolling_ms2,
                Law::steady(1.0),
                draw.part("rolling"),
            ),
        ])),
    ]
}
