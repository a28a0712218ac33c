//! What a reading adds up while it is open.

use alloc::vec::Vec;

use humward_signal::{
    bands::KnownFrequencies,
    envelope::{EnvelopeSpectrum, LineSearch},
    lowband::WaveStats,
    psd::Psd,
    statistics::{Rails, Statistics, Summary},
    units,
};

use super::plans::Plans;
use crate::{
    plan::{BandPlan, PointSpec, Quantity, Race},
    reading::{AccelerationSummary, RaceLine, RaceResult, ShaftSpeed, SpectralLine},
};

/// Half width in which a bearing line is looked for: slip and geometry (Randall and Antoni, MSSP 25, 2011: 1 to 2 %).
const SLIP_TOLERANCE: f64 = 0.02;
/// Harmonics looked for, the line itself counted.
const HARMONICS: usize = 4;
/// A harmonic this far over its floor stands out, dB; two must. Common practice, no source: 3 to 5 x the floor is 5 to 7 dB.
const STANDS_OUT_DB: f64 = 6.0;
/// Bounds of the high band, Hz; the upper one is also held below rate/2.56.
const HIGH_BAND_HZ: (f64, f64) = (1000.0, 10_000.0);
/// Lines of the velocity spectrum a reading keeps.
const STRONGEST: usize = 5;
/// Lines of the acceleration spectrum they are chosen from.
const CANDIDATES: usize = 24;

/// Accumulators of one reading.
#[derive(Debug)]
pub(super) struct Sums {
    pub(super) statistics: Statistics,
    pub(super) psd: Psd,
    pub(super) envelope: Option<EnvelopeSpectrum>,
    pub(super) velocity: WaveStats,
}

impl Sums {
    pub(super) fn new(plans: &Plans) -> Self {
        Self {
            statistics: Statistics::new(None),
            psd: plans.frame.psd(),
            envelope: plans.envelope.as_ref().map(|plan| plan.spectrum()),
            velocity: WaveStats::new(),
        }
    }

    /// Forgets everything; samples from here on clip at `rails`.
    pub(super) fn clear(&mut self, rails: Option<Rails>) {
        self.statistics = Statistics::new(rails);
        self.psd.clear();
        if let Some(envelope) = &mut self.envelope {
            envelope.clear();
        }
        self.velocity.clear();
    }

    /// Whether a sensor that moves at all could have given these samples: half of them equal in a row is none.
    pub(super) fn is_flat(summary: &Summary) -> bool {
        summary.longest_equal_run.saturating_mul(2) >= summary.count
    }

    /// Two samples at the rail in a row, or eight in all, are clipping; a lone one may be a true peak.
    pub(super) fn is_clipped(summary: &Summary) -> bool {
        summary.longest_rail_run >= 2 || summary.rail_samples >= 8
    }

    pub(super) fn acceleration(summary: &Summary, pivot: f32) -> Option<AccelerationSummary> {
        Some(AccelerationSummary {
            rms: summary.rms,
            peak: summary.peak,
            crest: summary.crest?,
            kurtosis: summary.kurtosis?,
            mean: summary.mean + f64::from(pivot),
        })
    }

    pub(super) fn high_band(&self, rate_hz: f64) -> Option<f64> {
        let to = HIGH_BAND_HZ.1.min(rate_hz / 2.56);
        (self.psd.frames() > 0 && to > HIGH_BAND_HZ.0)
            .then(|| self.psd.band_rms(HIGH_BAND_HZ.0, to))
    }

    /// Values of the named bands at the speed; `None` where a band reaches above half the rate.
    pub(super) fn bands(&self, bands: &[BandPlan], speed: ShaftSpeed) -> Vec<Option<f64>> {
        let known = KnownFrequencies {
            shaft_hz: Some(units::rpm_to_hz(speed.rpm())),
            ..KnownFrequencies::default()
        };
        let value = |band: &BandPlan| {
            let (from, to) = band.band().resolve(&known, self.psd.rate_hz() / 2.0).ok()?;
            let velocity = band.spec().quantity == Quantity::VelocityRms;
            Some(if velocity {
                self.psd.velocity_band_rms(from, to)
            } else {
                self.psd.band_rms(from, to)
            })
        };
        bands
            .iter()
            .map(|band| {
                if self.psd.frames() > 0 {
                    value(band)
                } else {
                    None
                }
            })
            .collect()
    }

    /// Looks for the bearing's lines at the speed.
    pub(super) fn races(&self, point: &PointSpec, speed: ShaftSpeed) -> [Option<RaceResult>; 4] {
        let (Some(envelope), Some(bearing)) = (&self.envelope, &point.bearing) else {
            return [None; 4];
        };
        let shaft_hz = units::rpm_to_hz(speed.rpm());
        if envelope.frames() == 0 || shaft_hz <= 0.0 {
            return [None; 4];
        }
        Race::ALL.map(|race| {
            let order = race.order(bearing);
            let family = envelope.search(&LineSearch {
                frequency_hz: order * shaft_hz,
                tolerance: SLIP_TOLERANCE,
                harmonics: HARMONICS,
                shaft_hz: Some(shaft_hz),
            });
            let standing = family.count_above(STANDS_OUT_DB);
            Some(match family.fundamental() {
                Some(line) if standing >= 2 && line.db >= STANDS_OUT_DB => {
                    RaceResult::Line(RaceLine {
                        frequency_hz: line.frequency_hz,
                        order: line.frequency_hz / shaft_hz,
                        db: line.db,
                        ms2: line.m_s2,
                        harmonics: standing as u8,
                    })
                }
                _ => RaceResult::NoLine,
            })
        })
    }

    /// The strongest lines of the velocity spectrum between the band's lower edge and 1000 Hz, mm/s rms.
    pub(super) fn strongest(&self, from_hz: f64) -> Vec<SpectralLine> {
        if self.psd.frames() == 0 {
            return Vec::new();
        }
        let mut lines: Vec<SpectralLine> = self
            .psd
            .lines(from_hz, 1000.0, CANDIDATES)
            .into_iter()
            .map(|line| SpectralLine {
                frequency_hz: line.frequency_hz,
                velocity_rms: units::velocity_mm_s(line.amplitude, line.frequency_hz)
                    / core::f64::consts::SQRT_2,
            })
            .collect();
        lines.sort_by(|a, b| b.velocity_rms.total_cmp(&a.velocity_rms));
        lines.truncate(STRONGEST);
        lines
    }
}
