//! Inputs nobody would send: whatever comes, the core neither panics nor runs away, and its messages keep their bounds.

use humward_monitor::{
    Action,
    input::{DeadlineReason, GapCause, Input, Source},
    time::Arrival,
};
use humward_wire::{
    block::{Block, Unit},
    command::{Command, Verb},
    out::{MAX_EVENT, MAX_EVIDENCE, MAX_STATUS, Message as _},
    process::Process,
    refusal::{Reason, Refusal},
    speed::Speed,
};
use proptest::prelude::*;

use crate::{
    drive::{Driver, identity},
    inputs::ZERO_NS,
    language::Words,
    settings::{Settings, id},
};

fn time() -> impl Strategy<Value = i64> {
    prop_oneof![
        4 => (0i64..400_000_000_000).prop_map(|ns| ZERO_NS + ns),
        1 => any::<i64>(),
        1 => prop_oneof![
            Just(i64::MIN), Just(i64::MIN + 1), Just(-1), Just(0), Just(1), Just(i64::MAX - 1), Just(i64::MAX),
            Just(7_258_118_399_999_999_999), Just(7_258_118_400_000_000_000),
        ],
    ]
}

fn number() -> impl Strategy<Value = f64> {
    prop_oneof![
        2 => 0.0..3000.0f64,
        1 => any::<f64>(),
        1 => prop_oneof![
            Just(0.0), Just(-1.0), Just(f64::NAN), Just(f64::INFINITY), Just(f64::MIN_POSITIVE), Just(1e300),
        ],
    ]
}

fn rate() -> impl Strategy<Value = f64> {
    prop_oneof![
        4 => prop_oneof![Just(2560.0), Just(5120.0), Just(12_800.0), Just(1e6)],
        1 => number(),
    ]
}

fn samples() -> impl Strategy<Value = Vec<f32>> {
    let wild = prop_oneof![
        Just(0.0f32),
        Just(f32::NAN),
        Just(f32::INFINITY),
        Just(f32::MAX),
        any::<f32>()
    ];
    prop_oneof![
        3 => (0usize..9000, -20f32..20.0).prop_map(|(count, top)| (0..count).map(|i| top * (i as f32 * 0.7).sin()).collect()),
        1 => (wild, 0usize..5000).prop_map(|(value, count)| vec![value; count]),
    ]
}

prop_compose! {
    fn any_block()(
        at in prop::option::of(time()),
        seq in prop::option::of(any::<u64>()),
        rate_hz in rate(),
        unit in prop::sample::select(&Unit::ALL[..]),
        scale in prop_oneof![3 => Just(1.0), 1 => number()],
        channels in prop_oneof![3 => Just(1u16), 1 => any::<u16>()],
        rpm in prop::option::of(number()),
        samples in samples(),
        rails in prop::option::of((any::<f32>(), any::<f32>())),
    ) -> Block {
        Block { at, seq, rate_hz, unit, scale, channels, rpm, bias: None, samples, integer_rail: rails }
    }
}

fn source() -> Source {
    Source {
        asset: id("P-103A"),
        source: id("de"),
    }
}

/// Plans to go over to: another reading length, a watch less, no asset at all.
fn settings(which: u8) -> Settings {
    let reading = if which == 1 {
        "reading 3"
    } else {
        "reading 10"
    };
    let asset = if which == 2 {
        "asset P-999"
    } else {
        "asset P-103A"
    };
    let long = "a cooling water pump with a very long name, ".repeat(4);
    let asset = format!("{asset} \"{long}\"");
    let limits = if which == 3 {
        "alert 3"
    } else {
        "alert 2 danger 5"
    };
    let velocity = format!(
        "watch velocity {limits} alert_after \"1 reading\" danger_after 1s clear_after \"1 of 2\""
    );
    let lines = [
        "sensor_after 30",
        "status 3600",
        reading,
        "speed_valid 30",
        if which == 1 {
            "run_signal flow"
        } else {
            "run_signal run"
        },
        asset.as_str(),
        "point de \"the drive end bearing housing, horizontal, seen from the coupling side of it\" range 15 bearing 3.6 5.4 4.7 0.4 envelope 800 2400",
        "point nde \"non-drive end\" source de channel 1 count_per_g 100 band_orders 0.5 1.5",
        velocity.as_str(),
        "watch outer of outer alert 10 alert_after \"1 reading\"",
        "watch first-order of band at nde alert 0.5 alert_after \"1 reading\"",
    ];
    Settings::of(&lines.map(Words::of))
}

