//! Lines: sines at their own place, through speed ramps and paths.

use std::f64::consts::{PI, TAU};
use std::sync::Arc;

use humward_sim::machine::Path;
use humward_sim::random::Draw;
use humward_sim::wave::{Law, Line, Lines, Mode, Pitch, Sway, Wave, velocity_mm_s};

use super::measure::{samples, state};

fn one(pitch: Pitch, path: Path) -> Lines {
    let line = Line {
        pitch,
        peak_ms2: 3.0,
        phase: 0.7,
        law: Law::steady(0.0),
        sway: Sway::default(),
    };
    Lines::new(vec![line], Arc::new(path))
}

/// Closed form: 3 cos(2 pi 5 f t + 0.7) after 20 s at a steady 24.7 Hz.
#[test]
fn a_line_at_steady_speed_is_its_cosine_within_1e_8_after_20_s() {
    let got = samples(
        &mut one(Pitch::order(5.0), Path::plain()),
        12_800.0,
        20.0,
        24.7,
        0.0,
    );
    for (k, x) in got.iter().enumerate().skip(got.len() - 1000) {
        let t = k as f64 / 12_800.0;
        let want = 3.0 * (TAU * 5.0 * 24.7 * t + 0.7).cos();
        assert!((x - want).abs() < 3e-8, "{k}: {x} {want}");
    }
}

/// Closed form: the phase of a ramp is its integral, order (f0 t + r t² / 2); order 10 at 2.5 Hz/s.
#[test]
fn a_line_on_a_ramp_keeps_the_phase_of_the_integral_within_2_mrad() {
    let got = samples(
        &mut one(Pitch::order(10.0), Path::plain()),
        12_800.0,
        10.0,
        5.0,
        2.5,
    );
    let mut worst = 0_f64;
    for (k, x) in got.iter().enumerate() {
        let t = k as f64 / 12_800.0;
        let want = 3.0 * (TAU * 10.0 * (5.0 * t + 1.25 * t * t) + 0.7).cos();
        worst = worst.max((x - want).abs() / 3.0);
    }
    assert!(worst < 2.0e-3, "{worst}");
    assert!(worst > 1e-6, "a bound that cannot fail");
}

/// Closed form: a single mode at resonance adds g / (2 i zeta) to 1 (Den Hartog, from memory); far below it nothing,
/// far above it -g.
#[test]
fn a_path_has_the_response_of_its_modes() {
    let mode = Mode {
        hz: 400.0,
        damping: 0.05,
        gain: 0.2,
    };
    let path = Path::with_modes(1.5, vec![mode]);
    let at = |hz: f64| path.response(hz);
    assert!((at(400.0).re - 1.5).abs() < 1e-12 && (at(400.0).im + 1.5 * 0.2 / 0.1).abs() < 1e-12);
    assert!((at(4.0).norm() - 1.5 * (1.0 + 0.2e-4)).abs() < 1e-5);
    assert!((at(40_000.0).norm() - 1.5 * 0.8).abs() < 1e-3);
    for seed in 0..200 {
        let drawn = Path::drawn(Draw::new(seed), 12_800.0);
        for hz in [10.0, 25.0, 50.0, 100.0, 200.0] {
            let gain = drawn.response(hz).norm();
            assert!(
                (1.0 / 1.6..1.6).contains(&gain),
                "seed {seed}, {hz} Hz: {gain}"
            );
        }
        assert_eq!(
            drawn.response(5800.0).norm(),
            0.0,
            "above 0.45 of the rate nothing comes through"
        );
    }
}

/// Closed form: two lines of one frequency add as phasors, of two frequencies by power.
#[test]
fn clean_velocity_adds_one_frequency_by_phase_and_several_by_power() {
    let line = |order: f64, phase: f64| Line {
        pitch: Pitch::order(order),
        peak_ms2: TAU * 25.0 * order * 1e-3 * 2_f64.sqrt(),
        phase,
        law: Law::steady(0.0),
        sway: Sway::default(),
    };
    let now = state(1.0, 25.0, 0.0, 25.0);
    let velocity = |lines: Vec<Line>| {
        let waves: Vec<Box<dyn Wave>> = lines
            .into_iter()
            .map(|line| Box::new(Lines::new(vec![line], Arc::new(Path::plain()))) as Box<dyn Wave>)
            .collect();
        velocity_mm_s(waves.iter().map(|wave| (&**wave, &now)))
    };
    assert!((velocity(vec![line(1.0, 0.0)]) - 1.0).abs() < 1e-12);
    assert!((velocity(vec![line(1.0, 0.0), line(1.0, 0.0)]) - 2.0).abs() < 1e-12);
    assert!(velocity(vec![line(1.0, 0.0), line(1.0, PI)]) < 1e-9);
    assert!((velocity(vec![line(1.0, 0.0), line(2.0, 0.0)]) - 2_f64.sqrt()).abs() < 1e-12);
    assert_eq!(
        velocity(vec![line(0.39, 0.0)]),
        0.0,
        "9.75 Hz lies below the band"
    );
}
