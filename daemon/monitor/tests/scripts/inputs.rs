//! A command to stamped inputs.
//!
//! Streams: `FROM-TO vibrate V [hz F] [noise N] [bursts HZ PEAK] [clip C] [mean M]`, `flat`; with `to`, `lag`,
//! `jitter`, `at_once T` (all arrive then), `later T V` (V mm/s from second T on), `shift` (the sensor's clock is off), `rate`, `block`, `unit`, `seq`, `unstamped`, `second V` (a second
//! channel). Moments: `speed R [until R] [wander SHARE PERIOD] [noise SHARE] [shaft S]`, `process NAME VALUE`, `link up|lost`, `gap shed N`, `refuse REASON`, `clock_step S`,
//! `command VERB ID`, `plan SETTING`, `restart`, `wait`, `wake` (a `wait` nobody
//! attended), `end`. A moment given from-to repeats `every` so many seconds.

use std::sync::Arc;

use humward_monitor::{
    input::{DeadlineReason, GapCause, Input, Source},
    plan::GroupPlan,
    time::{Arrival, SECOND},
};
use humward_wire::{
    block::{Block, Unit},
    command::{Command as Asked, Verb},
    id::Id,
    process::Process,
    refusal::{Reason, Refusal},
    speed::Speed,
};

use crate::{
    language::{Command, Words},
    settings::{Settings, id},
    signals::{Vibration, uniform},
};

/// 2026-12-01 03:00 UTC: second 0 of every script.
pub(crate) const ZERO_NS: i64 = 1_796_094_000 * SECOND;

/// What is done at a moment.
#[derive(Debug, Clone)]
pub(crate) enum Deed {
    /// An input reaches the core.
    Step(Input),
    /// The same, although deadlines have passed that nobody looked at.
    Wake(Input),
    /// The daemon is started anew, with this plan.
    Restart(Arc<GroupPlan>),
}

/// A deed with its arrival.
#[derive(Debug, Clone)]
pub(crate) struct Timed {
    /// When it arrives.
    pub(crate) arrival: Arrival,
    /// Which command it belongs to.
    pub(crate) command: usize,
    /// What is done.
    pub(crate) deed: Deed,
}

/// Nanoseconds of a script's second.
pub(crate) fn ns(seconds: f64) -> i64 {
    (seconds * SECOND as f64).round() as i64
}

/// All commands as deeds in the order they arrive.
pub(crate) fn timed(settings: &Settings, commands: &[Command]) -> Vec<Timed> {
    let mut settings = settings.clone();
    let mut all = Vec::new();
    for (place, command) in commands.iter().enumerate() {
        for (seconds, deed) in deeds(&mut settings, command) {
            all.push((seconds, place, deed));
        }
    }
    all.sort_by(|a, b| a.0.total_cmp(&b.0));
    let (mut ahead, mut offset) = (0, 0);
    let stamp = |(seconds, command, deed): (f64, usize, Deed)| {
        let arrival = Arrival::from_ns(ZERO_NS + ns(seconds) + offset);
        // The stamps run on after a step back, and jump with a step forward that is more than was gained before.
        if let Deed::Step(Input::ClockStep(by)) = &deed {
            offset += (by - ahead).max(0);
            ahead = (ahead - by).max(0);
        }
        Timed {
            arrival,
            command,
            deed,
        }
    };
    all.into_iter().map(stamp).collect()
}

fn deeds(settings: &mut Settings, command: &Command) -> Vec<(f64, Deed)> {
    let words = &command.words;
    if matches!(words.at(0), "vibrate" | "flat") {
        return stream(settings, command);
    }
    let every: f64 = words.read("every").unwrap_or(1.0);
    let to = command.to.unwrap_or(command.from + every);
    let count = ((to - command.from) / every).round() as usize;
    let lag = words.read("lag").unwrap_or(0.0);
    let moments = (0..count).map(|k| command.from + k as f64 * every);
    let mut made = Vec::new();
    for moment in moments {
        made.push((
            moment + lag,
            deed(settings, words, moment, command.from, to),
        ));
    }
    made
}

/// The speed a command reports at a moment, r/min.
fn rpm(words: &Words, moment: f64, from: f64, to: f64) -> f64 {
    let first = words.number(1);
    // `speed A until B`: in a straight line from the one, which is not told again, to the other.
    let rpm = words.read::<f64>("until").map_or(first, |last| {
        let every = words.read("every").unwrap_or(1.0);
        first + (last - first) * ((moment + every - from) / (to - from)).min(1.0)
    });
    let wander = words.numbers("wander").map_or(0.0, |[share, period]| {
        share * (std::f64::consts::TAU * moment / period).sin()
    });
    let noise: f64 = words.read("noise").unwrap_or(0.0);
    let drawn = 2.0 * uniform((moment * 1000.0) as u64) - 1.0;
    rpm * (1.0 + wander + noise * drawn)
}

