//! The operating state by speed, run signal and level.

use alloc::{string::ToString, vec::Vec};

use humward_wire::id::Id;

use super::{Operating, Report, RunningState};
use crate::{
    plan::{AssetSpec, RunningRule, SpeedRange, StartingRule},
    time::{Arrival, SECOND, SignalTime, Span},
};

fn spec(reading_s: i64) -> AssetSpec {
    let id = Id::new("P-103A").unwrap();
    AssetSpec {
        name: id.to_string(),
        id,
        speed: SpeedRange {
            lowest: 1000.0,
            nominal: 1480.0,
            highest: 1500.0,
        },
        running: RunningRule {
            from_rpm: 300.0,
            from_mm_s: 1.0,
            speed_valid: Span::from_secs(120),
        },
        run_signal: None,
        starting: StartingRule::USUAL,
        zones: None,
        reading_every: Span::from_secs(reading_s),
        status_every: Span::from_secs(300),
        sensor_after: Span::from_secs(60),
        points: Vec::new(),
        watches: Vec::new(),
    }
}

fn at(s: f64) -> SignalTime {
    SignalTime::from_ns((s * SECOND as f64) as i64)
}

/// A machine, its plan, and the states it went through with the second each began.
struct Machine {
    spec: AssetSpec,
    state: RunningState,
    told: Vec<(Operating, f64)>,
}

impl Machine {
    fn new(reading_s: i64) -> Self {
        Self {
            spec: spec(reading_s),
            state: RunningState::default(),
            told: Vec::new(),
        }
    }

    fn speed(&mut self, s: f64, rpm: f64) {
        self.speed_under(s, rpm, None);
    }

    fn speed_under(&mut self, s: f64, rpm: f64, signal: Option<bool>) {
        let report = Report { at: at(s), rpm };
        let arrival = Arrival::from_ns(report.at.ns());
        let changed = self.state.speed(&self.spec, report, arrival, signal);
        self.tell(changed);
    }

    fn tell(&mut self, changed: bool) {
        if changed {
            let since = self.state.since().unwrap();
            self.told
                .push((self.state.state(), since.ns() as f64 / SECOND as f64));
        }
    }

    /// From one speed to another, reports `every` so many seconds.
    fn ramp(&mut self, (from_s, to_s): (f64, f64), (from, to): (f64, f64), every: f64) {
        let count = ((to_s - from_s) / every) as usize;
        for k in 0..count {
            let s = from_s + k as f64 * every;
            self.speed(s, from + (to - from) * (s - from_s) / (to_s - from_s));
        }
    }
}

use Operating::{Coasting, Running, Starting, Stopped};

#[test]
fn a_level_between_the_two_borders_leaves_the_state_as_it_was() {
    let mut running = RunningState::default();
    let rule = spec(10).running;
    assert!(running.by_level(&rule, at(1.0), 1.2));
    assert!(!running.by_level(&rule, at(2.0), 0.8));
    assert_eq!(running.state(), Running);
    assert!(running.by_level(&rule, at(3.0), 0.6));
    assert!(!running.by_level(&rule, at(4.0), 0.8));
    assert_eq!(running.state(), Stopped);
    assert!(!running.ran_from(at(4.0)));
}

#[test]
fn a_start_and_a_stop_are_told_by_several_reports_a_second_and_by_one_each_10_s() {
    for every in [0.25, 1.0, 10.0] {
        let mut machine = Machine::new(10);
        machine.ramp((0.0, 60.0), (0.0, 0.0), every);
        machine.ramp((60.0, 90.0), (0.0, 1480.0), every);
        machine.ramp((90.0, 150.0), (1480.0, 1480.0), every);
        machine.ramp((150.0, 180.0), (1480.0, 0.0), every);
        machine.ramp((180.0, 210.0), (0.0, 0.0), every);
        let states: Vec<Operating> = machine.told.iter().map(|(state, _)| *state).collect();
        assert_eq!(
            states,
            [Stopped, Starting, Running, Coasting, Stopped],
            "{every}"
        );
        let since: Vec<f64> = machine.told.iter().map(|(_, since)| *since).collect();
        // Standstill ends at 300 r/min, 6 s into the ramp; the speed is within 6 % of its last from 88 s on.
        let expected = [0.0, 66.1, 98.2, 152.4, 174.0];
        let near = |(since, expected): (&f64, f64)| (since - expected).abs() <= every.max(2.0);
        assert!(
            since.iter().zip(expected).all(near),
            "each {every} s: {since:?} for {expected:?}"
        );
    }
}

#[test]
fn a_start_lasts_until_the_speed_held_as_long_as_a_reading_and_10_s_at_least() {
    for (reading_s, began) in [(1, 30.0), (10, 30.0), (60, 80.0)] {
        let mut machine = Machine::new(reading_s);
        machine.ramp((0.0, 20.0), (0.0, 0.0), 1.0);
        machine.ramp((20.0, 120.0), (1480.0, 1480.0), 1.0);
        assert_eq!(
            machine.told[1..],
            [(Starting, 20.0), (Running, began)],
            "{reading_s} s"
        );
    }
}

