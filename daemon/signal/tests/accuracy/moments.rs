//! Statistics of waveforms. Sources: calculus; Pachaud, Salvetat and Fray, MSSP 11 (1997), eq. (1),
//! for the bursts; order statistics for the peak of Gaussian noise.

use std::f64::consts::{PI, TAU};

use humward_signal::statistics::{Rails, Statistics, Summary};
use proptest::prelude::{ProptestConfig, prop, prop_assert, prop_assert_eq, proptest};

use crate::signals::{Noise, close, sampled, sine};

fn summary(samples: &[f32]) -> Summary {
    let mut statistics = Statistics::new(None);
    statistics.push(samples);
    statistics.summary().unwrap()
}

#[test]
fn sine_reads_its_rms_crest_and_kurtosis_with_gravity_in_the_signal() {
    // stat.sine.*; with gravity and without, phases apart so the first sample differs.
    for offset in [0.0, 9.80665, -9.80665] {
        for phase in [0.0, 0.25 * TAU, 2.0] {
            let s = summary(&sampled(25_600, 25_600.0, |t| {
                offset + sine(1.0, 50.0, phase)(t)
            }));
            close("rms", s.rms, std::f64::consts::FRAC_1_SQRT_2, 2e-6);
            close("crest", s.crest.unwrap(), std::f64::consts::SQRT_2, 2e-5);
            close("kurtosis", s.kurtosis.unwrap(), 1.5, 3e-6);
            close("mean", s.mean, offset, 1e-6);
            close("peak to peak", s.peak_to_peak, 2.0, 1e-4);
        }
    }
}

#[test]
fn square_triangle_and_two_tones_read_their_kurtosis() {
    // stat.square.kurtosis, stat.triangle.*, stat.two_tone.kurtosis
    let square = summary(&sampled(25_600, 25_600.0, |t| {
        if (t * 50.0).fract() < 0.5 { 2.0 } else { -2.0 }
    }));
    close("square", square.kurtosis.unwrap(), 1.0, 1e-6);
    let triangle = summary(&sampled(102_400, 25_600.0, |t| {
        4.0 * ((t * 3.0).fract() - 0.5).abs() - 1.0
    }));
    close("triangle", triangle.kurtosis.unwrap(), 1.8, 1e-4);
    close("triangle", triangle.crest.unwrap(), 1.732050808, 1e-4 * 2.0);
    let two = summary(&sampled(512_000, 25_600.0, |t| {
        sine(1.0, 50.0, 0.3)(t) + sine(1.0, 50.0 * 2f64.sqrt(), 1.0)(t)
    }));
    close("two tones", two.kurtosis.unwrap(), 2.25, 0.002);
}

#[test]
fn gaussian_noise_reads_3_and_peaks_near_4_sigma_in_8192_samples() {
    // stat.gauss.kurtosis, stat.gauss.kurtosis_se sqrt(24/n), stat.gauss.expected_peak_8192
    let mut noise = Noise(21);
    let readings: Vec<Summary> = (0..400)
        .map(|_| {
            summary(
                &(0..8192)
                    .map(|_| (9.81 + 0.3 * noise.gaussian()) as f32)
                    .collect::<Vec<_>>(),
            )
        })
        .collect();
    let mean = |values: &dyn Fn(&Summary) -> f64| readings.iter().map(values).sum::<f64>() / 400.0;
    let kurtosis = mean(&|s| s.kurtosis.unwrap());
    close("kurtosis", kurtosis, 3.0, 0.02);
    let scatter = mean(&|s| (s.kurtosis.unwrap() - kurtosis).powi(2)).sqrt();
    // 400 readings know the scatter to 3.5 %.
    close("kurtosis_se", scatter, 0.05412658774, 0.006);
    close("peak", mean(&|s| s.crest.unwrap()), 3.971358271, 0.03);
}

#[test]
fn burst_train_reads_the_kurtosis_and_crest_of_its_model() {
    // stat.impulse_train.kurtosis 7.89, .crest 4.378, each 3 %; zeta 0.03, f0 3 kHz, 107.5 bursts a second.
    let wave = |t: f64| {
        let since = t % (1.0 / 107.5);
        (-since * TAU * 0.03 * 3000.0).exp() * (TAU * 3000.0 * since).sin()
    };
    let s = summary(&sampled(1_024_000, 256_000.0, |t| 9.80665 + wave(t)));
    close("kurtosis", s.kurtosis.unwrap(), 7.890511781, 0.03 * 7.89);
    close("crest", s.crest.unwrap(), 4.377908802, 0.03 * 4.378);
}

#[test]
fn wild_first_sample_costs_no_digits() {
    let mut noise = Noise(22);
    let mut samples: Vec<f32> = (0..100_000).map(|_| noise.gaussian() as f32).collect();
    samples[0] = 2000.0;
    let (mean, second, fourth) = two_pass(&samples);
    let s = summary(&samples);
    close("rms", s.rms, second.sqrt(), 2e-6 * second.sqrt());
    close(
        "kurtosis",
        s.kurtosis.unwrap(),
        fourth / second.powi(2),
        2e-6 * fourth / second.powi(2),
    );
    close("mean", s.mean, mean, 1e-6);
}

