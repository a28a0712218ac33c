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
    /// When the last stretch ended, and each line then: where the next begins.
    ended: (f64, Vec<Moment>),
}

/// Level (m/s²) and phase (rad) of a line; `None` when it is not there.
type Moment = Option<(f64, f64)>;

const LANES: usize = 8;

impl Lines {
    /// Lines through `path`.
    #[must_use]
    pub fn new(lines: Vec<Line>, path: Arc<Path>) -> Lines {
        Lines {
            lines,
            path,
            ended: (f64::NAN, Vec::new()),
        }
    }

    /// Level and phase (rad) of a line at one moment, unrest included.
    fn moment(&self, line: &Line, state: &State) -> Moment {
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

/// A phasor and what it is multiplied by from sample to sample.
#[derive(Clone, Copy, Debug)]
struct Rotor {
    now: Complex64,
    step: Complex64,
}

/// Adds the real parts of up to eight rotors, side by side so that the processor turns several at once.
fn turn(rotors: &[Rotor], out: &mut [f64]) {
    let (mut re, mut im) = ([0.0; LANES], [0.0; LANES]);
    let (mut step_re, mut step_im) = ([0.0; LANES], [0.0; LANES]);
    for (lane, rotor) in rotors.iter().enumerate() {
        (re[lane], im[lane]) = (rotor.now.re, rotor.now.im);
        (step_re[lane], step_im[lane]) = (rotor.step.re, rotor.step.im);
    }
    for value in out.iter_mut() {
        *value += ((re[0] + re[4]) + (re[2] + re[6])) + ((re[1] + re[5]) + (re[3] + re[7]));
        for lane in 0..LANES {
            let next = re[lane] * step_re[lane] - im[lane] * step_im[lane];
            im[lane] = re[lane] * step_im[lane] + im[lane] * step_re[lane];
            re[lane] = next;
        }
    }
}

impl Wave for Lines {
    fn add(&mut self, tick: &Tick, stretch: Stretch, out: &mut [f64]) {
        if stretch.count == 0 {
            return;
        }
        let first = tick.at(stretch.first_s);
        let last = tick.at(stretch.at(stretch.count));
        let follows = (stretch.first_s - self.ended.0).abs() < 1e-9;
        let begun: Vec<Moment> = if follows {
            std::mem::take(&mut self.ended.1)
        } else {
            self.lines
                .iter()
                .map(|line| self.moment(line, &first))
                .collect()
        };
        let ended: Vec<Moment> = self
            .lines
            .iter()
            .map(|line| self.moment(line, &last))
            .collect();
        let count = stretch.count as f64;
        let ends = begun.iter().zip(&ended);
        let rotors: Vec<Rotor> = self
            .lines
            .iter()
            .zip(ends)
            .filter_map(|(line, (begun, ended))| {
                let (level, phase) = (*begun)?;
                let (end_level, end_phase) = ended.unwrap_or((level, phase));
                // Whole cycles between the two ends are what the pitch says; the rest is the phases' difference.
                let expected = TAU * (line.pitch.cycles(&last) - line.pitch.cycles(&first));
                let apart = end_phase - phase - expected;
                let advance = expected + apart - TAU * (apart / TAU).round();
                let gain = (end_level / level).powf(1.0 / count);
                Some(Rotor {
                    now: Complex64::from_polar(level, phase),
                    step: Complex64::from_polar(gain, advance / count),
                })
            })
            .collect();
        for eight in rotors.chunks(LANES) {
            turn(eight, out);
        }
        self.ended = (stretch.at(stretch.count), ended);
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
