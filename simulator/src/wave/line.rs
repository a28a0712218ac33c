//! Lines: sines that follow shaft, supply or a frequency of their own.
//!
//! In: pitch, peak acceleration (m/s²) at nominal speed, law, path. Out: samples; phase is anchored in the turns of
//! shaft and supply, so it never drifts from them. Within a tick frequency is constant and level exponential; at
//! 2.5 Hz/s and the tenth order the phase is off by at most 2 mrad. Checked by `tests/physics.rs`.

use core::f64::consts::TAU;
use std::sync::Arc;

use num_complex::Complex64;

use super::{Law, Phasor, State, Stretch, Tick, Wave};
use crate::machine::Path;
use crate::random::Draw;

/// What a line's frequency is made of: `order` x shaft + `line_multiple` x supply + `fixed_hz`.
#[derive(Clone, Copy, Debug, PartialEq, Default)]
pub struct Pitch {
    /// Cycles per turn of the shaft.
    pub order: f64,
    /// Cycles per cycle of the supply.
    pub line_multiple: f64,
    /// The rest, Hz.
    pub fixed_hz: f64,
}

impl Pitch {
    /// A multiple of the shaft.
    #[must_use]
    pub fn order(order: f64) -> Pitch {
        Pitch {
            order,
            ..Pitch::default()
        }
    }

    /// A multiple of the supply.
    #[must_use]
    pub fn supply(line_multiple: f64) -> Pitch {
        Pitch {
            line_multiple,
            ..Pitch::default()
        }
    }

    /// A frequency of its own.
    #[must_use]
    pub fn fixed(fixed_hz: f64) -> Pitch {
        Pitch {
            fixed_hz,
            ..Pitch::default()
        }
    }

    /// The frequency in `state`, Hz.
    #[must_use]
    pub fn hz(&self, state: &State) -> f64 {
        self.order * state.shaft_hz + self.line_multiple * state.line_hz + self.fixed_hz
    }

    fn cycles(&self, state: &State) -> f64 {
        self.order * state.turns
            + self.line_multiple * state.line_turns
            + self.fixed_hz * state.at_s
    }
}

/// Slow unrest of a line: level by up to `level`, phase by up to `cycles`, both at `hz`.
#[derive(Clone, Copy, Debug, PartialEq, Default)]
pub struct Sway {
    /// Share of the level.
    pub level: f64,
    /// Cycles of phase.
    pub cycles: f64,
    /// How fast, Hz.
    pub hz: f64,
    /// Where it begins, rad.
    pub angle: f64,
}

impl Sway {
    /// Unrest as a line in a plant has it: 1 to 5 % of level, 0.01 to 0.05 cycles, once in 7 to 40 s.
    pub fn drawn(draw: &mut Draw) -> Sway {
        Sway {
            level: draw.between(0.01, 0.05),
            cycles: draw.between(0.01, 0.05),
            hz: 1.0 / draw.between(7.0, 40.0),
            angle: draw.angle(),
        }
    }

    fn at(&self, at_s: f64) -> (f64, f64) {
        let angle = TAU * self.hz * at_s + self.angle;
        (1.0 + self.level * angle.sin(), self.cycles * angle.cos())
    }
}

/// One line.
#[derive(Clone, Debug)]
pub struct Line {
    /// Its frequency.
    pub pitch: Pitch,
    /// Peak acceleration before the path, at law factor 1, m/s².
    pub peak_ms2: f64,
    /// Phase of the cosine at the start, rad.
    pub phase: f64,
    /// Its strength over time, speed and load.
    pub law: Law,
    /// Unrest.
    pub sway: Sway,
}

/// Lines heard through one path.
#[derive(Clone, Debug)]
pub struct Lines {
    lines: Vec<Line>,
    path: Arc<Path>,
}

const LANES: usize = 8;

impl Lines {
    /// Lines through `path`.
    #[must_use]
    pub fn new(lines: Vec<Line>, path: Arc<Path>) -> Lines {
        Lines { lines, path }
    }

    /// Level and phase (rad) of a line at one moment, unrest included.
    fn moment(&self, line: &Line, state: &State) -> Option<(f64, f64)> {
        let factor = line.law.factor(state);
        if factor == 0.0 {
            return None;
        }
        let heard = self.path.response(line.pitch.hz(state));
        if heard.norm_sqr() == 0.0 {
            return None;
        }
        let (level, cycles) = line.sway.at(state.at_s);
        let turns = line.pitch.cycles(state) + cycles;
        Some((
            line.peak_ms2 * factor * level * heard.norm(),
            TAU * (turns - turns.floor()) + line.phase + heard.arg(),
        ))
    }
}

impl Wave for Lines {
    fn add(&mut self, tick: &Tick, stretch: Stretch, out: &mut [f64]) {
        if stretch.count == 0 {
            return;
        }
        let first = tick.at(stretch.first_s);
        let last = tick.at(stretch.at(stretch.count));
        for chunk in self.lines.chunks(LANES) {
            let (mut re, mut im) = ([0.0; LANES], [0.0; LANES]);
            let (mut step_re, mut step_im) = ([0.0; LANES], [0.0; LANES]);
            for (lane, line) in chunk.iter().enumerate() {
                let Some((level, phase)) = self.moment(line, &first) else {
                    continue;
                };
                let (end_level, end_phase) = self.moment(line, &last).unwrap_or((level, phase));
                // Whole cycles between the two ends are what the pitch says; the rest is the phases' difference.
                let expected = TAU * (line.pitch.cycles(&last) - line.pitch.cycles(&first));
                let apart = end_phase - phase - expected;
                let advance = expected + apart - TAU * (apart / TAU).round();
                let count = stretch.count as f64;
                let start = Complex64::from_polar(level, phase);
                let step =
                    Complex64::from_polar((end_level / level).powf(1.0 / count), advance / count);
                (re[lane], im[lane]) = (start.re, start.im);
                (step_re[lane], step_im[lane]) = (step.re, step.im);
            }
            for value in out.iter_mut() {
                *value += re.iter().sum::<f64>();
                for lane in 0..LANES {
                    let next = re[lane] * step_re[lane] - im[lane] * step_im[lane];
                    im[lane] = re[lane] * step_im[lane] + im[lane] * step_re[lane];
                    re[lane] = next;
                }
            }
        }
    }

    fn lines(&self, state: &State, into: &mut Vec<Phasor>) {
        for line in &self.lines {
            let factor = line.law.factor(state);
            let hz = line.pitch.hz(state);
            if factor != 0.0 && hz > 0.0 {
                into.push(Phasor {
                    hz,
                    peak: Complex64::from_polar(line.peak_ms2 * factor, line.phase)
                        * self.path.response(hz),
                });
            }
        }
    }

    fn random_velocity_power(&self, _: &State) -> f64 {
        0.0
    }
}
