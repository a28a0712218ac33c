//! Anything may arrive: no payload panics, and whatever is refused is refused whole, at a byte it has.

use humward_wire::block::{
    self, Block, Encoding, Fixed, JsonMap, Key, Limits, Packing, RawLayout, SampleEncoding,
    TimeUnit, Unit,
};
use humward_wire::out::Evidence;
use humward_wire::recording;
use humward_wire::refusal::{Form, Refusal};
use humward_wire::{command, process, speed};
use proptest::prelude::*;

use crate::round_trip::blocks;

fn encodings() -> Vec<Encoding> {
    let pointers = [
        (Key::At, "/at"),
        (Key::Samples, "/samples"),
        (Key::Rate, "/rate"),
        (Key::Unit, "/unit"),
    ];
    let map = JsonMap::new(&pointers, Fixed::default(), TimeUnit::Seconds).unwrap();
    let mut all = vec![Encoding::Cbor, Encoding::Json, Encoding::JsonMapped(map)];
    all.extend(Packing::all().map(|packing| {
        let (rate_hz, unit) = (1000.0, Unit::G);
        Encoding::Raw(RawLayout {
            packing,
            header_bytes: 3,
            at: None,
            rate_hz,
            unit,
            scale: 1.0,
            channels: 2,
        })
    }));
    all
}

/// Reads a payload in every way there is and checks what may be said about it.
fn survives(payload: &[u8]) -> Result<(), TestCaseError> {
    let limits = Limits {
        max_samples: 500,
        ..Limits::default()
    };
    let mut block = Block::empty();
    for encoding in encodings() {
        match block::decode_into(&mut block, payload, &encoding, &limits) {
            Ok(()) => {
                prop_assert!(
                    !block.samples.is_empty() && block.samples.len() <= limits.max_samples
                );
                prop_assert_eq!(block.samples.len() % usize::from(block.channels), 0);
                prop_assert!(
                    block
                        .samples
                        .iter()
                        .all(|sample| (f64::from(*sample) * block.scale).is_finite())
                );
                prop_assert!(block.rate_hz >= 1.0 && block.scale != 0.0);
            }
            Err(refusal) => {
                prop_assert!(block.samples.is_empty());
                told(refusal, payload, Some(encoding.form()))?;
            }
        }
    }
    for read in [
        speed::decode(payload).map(drop),
        process::decode(payload).map(drop),
        command::decode(payload).map(drop),
        Encoding::detect(payload).map(drop),
    ] {
        if let Err(refusal) = read {
            told(refusal, payload, None)?;
        }
    }
    if let Err(refusal) = Evidence::decode(payload) {
        prop_assert!(refusal.offset <= payload.len());
    }
    if let Ok((_, records)) = recording::open(payload) {
        prop_assert!(records.count() <= payload.len());
    }
    Ok(())
}

fn told(refusal: Refusal, payload: &[u8], form: Option<Form>) -> Result<(), TestCaseError> {
    prop_assert!(
        refusal.offset <= payload.len(),
        "{} of {}",
        refusal,
        payload.len()
    );
    if let Some(form) = form {
        prop_assert!(
            refusal.reason.occurs_in().contains(&form),
            "{} in {:?}",
            refusal,
            form
        );
    }
    Ok(())
}

/// A block in any encoding, to be damaged.
fn payloads() -> impl Strategy<Value = Vec<u8>> {
    (blocks(), 0..SampleEncoding::ALL.len() + 1).prop_map(|(block, way)| match SampleEncoding::ALL
        .get(way)
    {
        Some(encoding) => block::encode_cbor(&block, *encoding),
        None => block::encode_json(&block),
    })
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 2000, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn any_bytes_are_read_or_refused_at_a_byte_they_have(payload in proptest::collection::vec(any::<u8>(), 0..300)) {
        survives(&payload)?;
    }

    #[test]
    fn any_bytes_that_start_like_a_message_are_read_or_refused_at_a_byte_they_have(
        start in proptest::sample::select(vec![&b"\xa5\x62at\x1b"[..], b"{\"at\":", b"{\"samples\":[", b"\xa1\x67samples"]),
        rest in proptest::collection::vec(any::<u8>(), 0..100),
    ) {
        survives(&[start, &rest[..]].concat())?;
    }

    #[test]
    fn damaged_blocks_are_read_or_refused_whole_at_a_byte_they_have(
        payload in payloads(),
        damage in proptest::collection::vec((any::<proptest::sample::Index>(), any::<u8>(), 0u8..3), 1..4),
    ) {
        let mut payload = payload;
        for (place, byte, how) in damage {
            let place = place.index(payload.len().max(1));
            match how {
                0 if place < payload.len() => payload[place] = byte,
                1 => payload.insert(place, byte),
                2 if place < payload.len() => { payload.remove(place); }
                _ => {}
            }
        }
        survives(&payload)?;
    }

    #[test]
    fn a_block_cut_anywhere_is_refused(payload in payloads(), place in any::<proptest::sample::Index>()) {
        let cut = &payload[..place.index(payload.len())];
        for encoding in [Encoding::Cbor, Encoding::Json] {
            prop_assert!(block::decode(cut, &encoding, &Limits::default()).is_err());
        }
        survives(cut)?;
    }
}
