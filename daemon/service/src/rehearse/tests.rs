//! What a rehearsal answers to recordings that are not what they should be.

use std::path::PathBuf;

use humward_monitor::time::SECOND;
use humward_wire::block::{Block, SampleEncoding, Unit, encode_cbor};
use humward_wire::id::Id;
use humward_wire::recording::{Header, Record, header, record};

use super::{Options, RehearseError, run_with};
use crate::config::{Loaded, load};

const START: i64 = 1_764_547_200 * SECOND;

fn folder(test: &str) -> PathBuf {
    let folder =
        std::env::temp_dir().join(format!("humward-rehearse-{}-{test}", std::process::id()));
    std::fs::create_dir_all(&folder).expect("the temporary folder takes a folder");
    folder
}

fn config(test: &str) -> Loaded {
    let path = folder(test).join("site.toml");
    let text =
        "site = \"harbour\"\n[[asset]]\nid = \"P-1\"\nspeed = 1482\n[[asset.point]]\nid = \"de\"\n";
    std::fs::write(&path, text).expect("the temporary folder takes a file");
    load(&path, &[]).expect("six sound lines")
}

fn header_of(site: &str) -> Vec<u8> {
    let site = Id::new(site).expect("a test id");
    header(&Header {
        site,
        root: None,
        config_hash: None,
        epoch: None,
        truth: None,
    })
}

fn block(at: i64) -> Vec<u8> {
    let samples = (0..4096).map(|i| (i as f32 * 0.1).sin()).collect();
    encode_cbor(
        &Block {
            at: Some(at),
            rate_hz: 4096.0,
            unit: Unit::MetrePerSecondSquared,
            samples,
            ..Block::empty()
        },
        SampleEncoding::F32,
    )
}

fn message(second: i64, topic: &str, payload: &[u8]) -> Vec<u8> {
    record(&Record::Message {
        arrival: START + second * SECOND,
        topic,
        payload,
    })
}

fn rehearse(test: &str, bytes: &[u8], status: bool) -> (Result<(), RehearseError>, String, String) {
    let path = folder(test).join("recording.rec");
    std::fs::write(&path, bytes).expect("the temporary folder takes a file");
    let (mut out, mut told) = (Vec::new(), Vec::new());
    let done = run_with(
        &config(test),
        &[path],
        Options { status },
        &mut out,
        &mut told,
    );
    let text = |bytes| String::from_utf8(bytes).expect("rehearsals write text");
    (done, text(out), text(told))
}

const TOPIC: &str = "humward/v1/harbour/block/P-1/de";

#[test]
fn a_recording_of_another_site_with_no_topic_of_ours_is_an_error_naming_both_sites() {
    let mut bytes = header_of("lab");
    bytes.extend(message(0, "humward/v1/lab/block/P-1/de", &block(START)));
    let (done, _, _) = rehearse("other-site", &bytes, false);
    let text = done
        .expect_err("nothing of the recording is ours")
        .to_string();
    assert!(
        text.contains("lab") && text.contains("harbour") && text.contains("block/P-1/de"),
        "{text}"
    );
}

#[test]
fn a_recording_cut_in_its_last_record_is_rehearsed_up_to_there_and_told_with_its_byte() {
    let mut bytes = header_of("harbour");
    bytes.extend(message(1, TOPIC, &block(START)));
    let whole = bytes.len();
    bytes.extend(message(2, TOPIC, &block(START + SECOND)));
    bytes.truncate(bytes.len() - 1);
    let (done, _, told) = rehearse("cut", &bytes, false);
    let fault = done.expect_err("the recording is cut").to_string();
    assert!(fault.contains(&format!("byte {whole}:")), "{fault}");
    assert!(told.contains("1 messages"), "{told}");
}

#[test]
fn refused_payloads_and_unknown_topics_are_counted_and_the_first_of_each_is_named() {
    let mut bytes = header_of("harbour");
    bytes.extend(message(0, TOPIC, b"not a block"));
    bytes.extend(message(1, TOPIC, b"no block either"));
    bytes.extend(message(2, TOPIC, &block(START - 3600 * SECOND)));
    bytes.extend(message(
        3,
        "humward/v1/harbour/block/P-1/nde",
        &block(START),
    ));
    let (done, _, told) = rehearse("refused", &bytes, false);
    assert!(done.is_ok(), "{done:?}");
    for line in [
        "refused 2 x unknown_encoding",
        "refused 1 x far_from_arrival",
        "1 messages on topics not in the configuration, first humward/v1/harbour/block/P-1/nde",
    ] {
        assert!(told.contains(line), "{line:?} is not in:\n{told}");
    }
}

#[test]
fn the_last_reading_is_ended_and_no_sensor_alarm_rings_because_the_recording_stops() {
    let mut bytes = header_of("harbour");
    for second in 0..30 {
        bytes.extend(message(second + 1, TOPIC, &block(START + second * SECOND)));
    }
    let (done, out, told) = rehearse("end", &bytes, true);
    assert!(done.is_ok(), "{done:?}");
    assert!(told.contains("no event"), "{told}");
    assert!(
        told.contains("P-1/de: 2 readings judged, 0 doubtful, 1 not running"),
        "{told}"
    );
    assert!(
        out.lines().count() > 0 && out.lines().all(|line| line.contains("humward/status/1")),
        "{out}"
    );
}

#[test]
fn each_recording_meets_fresh_groups_so_twice_the_same_gives_twice_the_same() {
    let mut bytes = header_of("harbour");
    bytes.extend(message(1, TOPIC, &block(START)));
    let path = folder("twice").join("recording.rec");
    std::fs::write(&path, &bytes).expect("the temporary folder takes a file");
    let mut out = Vec::new();
    let both = [path.clone(), path];
    run_with(
        &config("twice"),
        &both,
        Options { status: true },
        &mut out,
        &mut Vec::new(),
    )
    .expect("a sound recording");
    let text = String::from_utf8(out).expect("rehearsals write text");
    let lines: Vec<&str> = text.lines().collect();
    assert!(!lines.is_empty());
    assert_eq!(lines[..lines.len() / 2], lines[lines.len() / 2..]);
}