#[test]
fn below_nine_tenths_of_the_lowest_speed_it_runs_only_once_that_held_for_a_minute() {
    for (rpm, began) in [(901.0, 30.0), (899.0, 80.0)] {
        let mut machine = Machine::new(10);
        machine.ramp((0.0, 20.0), (0.0, 0.0), 1.0);
        machine.ramp((20.0, 150.0), (rpm, rpm), 1.0);
        assert_eq!(
            machine.told[1..],
            [(Starting, 20.0), (Running, began)],
            "{rpm}"
        );
    }
    let first = |rpm| {
        let mut machine = Machine::new(10);
        machine.speed(0.0, rpm);
        machine.state.state()
    };
    assert_eq!([first(901.0), first(899.0)], [Running, Starting]);
}

#[test]
fn a_run_signal_alone_starts_for_30_s_and_then_runs() {
    let mut machine = Machine::new(10);
    let spec = machine.spec.clone();
    assert!(
        machine.state.by_signal(&spec, at(0.0), true),
        "its first sight"
    );
    assert_eq!(
        machine.state.settle(&spec, at(29.9), Some(true)),
        Some(false)
    );
    assert_eq!(
        machine.state.settle(&spec, at(35.0), Some(true)),
        Some(true)
    );
    assert_eq!(
        (machine.state.state(), machine.state.since()),
        (Running, Some(at(30.0)))
    );
    assert!(machine.state.by_signal(&spec, at(40.0), false));
    assert!(machine.state.by_signal(&spec, at(50.0), true));
    assert_eq!(machine.state.state(), Starting);
}

#[test]
fn a_run_signal_that_says_no_lets_it_coast_to_standstill_and_a_dead_tacho_does_not() {
    let mut machine = Machine::new(10);
    let spec = machine.spec.clone();
    machine.speed(0.0, 1480.0);
    assert!(!machine.state.by_signal(&spec, at(5.0), false));
    machine.speed_under(14.0, 1480.0, Some(false));
    assert_eq!(machine.state.state(), Running, "a drop-out so far");
    machine.speed_under(15.0, 1480.0, Some(false));
    assert_eq!(machine.state.state(), Coasting);
    machine.speed_under(16.0, 100.0, Some(false));
    machine.speed_under(17.0, 90.0, Some(false));
    assert_eq!(machine.state.state(), Stopped);
    machine.speed_under(18.0, 600.0, Some(false));
    machine.speed_under(18.5, 600.0, Some(false));
    assert_eq!(machine.state.state(), Stopped, "turned by the flow");
    machine.speed_under(19.0, 1480.0, Some(false));
    machine.speed_under(19.5, 1480.0, Some(false));
    assert_eq!(machine.state.state(), Coasting, "it does not stand");
    machine.speed_under(19.6, 0.0, Some(false));
    machine.speed_under(19.7, 0.0, Some(false));
    assert!(machine.state.by_signal(&spec, at(20.0), true));
    for s in 21..55 {
        machine.speed_under(f64::from(s), 0.0, Some(true));
    }
    assert_eq!(machine.state.state(), Running, "30 s after the signal rose");
}

#[test]
fn a_reading_in_which_a_report_waits_to_be_believed_did_not_surely_run() {
    let mut machine = Machine::new(10);
    machine.speed(0.0, 1480.0);
    machine.speed(20.0, 1480.0);
    assert!(machine.state.ran_from(at(10.0)));
    machine.speed(21.0, 0.0);
    assert!(!machine.state.ran_from(at(10.0)));
    machine.speed(22.0, 1480.0);
    assert!(machine.state.ran_from(at(10.0)));
}

#[test]
fn a_clock_set_forth_or_back_in_a_start_neither_ends_nor_restarts_it() {
    for by in [3600.0, -3600.0, 0.0] {
        for followed in [true, false] {
            let mut machine = Machine::new(10);
            machine.ramp((0.0, 20.0), (0.0, 0.0), 1.0);
            machine.ramp((20.0, 35.0), (0.0, 740.0), 1.0);
            let span = |s: f64| Span::from_secs_f64(s.max(0.0));
            machine.state.wall_clock_set(span(by), span(-by));
            let on = if followed { 35.0 + by } else { 35.0 };
            machine.ramp((on, on + 15.0), (740.0, 1480.0), 1.0);
            machine.ramp((on + 15.0, on + 30.0), (1480.0, 1480.0), 1.0);
            let states: Vec<Operating> = machine.told.iter().map(|(state, _)| *state).collect();
            assert_eq!(states, [Stopped, Starting, Running], "{by} {followed}");
            let (_, since) = machine.told[2];
            assert!((since - on - 23.0).abs() < 3.0, "{by} {followed}: {since}");
        }
    }
}
