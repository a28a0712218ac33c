//! The electrical supply a site shares: frequency that wanders a little about its nominal.
//!
//! An Ornstein-Uhlenbeck process of 0.01 Hz and one minute, as a large grid has it (common practice, no source).

use crate::random::Draw;

/// A supply on its way.
#[derive(Clone, Debug)]
pub struct Supply {
    nominal_hz: f64,
    off_hz: f64,
    turns: f64,
    draw: Draw,
}

/// Standard deviation of the frequency, Hz, and its correlation time, s.
const WANDER: (f64, f64) = (0.01, 60.0);

impl Supply {
    /// A supply of `nominal_hz`.
    #[must_use]
    pub fn new(nominal_hz: f64, mut draw: Draw) -> Supply {
        let off_hz = WANDER.0 * draw.normal();
        Supply {
            nominal_hz,
            off_hz,
            turns: 0.0,
            draw,
        }
    }

    /// Nominal frequency, Hz.
    #[must_use]
    pub fn nominal_hz(&self) -> f64 {
        self.nominal_hz
    }

    /// Cycles so far and frequency now, Hz.
    #[must_use]
    pub fn now(&self) -> (f64, f64) {
        (self.turns, self.nominal_hz + self.off_hz)
    }

    /// Goes on by `step_s`.
    pub fn advance(&mut self, step_s: f64) {
        let before = self.nominal_hz + self.off_hz;
        self.off_hz = wander(self.off_hz, WANDER, step_s, &mut self.draw);
        self.turns += 0.5 * (before + self.nominal_hz + self.off_hz) * step_s;
    }
}

/// One exact step of an Ornstein-Uhlenbeck process of (standard deviation, correlation time).
pub(super) fn wander(value: f64, (sigma, tau_s): (f64, f64), step_s: f64, draw: &mut Draw) -> f64 {
    let keep = (-step_s / tau_s).exp();
    value * keep + sigma * (1.0 - keep * keep).sqrt() * draw.normal()
}
