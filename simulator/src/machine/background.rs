//! What a plant hums beside the machine: lines nobody asked for.

use std::sync::Arc;

use core::f64::consts::{SQRT_2, TAU};

use super::Path;
use crate::random::Draw;
use crate::wave::{Law, Line, Lines, Pitch, Sway};

/// How many background lines each point hears.
pub const BACKGROUND_LINES: usize = 24;

/// The background of one point: 14 lines of other machinery at frequencies of their own, 6 that follow this shaft at
/// no whole order, 4 at multiples of the supply. Each 0.004 to 0.06 mm/s rms (common practice, no source), drawn, with the shaft at
/// its nominal `shaft_hz` and the supply at `line_hz`; nothing that the sensor's anti-alias filter at `rate_hz` stops.
/// Checked by `tests/physics.rs`.
#[must_use]
pub fn background(draw: &Draw, shaft_hz: f64, line_hz: f64, rate_hz: f64) -> Lines {
    let mut draw = draw.part("background");
    let lines = (0..BACKGROUND_LINES)
        .map(|index| {
            let (pitch, about_hz, law) = match index {
                0..14 => {
                    let hz = draw.log_between(12.0, 1500.0);
                    (Pitch::fixed(hz), hz, Law::elsewhere())
                }
                14..20 => {
                    let order = draw.between(1.0, 24.0).floor() + draw.between(0.12, 0.88);
                    (Pitch::order(order), order * shaft_hz, Law::steady(2.0))
                }
                _ => {
                    let multiple = draw.between(1.0, 7.0).floor();
                    (
                        Pitch::supply(multiple),
                        multiple * line_hz,
                        Law::elsewhere(),
                    )
                }
            };
            let velocity_m_s = draw.log_between(4e-6, 6e-5);
            Line {
                pitch,
                peak_ms2: SQRT_2 * TAU * about_hz * velocity_m_s,
                phase: draw.angle(),
                law,
                sway: Sway::drawn(&mut draw),
            }
        })
        .collect();
    Lines::new(lines, Arc::new(Path::limited(rate_hz)))
}
