//! A sensor that has fallen off: the machine runs on, the signal is small and looks healthy.
//!
//! When it falls, and when it is fitted again: a few bumps (half sines of 2-12 g, 0.5-3 ms) within two seconds. In
//! between the axis points elsewhere, so gravity's share goes to a drawn value, swings as a pendulum dies away (0.6-
//! 1.2 Hz, 20 s) and turns on slowly; of the machine's vibration some hundredths come through cable and air, nothing
//! above 60 Hz. Common practice, no source. Checked by `tests/sensor.rs`.

use core::f64::consts::{PI, TAU};

use crate::random::Draw;
use crate::scenario::Window;
use crate::wave::{Biquad, G0, Stretch};

/// Highest frequency that still comes through, Hz.
const THROUGH_HZ: f64 = 60.0;
/// How long bumps go on, s.
const HANDLED_S: f64 = 2.0;
/// Bumps each time.
const BUMPS: usize = 5;

/// One bump.
#[derive(Clone, Copy, Debug)]
struct Bump {
    at_s: f64,
    width_s: f64,
    peak_ms2: f64,
}

/// A sensor off its machine.
#[derive(Clone, Debug)]
pub(super) struct FallenOff {
    window: Window,
    bumps: Vec<Bump>,
    through: [Biquad; 2],
    share: f64,
    /// What gravity's share changes by, g.
    turned_g: f64,
    swing: (f64, f64, f64),
}

impl FallenOff {
    /// A sensor with `offset_g` on its axis, sampled at `rate_hz`, that falls at the window's beginning.
    pub(super) fn new(window: Window, offset_g: f64, rate_hz: f64, mut draw: Draw) -> FallenOff {
        let mut bumps = Vec::new();
        for start_s in [window.at_s(), window.until_s() - HANDLED_S] {
            for _ in 0..BUMPS {
                let sign = if draw.happens(0.5) { 1.0 } else { -1.0 };
                bumps.push(Bump {
                    at_s: start_s + draw.between(0.0, HANDLED_S),
                    width_s: draw.between(0.5e-3, 3e-3),
                    peak_ms2: sign * draw.between(2.0, 12.0) * G0,
                });
            }
        }
        FallenOff {
            window,
            bumps,
            through: [Biquad::low_pass(THROUGH_HZ, rate_hz); 2],
            share: draw.between(0.02, 0.05),
            turned_g: draw.between(-0.9, 0.9) - offset_g,
            swing: (
                draw.between(0.05, 0.15),
                draw.between(0.6, 1.2),
                draw.angle(),
            ),
        }
    }

    /// Gravity's change `since_s` seconds after the fall, g.
    fn gravity_g(&self, since_s: f64) -> f64 {
        let (depth, hz, angle) = self.swing;
        self.turned_g * (1.0 - (-since_s / 0.15).exp())
            + depth * (-since_s / 20.0).exp() * ((TAU * hz * since_s + angle).sin() - angle.sin())
            + 0.03 * (TAU * since_s / 600.0).sin()
    }

    /// Replaces the acceleration of the samples at which it is off.
    pub(super) fn apply(&mut self, stretch: Stretch, samples: &mut [f64]) {
        let range = self.window.within(stretch);
        if range.is_empty() {
            return;
        }
        for index in range.clone() {
            let x = self
                .through
                .iter_mut()
                .fold(samples[index], |x, section| section.run(x));
            let since_s = stretch.at(index) - self.window.at_s();
            samples[index] = self.share * x + G0 * self.gravity_g(since_s);
        }
        for bump in &self.bumps {
            let felt = Window::of(bump.at_s, bump.at_s + bump.width_s).within(stretch);
            let (from, until) = (felt.start.max(range.start), felt.end.min(range.end));
            for (index, value) in samples.iter_mut().enumerate().take(until).skip(from) {
                let share = (stretch.at(index) - bump.at_s) / bump.width_s;
                *value += bump.peak_ms2 * (PI * share).sin();
            }
        }
    }
}
