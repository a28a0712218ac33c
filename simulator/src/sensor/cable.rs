//! A cable with a bad contact: gaps, spikes and steps to a rail, at random.
//!
//! Bouts come as a Poisson process; in each the contact bounces one to five times, 1 to 50 ms each (log-uniform) with
//! pauses alike. A bout is of one kind, all three equally likely: open (0), a rail (± range), or spikes of a few
//! samples anywhere within the range. Common practice, no source. Checked by `tests/sensor.rs`.

use std::collections::VecDeque;

use serde::Deserialize;

use crate::random::Draw;
use crate::scenario::{Seconds, Window};
use crate::wave::Stretch;

/// A cable with a bad contact.
#[derive(Clone, Copy, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Cable {
    /// When it begins.
    pub at: Seconds,
    /// When it ends; never if not given.
    #[serde(default)]
    pub until: Option<Seconds>,
    /// Bouts per minute.
    pub per_minute: f64,
}

/// Shortest and longest bounce of a contact, s.
pub(super) const BOUNCE_S: (f64, f64) = (1e-3, 50e-3);
/// Most bounces in a bout.
const BOUNCES: f64 = 5.0;

/// Something else than the signal.
#[derive(Clone, Copy, Debug)]
struct Bounce {
    window: Window,
    value_ms2: f64,
}

/// A bad contact at work.
#[derive(Clone, Debug)]
pub(super) struct Contact {
    window: Window,
    per_s: f64,
    range_ms2: f64,
    step_s: f64,
    draw: Draw,
    next_s: f64,
    bounces: VecDeque<Bounce>,
}

impl Contact {
    /// The contact of a sensor of ± `range_ms2` that samples every `step_s`.
    pub(super) fn new(cable: &Cable, range_ms2: f64, step_s: f64, mut draw: Draw) -> Contact {
        let per_s = cable.per_minute / 60.0;
        Contact {
            window: Window::new(cable.at, cable.until),
            per_s,
            range_ms2,
            step_s,
            next_s: cable.at.0 + draw.exponential() / per_s,
            draw,
            bounces: VecDeque::new(),
        }
    }

    /// Adds the bounces of the bout that begins at `next_s` and draws the next.
    fn bout(&mut self) {
        let kind = self.draw.between(0.0, 3.0);
        let sign = if self.draw.happens(0.5) { 1.0 } else { -1.0 };
        let count = self.draw.between(1.0, BOUNCES + 1.0).floor() as usize;
        let mut at_s = self.next_s;
        for _ in 0..count {
            let (length_s, value_ms2) = if kind < 1.0 {
                (self.draw.log_between(BOUNCE_S.0, BOUNCE_S.1), 0.0)
            } else if kind < 2.0 {
                let length_s = self.draw.log_between(BOUNCE_S.0, BOUNCE_S.1);
                (length_s, sign * self.range_ms2)
            } else {
                let height = self.draw.between(-self.range_ms2, self.range_ms2);
                (self.draw.between(1.0, 3.0) * self.step_s, height)
            };
            self.bounces.push_back(Bounce {
                window: Window::of(at_s, at_s + length_s),
                value_ms2,
            });
            at_s += length_s + self.draw.log_between(BOUNCE_S.0, BOUNCE_S.1);
        }
        self.next_s += self.draw.exponential() / self.per_s;
    }

    /// Replaces what the contact does not let through.
    pub(super) fn apply(&mut self, stretch: Stretch, samples: &mut [f64]) {
        let end_s = stretch.at(stretch.count);
        while self.next_s < end_s.min(self.window.until_s()) {
            self.bout();
        }
        for bounce in &self.bounces {
            for index in bounce.window.within(stretch) {
                if self.window.holds(stretch.at(index)) {
                    samples[index] = bounce.value_ms2;
                }
            }
        }
        self.bounces
            .retain(|bounce| bounce.window.until_s() > end_s);
    }
}
