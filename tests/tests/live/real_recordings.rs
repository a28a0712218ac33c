//! Real vibration through a real broker into the daemon, and the same rehearsed: one right message each.
//!
//! One configuration and one limit for all three recordings. What they are and what an independent envelope
//! spectrum of them shows stands beside them: healthy has no bearing line, the other two one race each.

use std::collections::BTreeSet;
use std::thread;

use humward_tests::broker::Broker;
use humward_tests::daemon::{Daemon, rehearse};
use humward_tests::listener::Listener;
use humward_tests::player::{Player, play};
use humward_tests::{SOON, folder, recordings, wait};
use humward_wire::out::{Event, Message as _, Quality, Severity, Status, Transition};

/// What each recording must bring: the watch that rings, or none.
const RECORDINGS: [(&str, Option<&str>); 3] = [
    ("healthy.rec", None),
    ("inner-race.rec", Some("race-inner.drive-end")),
    ("outer-race.rec", Some("race-outer.drive-end")),
];
/// Seconds played: more than one loop of any.
const SECONDS: f64 = 12.0;

fn config(port: u16) -> String {
    format!(
        r#"site = "lab"
reading_every = "1s"
status_every = "1s"
default_watches = false

[broker]
port = {port}

[[watch]]
name = "race"
measure = "bearing.any"
alert = 20
alert_after = "3 readings"
clear_after = "3 readings"

[[asset]]
id = "test-rig"
name = "motor test rig"
speed = 1797
zones = "pump-2-small"

[[asset.point]]
id = "drive-end"
envelope_hz = [2000, 5500]
bearing = {{ outer = 3.5848, inner = 5.4152, element = 4.7135, cage = 0.39828 }}
"#
    )
}

/// One message that is right: the race, line strength in dB and m/s2, velocity in zone A, advisory.
fn assert_right(event: &Event, watch: &str) {
    let finding = &event.finding;
    assert_eq!(
        (event.n, event.transition, finding.standing.severity()),
        (1, Transition::Raised, Severity::Alert)
    );
    assert_eq!(finding.watch.as_deref(), Some(watch));
    assert_eq!(finding.readings, 3);
    let race = if watch.contains("inner") {
        "inner race"
    } else {
        "outer race"
    };
    assert!(
        finding.text.contains(race) && finding.text.contains("Advisory only"),
        "{}",
        finding.text
    );
    assert!(finding.text.chars().count() <= 300);
    let line = finding.lines.first().expect("the line it rests on");
    // The whole-record envelope spectrum shows 47 dB and more; with frames of 8192 samples about 30 dB are expected.
    assert!(
        line.strength_db
            .is_some_and(|db| (25.0..40.0).contains(&db)),
        "{line:?}"
    );
    assert!(
        line.strength.is_some_and(|strength| strength > 0.0) && line.unit == "m/s2 rms",
        "{line:?}"
    );
    let velocity = finding
        .also
        .iter()
        .find(|also| also.value.measure == "velocity_rms")
        .expect("velocity beside it");
    assert_eq!(velocity.zone.as_deref(), Some("A"));
    // Bounds of the recordings' own account: 0.16 to 0.23 mm/s rms for a fault, whole record.
    assert!(
        velocity
            .value
            .value
            .is_some_and(|value| (0.12..0.30).contains(&value)),
        "{velocity:?}"
    );
}

/// The event `shift_ns` earlier; its sentence, which names the time of day, is left out.
fn without_clock(json: &[u8], shift_ns: i64) -> Event {
    let mut event = Event::from_json(json).expect("an event of ours");
    event.header.at.0 -= shift_ns;
    let finding = &mut event.finding;
    let both = [&mut finding.since, &mut finding.running.since];
    for since in both.into_iter().flatten() {
        since.0 -= shift_ns;
    }
    event.finding.text.clear();
    event
}

