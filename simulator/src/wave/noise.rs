//! Noise: white Gaussian samples through filters, m/s².
//!
//! Each voice has its own generator, band and rms, so powers add and the density is known in closed form. A voice
//! may be modulated with the turns of the shaft (blade passing in cavitation). Checked by `tests/physics.py`.

use core::f64::consts::TAU;

use super::{Cascade, Law, Phasor, State, Stretch, Tick, VELOCITY_BAND_HZ, Wave};
use crate::random::Draw;

/// One band of noise.
#[derive(Clone, Debug)]
pub struct Voice {
    filter: Cascade,
    draw: Draw,
    /// Standard deviation of the white noise before the filter.
    sigma: f64,
    /// Velocity power at law factor 1, (m/s)².
    velocity_power: f64,
    law: Law,
    /// Cycles per turn and depth of a modulation 1 + depth cos.
    modulation: Option<(f64, f64)>,
    level: f64,
}

impl Voice {
    /// A voice that has `rms_ms2` in all, from 0.1 Hz to half the rate, at law factor 1 and without modulation.
    #[must_use]
    pub fn with_rms(filter: Cascade, rate_hz: f64, rms_ms2: f64, law: Law, draw: Draw) -> Voice {
        let unit = filter.noise_power(0.1, rate_hz / 2.0, |_| 1.0);
        Voice::scaled(filter, rms_ms2 / unit.sqrt(), law, draw)
    }

    /// A voice that has `rms_m_s` of velocity in [`VELOCITY_BAND_HZ`], at law factor 1 and without modulation.
    #[must_use]
    pub fn with_velocity(filter: Cascade, rms_m_s: f64, law: Law, draw: Draw) -> Voice {
        let unit = velocity_of_unit(&filter);
        Voice::scaled(filter, rms_m_s / unit.sqrt(), law, draw)
    }

    fn scaled(filter: Cascade, sigma: f64, law: Law, draw: Draw) -> Voice {
        let velocity_power = velocity_of_unit(&filter) * sigma * sigma;
        Voice {
            filter,
            draw,
            sigma,
            velocity_power,
            law,
            modulation: None,
            level: 0.0,
        }
    }

    /// The same, modulated by 1 + `depth` cos(2 pi `order` turns).
    #[must_use]
    pub fn modulated(self, order: f64, depth: f64) -> Voice {
        Voice {
            modulation: Some((order, depth)),
            ..self
        }
    }
}

fn velocity_of_unit(filter: &Cascade) -> f64 {
    let (low, high) = VELOCITY_BAND_HZ;
    filter.noise_power(low, high, |hz| (TAU * hz).powi(-2))
}

/// Voices together.
#[derive(Clone, Debug)]
pub struct Noise {
    voices: Vec<Voice>,
    buffer: Vec<f64>,
}

impl Noise {
    /// Voices together.
    #[must_use]
    pub fn new(voices: Vec<Voice>) -> Noise {
        Noise {
            voices,
            buffer: Vec::new(),
        }
    }
}

impl Wave for Noise {
    fn add(&mut self, tick: &Tick, stretch: Stretch, out: &mut [f64]) {
        for voice in &mut self.voices {
            let end = voice.sigma * voice.law.factor(&tick.at(stretch.at(stretch.count)));
            if end == 0.0 && voice.level == 0.0 {
                continue;
            }
            self.buffer.clear();
            let normals = core::iter::repeat_with(|| voice.draw.normal());
            self.buffer.extend(normals.take(stretch.count));
            voice.filter.run_all(&mut self.buffer);
            if let Some((order, depth)) = voice.modulation {
                for (index, value) in self.buffer.iter_mut().enumerate() {
                    let turns = tick.at(stretch.at(index)).turns;
                    *value *= 1.0 + depth * (TAU * order * turns).cos();
                }
            }
            let slope = (end - voice.level) / stretch.count.max(1) as f64;
            for (index, (value, noise)) in out.iter_mut().zip(&self.buffer).enumerate() {
                *value += (voice.level + slope * (index + 1) as f64) * noise;
            }
            voice.level = end;
        }
    }

    fn lines(&self, _: &State, _: &mut Vec<Phasor>) {}

    fn random_velocity_power(&self, state: &State) -> f64 {
        self.voices
            .iter()
            .map(|voice| {
                let depth = voice.modulation.map_or(0.0, |(_, depth)| depth);
                let factor = voice.law.factor(state);
                voice.velocity_power * factor * factor * (1.0 + depth * depth / 2.0)
            })
            .sum()
    }
}
