//! Random stories of a machine and its sensor, as inputs in the order they arrive.

use humward_monitor::{
    input::{GapCause, Input, Source},
    time::Arrival,
};
use humward_wire::{
    refusal::{Reason, Refusal},
    speed::Speed,
};
use proptest::prelude::*;

use crate::{
    inputs::{ZERO_NS, block, ns},
    language::Words,
    settings::{Settings, id},
    signals::{Vibration, uniform},
};

/// Sample rate of all stories, samples/s: the lowest that serves.
const RATE_HZ: f64 = 2560.0;

/// One stretch of a story.
#[derive(Debug, Clone, Copy)]
pub(crate) enum Episode {
    /// It vibrates, mm/s rms, for so many seconds.
    Vibrates(f64, u8),
    /// As before, but beyond the sensor's range.
    Clips(f64, u8),
    /// The sensor gives one value.
    Flat(u8),
    /// Nothing comes.
    Silent(u8),
    /// What comes is refused.
    Refused(u8),
    /// The speed is reported, r/min.
    Speed(u16),
    /// The speed goes from one to another, r/min, in so many seconds, reported each second; it vibrates, mm/s rms.
    Ramp(u16, u16, u8, f64),
    /// We let blocks go.
    Gap,
    /// The link is lost for so many seconds.
    LinkLost(u8),
    /// Our clock is set, s.
    ClockStep(i16),
}

/// A story of up to `most` episodes.
pub(crate) fn story(most: usize) -> impl Strategy<Value = Vec<Episode>> {
    let episode = prop_oneof![
        6 => (prop_oneof![0.1..3.0, 4.0..6.0, 7.5..12.0], 5u8..45).prop_map(|(v, s)| Episode::Vibrates(v, s)),
        1 => (9.0..14.0, 5u8..45).prop_map(|(v, s)| Episode::Clips(v, s)),
        1 => (5u8..90).prop_map(Episode::Flat),
        1 => (5u8..90).prop_map(Episode::Silent),
        1 => (5u8..90).prop_map(Episode::Refused),
        2 => prop_oneof![Just(0u16), Just(1482), Just(1900)].prop_map(Episode::Speed),
        2 => (
            prop_oneof![Just((0u16, 1482)), Just((1482, 0)), Just((1000, 1482)), Just((1482, 1000))],
            10u8..40,
            prop_oneof![0.1..3.0, 7.5..12.0, 22.0..30.0],
        )
            .prop_map(|((from, to), s, v)| Episode::Ramp(from, to, s, v)),
        1 => Just(Episode::Gap),
        1 => (5u8..90).prop_map(Episode::LinkLost),
        1 => (-200i16..200).prop_map(Episode::ClockStep),
    ];
    prop::collection::vec(episode, 1..most)
}

/// A story in which nothing but the vibration changes.
pub(crate) fn quiet_story() -> impl Strategy<Value = Vec<Episode>> {
    let velocity = prop_oneof![0.1..3.0, 4.0..6.0, 7.5..12.0];
    let episode = (velocity, 5u8..45).prop_map(|(v, s)| Episode::Vibrates(v, s));
    prop::collection::vec(episode, 1..8)
}

/// The plan all stories run on.
pub(crate) fn settings() -> Settings {
    let lines = [
        "sensor_after 40",
        "status 60",
        "zones 2.8 4.5 7.1",
        "point drive-end \"pump drive end\" range 6",
        "watch velocity alert 4.5 danger 7.1 deadband 0.3 alert_after \"3 readings\" danger_after 20s",
        "watch peak of velocity_peak alert 9 alert_after \"2 of 4\" clear_after 30s",
        "watch acceleration of acceleration_rms danger 4",
    ];
    Settings::of(&lines.map(Words::of))
}

/// The inputs of a story; each block arrives when it is taken, up to `jitter` seconds later, in order.
pub(crate) fn inputs(story: &[Episode], jitter: f64) -> Vec<(Arrival, Input)> {
    let asset = id("P-103A");
    let source = || Source {
        asset: asset.clone(),
        source: id("drive-end"),
    };
    let speed = |t: f64, rpm: u16| {
        Input::Speed(
            asset.clone(),
            Speed {
                at: Some(ZERO_NS + ns(t)),
                rpm: f64::from(rpm),
                shaft: None,
            },
        )
    };
    let mut told = vec![(Arrival::from_ns(ZERO_NS), speed(0.0, 1482))];
    let (mut now, mut offset, mut ahead, mut last) = (0.0, 0, 0, ZERO_NS);
    for (place, episode) in story.iter().enumerate() {
        let blocks = |vibration: Vibration, seconds: u8| {
            (0..seconds)
                .map(move |k| (f64::from(k), Some(vibration)))
                .collect::<Vec<_>>()
        };
        let refusal = Refusal {
            reason: Reason::Truncated,
            offset: 3,
            key: None,
        };
        let single = |input: Input| (Vec::new(), vec![(0.0, input)], 0.0);
        let (streams, singles, seconds) = match *episode {
            Episode::Vibrates(velocity, s) => {
                let vibration = Vibration {
                    noise: 0.02,
                    ..Vibration::sine(velocity.min(7.9))
                };
                (blocks(vibration, s), Vec::new(), f64::from(s))
            }
            Episode::Clips(velocity, s) => {
                let vibration = Vibration {
                    clip: 6.0,
                    ..Vibration::sine(velocity)
                };
                (blocks(vibration, s), Vec::new(), f64::from(s))
            }
            Episode::Flat(s) => (blocks(Vibration::STILL, s), Vec::new(), f64::from(s)),
            Episode::Silent(s) => (Vec::new(), Vec::new(), f64::from(s)),
            Episode::Refused(s) => {
                let refused = |k: u8| (f64::from(k), Input::Refused(source(), refusal));
                (Vec::new(), (0..s).map(refused).collect(), f64::from(s))
            }
            Episode::Speed(rpm) => single(speed(now, rpm)),
            Episode::Ramp(from, to, s, velocity) => {
                let vibration = Vibration {
                    noise: 0.02,
                    ..Vibration::sine(velocity)
                };
                let (from, to) = (f64::from(from), f64::from(to));
                let reports = (0..s).map(|k| {
                    let share = f64::from(k + 1) / f64::from(s);
                    let rpm = (from + (to - from) * share) as u16;
                    (f64::from(k), speed(now + f64::from(k), rpm))
                });
                (blocks(vibration, s), reports.collect(), f64::from(s))
            }
            Episode::Gap => single(Input::Gap(Some(source()), GapCause::Shed, 2)),
            Episode::LinkLost(s) => {
                let s = f64::from(s);
                let link = vec![(0.0, Input::Link(false)), (s, Input::Link(true))];
                (Vec::new(), link, s)
            }
            Episode::ClockStep(by) => single(Input::ClockStep(ns(f64::from(by)))),
        };
        let streams = streams.into_iter().filter_map(|(k, vibration)| {
            let block = block(&[vibration?], now + k, 1.0, RATE_HZ);
            Some((k + 1.0, Input::Block(source(), block)))
        });
        let mut all: Vec<(f64, Input)> = streams.chain(singles).collect();
        all.sort_by(|(a, _), (b, _)| a.total_cmp(b));
        for (k, (after, input)) in all.into_iter().enumerate() {
            let late = jitter * uniform((place * 1000 + k) as u64);
            last = last.max(ZERO_NS + ns(now + after + late) + offset);
            if let Input::ClockStep(by) = &input {
                offset += (by - ahead).max(0);
                ahead = (ahead - by).max(0);
            }
            told.push((Arrival::from_ns(last), input));
        }
        now += seconds;
    }
    told
}
