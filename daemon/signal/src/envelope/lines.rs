//! Search for a family of lines in an envelope spectrum, and what their heights mean.
//!
//! Height over the floor: 10 log10 of the line's power over the median power of 0.5-1.5 × its
//! frequency, without ±2 % (or ±2 bins, where that is wider) about the line.
//! Height in m/s²: √(amplitude of the squared envelope)/2. For a train of bursts A e^(−t/τ) at rate
//! f the squared envelope's h-th line is E = 2 f A² / |2/τ + j2πhf|, and the train's rms A √(fτ)/2,
//! so a train of short bursts reads its own rms in the band. Long bursts and high harmonics read low,
//! by the factor (1 + (πhfτ)²)^(−1/4): 2.3 % at fτ = 0.1, 8 % at 0.2, 26.7 % at 0.5.
//! An amplitude-modulated tone is no train of bursts: its line reads √(2m)·A/2, not an rms.
//! Checked by `tests/accuracy/envelope.rs`.

use alloc::vec::Vec;

use super::EnvelopeSpectrum;
use crate::peaks::{self, Peak};

/// A line this near a whole multiple of the shaft is the shaft's, relative: the error of a speed told in whole
/// r/min and of the line's place. Common practice, no source.
const SHAFTS_OWN: f64 = 0.003;
/// Half width left out of the floor about the line, relative.
const FLOOR_NOTCH: f64 = 0.02;
/// The same in bins: the main lobe of the Hann window.
const FLOOR_NOTCH_BINS: f64 = 2.0;
/// Fewest bins a floor is taken over.
const FEWEST_FLOOR_BINS: usize = 8;

/// What to look for.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct LineSearch {
    /// Expected frequency of the fundamental, Hz.
    pub frequency_hz: f64,
    /// Half width searched, relative: 0.02 is ±2 %, for slip and geometry.
    pub tolerance: f64,
    /// Lines wanted, the fundamental among them.
    pub harmonics: usize,
    /// Shaft frequency, Hz, whose whole multiples (vanes, looseness) are not taken for the fundamental.
    pub shaft_hz: Option<f64>,
}

/// One line of a family.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct EnvelopeLine {
    /// Interpolated frequency, Hz.
    pub frequency_hz: f64,
    /// Height over the median floor around it, dB; infinite over a floor of zero.
    pub db: f64,
    /// Interpolated amplitude of the squared envelope, (m/s²)² peak.
    pub squared_amplitude: f64,
    /// √ of that, halved: rms of a train of short bursts, m/s².
    pub m_s2: f64,
}

/// The lines found, and not found, of one family.
#[derive(Debug, Clone, PartialEq)]
pub struct LineFamily {
    /// Entry h − 1 is the h-th harmonic; `None` where no local peak stands, or beyond the reach.
    pub lines: Vec<Option<EnvelopeLine>>,
}

impl LineFamily {
    /// The first line, if found.
    pub fn fundamental(&self) -> Option<EnvelopeLine> {
        self.lines.first().copied().flatten()
    }

    /// Lines standing at least `db` over their floor.
    pub fn count_above(&self, db: f64) -> usize {
        self.lines
            .iter()
            .flatten()
            .filter(|line| line.db >= db)
            .count()
    }
}

impl EnvelopeSpectrum {
    /// Looks for a family of lines.
    ///
    /// The fundamental is the highest local peak within the tolerance, which the skirt of a stronger
    /// line outside it is not, and no multiple of the shaft: a peak within 0.3 % of one, and nearer to it than
    /// to the frequency expected, is passed over. Harmonics lie within ±1 bin or ±0.5 %, whichever is wider, of
    /// multiples of the frequency *found*. Without a fundamental nothing is found.
    pub fn search(&self, search: &LineSearch) -> LineFamily {
        let power = self.powers();
        let df = self.resolution_hz();
        let mut lines = Vec::with_capacity(search.harmonics);
        let nominal = search.frequency_hz / df;
        let half_width = (search.tolerance * nominal).max(0.5);
        let fundamental = line_near(&power, nominal, half_width, |bin| {
            search
                .shaft_hz
                .is_none_or(|shaft_hz| !is_the_shafts(bin, nominal, shaft_hz / df))
        });
        let found = fundamental.map(|peak| peak.bin);
        for h in 1..=search.harmonics {
            let peak = match (h, found) {
                (1, _) => fundamental,
                (_, Some(first)) => {
                    let bin = first * h as f64;
                    line_near(&power, bin, (0.005 * bin).max(1.0), |_| true)
                }
                (_, None) => None,
            };
            lines.push(peak.and_then(|peak| self.measure(&power, &peak)));
        }
        LineFamily { lines }
    }

    /// Height of a peak; `None` where too few bins are left for a floor.
    fn measure(&self, power: &[f64], peak: &Peak) -> Option<EnvelopeLine> {
        let floor = floor(power, peak.bin)?;
        let squared_amplitude = peak.power.sqrt();
        Some(EnvelopeLine {
            frequency_hz: peak.bin * self.resolution_hz(),
            db: 10.0 * (peak.power / floor).log10(),
            squared_amplitude,
            m_s2: 0.5 * squared_amplitude.sqrt(),
        })
    }
}

/// Median power of 0.5-1.5 × `bin` without the notch about it.
fn floor(power: &[f64], bin: f64) -> Option<f64> {
    let notch = (FLOOR_NOTCH * bin).max(FLOOR_NOTCH_BINS);
    // Bins 0 and 1 show the mean's removal, not a floor.
    let first = ((0.5 * bin).ceil() as usize).max(2);
    let last = ((1.5 * bin).floor() as usize).min(power.len().saturating_sub(1));
    let mut around: Vec<f64> = (first..=last)
        .filter(|k| (*k as f64 - bin).abs() > notch)
        .map(|k| power[k])
        .collect();
    if around.len() < FEWEST_FLOOR_BINS {
        return None;
    }
    peaks::median(&mut around)
}

/// Whether a peak at `bin` is a whole multiple of the shaft rather than the line expected at `nominal`.
fn is_the_shafts(bin: f64, nominal: f64, shaft: f64) -> bool {
    let multiple = (bin / shaft).round() * shaft;
    let off = (bin - multiple).abs();
    off <= SHAFTS_OWN * bin && off < (bin - nominal).abs()
}

/// The highest local peak whose top lies within `half_width` bins of `bin`, among those that `may` be it.
fn line_near(power: &[f64], bin: f64, half_width: f64, may: impl Fn(f64) -> bool) -> Option<Peak> {
    let first = ((bin - half_width).floor().max(2.0)) as usize;
    let last = ((bin + half_width).ceil().max(0.0) as usize).min(power.len().saturating_sub(2));
    (first..=last)
        .filter_map(|k| peaks::at(power, k))
        .filter(|peak| (peak.bin - bin).abs() <= half_width && may(peak.bin))
        .max_by(|a, b| a.power.total_cmp(&b.power))
}
