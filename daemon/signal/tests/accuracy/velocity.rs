//! Weighted velocity from the low band against the closed form of its weighting (ISO 2954, corners
//! from memory; the weighting itself is checked in `weighting.rs` and by scipy in `reference.rs`).

use std::f64::consts::TAU;

use humward_signal::lowband::{Response, WaveStats};
use humward_signal::weighting::Weighting;

use crate::signals::{Noise, close, low_band_of, psd_of, rms, sampled, sine};

const VELOCITY: Response = Response::Velocity {
    lower_edge_hz: 10.0,
};

/// Velocity waveform after settling, the last whole seconds of it.
fn settled(n: usize, rate: f64, response: Response, seconds: f64, samples: &[f32]) -> Vec<f32> {
    let (plan, out) = low_band_of(n, rate, response, samples);
    let keep = (seconds * plan.low_rate_hz()).round() as usize;
    let usable = &out[plan.settle_samples()..];
    usable[usable.len() - keep..].to_vec()
}

/// Acceleration of a sine of `mm_s` rms.
fn tone(mm_s: f64, hz: f64, phase: f64) -> impl Fn(f64) -> f64 {
    sine(mm_s * 2f64.sqrt() * 1e-3 * TAU * hz, hz, phase)
}

#[test]
fn sine_of_any_phase_reads_itself_times_the_weighting_within_half_a_percent() {
    let weighting = Weighting::velocity(10.0).unwrap();
    let mut worst = 0f64;
    for rate in [12_000.0, 25_600.0, 48_000.0] {
        for hz in [
            10.0, 11.0, 14.0, 17.0, 25.0, 50.0, 79.0, 100.0, 160.0, 315.0, 500.0, 800.0, 900.0,
            1000.0,
        ] {
            for phase in [0.0, 1.3, 3.9] {
                let samples = sampled((rate * 4.0) as usize, rate, |t| {
                    9.80665 + tone(5.0, hz, phase)(t)
                });
                let wave = settled(8192, rate, VELOCITY, 2.0, &samples);
                let mut stats = WaveStats::new();
                stats.push(&wave);
                let error = stats.rms().unwrap() / (5.0 * weighting.magnitude(hz)) - 1.0;
                assert!(
                    error.abs() < 0.005,
                    "{hz} Hz at {rate}: {:.4} %",
                    error * 100.0
                );
                worst = worst.max(error.abs());
            }
        }
    }
    // The promise is 0.5 %; what is left here is far below it.
    assert!(worst < 2e-4, "worst {worst}");
}

#[test]
fn the_lower_edges_of_slow_machines_weigh_alike() {
    for (edge, hz) in [
        (2.0, 2.0),
        (2.0, 5.0),
        (2.0, 25.0),
        (0.8, 1.0),
        (0.8, 2.0),
        (0.8, 100.0),
    ] {
        let weighting = Weighting::velocity(edge).unwrap();
        let response = Response::Velocity {
            lower_edge_hz: edge,
        };
        let samples = sampled(12_000 * 16, 12_000.0, tone(5.0, hz, 0.7));
        let wave = settled(8192, 12_000.0, response, 6.0, &samples);
        close(
            "slow",
            rms(&wave),
            5.0 * weighting.magnitude(hz),
            0.0025 * 5.0,
        );
    }
}

#[test]
fn true_peak_of_a_sine_is_its_amplitude_and_of_two_tones_more_than_their_rms() {
    let weighting = Weighting::velocity(10.0).unwrap();
    let read = |wave: &dyn Fn(f64) -> f64| {
        let mut stats = WaveStats::new();
        stats.push(&settled(
            8192,
            25_600.0,
            VELOCITY,
            1.0,
            &sampled(25_600 * 3, 25_600.0, wave),
        ));
        assert_eq!(stats.count(), 3200);
        stats
    };
    let one = read(&tone(2.0, 50.0, 0.0));
    let amplitude = 2.0 * 2f64.sqrt() * weighting.magnitude(50.0);
    // 64 samples a turn: the top is met within 0.12 %.
    close("peak", one.peak().unwrap(), amplitude, 0.0013 * amplitude);
    close(
        "peak to peak",
        one.peak_to_peak().unwrap(),
        2.0 * amplitude,
        0.0026 * amplitude,
    );
    let two = read(&|t| tone(2.0, 50.0, 0.0)(t) + tone(2.0, 61.0, 0.0)(t));
    let (a, b) = (
        2.0 * weighting.magnitude(50.0),
        2.0 * weighting.magnitude(61.0),
    );
    close("rms", two.rms().unwrap(), (a * a + b * b).sqrt(), 0.003);
    // The two beat, so within a second both tops meet, whatever their phases.
    close("peak", two.peak().unwrap(), 2f64.sqrt() * (a + b), 0.02);
}

