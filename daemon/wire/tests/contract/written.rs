//! What is written is, byte for byte, what another program writes for the same values (`written/write.py`).

use humward_wire::block::{self, Block, SampleEncoding, Unit};
use humward_wire::out::Evidence;

use crate::recordings;
use crate::samples::{evidence, trace};

/// The message of that name as hex, written by cbor2.
fn expected(name: &str) -> &'static str {
    include_str!("../written/messages.txt")
        .lines()
        .filter_map(|line| line.split_once(' '))
        .find(|(written, _)| *written == name)
        .unwrap()
        .1
}

fn hex(bytes: &[u8]) -> String {
    bytes.iter().map(|byte| format!("{byte:02x}")).collect()
}

#[test]
fn a_block_is_written_as_cbor2_writes_it_in_every_encoding() {
    let bare = Block {
        at: Some(1_796_094_480_250_000_000),
        rate_hz: 25_600.0,
        unit: Unit::MetrePerSecondSquared,
        scale: -0.25,
        channels: 3,
        samples: vec![1.0, -2.0, 300.0],
        ..Block::empty()
    };
    let full = Block {
        seq: Some(23),
        rpm: Some(1482.3),
        bias: Some(-9.5),
        ..bare.clone()
    };
    let last = Block {
        seq: Some(u64::MAX),
        ..bare.clone()
    };
    let large = Block {
        samples: vec![100_000.0, f32::MAX],
        ..bare.clone()
    };
    for (name, block, encoding) in [
        ("s16", &full, SampleEncoding::S16),
        ("s32", &last, SampleEncoding::S32),
        ("f32", &bare, SampleEncoding::F32),
        ("f64", &bare, SampleEncoding::F64),
        ("plain", &large, SampleEncoding::Plain),
    ] {
        let written = block::encode_cbor(block, encoding);
        assert_eq!(hex(&written), expected(name), "{name}");
    }
}

#[test]
fn evidence_is_written_as_cbor2_writes_it() {
    let mut waveform = trace(0, 0.5, "s");
    waveform.thinned = 70_000;
    waveform.values = vec![0.0, 1.0, -2.5];
    let evidence = Evidence {
        watch: None,
        spectrum: None,
        envelope: None,
        waveform: Some(waveform),
        truncated: true,
        ..evidence()
    };
    assert_eq!(hex(&evidence.encode()), expected("evidence"));
}

#[test]
fn a_recording_is_written_as_cbor2_writes_it() {
    assert_eq!(hex(&recordings::written().0), expected("recording"));
}