fn live_and_rehearsed(recording: &std::path::Path, watch: Option<&str>) {
    let player = Player::new(&std::fs::read(recording).expect("a readable recording"));
    let broker = Broker::start();
    let listener = Listener::connect(broker.port(), "listener", "humward/#");
    let daemon = Daemon::start(&config(broker.port()));
    daemon.wait_for_log("subscribed to");
    let shift_ns = player.shift_to_now();
    let messages = player.messages(shift_ns, SECONDS);
    let shifted = folder("shifted").join("shifted.rec");
    std::fs::write(&shifted, player.recording(&messages)).expect("the folder takes a file");
    play(&listener, &messages);

    // Seven seconds, each with a reading closed less than two seconds before it, hold at least four readings.
    let judged_seconds = || -> BTreeSet<i64> {
        let statuses = listener.heard("status/test-rig");
        let fresh = |status: &Status| {
            status.points.iter().any(|point| {
                point.quality == Quality::Good && point.age_s.is_some_and(|age| age <= 1)
            })
        };
        let fresh = statuses
            .iter()
            .map(|heard| heard.read::<Status>())
            .filter(fresh);
        fresh
            .map(|status| status.header.at.0 / 1_000_000_000)
            .collect()
    };
    wait("seven seconds with a fresh good reading", SOON, || {
        (judged_seconds().len() >= 7).then_some(())
    });
    let status = listener
        .heard("status/test-rig")
        .pop()
        .expect("there were statuses");
    assert_eq!(
        status.read::<Status>().open_count,
        u32::from(watch.is_some())
    );

    let rehearsed = rehearse(&config(broker.port()), &[&shifted]);
    let told = String::from_utf8_lossy(&rehearsed.stderr).into_owned();
    assert!(rehearsed.status.success(), "{told}");
    let judged = told
        .split("test-rig/drive-end: ")
        .nth(1)
        .and_then(|rest| rest.split(' ').next()?.parse::<u32>().ok());
    assert!(judged.is_some_and(|judged| judged >= 4), "{told}");
    let text = String::from_utf8(rehearsed.stdout).expect("events are text");
    let rehearsed: Vec<&[u8]> = text.lines().map(str::as_bytes).collect();
    if watch.is_some() {
        listener.wait_for("the event", "event/test-rig", |_| true);
    }
    let live = listener.heard("event/test-rig");
    let live: Vec<&[u8]> = live.iter().map(|heard| heard.payload.as_slice()).collect();
    assert_eq!(
        live.iter()
            .map(|event| String::from_utf8_lossy(event))
            .collect::<Vec<_>>(),
        rehearsed
            .iter()
            .map(|event| String::from_utf8_lossy(event))
            .collect::<Vec<_>>(),
        "live and rehearsed"
    );
    let untouched = rehearse(&config(broker.port()), &[recording]);
    let untouched = String::from_utf8(untouched.stdout).expect("events are text");
    let untouched: Vec<Event> = untouched
        .lines()
        .map(|line| without_clock(line.as_bytes(), 0))
        .collect();
    let undone: Vec<Event> = live
        .iter()
        .map(|event| without_clock(event, shift_ns))
        .collect();
    assert_eq!(
        undone, untouched,
        "live with the shift undone, and the recording itself"
    );
    match watch {
        None => assert!(live.is_empty(), "healthy rings nothing"),
        Some(watch) => {
            assert_eq!(live.len(), 1, "one message");
            assert_right(&Event::from_json(live[0]).expect("an event of ours"), watch);
            listener.wait_for(
                "the retained alarm",
                &format!("alarm/test-rig/{watch}"),
                |heard| !heard.payload.is_empty(),
            );
            listener.wait_for("its evidence", "evidence/test-rig/0-1", |heard| {
                heard.payload.len() <= 60 * 1024
            });
        }
    }
    assert_eq!(daemon.stop().code(), Some(0));
}

#[test]
fn three_real_recordings_live_and_rehearsed_give_the_same_right_events_under_one_limit() {
    let Some(folder) = recordings::folder("three_real_recordings_live_and_rehearsed") else {
        return;
    };
    thread::scope(|scope| {
        for (name, watch) in RECORDINGS {
            let path = folder.join(name);
            scope.spawn(move || live_and_rehearsed(&path, watch));
        }
    });
}