fn deed(settings: &mut Settings, words: &Words, moment: f64, from: f64, to: f64) -> Deed {
    let (asset, source) = settings.target(words);
    let at = (!words.has("unstamped")).then_some(ZERO_NS + ns(moment));
    Deed::Step(match words.at(0) {
        "speed" => {
            let rpm = rpm(words, moment, from, to);
            Input::Speed(
                asset,
                Speed {
                    at,
                    rpm,
                    shaft: words.option("shaft").map(|shaft| Id::new(shaft).unwrap()),
                },
            )
        }
        "process" => Input::Process(
            asset,
            Process {
                at,
                name: id(words.at(1)),
                value: words.number(2),
                unit: None,
            },
        ),
        "link" => Input::Link(words.at(1) == "up"),
        "gap" => {
            let source = (!words.has("everywhere")).then_some(Source { asset, source });
            Input::Gap(source, GapCause::Shed, words.number(2) as u64)
        }
        "refuse" => {
            let reason = Reason::ALL
                .iter()
                .find(|reason| reason.code() == words.at(1));
            let refusal = Refusal {
                reason: *reason.unwrap_or_else(|| panic!("{words:?}: no such reason")),
                offset: 12,
                key: None,
            };
            Input::Refused(Source { asset, source }, refusal)
        }
        "clock_step" => Input::ClockStep(ns(words.number(1))),
        "command" => {
            let verb = Verb::from_text(words.at(1)).unwrap();
            let expires = words
                .read("expires")
                .map(|seconds: f64| ZERO_NS + ns(seconds));
            Input::Command(asset, id("control-room"), asked(verb, words.at(2), expires))
        }
        "plan" => {
            settings.set(&words.rest(1));
            Input::Plan(settings.plan())
        }
        "restart" => return Deed::Restart(settings.plan()),
        "wake" => return Deed::Wake(Input::Deadline(DeadlineReason::StatusDue)),
        "wait" => Input::Deadline(DeadlineReason::StatusDue),
        "end" => Input::Deadline(DeadlineReason::RecordingEnd),
        other => panic!("{other:?} is no command"),
    })
}

fn asked(verb: Verb, called: &str, expires: Option<i64>) -> Asked {
    Asked {
        id: id(called),
        verb,
        occurrence: None,
        watch: None,
        event: None,
        point: None,
        by: Some("shift lead".into()),
        expires,
        until: None,
        from_n: None,
        to_n: None,
        note: None,
    }
}

fn stream(settings: &Settings, command: &Command) -> Vec<(f64, Deed)> {
    let words = &command.words;
    let (asset, source) = settings.target(words);
    let number = |name: &str, otherwise: f64| words.read(name).unwrap_or(otherwise);
    // A real sensor is never without noise; a dead one is.
    let (velocity, noise) = if words.at(0) == "flat" {
        (0.0, 0.0)
    } else {
        (words.number(1), 0.02)
    };
    let vibration = Vibration {
        velocity,
        hz: number("hz", 80.0),
        noise: number("noise", noise),
        bursts: words.numbers("bursts").map(|[hz, peak]| (hz, peak)),
        clip: number("clip", f64::INFINITY),
        mean: number("mean", 0.0),
        later: words
            .numbers("later")
            .map(|[from, velocity]| (from, velocity)),
    };
    let second = words.read("second").map(|velocity| Vibration {
        velocity,
        ..vibration
    });
    let (rate, length) = (
        number("rate", settings.rate),
        number("block", settings.block),
    );
    let (lag, jitter) = (number("lag", settings.lag), number("jitter", 0.0));
    let to = command.to.unwrap_or(command.from + length);
    let count = ((to - command.from) / length).round() as usize;
    let first_seq = words.read::<u64>("seq");
    let unit = words
        .option("unit")
        .map_or(Unit::MetrePerSecondSquared, |unit| {
            Unit::from_text(unit).unwrap()
        });
    let made = (0..count).map(|k| {
        let start = command.from + k as f64 * length;
        let channels: Vec<Vibration> = [Some(vibration), second].into_iter().flatten().collect();
        let mut block = block(&channels, start, length, rate);
        block.at = (!words.has("unstamped")).then_some(ZERO_NS + ns(start + number("shift", 0.0)));
        block.seq = first_seq.map(|first| first + k as u64);
        block.unit = unit;
        let late = jitter * uniform(k as u64);
        let source = Source {
            asset: asset.clone(),
            source: source.clone(),
        };
        (
            words.read("at_once").unwrap_or(start + length + lag + late),
            Deed::Step(Input::Block(source, block)),
        )
    });
    made.collect()
}

/// One block of interleaved channels, m/s2, that begins `start` seconds into the script.
pub(crate) fn block(channels: &[Vibration], start: f64, length: f64, rate: f64) -> Block {
    let first = (start * rate).round();
    let count = (length * rate).round() as usize;
    let samples = (0..count).flat_map(|i| {
        let t = (first + i as f64) / rate;
        channels.iter().map(move |channel| channel.at(t))
    });
    Block {
        at: Some(ZERO_NS + ns(start)),
        rate_hz: rate,
        unit: Unit::MetrePerSecondSquared,
        channels: channels.len() as u16,
        samples: samples.collect(),
        ..Block::empty()
    }
}