/// Mean, second and fourth central moment in `f64`, two passes.
fn two_pass(samples: &[f32]) -> (f64, f64, f64) {
    let n = samples.len() as f64;
    let mean = samples.iter().map(|x| f64::from(*x)).sum::<f64>() / n;
    let moment = |p| {
        samples
            .iter()
            .map(|x| (f64::from(*x) - mean).powi(p))
            .sum::<f64>()
            / n
    };
    (mean, moment(2), moment(4))
}

#[test]
fn constant_signal_has_no_crest_and_no_kurtosis() {
    let s = summary(&[9.81; 1000]);
    assert_eq!(
        (s.rms, s.peak, s.crest, s.kurtosis, s.longest_equal_run),
        (0.0, s.peak, None, None, 1000)
    );
    assert!(s.peak < 1e-6);
    assert!(Statistics::new(None).summary().is_none());
}

#[test]
fn clipped_sine_counts_its_rails() {
    let rails = Rails {
        low: -1.0,
        high: 1.0,
    };
    let mut statistics = Statistics::new(Some(rails));
    // 2 sin, clipped at 1: at the rails from 30 to 150 degrees, a third of each half turn on either side.
    let samples = sampled(3600, 3600.0, |t| {
        (2.0 * (TAU * 10.0 * t + 1e-4).sin()).clamp(-1.0, 1.0)
    });
    statistics.push(&samples);
    let s = statistics.summary().unwrap();
    assert_eq!(
        (s.rail_samples, s.longest_rail_run, s.longest_equal_run),
        (2400, 120, 120)
    );
    statistics.clear();
    statistics.push(&samples[..10]);
    assert_eq!(
        statistics.summary().unwrap().rail_samples,
        0,
        "30 degrees are not reached in 10 samples"
    );
    assert_eq!(statistics.count(), 10);
}

#[test]
fn a_run_one_longer_than_the_longest_is_noticed() {
    // Runs of 2, 3, 4 … equal samples, each in a span of its own between samples that all differ.
    let mut statistics = Statistics::new(None);
    for run in 1..=40u16 {
        let mut samples: Vec<f32> = (0..100u16).map(|i| f32::from(i) + 0.5).collect();
        samples[50..50 + usize::from(run)].fill(-1.0);
        statistics.push(&samples);
        assert_eq!(
            statistics.summary().unwrap().longest_equal_run,
            u64::from(run)
        );
    }
}

fn walk(samples: &[f32], rails: Rails) -> (u64, u64, u64) {
    let (mut equal, mut rail, mut count) = ((0, 0), (0, 0), 0);
    for (i, &x) in samples.iter().enumerate() {
        equal.0 = if i > 0 && samples[i - 1] == x {
            equal.0 + 1
        } else {
            1
        };
        equal.1 = equal.1.max(equal.0);
        let hit = x <= rails.low || x >= rails.high;
        rail.0 = if hit { rail.0 + 1 } else { 0 };
        rail.1 = rail.1.max(rail.0);
        count += u64::from(hit);
    }
    (equal.1, count, rail.1)
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(300))]

    #[test]
    fn runs_match_a_walk_over_every_sample(
        values in prop::collection::vec((-3i8..=3, 1usize..90), 1..40),
        cut in 1usize..70,
    ) {
        let samples: Vec<f32> =
            values.iter().flat_map(|(v, times)| std::iter::repeat_n(f32::from(*v), times % 41 + 1)).collect();
        let rails = Rails { low: -3.0, high: 3.0 };
        let mut statistics = Statistics::new(Some(rails));
        for block in samples.chunks(cut) {
            statistics.push(block);
        }
        let s = statistics.summary().unwrap();
        prop_assert_eq!((s.longest_equal_run, s.rail_samples, s.longest_rail_run), walk(&samples, rails));
    }

    #[test]
    fn block_borders_do_not_change_the_moments(seed in 1u64..1000, cut in 1usize..700, offset in -50i16..50) {
        let mut noise = Noise(seed);
        let samples: Vec<f32> = (0..3000).map(|i| {
            (f64::from(offset) + noise.uniform() + (PI * f64::from(i) / 50.0).sin()) as f32
        }).collect();
        let mut statistics = Statistics::new(None);
        for block in samples.chunks(cut) {
            statistics.push(block);
        }
        let s = statistics.summary().unwrap();
        let (mean, second, fourth) = two_pass(&samples);
        let kurtosis = fourth / second.powi(2);
        prop_assert!((s.mean - mean).abs() < 1e-6 && (s.rms / second.sqrt() - 1.0).abs() < 2e-6);
        prop_assert!((s.kurtosis.unwrap() / kurtosis - 1.0).abs() < 2e-6, "{:?} {kurtosis}", s.kurtosis);
    }
}
