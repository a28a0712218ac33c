//! Waves: closed-form parts of an acceleration signal.
//!
//! A wave adds its acceleration, m/s², at the samples of one stretch of time, while the machine that drives it goes
//! through one [`Tick`]. It also says what it is in closed form: the phasors of its lines and the velocity power of
//! its random part, from which the truth of a scenario is computed without a single sample.

mod biquad;
mod burst;
mod law;
mod line;
mod noise;
mod pulse;
mod strikes;

pub use biquad::{Biquad, Cascade};
pub use burst::{BurstTrain, Mode};
pub use law::{Gate, Growth, GrowthLaw, Law, LoadLaw};
pub use line::{Line, Lines, Pitch, Sway};
pub use noise::{Noise, Voice};
pub use pulse::HalfSines;
pub use strikes::{Strength, Strike, Strikes, Timing};

use num_complex::Complex64;

/// Where velocity is counted: lowest and highest frequency, Hz.
pub const VELOCITY_BAND_HZ: (f64, f64) = (10.0, 1000.0);

/// A machine at one moment.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct State {
    /// Seconds since the start of the scenario.
    pub at_s: f64,
    /// Shaft turns since the start.
    pub turns: f64,
    /// Shaft speed, turns per second; 0 when it stands.
    pub shaft_hz: f64,
    /// Shaft speed at which levels are stated, turns per second.
    pub nominal_hz: f64,
    /// Load as a share of the rated one.
    pub load: f64,
    /// Whether the motor has power; a machine that runs down has none.
    pub powered: bool,
    /// Cycles of the supply since the start.
    pub line_turns: f64,
    /// Frequency of the supply, Hz.
    pub line_hz: f64,
}

/// A machine between two moments at most [`TICK_S`] apart.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Tick {
    /// Its beginning.
    pub from: State,
    /// Its end.
    pub to: State,
}

/// Standard gravity, m/s² (3rd CGPM 1901).
pub const G0: f64 = 9.80665;

/// Longest tick, s: speed, load and levels are taken as linear within it.
pub const TICK_S: f64 = 0.01;

impl Tick {
    /// The machine at `at_s` within the tick, or a sample's length beyond it: speed and load linear, turns their
    /// integral, power only where both ends have it.
    #[must_use]
    pub fn at(&self, at_s: f64) -> State {
        let (a, b) = (&self.from, &self.to);
        let length = b.at_s - a.at_s;
        let share = (at_s - a.at_s) / length;
        let mix = |from: f64, to: f64| from + (to - from) * share;
        let integral = |turns: f64, from: f64, to: f64| {
            turns + share * length * (from + 0.5 * (to - from) * share)
        };
        State {
            at_s: mix(a.at_s, b.at_s),
            turns: integral(a.turns, a.shaft_hz, b.shaft_hz),
            shaft_hz: mix(a.shaft_hz, b.shaft_hz),
            nominal_hz: a.nominal_hz,
            load: mix(a.load, b.load),
            powered: a.powered && b.powered,
            line_turns: integral(a.line_turns, a.line_hz, b.line_hz),
            line_hz: mix(a.line_hz, b.line_hz),
        }
    }
}

/// Evenly spaced sample instants.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Stretch {
    /// The first, s since the start of the scenario.
    pub first_s: f64,
    /// Between two, s.
    pub step_s: f64,
    /// How many.
    pub count: usize,
}

impl Stretch {
    /// The instant of sample `index`, s.
    #[must_use]
    pub fn at(&self, index: usize) -> f64 {
        self.first_s + index as f64 * self.step_s
    }
}

/// One line of a wave: acceleration phasor at a frequency.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Phasor {
    /// Frequency, Hz.
    pub hz: f64,
    /// Peak amplitude (m/s²) and phase.
    pub peak: Complex64,
}

/// Part of an acceleration signal.
pub trait Wave: Send {
    /// Adds its acceleration, m/s², to `out`, which has one place for each sample of `stretch`.
    ///
    /// Stretches follow each other and lie within their tick.
    fn add(&mut self, tick: &Tick, stretch: Stretch, out: &mut [f64]);

    /// Adds the lines it has in `state` to `into`; random parts have none.
    fn lines(&self, state: &State, into: &mut Vec<Phasor>);

    /// Expected mean square of the velocity of its random part in [`VELOCITY_BAND_HZ`], (m/s)².
    fn random_velocity_power(&self, state: &State) -> f64;
}

/// Velocity rms in [`VELOCITY_BAND_HZ`] of waves heard together, mm/s: lines of one frequency add as phasors,
/// everything else by power. Each wave comes with the state of the machine that drives it.
#[must_use]
pub fn velocity_mm_s<'a>(waves: impl Iterator<Item = (&'a dyn Wave, &'a State)>) -> f64 {
    let mut phasors = Vec::new();
    let mut power = 0.0;
    for (wave, state) in waves {
        wave.lines(state, &mut phasors);
        power += wave.random_velocity_power(state);
    }
    phasors.sort_by(|a, b| a.hz.total_cmp(&b.hz));
    let mut rest = phasors.as_slice();
    while let [first, ..] = rest {
        let same = rest.iter().take_while(|p| p.hz - first.hz < 1e-6).count();
        let sum: Complex64 = rest[..same].iter().map(|p| p.peak).sum();
        if first.hz >= VELOCITY_BAND_HZ.0 && first.hz <= VELOCITY_BAND_HZ.1 {
            power += (sum.norm() / (core::f64::consts::TAU * first.hz)).powi(2) / 2.0;
        }
        rest = &rest[same..];
    }
    power.sqrt() * 1e3
}
