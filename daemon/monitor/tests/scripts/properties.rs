//! What holds for every story: how time is cut up, samples are cut up and arrivals jitter changes nothing it should not.

use std::collections::BTreeMap;

use humward_monitor::{
    Action, Input,
    analysis::{Arriving, PointAnalysis, Speeds},
    input::DeadlineReason,
    reading::{Reading, ShaftSpeed},
    time::{Arrival, SignalTime, Span},
};
use humward_signal::frame::Scratch;
use humward_wire::{
    block::{Block, Unit},
    out::{Event, Severity, State},
};
use proptest::prelude::*;

use crate::{
    drive::Driver,
    episodes::{inputs, quiet_story, settings, story},
    inputs::{ZERO_NS, block, ns},
    signals::Vibration,
};

fn config(cases: u32) -> ProptestConfig {
    ProptestConfig {
        cases,
        failure_persistence: None, // the smallest failing story is printed whole
        ..ProptestConfig::default()
    }
}

fn start() -> (Driver, Vec<Action>) {
    Driver::start(settings().plan(), Arrival::from_ns(ZERO_NS))
}

fn events(actions: &[Action]) -> Vec<&Event> {
    fn event(action: &Action) -> Option<&Event> {
        match action {
            Action::Event(event) => Some(event),
            Action::Status(_)
            | Action::Alarm { .. }
            | Action::Evidence(_)
            | Action::Reply { .. } => None,
        }
    }
    actions.iter().filter_map(event).collect()
}

fn is_of_the_machine(event: &Event) -> bool {
    let watch = event.finding.watch.as_deref();
    !watch.is_some_and(|watch| watch.starts_with("sensor."))
}

proptest! {
    #![proptest_config(config(40))]

    #[test]
    fn one_big_step_acts_as_many_small_ones(story in story(10), cuts in 1i64..5) {
        let inputs = inputs(&story, 0.0);
        let (mut big, mut in_one) = start();
        for (arrival, input) in &inputs {
            in_one.extend(big.step(*arrival, input));
        }
        let (mut small, mut in_many) = start();
        let mut before = Arrival::from_ns(ZERO_NS);
        for (arrival, input) in &inputs {
            let between = arrival.since(before).ns();
            for cut in 1..cuts {
                let at = before.plus(Span::from_ns(between / cuts * cut));
                let look = Input::Deadline(DeadlineReason::StatusDue);
                in_many.extend(small.step_on_time(at, &look).into_iter().map(|(_, action)| action));
            }
            in_many.extend(small.step_on_time(*arrival, input).into_iter().map(|(_, action)| action));
            before = *arrival;
        }
        prop_assert_eq!(in_one, in_many);
    }

    #[test]
    fn arrival_jitter_changes_no_machine_event(story in quiet_story()) {
        let run = |jitter: f64| {
            let (mut driver, mut actions) = start();
            for (arrival, input) in inputs(&story, jitter) {
                actions.extend(driver.step(arrival, &input));
            }
            events(&actions).into_iter().filter(|event| is_of_the_machine(event)).cloned().collect::<Vec<_>>()
        };
        prop_assert_eq!(run(0.0), run(1.5));
    }

    #[test]
    fn numbers_alarms_and_status_tell_one_story(story in story(12)) {
        let (mut driver, started) = start();
        let mut retained: BTreeMap<String, (State, Severity)> = BTreeMap::new();
        let (mut n, mut open) = (0, None);
        let steps = std::iter::once(started).chain(
            inputs(&story, 0.0).into_iter().map(|(arrival, input)| driver.step(arrival, &input)),
        );
        for actions in steps {
            for action in actions {
                match action {
                    Action::Event(event) => {
                        n += 1;
                        prop_assert_eq!(event.n, n, "events count up by one");
                        prop_assert!(event.finding.text.chars().count() <= 300);
                    }
                    Action::Alarm { watch, open: Some(alarm), .. } => {
                        let standing = alarm.finding.standing;
                        retained.insert(watch, (standing.state(), standing.severity()));
                    }
                    Action::Alarm { watch, open: None, .. } => {
                        prop_assert!(retained.remove(&watch).is_some(), "{} was not open", watch);
                    }
                    Action::Status(status) => {
                        prop_assert_eq!(status.last_n, n);
                        let told = status.open.iter().map(|open| {
                            (open.watch.clone(), (open.standing.state(), open.standing.severity()))
                        });
                        open = Some(told.collect::<BTreeMap<_, _>>());
                    }
                    Action::Evidence(_) | Action::Reply { .. } => {}
                }
            }
            prop_assert_eq!(open.as_ref(), Some(&retained), "status and retained alarms differ");
        }
    }
}

struct Steady;

impl Speeds for Steady {
    fn over(&self, _: SignalTime, _: SignalTime) -> (ShaftSpeed, bool) {
        (ShaftSpeed::Reported(1482.0), false)
    }
}

