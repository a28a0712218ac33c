//! The way from a force in the machine to a sensor on it.
//!
//! Response: g (1 + sum p_m r² / (1 - r² + 2 i zeta r)), r = f / f_m: a base gain and the acceleration of a few single
//! degree of freedom modes (Den Hartog; Rao, from memory). Gain, modes, damping and shares are drawn; below 200 Hz the
//! response stays within a factor of 1.6 of 1, so a level stated in a scenario is roughly what a point hears there.
//! Checked by `tests/physics.rs`.

use num_complex::Complex64;

use crate::random::Draw;
use crate::wave::Mode;

/// Above this share of the sampling rate a sensor's anti-alias filter lets nothing through (common practice, no source).
const HIGHEST: f64 = 0.45;

/// A drawn path.
#[derive(Clone, Debug, PartialEq)]
pub struct Path {
    gain: f64,
    /// Above this the sensor's anti-alias filter lets nothing through, Hz.
    highest_hz: f64,
    modes: Vec<Mode>,
    ringing: Vec<Mode>,
}

impl Path {
    /// A path at a machine whose sensors sample `rate_hz`; modes that ring stay below 0.42 of it.
    #[must_use]
    pub fn drawn(mut draw: Draw, rate_hz: f64) -> Path {
        let modes = [(300.0, 700.0), (900.0, 1800.0), (2200.0, 4500.0)]
            .into_iter()
            .map(|(low, high)| Mode {
                hz: draw.log_between(low, high),
                damping: draw.between(0.02, 0.06),
                gain: draw.between(0.05, 0.3),
            })
            .collect();
        let highest = (0.42 * rate_hz).min(8000.0);
        let lowest = (0.16 * rate_hz).min(2000.0);
        let first = draw.log_between(lowest, (lowest * highest).sqrt());
        let second = draw.log_between(first * 1.15, highest.max(first * 1.2));
        let share = draw.between(0.25, 0.6);
        let ringing = vec![
            Mode {
                hz: first,
                damping: draw.between(0.015, 0.05),
                gain: 1.0 - share,
            },
            Mode {
                hz: second,
                damping: draw.between(0.015, 0.05),
                gain: share,
            },
        ];
        Path {
            gain: draw.gain_db(1.5),
            highest_hz: HIGHEST * rate_hz,
            modes,
            ringing,
        }
    }

    /// A path of a base gain and modes one states, for checks of closed forms; impacts ring at 3 kHz.
    #[must_use]
    pub fn with_modes(gain: f64, modes: Vec<Mode>) -> Path {
        Path {
            gain,
            highest_hz: f64::INFINITY,
            modes,
            ringing: vec![Mode {
                hz: 3000.0,
                damping: 0.03,
                gain: 1.0,
            }],
        }
    }

    /// A path that changes nothing.
    #[must_use]
    pub fn plain() -> Path {
        Path::with_modes(1.0, Vec::new())
    }

    /// A path that changes nothing but what the anti-alias filter of a sensor at `rate_hz` stops.
    #[must_use]
    pub fn limited(rate_hz: f64) -> Path {
        Path {
            highest_hz: HIGHEST * rate_hz,
            ..Path::plain()
        }
    }

    /// The same path weaker or stronger by `factor`.
    #[must_use]
    pub fn times(&self, factor: f64) -> Path {
        Path {
            gain: self.gain * factor,
            ..self.clone()
        }
    }

    /// Acceleration heard per acceleration at the source; 0 above 0.45 of the sampling rate.
    #[must_use]
    pub fn response(&self, hz: f64) -> Complex64 {
        if hz > self.highest_hz {
            return Complex64::ZERO;
        }
        let modes: Complex64 = self
            .modes
            .iter()
            .map(|mode| {
                let r = hz / mode.hz;
                Complex64::from(mode.gain * r * r)
                    / Complex64::new(1.0 - r * r, 2.0 * mode.damping * r)
            })
            .sum();
        (modes + 1.0) * self.gain
    }

    /// The high modes that impacts ring, with the path's base gain in their shares.
    #[must_use]
    pub fn ringing(&self) -> Vec<Mode> {
        self.ringing
            .iter()
            .map(|mode| Mode {
                gain: mode.gain * self.gain,
                ..*mode
            })
            .collect()
    }

    /// The base gain.
    #[must_use]
    pub fn gain(&self) -> f64 {
        self.gain
    }
}
