//! Frequency bands as people state them, turned into Hz at the present speed.
//!
//! In: edges in Hz, in orders of a shaft, or in multiples of line or drive-output frequency.
//! Out: (f1, f2) in Hz. A band that needs a frequency not known now is a fault, never a guess.
//! Checked by the tests in this file.

use core::fmt;

/// What a band's edges are multiples of.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Base {
    /// Plain Hz.
    Hertz,
    /// Orders: multiples of the shaft's turning frequency.
    Shaft,
    /// Multiples of the supply's line frequency.
    Line,
    /// Multiples of the drive's output frequency.
    DriveOutput,
}

impl Base {
    fn name(self) -> &'static str {
        match self {
            Base::Hertz => "Hz",
            Base::Shaft => "shaft speed",
            Base::Line => "line frequency",
            Base::DriveOutput => "drive output frequency",
        }
    }
}

/// The frequencies known at the moment, Hz.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct KnownFrequencies {
    /// Turning frequency of the point's shaft.
    pub shaft_hz: Option<f64>,
    /// Line frequency of the supply.
    pub line_hz: Option<f64>,
    /// Output frequency of the drive.
    pub drive_output_hz: Option<f64>,
}

/// Why a band has no frequencies.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum BandFault {
    /// The edges are not finite, negative, or the wrong way round.
    Edges {
        /// Lower edge stated.
        from: f64,
        /// Upper edge stated.
        to: f64,
    },
    /// The base frequency is not known now.
    Unknown {
        /// What the edges are multiples of.
        base: Base,
    },
    /// The band, wholly or in part, lies above what the samples carry.
    AboveReach {
        /// Upper edge, Hz.
        to_hz: f64,
        /// Highest usable frequency, Hz.
        reach_hz: f64,
    },
}

impl fmt::Display for BandFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            BandFault::Edges { from, to } => {
                write!(
                    f,
                    "band from {from} to {to} is empty; state 0 or more, lower edge first"
                )
            }
            BandFault::Unknown { base } => {
                write!(
                    f,
                    "band follows the {} and that is not known now; supply it",
                    base.name()
                )
            }
            BandFault::AboveReach { to_hz, reach_hz } => write!(
                f,
                "band ends at {to_hz} Hz but the samples reach {reach_hz} Hz; sample faster or lower the band"
            ),
        }
    }
}

impl core::error::Error for BandFault {}

/// A band with checked edges.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Band {
    base: Base,
    from: f64,
    to: f64,
}

impl Band {
    /// A band from `from` to `to`, both multiples of `base`; 0 ≤ from < to.
    pub fn new(base: Base, from: f64, to: f64) -> Result<Self, BandFault> {
        if !(from.is_finite() && to.is_finite() && from >= 0.0 && from < to) {
            return Err(BandFault::Edges { from, to });
        }
        Ok(Band { base, from, to })
    }

    /// A band of relative half width `tolerance` about the multiple `centre`: 0.02 is ±2 %.
    ///
    /// For bearing orders, whose lines slip; `tolerance` above 0 and below 1.
    pub fn around(base: Base, centre: f64, tolerance: f64) -> Result<Self, BandFault> {
        Band::new(base, centre * (1.0 - tolerance), centre * (1.0 + tolerance))
    }

    /// What the edges are multiples of.
    pub fn base(&self) -> Base {
        self.base
    }

    /// The edges in Hz with the frequencies known now, for samples usable up to `reach_hz`.
    pub fn resolve(
        &self,
        known: &KnownFrequencies,
        reach_hz: f64,
    ) -> Result<(f64, f64), BandFault> {
        let unit = match self.base {
            Base::Hertz => Some(1.0),
            Base::Shaft => known.shaft_hz,
            Base::Line => known.line_hz,
            Base::DriveOutput => known.drive_output_hz,
        };
        let unit = unit
            .filter(|hz| hz.is_finite() && *hz > 0.0)
            .ok_or(BandFault::Unknown { base: self.base })?;
        let to_hz = self.to * unit;
        if to_hz > reach_hz {
            return Err(BandFault::AboveReach { to_hz, reach_hz });
        }
        Ok((self.from * unit, to_hz))
    }
}

#[cfg(test)]
mod tests {
    use super::{Band, BandFault, Base, KnownFrequencies};

    const REACH: f64 = 10_000.0;

    #[test]
    fn an_order_band_follows_the_speed() {
        let band = Band::new(Base::Shaft, 0.9, 1.1).unwrap();
        for rpm in [1480.0, 740.0] {
            let known = KnownFrequencies {
                shaft_hz: Some(rpm / 60.0),
                ..KnownFrequencies::default()
            };
            let (f1, f2) = band.resolve(&known, REACH).unwrap();
            assert!((f1 - 0.9 * rpm / 60.0).abs() < 1e-12 && (f2 - 1.1 * rpm / 60.0).abs() < 1e-12);
        }
    }

    #[test]
    fn a_band_without_its_frequency_is_a_fault() {
        for base in [Base::Shaft, Base::Line, Base::DriveOutput] {
            let band = Band::new(base, 1.0, 2.0).unwrap();
            assert_eq!(
                band.resolve(&KnownFrequencies::default(), REACH),
                Err(BandFault::Unknown { base })
            );
        }
        let stopped = KnownFrequencies {
            shaft_hz: Some(0.0),
            ..KnownFrequencies::default()
        };
        let band = Band::new(Base::Shaft, 1.0, 2.0).unwrap();
        assert_eq!(
            band.resolve(&stopped, REACH),
            Err(BandFault::Unknown { base: Base::Shaft })
        );
    }

    #[test]
    fn a_band_beyond_the_samples_is_a_fault() {
        let band = Band::new(Base::Hertz, 1_000.0, 12_000.0).unwrap();
        assert_eq!(
            band.resolve(&KnownFrequencies::default(), REACH),
            Err(BandFault::AboveReach {
                to_hz: 12_000.0,
                reach_hz: REACH
            })
        );
    }

    #[test]
    fn inverted_negative_and_infinite_edges_are_refused() {
        for (from, to) in [
            (2.0, 1.0),
            (1.0, 1.0),
            (-1.0, 1.0),
            (0.0, f64::INFINITY),
            (f64::NAN, 1.0),
        ] {
            assert!(
                matches!(
                    Band::new(Base::Hertz, from, to),
                    Err(BandFault::Edges { .. })
                ),
                "{from} {to}"
            );
        }
    }

    #[test]
    fn twice_line_around_two_percent_is_98_to_102_hz_at_50_hz() {
        let known = KnownFrequencies {
            line_hz: Some(50.0),
            ..KnownFrequencies::default()
        };
        let (f1, f2) = Band::around(Base::Line, 2.0, 0.02)
            .unwrap()
            .resolve(&known, REACH)
            .unwrap();
        assert!((f1 - 98.0).abs() < 1e-9 && (f2 - 102.0).abs() < 1e-9);
    }
}
