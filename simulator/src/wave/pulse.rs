//! Knocks: one-sided half-sine pulses of acceleration, m/s².
//!
//! What a wrench, a valve or a trolley does to a housing; no defect. Between samples a pulse is the plain half sine
//! at the sample's instant.

use core::f64::consts::PI;

use super::{Phasor, State, Stretch, Strikes, Tick, Wave};

/// Strikes as half sines.
#[derive(Clone, Debug)]
pub struct HalfSines {
    strikes: Strikes,
    width_s: f64,
    going: Vec<(f64, f64)>,
}

impl HalfSines {
    /// Pulses `width_s` long whose height is the strength of their strike.
    #[must_use]
    pub fn new(strikes: Strikes, width_s: f64) -> HalfSines {
        HalfSines {
            strikes,
            width_s,
            going: Vec::new(),
        }
    }
}

impl Wave for HalfSines {
    fn add(&mut self, tick: &Tick, stretch: Stretch, out: &mut [f64]) {
        let going = &mut self.going;
        self.strikes
            .within(tick, |strike| going.push((strike.at_s, strike.strength)));
        for (struck, height) in &self.going {
            for (index, value) in out.iter_mut().enumerate() {
                let share = (stretch.at(index) - struck) / self.width_s;
                if (0.0..1.0).contains(&share) {
                    *value += height * (PI * share).sin();
                }
            }
        }
        let end = stretch.at(stretch.count);
        let width = self.width_s;
        self.going.retain(|(struck, _)| struck + width > end);
    }

    fn lines(&self, _: &State, _: &mut Vec<Phasor>) {}

    /// Single knocks have no mean power to speak of.
    fn random_velocity_power(&self, _: &State) -> f64 {
        0.0
    }
}
