//! The same quantities by scipy. Source of every value: `tests/reference/make.py`, which names the
//! versions in each file; inputs are rebuilt here from the same formulas.

use std::f64::consts::TAU;

use humward_signal::lowband::{Response, WaveStats};
use humward_signal::statistics::Statistics;
use humward_signal::weighting::Weighting;
use serde_json::Value;

use crate::signals::{Noise, close, envelope_of, low_band_of, psd_of, sine};

macro_rules! reference {
    ($name:literal) => {
        serde_json::from_str::<Value>(include_str!(concat!(
            env!("CARGO_MANIFEST_DIR"),
            "/../../tests/reference/",
            $name,
            ".json"
        )))
        .unwrap()
    };
}

fn number(value: &Value, key: &str) -> f64 {
    value[key].as_f64().unwrap()
}

fn numbers(value: &Value, key: &str) -> Vec<f64> {
    value[key]
        .as_array()
        .unwrap()
        .iter()
        .map(|v| v.as_f64().unwrap())
        .collect()
}

#[test]
fn density_agrees_with_scipy_welch_within_1e_4() {
    let reference = reference!("welch");
    let (rate, n) = (
        number(&reference, "rate_hz"),
        number(&reference, "n") as usize,
    );
    let mut noise = Noise(1);
    let samples: Vec<f32> = (0..number(&reference, "count") as usize)
        .map(|i| {
            let (t, mut x) = (i as f64 / rate, 9.80665 + 4.0 * noise.uniform());
            for (amplitude, hz, phase) in [(3.0, 49.3, 0.1), (0.5, 812.0, 1.0), (1.5, 3001.7, 2.0)]
            {
                x += sine(amplitude, hz, phase)(t);
            }
            x as f32
        })
        .collect();
    let psd = psd_of(n, rate, &samples);
    let expected = numbers(&reference, "density");
    assert_eq!(expected.len(), psd.bins());
    for (k, expected) in expected.iter().enumerate() {
        close("density", psd.density(k) / expected, 1.0, 1e-4);
    }
}

#[test]
fn envelope_agrees_with_scipy_hilbert_within_1e_4() {
    let reference = reference!("envelope");
    let (rate, n) = (
        number(&reference, "rate_hz"),
        number(&reference, "n") as usize,
    );
    let mut noise = Noise(2);
    let samples: Vec<f32> = (0..number(&reference, "count") as usize)
        .map(|i| {
            let t = i as f64 / rate;
            let since = t % (1.0 / 97.0);
            let ring = 8.0 * (-since / 0.0008).exp() * (TAU * 4100.0 * since).sin();
            (ring + 2.0 * noise.uniform() + sine(5.0, 24.7, 0.3)(t)) as f32
        })
        .collect();
    let spectrum = envelope_of(
        n,
        rate,
        (number(&reference, "f1_hz"), number(&reference, "f2_hz")),
        &samples,
    );
    let expected = numbers(&reference, "power");
    assert!(expected.len() > 200 && expected.len() <= spectrum.bins());
    for (k, expected) in expected.iter().enumerate() {
        close("power", spectrum.power(k) / expected, 1.0, 1e-4);
    }
}

#[test]
fn velocity_waveform_agrees_with_scipy_in_every_sample() {
    let reference = reference!("velocity");
    let stride = number(&reference, "stride") as usize;
    let mut phases = Noise(3);
    let phases: Vec<f64> = (0..60).map(|_| phases.uniform()).collect();
    for case in reference["cases"].as_array().unwrap() {
        let (rate, count) = (number(case, "rate_hz"), number(case, "count") as usize);
        let period: Vec<f32> = (0..count)
            .map(|i| {
                let t = i as f64 / rate;
                let tones = (0..60).map(|k| (k, (3.0 * 1.1f64.powi(k)).round() / 2.0 + 0.5));
                tones
                    .filter(|(_, hz)| *hz <= 1000.0)
                    .map(|(k, hz)| {
                        (0.05 + 0.004 * f64::from(k)) * (TAU * (hz * t + phases[k as usize])).sin()
                    })
                    .sum::<f64>() as f32
            })
            .collect();
        let (wave, offset) = last_period(case, &period);
        let mut stats = WaveStats::new();
        stats.push(&wave);
        let expected_rms = number(case, "tones_rms");
        close(
            "rms",
            stats.rms().unwrap(),
            expected_rms,
            1e-4 * expected_rms,
        );
        close(
            "peak",
            stats.peak().unwrap(),
            number(case, "tones_peak"),
            1e-3 * number(case, "tones_peak"),
        );
        let low_count = wave.len();
        for (i, expected) in numbers(case, "tones").iter().enumerate() {
            let at = (i * stride + low_count - offset % low_count) % low_count;
            close(
                "sample",
                f64::from(wave[at]),
                *expected,
                2e-4 * expected_rms,
            );
        }
    }
}

#[test]
fn velocity_of_noise_agrees_with_scipy_within_1e_3() {
    for case in reference!("velocity")["cases"].as_array().unwrap() {
        let mut noise = Noise(4);
        let count = number(case, "count") as usize;
        let period: Vec<f32> = (0..count).map(|_| (6.0 * noise.uniform()) as f32).collect();
        let (wave, _) = last_period(case, &period);
        let mut stats = WaveStats::new();
        stats.push(&wave);
        let expected = number(case, "noise_rms");
        close("rms", stats.rms().unwrap(), expected, 1e-3 * expected);
    }
}

/// The velocity of a periodic record in its steady state: one period, and where in the run it starts.
fn last_period(case: &Value, period: &[f32]) -> (Vec<f32>, usize) {
    let (rate, factor) = (number(case, "rate_hz"), number(case, "factor") as usize);
    let samples: Vec<f32> = period
        .iter()
        .cycle()
        .take(period.len() * 6)
        .copied()
        .collect();
    let response = Response::Velocity {
        lower_edge_hz: number(case, "lower_edge_hz"),
    };
    let (plan, out) = low_band_of(8192, rate, response, &samples);
    assert_eq!(plan.factor(), factor);
    let low_count = period.len() / factor;
    let offset = out.len() - low_count;
    assert!(offset > plan.settle_samples());
    (out[offset..].to_vec(), offset)
}

#[test]
fn weighting_agrees_with_scipy_butterworth() {
    let reference = reference!("weighting");
    for (key, edge) in [("lower_10", 10.0), ("lower_2", 2.0)] {
        let weighting = Weighting::velocity(edge).unwrap();
        for (hz, expected) in numbers(&reference, "hz")
            .into_iter()
            .zip(numbers(&reference, key))
        {
            close(
                "weighting",
                weighting.magnitude(hz),
                expected,
                1e-7 * expected.max(1e-2),
            );
        }
    }
}

#[test]
fn moments_agree_with_scipy_stats_within_2e_6() {
    let reference = reference!("moments");
    let mut noise = Noise(5);
    let samples: Vec<f32> = (0..number(&reference, "count") as usize)
        .map(|i| {
            let knock = if i % 9973 == 0 { 60.0 } else { 0.0 };
            (9.80665 + 3.0 * noise.uniform() + 2e-5 * i as f64 + knock) as f32
        })
        .collect();
    let mut statistics = Statistics::new(None);
    statistics.push(&samples);
    let s = statistics.summary().unwrap();
    for (key, got) in [
        ("mean", s.mean),
        ("rms", s.rms),
        ("peak", s.peak),
        ("kurtosis", s.kurtosis.unwrap()),
        ("crest", s.crest.unwrap()),
    ] {
        close(key, got / number(&reference, key), 1.0, 2e-6);
    }
}
