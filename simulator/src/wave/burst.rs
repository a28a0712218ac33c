//! Bursts: strikes that ring the modes of the structure.
//!
//! h(t) = sum g_m exp(-zeta omega t) sin(omega_d t), excited exactly between samples: a damped complex phasor per
//! mode, turned from sample to sample, to which each strike adds its own at its own instant. In: strikes with
//! strength in m/s² (the height of the envelope at its beginning). Model: Antoni & Randall 2003 (from memory).
//! Checked by `tests/physics.rs` against the sum of damped sines and by `tests/physics.py` (burst rate, kurtosis).

use core::f64::consts::TAU;

use num_complex::Complex64;

use super::{Phasor, State, Stretch, Strikes, Tick, VELOCITY_BAND_HZ, Wave};

/// A mode of the structure as a sensor hears it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Mode {
    /// Undamped natural frequency, Hz.
    pub hz: f64,
    /// Damping ratio.
    pub damping: f64,
    /// Share in a burst.
    pub gain: f64,
}

impl Mode {
    fn pole(&self) -> Complex64 {
        let omega = TAU * self.hz;
        Complex64::new(
            -self.damping * omega,
            omega * (1.0 - self.damping * self.damping).sqrt(),
        )
    }

    /// Fourier transform of exp(-zeta omega t) sin(omega_d t) at `hz`, s.
    fn transform(&self, hz: f64) -> Complex64 {
        let omega = TAU * self.hz;
        let damped = self.pole().im;
        let w = TAU * hz;
        Complex64::from(damped)
            / Complex64::new(omega * omega - w * w, 2.0 * self.damping * omega * w)
    }
}

/// So many harmonics of evenly spaced strikes are summed one by one.
const HARMONICS: f64 = 2000.0;
/// Slower strikes have no mean power to speak of, Hz.
const SLOWEST_HZ: f64 = 0.1;

/// Strikes and the modes they ring.
#[derive(Clone, Debug)]
pub struct BurstTrain {
    strikes: Strikes,
    modes: Vec<Mode>,
    ringing: Vec<Complex64>,
    pending: Vec<(f64, f64)>,
}

impl BurstTrain {
    /// Bursts of `strikes` through `modes`.
    #[must_use]
    pub fn new(strikes: Strikes, modes: Vec<Mode>) -> BurstTrain {
        let ringing = vec![Complex64::ZERO; modes.len()];
        BurstTrain {
            strikes,
            modes,
            ringing,
            pending: Vec::new(),
        }
    }

    fn transform(&self, hz: f64) -> Complex64 {
        self.modes
            .iter()
            .map(|mode| mode.transform(hz) * mode.gain)
            .sum()
    }
}

impl Wave for BurstTrain {
    fn add(&mut self, tick: &Tick, stretch: Stretch, out: &mut [f64]) {
        let pending = &mut self.pending;
        self.strikes
            .within(tick, |strike| pending.push((strike.at_s, strike.strength)));
        let quiet = self.ringing.iter().map(|z| z.norm_sqr()).sum::<f64>() < 1e-20;
        if quiet && self.pending.is_empty() {
            self.ringing.fill(Complex64::ZERO);
            return;
        }
        for (mode, z) in self.modes.iter().zip(&mut self.ringing) {
            let pole = mode.pole();
            let turn = (pole * stretch.step_s).exp();
            let mut next = 0;
            for (index, value) in out.iter_mut().enumerate() {
                let at_s = stretch.at(index);
                *z *= turn;
                while let Some((struck, strength)) = self.pending.get(next).filter(|p| p.0 <= at_s)
                {
                    *z += (pole * (at_s - struck)).exp() * (strength * mode.gain);
                    next += 1;
                }
                *value += z.im;
            }
        }
        let last = stretch.at(stretch.count.saturating_sub(1));
        self.pending
            .retain(|strike| strike.0 > last || stretch.count == 0);
    }

    fn lines(&self, _: &State, _: &mut Vec<Phasor>) {}

    /// Evenly spaced strikes: lines at multiples of the rate, power from the mean square of the strength, which puts
    /// the sidebands of a load zone at their carrier. Strikes by chance, and lines so dense that more than
    /// [`HARMONICS`] lie in the band: density 2 x rate x mean square |H|². Less than one strike in 10 s counts as none.
    fn random_velocity_power(&self, state: &State) -> f64 {
        let factor = self.strikes.law().factor(state);
        let (rate, even) = self.strikes.rate(state);
        if factor == 0.0 || rate < SLOWEST_HZ {
            return 0.0;
        }
        let (_, square) = self.strikes.moments();
        let square = square * factor * factor;
        let (low, high) = VELOCITY_BAND_HZ;
        let velocity = |hz: f64| self.transform(hz).norm_sqr() / (TAU * hz).powi(2);
        if even && high / rate <= HARMONICS {
            let (first, last) = ((low / rate).ceil() as u32, (high / rate).floor() as u32);
            (first.max(1)..=last)
                .map(|k| 2.0 * square * rate * rate * velocity(rate * f64::from(k)))
                .sum()
        } else {
            let steps = 400;
            let ratio = (high / low).ln() / f64::from(steps);
            let density = |k: i32| {
                let hz = low * (ratio * f64::from(k)).exp();
                2.0 * rate * square * velocity(hz) * hz
            };
            let inner: f64 = (1..steps).map(density).sum();
            (inner + 0.5 * (density(0) + density(steps))) * ratio
        }
    }
}