fn any_input() -> impl Strategy<Value = Input> {
    let asset = id("P-103A");
    let (a, b, c) = (asset.clone(), asset.clone(), asset);
    let deadlines = [
        DeadlineReason::ReadingOverdue,
        DeadlineReason::SpeedStands,
        DeadlineReason::SensorOverdue,
        DeadlineReason::StatusDue,
        DeadlineReason::RecordingEnd,
    ];
    prop_oneof![
        12 => any_block().prop_map(|block| Input::Block(source(), block)),
        3 => (prop::option::of(time()), number())
            .prop_map(move |(at, rpm)| Input::Speed(a.clone(), Speed { at, rpm, shaft: None })),
        1 => (prop::option::of(time()), number())
            .prop_map(move |(at, value)| Input::Process(b.clone(), Process { at, name: id("run"), value, unit: None })),
        1 => (prop::sample::select(&Verb::ALL[..]), prop::option::of(time()))
            .prop_map(move |(verb, expires)| Input::Command(c.clone(), id("panel"), command(verb, expires))),
        1 => (any::<bool>(), any::<u64>()).prop_map(|(named, blocks)| {
            Input::Gap(named.then(source), GapCause::Shed, blocks)
        }),
        1 => prop::sample::select(Reason::ALL).prop_map(|reason| {
            Input::Refused(source(), Refusal { reason, offset: usize::MAX, key: None })
        }),
        1 => any::<bool>().prop_map(Input::Link),
        1 => prop_oneof![any::<i64>(), -3_600_000_000_000i64..3_600_000_000_000].prop_map(Input::ClockStep),
        2 => prop::sample::select(deadlines.to_vec()).prop_map(Input::Deadline),
        1 => (0u8..4).prop_map(|which| Input::Plan(settings(which).plan())),
        1 => Just(Input::Started(identity())),
    ]
}

fn command(verb: Verb, expires: Option<i64>) -> Command {
    Command {
        id: id("c-1"),
        verb,
        occurrence: None,
        watch: None,
        event: None,
        point: None,
        by: None,
        expires,
        until: None,
        from_n: None,
        to_n: None,
        note: None,
    }
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 150, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn no_input_sequence_panics_or_outgrows_its_messages(
        inputs in prop::collection::vec((time(), any_input()), 1..40),
        in_order in any::<bool>(),
    ) {
        let mut inputs = inputs;
        if in_order {
            inputs.sort_by_key(|(arrival, _)| *arrival);
        }
        let (mut driver, _) = Driver::start(settings(0).plan(), Arrival::from_ns(ZERO_NS));
        for (arrival, input) in &inputs {
            let actions = driver.step(Arrival::from_ns(*arrival), input);
            prop_assert!(actions.len() < 500, "{} actions in one step", actions.len());
            for action in actions {
                match action {
                    Action::Event(event) => {
                        prop_assert!(event.to_json().len() <= MAX_EVENT);
                        let text = &event.finding.text;
                        prop_assert!(text.chars().count() <= 300, "{}", text);
                        prop_assert!(text.contains(" P-") && text.ends_with("Advisory only."), "{}", text);
                    }
                    Action::Status(status) => prop_assert!(status.to_json().len() <= MAX_STATUS),
                    Action::Alarm { open: Some(alarm), .. } => prop_assert!(alarm.to_json().len() <= MAX_EVENT),
                    Action::Evidence(evidence) => prop_assert!(evidence.encode().len() <= MAX_EVIDENCE),
                    Action::Alarm { open: None, .. } | Action::Reply { .. } => {}
                }
            }
        }
    }
}
