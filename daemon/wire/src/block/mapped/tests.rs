use super::{Fixed, JsonMap, Key, MapFault, TimeUnit, tokens};
use crate::block::{Encoding, Limits, Unit, decode};
use crate::refusal::{Reason, Refusal};

fn map() -> JsonMap {
    let pointers = [
        (Key::At, "/meta/t"),
        (Key::Samples, "/data/0/v"),
        (Key::Scale, "/meta/k~1c"),
        (Key::Seq, "/n"),
    ];
    let fixed = Fixed {
        rate_hz: Some(6400.0),
        unit: Some(Unit::G),
        ..Fixed::default()
    };
    JsonMap::new(&pointers, fixed, TimeUnit::Milliseconds).unwrap()
}

#[test]
fn escapes_in_pointers_follow_rfc_6901() {
    // RFC 6901 section 5: "/a~1b" names "a/b", "/m~0n" names "m~n", "/" names "".
    for (pointer, token) in [
        ("/a~1b", "a/b"),
        ("/m~0n", "m~n"),
        ("/", ""),
        ("/~01", "~1"),
        ("/c%d", "c%d"),
    ] {
        assert_eq!(tokens(pointer), Some([token.into()].into()), "{pointer}");
    }
    for pointer in ["", "a", "/~", "/~2", "/a~"] {
        assert_eq!(tokens(pointer), None, "{pointer}");
    }
}

#[test]
fn a_foreign_payload_is_read_through_its_pointers_and_fixed_values() {
    let payload = br#"{"n": 7, "other": [1, {"v": 2}], "data": [{"v": [1, -2.5, 3e2]}, {"v": null}], "meta": {"t": 1790000000250, "k/c": 0.5}}"#;
    let block = decode(payload, &Encoding::JsonMapped(map()), &Limits::default()).unwrap();
    assert_eq!(block.at, Some(1_790_000_000_250_000_000));
    assert_eq!(
        (
            block.seq,
            block.rate_hz,
            block.unit,
            block.scale,
            block.channels
        ),
        (Some(7), 6400.0, Unit::G, 0.5, 1)
    );
    assert_eq!(block.samples, [1.0, -2.5, 300.0]);
}

#[test]
fn a_pointer_that_leads_nowhere_is_a_missing_key() {
    let payload = br#"{"data": [], "meta": {"t": 1790000000250}}"#;
    assert_eq!(
        decode(payload, &Encoding::JsonMapped(map()), &Limits::default()),
        Err(Refusal {
            reason: Reason::MissingKey,
            offset: 0,
            key: Some("samples")
        })
    );
}

#[test]
fn a_mapping_that_could_never_give_a_block_is_refused_when_made() {
    let none = Fixed::default();
    let unit = TimeUnit::Nanoseconds;
    assert_eq!(
        JsonMap::new(&[], none.clone(), unit),
        Err(MapFault::Missing { key: Key::Samples })
    );
    assert_eq!(
        JsonMap::new(&[(Key::Samples, "/v")], none.clone(), unit),
        Err(MapFault::Missing { key: Key::Rate })
    );
    assert_eq!(
        JsonMap::new(&[(Key::Seq, "/a"), (Key::Seq, "/b")], none.clone(), unit),
        Err(MapFault::Twice { key: Key::Seq })
    );
    let fixed = Fixed {
        scale: Some(1.0),
        ..Fixed::default()
    };
    assert_eq!(
        JsonMap::new(&[(Key::Scale, "/a")], fixed, unit),
        Err(MapFault::Twice { key: Key::Scale })
    );
    assert_eq!(
        JsonMap::new(
            &[(Key::At, "/a/a/a/a/a/a/a/a/a/a/a/a/a/a/a/a/a")],
            none,
            unit
        ),
        Err(MapFault::Deep {
            key: Key::At,
            levels: 17
        })
    );
}
