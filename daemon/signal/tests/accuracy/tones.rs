//! Frequency and amplitude of tones by two-bin interpolation. Source: Grandke, IEEE Trans. Instrum.
//! Meas. 32 (1983). How much neighbours and the negative frequencies disturb is the method's own, found
//! here by sweeping offsets and phases.

use humward_signal::psd::Line;

use crate::signals::{psd_of, sampled, sine};

const RATE: f64 = 25_600.0;

/// Largest error in bins and relative amplitude of tone 0 over offsets and phases.
fn worst(n: usize, bins: &[f64], amplitudes: &[f64]) -> (f64, f64) {
    let df = RATE / n as f64;
    let (mut frequency, mut amplitude) = (0f64, 0f64);
    for offset in 0..21 {
        for phase in (0..12).map(|i| 0.55 * f64::from(i)) {
            let at = |i: usize| (bins[i] + f64::from(offset) * 0.05) * df;
            let samples = sampled(n, RATE, |t| {
                (0..bins.len())
                    .map(|i| {
                        sine(
                            amplitudes[i],
                            at(i),
                            if i == 0 { 0.3 } else { 0.3 + phase } + 0.7 * phase,
                        )(t)
                    })
                    .sum()
            });
            let lines = psd_of(n, RATE, &samples).lines(at(0) - 1.5 * df, at(0) + 1.5 * df, 1);
            let [
                Line {
                    frequency_hz,
                    amplitude: read,
                },
            ] = lines[..]
            else {
                panic!("no line at {}", at(0))
            };
            frequency = frequency.max((frequency_hz - at(0)).abs() / df);
            amplitude = amplitude.max((read / amplitudes[0] - 1.0).abs());
        }
    }
    (frequency, amplitude)
}

#[track_caller]
fn within(got: (f64, f64), bins: f64, relative: f64) {
    assert!(
        got.0 <= bins && got.1 <= relative,
        "{got:?} exceeds {bins} bin, {relative}"
    );
}

#[test]
fn lone_tone_far_from_zero_is_exact_to_f32() {
    // interp.grandke_hann.max_freq_err, max_amp_err: 1e-6 in f64, bin 400 of 4096; f32 frames 2e-6.
    within(worst(4096, &[400.0], &[1.0]), 2e-6, 2e-6);
}

#[test]
fn lone_tone_from_bin_4_is_within_0_001_bin_and_0_023_percent() {
    for bin in [4.0, 5.0, 7.0, 12.0] {
        within(worst(8192, &[bin], &[1.0]), 0.001, 0.00023);
    }
}

#[test]
fn equal_neighbour_disturbs_a_tone_by_the_stated_little() {
    for (distance, bins, relative) in [
        (4.0, 0.012, 0.0033),
        (6.0, 0.003, 0.0008),
        (8.0, 0.0012, 0.0003),
    ] {
        within(
            worst(8192, &[300.0, 300.0 + distance], &[1.0, 1.0]),
            bins,
            relative,
        );
    }
}

#[test]
fn ten_times_stronger_neighbour_8_bins_away_disturbs_by_0_012_bin() {
    within(worst(8192, &[300.0, 308.0], &[1.0, 10.0]), 0.012, 0.0028);
}

#[test]
fn lines_are_listed_largest_first_and_skirts_are_not_lines() {
    let samples = sampled(8192, RATE, |t| {
        sine(5.0, 503.3, 0.2)(t) + sine(2.0, 1001.7, 1.0)(t) + sine(0.1, 2503.1, 2.0)(t)
    });
    let lines = psd_of(8192, RATE, &samples).lines(100.0, 12_000.0, 10);
    let found: Vec<i64> = lines
        .iter()
        .filter(|l| l.amplitude > 1e-3)
        .map(|l| l.frequency_hz.round() as i64)
        .collect();
    assert_eq!(found, [503, 1002, 2503]);
}

#[test]
fn skirt_of_a_line_outside_the_asked_range_is_no_line() {
    let samples = sampled(8192, RATE, sine(5.0, 503.3, 0.2));
    let lines = psd_of(8192, RATE, &samples).lines(510.0, 600.0, 5);
    assert!(lines.iter().all(|l| l.amplitude < 1e-3), "{lines:?}");
}
