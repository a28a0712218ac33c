//! What holds for every start, stop and report of a speed, however often it is reported.

use humward_monitor::{Action, Input, input::Source, time::Arrival};
use humward_wire::{out::RunState, speed::Speed};
use proptest::prelude::*;

use crate::{
    drive::Driver,
    inputs::{ZERO_NS, block, ns},
    language::Words,
    settings::{Settings, id},
    signals::{Vibration, uniform},
};

/// Sample rate, samples/s: the lowest that serves.
const RATE_HZ: f64 = 2560.0;

fn settings() -> Settings {
    let lines = [
        "status 3600",
        "sensor_after 86400",
        "point drive-end \"pump drive end\"",
        "watch velocity alert 4.5 danger 7.1 alert_after \"2 readings\" danger_after \"2 readings\"",
        "watch peak of velocity_peak danger 9 danger_after \"2 readings\"",
        "watch impacts of kurtosis danger 2.5 danger_after \"2 readings\"",
    ];
    Settings::of(&lines.map(Words::of))
}

fn speed(s: f64, rpm: f64) -> (f64, Input) {
    let at = Some(ZERO_NS + ns(s));
    let speed = Speed {
        at,
        rpm,
        shaft: None,
    };
    (s, Input::Speed(id("P-103A"), speed))
}

/// A second of vibration, mm/s rms, as a block.
fn vibrates(s: u32, velocity: f64) -> (f64, Input) {
    let source = Source {
        asset: id("P-103A"),
        source: id("drive-end"),
    };
    let vibration = Vibration {
        noise: 0.02,
        ..Vibration::sine(velocity)
    };
    let block = block(&[vibration], f64::from(s), 1.0, RATE_HZ);
    (f64::from(s) + 1.0, Input::Block(source, block))
}

/// Everything the core does about these inputs, sorted by the second they arrive.
fn acts(mut inputs: Vec<(f64, Input)>) -> Vec<Action> {
    inputs.sort_by(|(a, _), (b, _)| a.total_cmp(b));
    let (mut driver, mut actions) = Driver::start(settings().plan(), Arrival::from_ns(ZERO_NS));
    for (s, input) in &inputs {
        actions.extend(driver.step(Arrival::from_ns(ZERO_NS + ns(*s)), input));
    }
    actions
}

/// The states told, each once in a row; anything but a status is a failure.
fn states(actions: &[Action]) -> Result<Vec<RunState>, TestCaseError> {
    let mut states = Vec::new();
    for action in actions {
        let Action::Status(status) = action else {
            return Err(TestCaseError::fail(format!("{action:?}")));
        };
        if states.last() != Some(&status.running.state) {
            states.push(status.running.state);
        }
    }
    Ok(states)
}

/// Times of reports from one second to another, each up to a fifth of the distance late.
fn times(from: f64, to: f64, every: f64, seed: u64) -> Vec<f64> {
    let count = ((to - from) / every).floor() as u64;
    (0..count)
        .map(|k| from + (k as f64 + 0.2 * uniform(seed + k)) * every)
        .collect()
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 60, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn one_bad_report_among_good_ones_changes_no_state(
        every in 0.2..10.0f64,
        seed in 0u64..1000,
        steady in prop_oneof![Just(0.0), 1000.0..1500.0f64],
        bad in prop_oneof![Just(0.0), 0.0..20_000.0f64],
        place in 1usize..20,
        wander in 0.0..0.02f64,
    ) {
        let turn = |s: f64| steady * (1.0 + wander * (std::f64::consts::TAU * s / 60.0).sin());
        let times = times(0.0, every * 24.0, every, seed);
        let rpm = |(k, s): (usize, &f64)| speed(*s, if k == place { bad } else { turn(*s) });
        let reports = times.iter().enumerate().map(rpm).collect();
        let told = states(&acts(reports))?;
        let stays = if steady > 0.0 { RunState::Running } else { RunState::Stopped };
        prop_assert_eq!(told, [RunState::Unknown, stays]);
    }

    #[test]
    fn a_start_and_a_stop_with_nothing_wrong_tell_statuses_alone(
        every in 0.2..10.0f64,
        seed in 0u64..1000,
        up in 5u32..120,
        down in 5u32..120,
        velocity in 0.5..20.0f64,
        top in 1000.0..3000.0f64,
    ) {
        // At rest for 30 s, up, steady for 60 s, down, at rest for 40 s.
        let stop = 90 + up;
        let rest = stop + down;
        let at = |s: f64| {
            let up = (s - 30.0) / f64::from(up);
            let down = (f64::from(rest) - s) / f64::from(down);
            top * up.min(down).clamp(0.0, 1.0)
        };
        let mut inputs: Vec<(f64, Input)> = times(0.0, f64::from(rest) + 40.0, every, seed)
            .into_iter()
            .map(|s| speed(s, at(s)))
            .collect();
        // Away from its top speed it passes a resonance; limits that one reading could pass would see it begin.
        for s in 0..rest + 40 {
            let share = at(f64::from(s)) / top;
            let shakes = if share > 0.9 { 2.0 } else if share > 0.0 { velocity } else { 0.1 };
            inputs.push(vibrates(s, shakes));
        }
        let mut told = states(&acts(inputs))?;
        // Between reports further apart than a third of a start or stop it may be over when it is first seen.
        for (place, state, next, lasts) in [
            (2, RunState::Starting, RunState::Running, up),
            (4, RunState::Coasting, RunState::Stopped, down),
        ] {
            if told.get(place) == Some(&next) && f64::from(lasts) < 3.0 * every {
                told.insert(place, state);
            }
        }
        prop_assert_eq!(told, [
            RunState::Unknown,
            RunState::Stopped,
            RunState::Starting,
            RunState::Running,
            RunState::Coasting,
            RunState::Stopped,
        ]);
    }
}
