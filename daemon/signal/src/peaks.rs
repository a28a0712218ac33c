//! Lines in a Hann-windowed power spectrum: local peaks and their two-bin interpolation.
//!
//! In: mean |Y\[k\]|² per bin of a Hann-windowed transform. Out: position in bins, power at the top.
//! Interpolation (Grandke 1983, IEEE Trans. Instrum. Meas. 32): α = larger neighbour / peak in
//! amplitude, δ = (2α − 1)/(α + 1), amplitude × (πδ / sin πδ)(1 − δ²). Exact for one noise-free
//! tone far from zero and the half rate; tones closer than 4 bins disturb each other.
//! At whole bins a tone's Hann skirt only falls, so a skirt has no local peak: what stands up beside
//! a strong line is another line, or noise.

use alloc::vec::Vec;
use core::f64::consts::PI;

/// An interpolated local peak.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Peak {
    /// Position of the top in bins, fractional.
    pub(crate) bin: f64,
    /// |Y|² a tone centred on a bin would have shown.
    pub(crate) power: f64,
}

/// Interpolates the local peak at bin `k`; `None` unless `k` is a local maximum with two neighbours.
pub(crate) fn at(power: &[f64], k: usize) -> Option<Peak> {
    if k == 0 || k + 1 >= power.len() {
        return None;
    }
    let (below, top, above) = (power[k - 1], power[k], power[k + 1]);
    if !(top > 0.0 && top >= below && top > above) {
        return None;
    }
    let (side, neighbour) = if above > below {
        (1.0, above)
    } else {
        (-1.0, below)
    };
    let (delta, gain) = grandke((neighbour / top).sqrt());
    Some(Peak {
        bin: k as f64 + side * delta,
        power: top * gain * gain,
    })
}

/// Offset in bins towards the larger neighbour and the amplitude gain, from the amplitude ratio.
pub(crate) fn grandke(ratio: f64) -> (f64, f64) {
    let delta = ((2.0 * ratio - 1.0) / (ratio + 1.0)).clamp(0.0, 0.5);
    if delta < 1e-6 {
        return (delta, 1.0);
    }
    (
        delta,
        PI * delta / (PI * delta).sin() * (1.0 - delta * delta),
    )
}

/// The `count` strongest local peaks whose tops lie in `from..=to` bins, strongest first.
pub(crate) fn strongest(power: &[f64], from: f64, to: f64, count: usize) -> Vec<Peak> {
    let mut peaks: Vec<Peak> = (1..power.len())
        .filter_map(|k| at(power, k))
        .filter(|peak| (from..=to).contains(&peak.bin))
        .collect();
    peaks.sort_by(|a, b| b.power.total_cmp(&a.power));
    peaks.truncate(count);
    peaks
}

/// The median of `values`, which it reorders; the mean of the middle two for an even count.
pub(crate) fn median(values: &mut [f64]) -> Option<f64> {
    let len = values.len();
    if len == 0 {
        return None;
    }
    let (below, &mut upper, _) = values.select_nth_unstable_by(len / 2, f64::total_cmp);
    if len % 2 == 1 {
        return Some(upper);
    }
    let lower = below.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    Some(0.5 * (lower + upper))
}
