//! Times held against the stamp, memory going round.

use humward_monitor::input::{Input, Source};
use humward_monitor::time::{Arrival, SECOND, Span};
use humward_wire::block::{Block, SampleEncoding, Unit, encode_cbor};
use humward_wire::id::Id;
use humward_wire::refusal::Reason;

use super::Decoder;
use crate::clock::Stamp;
use crate::route::About;

const NOW: i64 = 1_764_547_200 * SECOND;
const TOLERANCE: i64 = 600;

fn id(text: &str) -> Id {
    Id::new(text).expect("a test id")
}

fn about() -> About {
    About::Block(
        Source {
            asset: id("P-1"),
            source: id("de"),
        },
        None,
    )
}

fn payload(at: i64) -> Vec<u8> {
    let block = Block {
        at: Some(at),
        rate_hz: 12_000.0,
        unit: Unit::G,
        samples: vec![0.5, -0.5, 0.25, 0.0],
        ..Block::empty()
    };
    encode_cbor(&block, SampleEncoding::F32)
}

fn stamp(ahead_s: i64) -> Stamp {
    Stamp {
        arrival: Arrival::from_ns(NOW),
        ahead: Span::from_secs(ahead_s),
    }
}

fn reason(about: &About, stamp: Stamp, payload: &[u8]) -> Option<Reason> {
    Decoder::new(Span::from_secs(TOLERANCE))
        .decode(about, stamp, payload)
        .err()
        .map(|refusal| refusal.reason)
}

#[test]
fn a_block_further_from_its_arrival_than_the_tolerance_is_refused_on_either_side() {
    for (offset, refused) in [
        (TOLERANCE, false),
        (TOLERANCE + 1, true),
        (-TOLERANCE, false),
        (-TOLERANCE - 1, true),
    ] {
        let found = reason(&about(), stamp(0), &payload(NOW + offset * SECOND));
        assert_eq!(
            found,
            refused.then_some(Reason::FarFromArrival),
            "{offset} s"
        );
    }
}

#[test]
fn stamps_that_run_ahead_of_a_clock_set_back_do_not_refuse_blocks_of_the_present() {
    let hour_back = payload(NOW - 3600 * SECOND);
    assert_eq!(
        reason(&about(), stamp(0), &hour_back),
        Some(Reason::FarFromArrival)
    );
    assert_eq!(reason(&about(), stamp(3600), &hour_back), None);
}

#[test]
fn an_old_speed_is_only_stale_and_one_of_the_future_is_refused() {
    let speed = |at: i64| format!("{{\"at\": {at}, \"rpm\": 1482.0}}");
    let about = About::Speed(id("P-1"));
    assert_eq!(
        reason(&about, stamp(0), speed(NOW - 86_400 * SECOND).as_bytes()),
        None
    );
    assert_eq!(
        reason(
            &about,
            stamp(0),
            speed(NOW + (TOLERANCE + 1) * SECOND).as_bytes()
        ),
        Some(Reason::FarFromArrival)
    );
}

#[test]
fn sample_memory_goes_round() {
    let mut decoder = Decoder::new(Span::from_secs(TOLERANCE));
    let first = decoder
        .decode(&about(), stamp(0), &payload(NOW))
        .expect("a sound block");
    let Input::Block(_, block) = &first else {
        unreachable!("a block route gives a block")
    };
    let memory = block.samples.as_ptr();
    decoder.take_back(first);
    let second = decoder
        .decode(&about(), stamp(0), &payload(NOW))
        .expect("a sound block");
    let Input::Block(source, block) = &second else {
        unreachable!("a block route gives a block")
    };
    assert_eq!(
        (
            block.samples.as_ptr(),
            block.samples.len(),
            source.source.as_str()
        ),
        (memory, 4, "de")
    );
}

#[test]
fn a_time_too_far_away_is_told_at_the_byte_where_it_stands() {
    let mut decoder = Decoder::new(Span::from_secs(TOLERANCE));
    let late = (NOW + (TOLERANCE + 1) * SECOND).to_string();
    let json = format!("{{\"rate\": 2560, \"unit\": \"g\", \"at\": {late}, \"samples\": [1.0]}}");
    let refusal = decoder
        .decode(&about(), stamp(0), json.as_bytes())
        .expect_err("too far away");
    assert_eq!(Some(refusal.offset), json.find(&late));
    let cbor = payload(NOW + (TOLERANCE + 1) * SECOND);
    let refusal = decoder
        .decode(&about(), stamp(0), &cbor)
        .expect_err("too far away");
    // A map head, then the text `at` with its head: the value stands at byte 4.
    assert_eq!((refusal.offset, &cbor[2..4]), (4, &b"at"[..]));
}
