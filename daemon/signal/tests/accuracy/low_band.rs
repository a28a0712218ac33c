//! The decimated waveform against its closed form. Source: the signal itself, sampled slowly.

use humward_signal::frame::FramePlan;
use humward_signal::lowband::{LowBandFault, LowBandPlan, Response, factor};

use crate::signals::{frames, low_band_of, sampled, sine};

#[test]
fn decimation_factors_are_those_promised() {
    for (n, rate, expected) in [
        (8192, 25_600.0, Some(8)),
        (8192, 12_000.0, Some(4)),
        (8192, 48_000.0, Some(16)),
        (12_000, 25_600.0, Some(10)),
        (8192, 2_560.0, Some(1)),
        (8192, 2_559.0, None),
    ] {
        assert_eq!(factor(n, rate), expected, "{n} at {rate}");
    }
}

/// Largest error of the plain low band, relative to a full scale of 10 m/s², on gravity; the highest
/// tone at `highest` of the low rate.
fn worst(n: usize, rate: f64, highest: f64) -> f64 {
    let low_rate = rate / factor(n, rate).unwrap() as f64;
    let truth = |t: f64| {
        sine(4.0, 17.3, 0.5)(t) + sine(3.0, 411.7, 1.5)(t) + sine(3.0, highest * low_rate, 2.5)(t)
    };
    let samples = sampled(n * 8, rate, |t| 9.80665 + truth(t));
    let (plan, out) = low_band_of(n, rate, Response::Plain, &samples);
    assert_eq!(out.len(), 15 * plan.samples_per_frame());
    let pivot = f64::from(samples[0]);
    let errors = out
        .iter()
        .enumerate()
        .skip(plan.settle_samples())
        .map(|(i, got)| {
            (f64::from(*got) + pivot - 9.80665 - truth(i as f64 / plan.low_rate_hz())).abs()
        });
    errors.fold(0.0, f64::max) / 10.0
}

#[test]
fn waveform_matches_the_slowly_sampled_signal_within_1e_5() {
    for (n, rate) in [
        (8192, 25_600.0),
        (8192, 12_000.0),
        (8192, 48_000.0),
        (4096, 25_600.0),
        (6000, 20_000.0),
    ] {
        let error = worst(n, rate, 0.3);
        assert!(error < 1e-5, "n {n} rate {rate}: {error}");
        let near_the_taper = worst(n, rate, 0.395);
        assert!(
            near_the_taper < 1e-4,
            "n {n} rate {rate}: {near_the_taper} near the taper"
        );
    }
}

#[test]
fn tone_above_the_low_band_leaves_nothing() {
    for hz in [1_700.0, 3_200.0, 6_400.0, 9_000.0] {
        let (plan, out) = low_band_of(
            8192,
            25_600.0,
            Response::Plain,
            &sampled(8192 * 4, 25_600.0, |t| {
                10.0 * (std::f64::consts::TAU * hz * t).cos() - 10.0
            }),
        );
        let mean = -10.0 + 0.0;
        for got in &out[plan.settle_samples()..] {
            // The first sample, pivot, is 0 here, so the constant stays: -10.
            assert!(
                (f64::from(*got) - mean).abs() < 1e-3,
                "{hz} Hz leaves {got}"
            );
        }
    }
}

#[test]
fn a_state_of_another_plan_is_refused_and_gives_nothing() {
    let plan = FramePlan::new(8192, 25_600.0).unwrap();
    let low = LowBandPlan::new(8192, 25_600.0, Response::Plain).unwrap();
    let other = LowBandPlan::new(8192, 12_000.0, Response::Plain).unwrap();
    let mut state = other.start();
    let mut out = Vec::new();
    frames(
        &plan,
        &sampled(8192, 25_600.0, sine(1.0, 50.0, 0.0)),
        |scratch| {
            assert!(low.push_frame(scratch, &mut state, &mut out).is_err());
        },
    );
    assert!(out.is_empty());
}

#[test]
fn rates_too_low_for_velocity_are_refused() {
    let fault = LowBandPlan::new(8192, 2_000.0, Response::Plain).unwrap_err();
    assert_eq!(fault, LowBandFault::TooSlow { rate_hz: 2_000.0 });
    assert!(fault.to_string().contains("2560"), "{fault}");
}
