//! Vibration by closed form: what a sample is at a moment, whatever block it comes in.

use std::f64::consts::{SQRT_2, TAU};

/// What an accelerometer sees.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Vibration {
    /// Velocity of the sine, mm/s rms.
    pub(crate) velocity: f64,
    /// Its frequency, Hz.
    pub(crate) hz: f64,
    /// Noise of acceleration, m/s2 rms, white.
    pub(crate) noise: f64,
    /// A burst train: repetition, Hz, and first peak, m/s2.
    pub(crate) bursts: Option<(f64, f64)>,
    /// The sensor gives no more than this, m/s2.
    pub(crate) clip: f64,
    /// Gravity or bias, m/s2.
    pub(crate) mean: f64,
    /// From this second on, this velocity.
    pub(crate) later: Option<(f64, f64)>,
}

/// Ringing of a burst, Hz, and its decay, 1/s.
const RINGING: (f64, f64) = (3000.0, 1000.0);

impl Vibration {
    /// Nothing moves.
    pub(crate) const STILL: Self = Self {
        velocity: 0.0,
        hz: 80.0,
        noise: 0.0,
        bursts: None,
        clip: f64::INFINITY,
        mean: 0.0,
        later: None,
    };

    /// A sine of 80 Hz whose velocity reads so many mm/s rms.
    pub(crate) const fn sine(velocity: f64) -> Self {
        Self {
            velocity,
            ..Self::STILL
        }
    }

    /// Acceleration at `t` seconds, m/s2: amplitude a = sqrt(2) v 2 pi f.
    pub(crate) fn at(&self, t: f64) -> f32 {
        let later = self.later.filter(|(from, _)| t >= *from);
        let velocity = later.map_or(self.velocity, |(_, velocity)| velocity);
        let sine = SQRT_2 * velocity / 1000.0 * TAU * self.hz * (TAU * self.hz * t).sin();
        let bursts = self.bursts.map_or(0.0, |(every_hz, peak)| {
            let since = (t * every_hz).rem_euclid(1.0) / every_hz;
            peak * (-RINGING.1 * since).exp() * (TAU * RINGING.0 * since).sin()
        });
        let noise = self.noise * noise((t * 1e6).round() as i64);
        (sine + bursts + noise + self.mean).clamp(-self.clip, self.clip) as f32
    }
}

/// Noise of variance one that depends on its place alone: four uniform numbers added.
pub(crate) fn noise(place: i64) -> f64 {
    let mut sum = 0.0;
    for k in 0..4u64 {
        sum += uniform((place as u64).wrapping_mul(4).wrapping_add(k)) - 0.5;
    }
    sum * 3.0f64.sqrt()
}

/// A number from 0 to 1 that depends on its place alone (splitmix64, Steele, Lea and Flood 2014).
pub(crate) fn uniform(place: u64) -> f64 {
    let mut z = place.wrapping_add(0x9e37_79b9_7f4a_7c15);
    z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
    z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
    (z ^ (z >> 31)) as f64 / u64::MAX as f64
}
