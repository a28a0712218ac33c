//! What the driver's electricity does to the frame.
//!
//! Induction motor: the air gap is pulled twice a cycle, so 2 x supply (or 2 x the inverter's output). Six-pulse
//! rectifier: the armature current has 6 x supply and its multiples; voltage of harmonic n = 6k at firing angle a
//! is 2 sqrt(cos² a + n² sin² a) / (n² - 1) of the mean at a = 0 (Fourier series of the ideal bridge with continuous
//! current), current that over n as the armature is inductive, and force goes with current. With the shaft's
//! sidebands at 4 %. All of it stops when the power does, while the shaft still runs down. Checked by `tests/physics.rs` against an
//! independently simulated bridge (0.295 per unit of phase peak for n = 6 at 30 degrees).

use core::f64::consts::{SQRT_2, TAU};
use std::sync::Arc;

use super::Path;
use crate::random::Draw;
use crate::scenario::{Asset, Motor, MotorKind};
use crate::wave::{Gate, Law, Line, Lines, LoadLaw, Pitch, Sway, Wave};

/// Voltage of harmonic `n` of a six-pulse bridge, relative to the mean at firing angle 0.
#[must_use]
pub fn bridge_ripple(n: f64, firing_deg: f64) -> f64 {
    let (sin, cos) = firing_deg.to_radians().sin_cos();
    2.0 * (cos * cos + n * n * sin * sin).sqrt() / (n * n - 1.0)
}

/// A name, a pitch and acceleration relative to the first line's.
pub type Tone = (String, Pitch, f64);

/// The electrical lines of a motor.
#[must_use]
pub fn electrical_tones(motor: &Motor) -> Vec<Tone> {
    match motor.kind {
        MotorKind::Induction => vec![("twice line".to_owned(), Pitch::supply(2.0), 1.0)],
        MotorKind::VariableSpeed => {
            // Output frequency is poles / 2 turns of the field, one per cent ahead of the shaft.
            let order = f64::from(motor.poles) * 1.01;
            vec![("twice drive output".to_owned(), Pitch::order(order), 1.0)]
        }
        MotorKind::Rectifier => {
            let current = |n: f64| bridge_ripple(n, motor.firing_deg) / n;
            let first = current(6.0);
            let mut tones = Vec::new();
            for n in [6.0, 12.0, 18.0] {
                let share = current(n) / first;
                tones.push((format!("{n} x line, firing"), Pitch::supply(n), share));
                for (sign, order) in [("-", -1.0), ("+", 1.0)] {
                    let pitch = Pitch {
                        order,
                        ..Pitch::supply(n)
                    };
                    tones.push((format!("{n} x line {sign} 1x"), pitch, 0.04 * share));
                }
            }
            tones
        }
    }
}

/// Frequency of a tone at nominal speed, Hz.
#[must_use]
pub fn tone_hz(pitch: &Pitch, asset: &Asset, line_hz: f64) -> f64 {
    pitch.order * asset.nominal_rpm() / 60.0 + pitch.line_multiple * line_hz
}

/// The electrical lines as waves: velocity of the first is 1 mm/s rms where `law` is 1.
#[must_use]
pub fn electrical(
    asset: &Asset,
    line_hz: f64,
    law: Law,
    path: &Arc<Path>,
    draw: &Draw,
) -> Vec<Box<dyn Wave>> {
    let Some(motor) = asset.motor else {
        return Vec::new();
    };
    let mut draw = draw.part("electrical");
    let tones = electrical_tones(&motor);
    let Some(first_hz) = tones
        .first()
        .map(|(_, pitch, _)| tone_hz(pitch, asset, line_hz))
    else {
        return Vec::new();
    };
    let first_ms2 = SQRT_2 * TAU * first_hz * 1e-3;
    let lines = tones
        .into_iter()
        .map(|(_, pitch, share)| Line {
            pitch,
            peak_ms2: first_ms2 * share,
            phase: draw.angle(),
            law: Law {
                load: LoadLaw::Torque,
                gate: Gate::Powered,
                ..law
            },
            sway: Sway::drawn(&mut draw),
        })
        .collect();
    vec![Box::new(Lines::new(lines, Arc::clone(path)))]
}
