//! Supply, shaft, load and background.

use humward_sim::machine::Path;
use humward_sim::machine::{BACKGROUND_LINES, Motion, Supply, background, bridge_ripple, healthy};
use humward_sim::plant::Plant;
use humward_sim::random::Draw;
use humward_sim::wave::{TICK_S, Wave, velocity_mm_s};
use std::f64::consts::{PI, TAU};
use std::sync::Arc;

use super::measure::{scenario, state};

/// Closed form: turns are the integral of the schedule: 0 to 1500 r/min in 30 s is 375 turns, then 25 a second.
#[test]
fn turns_are_the_integral_of_the_schedule() {
    let scenario = scenario(
        "rpm = 1500\nwander_percent = 0.0\nschedule = [[\"0s\", 0], [\"10s\", 0], [\"40s\", 1500]]",
        "",
        "",
    );
    let mut plant = Plant::new(&scenario);
    for _ in 0..5000 {
        plant.advance();
    }
    let state = plant.states()[0];
    assert!((state.at_s - 50.0).abs() < 1e-9 && (state.shaft_hz - 25.0).abs() < 1e-9);
    assert!(
        (state.turns - 375.0 - 250.0).abs() < 1e-6,
        "{}",
        state.turns
    );
}

/// Formula: n = 120 f / p (1 - s load), source: checks elec.sync.*; 4 poles, 50 Hz, rated 1470 r/min is s = 2 %.
#[test]
fn an_induction_motor_slips_with_its_load() {
    for (load, rpm) in [(1.0, 1470.0), (0.5, 1485.0)] {
        let asset = format!(
            "rpm = 1470\nwander_percent = 0.0\nload = {{ mean = {load} }}\nmotor = {{ kind = \"induction\", poles = 4 }}"
        );
        let scenario = scenario(&asset, "", "");
        let mut supply = Supply::new(50.0, Draw::new(1));
        let mut motion = Motion::new(&scenario.assets[0], &supply, &Draw::new(2));
        supply.advance(TICK_S);
        let tick = motion.advance(&supply);
        let want = rpm / 60.0 * tick.to.line_hz / 50.0;
        assert!(
            (tick.to.shaft_hz - want).abs() < 1e-9,
            "{} {want}",
            tick.to.shaft_hz
        );
    }
}

/// Closed form: standard deviation of the process, 0.01 Hz; 2000 minutes are about 1000 independent values.
#[test]
fn the_supply_wanders_by_its_stated_deviation() {
    let mut supply = Supply::new(60.0, Draw::new(4));
    let (mut sum, mut square, mut turns) = (0.0, 0.0, 0.0);
    for _ in 0..120_000 {
        let before = supply.now().1;
        supply.advance(1.0);
        let off = supply.now().1 - 60.0;
        sum += off;
        square += off * off;
        turns += 0.5 * (before + supply.now().1);
    }
    let mean = sum / 120_000.0;
    let deviation = (square / 120_000.0 - mean * mean).sqrt();
    assert!((deviation / 0.01 - 1.0).abs() < 0.1, "{deviation}");
    assert!((supply.now().0 - turns).abs() < 1e-6);
}

/// Independent route: the output of an ideal six-pulse bridge at firing angle a, made wave by wave, summed against
/// cosines. Source: checks elec.scr.healthy (0.295 of the phase peak for 6f at 30 degrees).
#[test]
fn rectifier_ripple_is_that_of_an_ideal_bridge_within_1e_4() {
    let firing = 30_f64.to_radians();
    let n = 120_000;
    // Within one sixth of a cycle the output is the line voltage sqrt 3 cos(x), x from -pi/6 + a to pi/6 + a.
    let output = |theta: f64| {
        let sixth = theta.rem_euclid(PI / 3.0);
        3_f64.sqrt() * (sixth - PI / 6.0 + firing).cos()
    };
    let mean_at_zero = 3.0 * 3_f64.sqrt() / PI;
    for harmonic in [6.0, 12.0, 18.0] {
        let (mut re, mut im) = (0.0, 0.0);
        for k in 0..n {
            let theta = TAU * f64::from(k) / f64::from(n);
            re += output(theta) * (harmonic * theta).cos();
            im += output(theta) * (harmonic * theta).sin();
        }
        let peak = 2.0 * re.hypot(im) / f64::from(n);
        let want = bridge_ripple(harmonic, 30.0) * mean_at_zero;
        assert!((peak - want).abs() < 1e-4, "{harmonic}: {peak} {want}");
        if harmonic == 6.0 {
            assert!((want - 0.295).abs() < 5e-4, "{want}");
        }
    }
}

/// Every point hears at least 20 background lines, none of them at a whole order, and two seeds differ in the level of
/// every one.
#[test]
fn two_seeds_differ_in_the_level_of_every_background_line() {
    const { assert!(BACKGROUND_LINES >= 20) };
    let lines = |seed: u64| {
        let mut all = Vec::new();
        let draw = Draw::new(seed).part("P-1").part("drive-end");
        background(&draw, 24.7, 50.0, 12_800.0).lines(&state(1.0, 24.7, 0.0, 24.7), &mut all);
        all
    };
    let first = lines(1);
    assert_eq!(first.len(), BACKGROUND_LINES);
    for other in 2..40 {
        for (a, b) in first.iter().zip(lines(other)) {
            assert!(
                (a.peak.norm() / b.peak.norm() - 1.0).abs() > 1e-6,
                "seed {other}: {} Hz",
                a.hz
            );
        }
    }
    for line in &first {
        let order = line.hz / 24.7;
        assert!(
            (order - order.round()).abs() > 1e-3,
            "{} Hz is order {order}",
            line.hz
        );
    }
}

/// Two seeds differ in every line of a healthy machine, too: the way to the sensor is drawn.
#[test]
fn two_seeds_differ_in_the_level_of_every_line_of_the_machine() {
    let scenario = scenario("rpm = 1482\nmotor = { kind = \"induction\" }", "", "");
    let asset = &scenario.assets[0];
    let lines = |seed: u64| {
        let draw = Draw::new(seed);
        let path = Arc::new(Path::drawn(draw.part("path"), 12_800.0));
        let mut all = Vec::new();
        for wave in healthy(asset, &asset.points[0], &path, &draw) {
            wave.lines(&state(1.0, 24.7, 0.0, 24.7), &mut all);
        }
        all
    };
    let first = lines(1);
    assert!(first.len() >= 7);
    for (a, b) in first.iter().zip(lines(2)) {
        assert!(
            (a.peak.norm() / b.peak.norm() - 1.0).abs() > 1e-3,
            "{} Hz",
            a.hz
        );
    }
}

/// A healthy machine has the velocity it was given within what is drawn: 2 dB a line, 1.5 dB of path. 200 seeds.
#[test]
fn a_healthy_machine_has_about_the_velocity_it_was_given() {
    let scenario = scenario("rpm = 1482\nvelocity_mm_s = 1.4", "", "");
    let asset = &scenario.assets[0];
    let mut mean = 0.0;
    for seed in 0..200 {
        let draw = Draw::new(seed);
        let path = Arc::new(Path::drawn(draw.part("path"), 12_800.0));
        let waves = healthy(asset, &asset.points[0], &path, &draw);
        let now = state(1.0, 24.7, 0.0, 24.7);
        let velocity = velocity_mm_s(waves.iter().map(|wave| (&**wave, &now)));
        assert!((0.9..2.4).contains(&velocity), "seed {seed}: {velocity}");
        mean += velocity / 200.0;
    }
    assert!((1.3..1.65).contains(&mean), "{mean}");
}
