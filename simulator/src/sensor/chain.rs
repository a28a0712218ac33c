//! The sensor at work: every step of the way of a sample, in place.

use super::cable::Contact;
use super::fallen::FallenOff;
use super::{Drift, Noisier, SensorFault};
use crate::random::Draw;
use crate::scenario::{Encoding, Point, Window};
use crate::wave::{Biquad, G0, Stretch};

/// 1.5 x 2^52: adding and taking it away again leaves the nearest whole number, ties to even, in two operations the
/// compiler can do for many samples at once.
const WHOLE: f64 = 6_755_399_441_055_744.0;

/// A sensor that gives the last sample over and over.
#[derive(Clone, Copy, Debug)]
struct Flat {
    window: Window,
    held: Option<f64>,
}

/// A sensor on its way: acceleration in m/s² in, what it sends in m/s² out, in place.
#[derive(Clone, Debug)]
pub struct Sensor {
    fallen: Vec<FallenOff>,
    resonance: Option<Biquad>,
    noise_ug_rthz: f64,
    noisier: Vec<Noisier>,
    /// Standard deviation of a sample per density, m/s² per µg/√Hz.
    sigma_per_ug: f64,
    noise: Draw,
    offset_ms2: f64,
    drifts: Vec<Drift>,
    dead: Vec<Window>,
    dead_noise: Draw,
    contacts: Vec<Contact>,
    range_ms2: f64,
    /// One step of a 16-bit sensor, m/s².
    step_ms2: Option<f64>,
    flat: Vec<Flat>,
    last_ms2: f64,
    bias_volts: Option<f64>,
}

impl Sensor {
    /// The sensor of `point`, which draws from its own part of `draw`.
    #[must_use]
    pub fn new(point: &Point, draw: &Draw) -> Sensor {
        let draw = draw.part("sensor");
        let rate_hz = point.true_rate_hz();
        let range_ms2 = point.range_g * G0;
        let mut sensor = Sensor {
            fallen: Vec::new(),
            resonance: point
                .resonance_hz
                .map(|hz| Biquad::mode(hz, point.resonance_damping, rate_hz)),
            noise_ug_rthz: point.noise_ug_rthz,
            noisier: Vec::new(),
            sigma_per_ug: 1e-6 * G0 * (rate_hz / 2.0).sqrt(),
            noise: draw.part("noise"),
            offset_ms2: point.offset_g * G0,
            drifts: Vec::new(),
            dead: Vec::new(),
            dead_noise: draw.part("dead"),
            contacts: Vec::new(),
            range_ms2,
            step_ms2: match point.encoding {
                Encoding::CborS16 => Some(point.step_g() * G0),
                Encoding::CborF32 | Encoding::Json => None,
            },
            flat: Vec::new(),
            last_ms2: 0.0,
            bias_volts: point.bias_volts,
        };
        for (number, fault) in point.sensor_faults.iter().enumerate() {
            let window = fault.window();
            let draw = draw.part(&format!("fault {number}"));
            match fault {
                SensorFault::Flat(_) => sensor.flat.push(Flat { window, held: None }),
                SensorFault::Dead(_) => sensor.dead.push(window),
                SensorFault::FallenOff(_) => {
                    sensor
                        .fallen
                        .push(FallenOff::new(window, point.offset_g, rate_hz, draw))
                }
                SensorFault::Cable(cable) => {
                    sensor
                        .contacts
                        .push(Contact::new(cable, range_ms2, 1.0 / rate_hz, draw));
                }
                SensorFault::Bias(drift) => sensor.drifts.push(*drift),
                SensorFault::Noise(noisier) => sensor.noisier.push(*noisier),
            }
        }
        sensor
    }

    /// Standard deviation of the noise at a moment, m/s².
    fn sigma(&self, at_s: f64) -> f64 {
        let usual = self.noise_ug_rthz;
        let more: f64 = self
            .noisier
            .iter()
            .map(|noisier| noisier.more_ug_rthz(at_s, usual))
            .sum();
        (usual + more).max(0.0) * self.sigma_per_ug
    }

    /// Turns the acceleration at the samples of `stretch` into what the sensor gives; stretches follow each other.
    pub fn sense(&mut self, stretch: Stretch, samples: &mut [f64]) {
        for fallen in &mut self.fallen {
            fallen.apply(stretch, samples);
        }
        if let Some(resonance) = &mut self.resonance {
            for value in samples.iter_mut() {
                *value = resonance.run(*value);
            }
        }
        let sigma = self.sigma(stretch.first_s);
        for value in samples.iter_mut() {
            *value += self.offset_ms2 + sigma * self.noise.normal();
        }
        for drift in &self.drifts {
            for (index, value) in samples.iter_mut().enumerate() {
                *value += G0 * drift.offset_g(stretch.at(index));
            }
        }
        for dead in &self.dead {
            for value in &mut samples[dead.within(stretch)] {
                *value = sigma * self.dead_noise.normal();
            }
        }
        for contact in &mut self.contacts {
            contact.apply(stretch, samples);
        }
        self.convert(samples);
        for flat in &mut self.flat {
            let range = flat.window.within(stretch);
            if range.is_empty() {
                continue;
            }
            let before = range.start.checked_sub(1).map(|index| samples[index]);
            let held = *flat.held.get_or_insert(before.unwrap_or(self.last_ms2));
            samples[range].fill(held);
        }
        self.last_ms2 = samples.last().copied().unwrap_or(self.last_ms2);
    }

    fn convert(&self, samples: &mut [f64]) {
        match self.step_ms2 {
            Some(step) => {
                let per_step = 1.0 / step;
                for value in samples {
                    let code = (*value * per_step).clamp(-32768.0, 32767.0);
                    *value = (code + WHOLE - WHOLE) * step;
                }
            }
            None => {
                for value in samples {
                    *value = value.clamp(-self.range_ms2, self.range_ms2);
                }
            }
        }
    }

    /// The bias voltage at a moment, V, if the point tells one.
    #[must_use]
    pub fn bias_volts(&self, at_s: f64) -> Option<f64> {
        let usual = self.bias_volts?;
        if self.dead.iter().any(|dead| dead.holds(at_s)) {
            return Some(0.0);
        }
        let more: f64 = self
            .drifts
            .iter()
            .map(|drift| drift.volts(at_s, usual))
            .sum();
        Some(usual + more)
    }
}