#[test]
fn two_kilohertz_reads_at_most_0_242_of_itself() {
    for rate in [12_000.0, 25_600.0, 48_000.0] {
        let samples = sampled((rate * 3.0) as usize, rate, tone(5.0, 2000.0, 0.4));
        assert!(rms(&settled(8192, rate, VELOCITY, 1.0, &samples)) <= 0.242 * 5.0);
    }
}

#[test]
fn sway_of_50_mm_s_at_1_hz_leaves_at_most_0_12_mm_s() {
    for rate in [12_000.0, 25_600.0, 48_000.0] {
        let samples = sampled((rate * 5.0) as usize, rate, tone(50.0, 1.0, 0.4));
        let left = rms(&settled(8192, rate, VELOCITY, 2.0, &samples));
        assert!(left <= 0.12, "{left} mm/s");
        // and not less than the weighting passes: 50 x 0.001995
        close("sway", left, 0.09976, 0.001);
    }
}

#[test]
fn gravity_and_a_ramp_leave_at_most_0_02_mm_s_after_settling() {
    for (edge, seconds) in [(10.0, 3.0), (2.0, 8.0), (0.8, 16.0)] {
        for rate in [12_000.0, 25_600.0] {
            // The first sample, the pivot, is a stray one: all of gravity stays in the signal.
            let mut samples = sampled((rate * seconds) as usize, rate, |t| 9.80665 + t);
            samples[0] = 0.0;
            let (plan, out) = low_band_of(
                8192,
                rate,
                Response::Velocity {
                    lower_edge_hz: edge,
                },
                &samples,
            );
            let left = out[plan.settle_samples()..]
                .iter()
                .fold(0f32, |a, b| a.max(b.abs()));
            assert!(
                left <= 0.02,
                "edge {edge} Hz at {rate}: {left} mm/s after {}",
                plan.settle_samples()
            );
            assert!(plan.settle_samples() < out.len(), "nothing was looked at");
            let early = out[plan.settle_samples() / 4..]
                .iter()
                .fold(0f32, |a, b| a.max(b.abs()));
            assert!(
                early > 0.02,
                "settling is stated longer than four times what is needed: {early}"
            );
        }
    }
}

#[test]
fn settling_takes_what_the_documentation_states() {
    use humward_signal::lowband::LowBandPlan;
    for (edge, seconds) in [(10.0, 0.37), (2.0, 2.20)] {
        let plan = LowBandPlan::new(
            8192,
            25_600.0,
            Response::Velocity {
                lower_edge_hz: edge,
            },
        )
        .unwrap();
        let beyond = (plan.settle_samples() - plan.samples_per_frame()) as f64 / plan.low_rate_hz();
        close("settling", beyond, seconds, 0.01);
    }
}

#[test]
fn white_noise_reads_the_velocity_of_its_density() {
    // noise.vel.sim: 100 ug/sqrt(Hz), 10-1000 Hz, 0.04911 mm/s, 3 %; 60 s of noise.
    let (rate, n) = (12_000.0, 100e-6 * 9.80665);
    let mut noise = Noise(31);
    let sigma = n * (rate / 2f64).sqrt();
    let samples: Vec<f32> = (0..720_000)
        .map(|_| (sigma * noise.gaussian()) as f32)
        .collect();
    close(
        "by bins",
        psd_of(8192, rate, &samples).velocity_band_rms(10.0, 1000.0),
        0.04911,
        0.03 * 0.04911,
    );
    // Weighted: the integral of |H|²/(2 pi f)² over all frequencies instead of the sharp band.
    let weighting = Weighting::velocity(10.0).unwrap();
    let power: f64 = (1..120_000)
        .map(|i| f64::from(i) * 0.05)
        .map(|f| (n * weighting.magnitude(f) / (TAU * f) * 1e3).powi(2) * 0.05)
        .sum();
    let wave = settled(8192, rate, VELOCITY, 58.0, &samples);
    close("weighted", rms(&wave), power.sqrt(), 0.03 * power.sqrt());
}
