//! When something strikes, and how hard: the point process behind bursts and knocks.
//!
//! Rolling elements over a pit strike once per 1/order turns with a slip that accumulates: each interval is
//! T (1 + sigma xi), Antoni & Randall 2003 (from memory), so the h-th harmonic is 2 pi h² sigma² f wide. The load zone
//! of a pit that turns with the inner ring is Stribeck's: [1 - (1 - cos theta) / (2 epsilon)]^n inside the zone, 0
//! outside (Harris, from memory). Everything else strikes by chance (Poisson) or when listed.

use core::f64::consts::TAU;

use super::{Law, State, Tick};
use crate::random::Draw;

/// When.
#[derive(Clone, Debug)]
pub enum Timing {
    /// Once per `1 / order` turns, with relative jitter `slip` of each interval.
    Turns {
        /// Strikes per turn.
        order: f64,
        /// Standard deviation of an interval, relative.
        slip: f64,
    },
    /// By chance, so often per second while the law's factor is not 0; likelier by 1 + depth cos(2 pi order turns).
    Chance {
        /// Mean rate, Hz.
        hz: f64,
        /// Cycles per turn of the modulation.
        order: f64,
        /// Its depth, 0 to 1.
        depth: f64,
    },
    /// At these times, s after the start, in order.
    Listed(Vec<f64>),
}

/// How hard, relative to the law's factor.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Strength {
    /// Log-normal about 1 with this standard deviation of its logarithm.
    Scattered {
        /// Standard deviation of ln.
        sigma: f64,
    },
    /// As the load where the inner ring's pit is: Stribeck with `epsilon` and exponent 1.5 (ball) or 10/9 (roller).
    LoadZone {
        /// Extent of the zone, 0.5 for half the ring.
        epsilon: f64,
        /// Exponent.
        exponent: f64,
        /// Shaft angle at which the pit is in the middle of the zone, rad.
        angle: f64,
    },
}

impl Strength {
    /// Share of the load at `theta` rad from the middle of the zone.
    #[must_use]
    pub fn load_zone(epsilon: f64, exponent: f64, theta: f64) -> f64 {
        (1.0 - (1.0 - theta.cos()) / (2.0 * epsilon))
            .max(0.0)
            .powf(exponent)
    }

    /// Mean and mean square of the strength over all strikes.
    #[must_use]
    pub fn moments(&self) -> (f64, f64) {
        match *self {
            Strength::Scattered { sigma } => {
                // A log-normal whose median is 1.
                ((sigma * sigma / 2.0).exp(), (2.0 * sigma * sigma).exp())
            }
            Strength::LoadZone {
                epsilon, exponent, ..
            } => {
                let steps = 3600;
                let (mut mean, mut square) = (0.0, 0.0);
                for k in 0..steps {
                    let q = Strength::load_zone(
                        epsilon,
                        exponent,
                        TAU * f64::from(k) / f64::from(steps),
                    );
                    mean += q;
                    square += q * q;
                }
                (mean / f64::from(steps), square / f64::from(steps))
            }
        }
    }
}

/// One strike.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Strike {
    /// When, s after the start.
    pub at_s: f64,
    /// How hard: law factor x strength.
    pub strength: f64,
}

/// A process of strikes.
#[derive(Clone, Debug)]
pub struct Strikes {
    timing: Timing,
    strength: Strength,
    law: Law,
    draw: Draw,
    /// Turns of the next strike, or seconds, or index in the list.
    next: f64,
    listed: usize,
}

impl Strikes {
    /// A process that draws from `draw` alone: clones strike alike.
    #[must_use]
    pub fn new(timing: Timing, strength: Strength, law: Law, mut draw: Draw) -> Strikes {
        let next = match &timing {
            Timing::Turns { order, .. } => draw.unit() / order,
            Timing::Chance { hz, depth, .. } => draw.exponential() / (hz * (1.0 + depth)),
            Timing::Listed(_) => 0.0,
        };
        Strikes {
            timing,
            strength,
            law,
            draw,
            next,
            listed: 0,
        }
    }

    /// Its law.
    #[must_use]
    pub fn law(&self) -> &Law {
        &self.law
    }

    /// Mean and mean square of the strength.
    #[must_use]
    pub fn moments(&self) -> (f64, f64) {
        self.strength.moments()
    }

    /// Mean rate in `state`, Hz, and whether the strikes are evenly spaced.
    #[must_use]
    pub fn rate(&self, state: &State) -> (f64, bool) {
        match &self.timing {
            Timing::Turns { order, .. } => (order * state.shaft_hz, true),
            Timing::Chance { hz, .. } => (*hz, false),
            Timing::Listed(_) => (0.0, false),
        }
    }

    /// The strikes from the one after the last call's up to the end of `tick`.
    pub fn within(&mut self, tick: &Tick, mut each: impl FnMut(Strike)) {
        let (from, to) = (tick.from, tick.to);
        loop {
            let at_s = match &self.timing {
                Timing::Turns { .. } if self.next >= to.turns => return,
                Timing::Turns { .. } => tick_time(tick, self.next),
                Timing::Chance { .. } if self.next >= to.at_s => return,
                Timing::Chance { .. } => self.next,
                Timing::Listed(times) => match times.get(self.listed) {
                    Some(at) if *at < to.at_s => *at,
                    _ => return,
                },
            };
            let state = tick.at(at_s.max(from.at_s));
            let struck = match &self.timing {
                Timing::Turns { order, slip } => {
                    self.next += (1.0 + slip * self.draw.normal()).max(0.05) / order;
                    true
                }
                Timing::Chance { hz, order, depth } => {
                    let likely = (1.0 + depth * (TAU * order * state.turns).cos()) / (1.0 + depth);
                    let (hz, depth) = (*hz, *depth);
                    self.next += self.draw.exponential() / (hz * (1.0 + depth));
                    self.draw.happens(likely)
                }
                Timing::Listed(_) => {
                    self.listed += 1;
                    true
                }
            };
            let relative = match self.strength {
                Strength::Scattered { sigma } => (sigma * self.draw.normal()).exp(),
                Strength::LoadZone {
                    epsilon,
                    exponent,
                    angle,
                } => Strength::load_zone(epsilon, exponent, TAU * state.turns - angle),
            };
            let strength = relative * self.law.factor(&state);
            if struck && strength != 0.0 && at_s >= from.at_s {
                each(Strike { at_s, strength });
            }
        }
    }
}

/// When the shaft has made `turns`, within a tick of linear speed; solved to 1e-12 of the tick by the exact root.
fn tick_time(tick: &Tick, turns: f64) -> f64 {
    let length = tick.to.at_s - tick.from.at_s;
    let (f0, rise) = (
        tick.from.shaft_hz,
        (tick.to.shaft_hz - tick.from.shaft_hz) / length,
    );
    let wanted = (turns - tick.from.turns).max(0.0);
    // wanted = f0 t + rise t²/2, by the form that does not cancel
    let root = (f0 * f0 + 2.0 * rise * wanted).max(0.0).sqrt();
    let t = if f0 + root > 0.0 {
        2.0 * wanted / (f0 + root)
    } else {
        0.0
    };
    tick.from.at_s + t.min(length)
}