/// Readings of 5 s of a signal of 32 s that is cut into blocks of these lengths, samples, over and over.
fn readings(lengths: &[usize]) -> Vec<Reading> {
    const RATE_HZ: f64 = 5120.0;
    let vibration = Vibration {
        noise: 0.3,
        mean: 9.81,
        ..Vibration::sine(4.0)
    };
    let plan = settings().plan();
    let point = plan.assets()[0].spec().points[0].spec().clone();
    let mut analysis = PointAnalysis::new(Span::from_secs(5), 1000.0);
    let (mut scratch, mut closed, mut done) = (Scratch::new(), Vec::new(), 0);
    let all = (32.0 * RATE_HZ) as usize;
    for length in lengths.iter().cycle() {
        let length = (*length).min(all - done);
        if length == 0 {
            break;
        }
        let start = done as f64 / RATE_HZ;
        let block = block(&[vibration], start, length as f64 / RATE_HZ, RATE_HZ);
        let arriving = Arriving {
            block: &block,
            at: SignalTime::from_ns(ZERO_NS + ns(start)),
            arrival: Arrival::from_ns(ZERO_NS + ns(start)),
            speeds: &Steady,
        };
        analysis.push(&point, arriving, &mut scratch, &mut closed);
        done += length;
    }
    closed
}

proptest! {
    #![proptest_config(config(24))]

    /// Known error: sums of a different order, 1e-6 relative.
    #[test]
    fn readings_do_not_depend_on_how_samples_are_cut_into_blocks(
        lengths in prop::collection::vec(50usize..40_000, 1..12),
    ) {
        let (whole, cut) = (readings(&[32 * 5120]), readings(&lengths));
        prop_assert_eq!(whole.len(), 6);
        prop_assert_eq!(cut.len(), 6);
        for (a, b) in whole.iter().zip(&cut) {
            prop_assert_eq!((a.start, a.end, a.samples, a.frames), (b.start, b.end, b.samples, b.frames));
            prop_assert_eq!((a.gaps, a.doubts), (b.gaps, b.doubts));
            let values = |reading: &Reading| {
                let (rms, peak) = reading.velocity.unwrap();
                let acceleration = reading.acceleration.unwrap();
                [rms, peak, acceleration.rms, acceleration.kurtosis, acceleration.mean, reading.high_band_rms.unwrap()]
            };
            for (x, y) in values(a).into_iter().zip(values(b)) {
                prop_assert!((x - y).abs() <= 1e-6 * x.abs(), "{} and {}", x, y);
            }
        }
    }
}

/// Readings of a second of `blocks` blocks of `length` samples; each block's time is cut to whole ns and is `early` ns early.
fn seconds(
    rate_hz: f64,
    length: usize,
    blocks: usize,
    start_ns: i64,
    early: &[i64],
) -> Vec<Reading> {
    let plan = settings().plan();
    let point = plan.assets()[0].spec().points[0].spec().clone();
    let mut analysis = PointAnalysis::new(Span::from_secs(1), 1000.0);
    let (mut scratch, mut closed) = (Scratch::new(), Vec::new());
    for k in 0..blocks {
        let block = Block {
            samples: (0..length).map(|i| ((i * 7919) % 101) as f32).collect(),
            rate_hz,
            unit: Unit::MetrePerSecondSquared,
            ..Block::empty()
        };
        let at = (k * length) as f64 / rate_hz * 1e9;
        let at = ZERO_NS + start_ns + at as i64 - early[k % early.len()];
        let arriving = Arriving {
            block: &block,
            at: SignalTime::from_ns(at),
            arrival: Arrival::from_ns(at),
            speeds: &Steady,
        };
        analysis.push(&point, arriving, &mut scratch, &mut closed);
    }
    closed
}

proptest! {
    #![proptest_config(config(48))]

    /// Stamps are whole nanoseconds and sensors round them as they like: a border is crossed once all the same.
    #[test]
    fn every_second_gives_one_reading_wherever_its_samples_fall(
        rate_hz in prop_oneof![Just(2560.0), Just(12_000.0), Just(44_100.0), Just(48_000.0), 2560.0..50_000.0f64],
        length in 500usize..9000,
        start_ns in 0i64..1_000_000_000,
        early in prop::collection::vec(0i64..30, 1..5),
    ) {
        let blocks = (6.0 * rate_hz / length as f64).ceil() as usize;
        let readings = seconds(rate_hz, length, blocks, start_ns, &early);
        prop_assert!(readings.len() >= 5, "{} readings", readings.len());
        for (k, reading) in readings.iter().enumerate() {
            prop_assert_eq!(reading.end.ns(), ZERO_NS + (k as i64 + 1) * 1_000_000_000);
            let (came, whole) = reading.samples;
            prop_assert!(k == 0 || came.abs_diff(whole) <= 1, "{came} of {whole}");
        }
    }
}
