//! The corpus of refused payloads, with reasons and offsets found by another program (`corpus/write.py`).

use std::collections::{BTreeMap, BTreeSet};
use std::fs;
use std::path::PathBuf;

use humward_wire::block::{
    self, Block, ByteOrder, Encoding, Fixed, JsonMap, Key, Limits, Packing, RawLayout, RawTime,
    SampleType, TimeUnit, Unit,
};
use humward_wire::refusal::{Form, Reason, Refusal};
use humward_wire::{command, process, speed};

struct Case {
    file: String,
    form: Form,
    kind: String,
    name: String,
    reason: Reason,
    offset: usize,
    key: Option<String>,
    payload: Vec<u8>,
}

fn folder() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("tests/corpus")
}

fn form(word: &str) -> Form {
    match word {
        "cbor" => Form::Cbor,
        "json" => Form::Json,
        "mapped" => Form::Mapped,
        "raw" => Form::Raw,
        "undetected" => Form::Undetected,
        other => panic!("manifest.txt: {other:?} is no form"),
    }
}

fn payload(written: &str) -> Vec<u8> {
    match written.split_once(':') {
        Some(("text", text)) => text.as_bytes().to_vec(),
        Some(("hex", hex)) => {
            let digits: Vec<u8> = hex.chars().map(|c| c.to_digit(16).unwrap() as u8).collect();
            digits
                .chunks(2)
                .map(|pair| pair[0] << 4 | pair[1])
                .collect()
        }
        _ => panic!("{written:?} is neither text: nor hex:"),
    }
}

fn cases() -> Vec<Case> {
    let manifest = fs::read_to_string(folder().join("manifest.txt")).unwrap();
    let mut cases = Vec::new();
    for row in manifest.lines().filter(|line| !line.starts_with('#')) {
        let mut columns = row.split_whitespace();
        let (file, form, kind) = (
            columns.next().unwrap(),
            form(columns.next().unwrap()),
            columns.next().unwrap(),
        );
        let text = fs::read_to_string(folder().join(format!("{file}.txt"))).unwrap();
        for line in text.lines() {
            let parts: Vec<&str> = line.splitn(5, ' ').collect();
            let reason = Reason::ALL.iter().find(|reason| reason.code() == parts[1]);
            cases.push(Case {
                file: file.to_string(),
                form,
                kind: kind.to_string(),
                name: parts[0].to_string(),
                reason: *reason.unwrap_or_else(|| panic!("{file}: {} is no reason", parts[1])),
                offset: parts[2].parse().unwrap(),
                key: (parts[3] != "-").then(|| parts[3].to_string()),
                payload: payload(parts[4]),
            });
        }
    }
    cases
}

fn limits() -> Limits {
    Limits {
        max_samples: 64,
        max_channels: 4,
        ..Limits::default()
    }
}

fn encoding(file: &str) -> Option<Encoding> {
    let all = [
        (Key::At, "/h/t"),
        (Key::Seq, "/h/n"),
        (Key::Rate, "/h/fs"),
        (Key::Unit, "/h/u"),
        (Key::Scale, "/h/k"),
        (Key::Samples, "/h/v"),
        (Key::Encoding, "/h/e"),
        (Key::Channels, "/h/c"),
        (Key::Rpm, "/h/rev"),
        (Key::Bias, "/h/b"),
    ];
    let s16 = Packing {
        sample: SampleType::S16,
        order: ByteOrder::Little,
    };
    let fixed = Fixed {
        rate_hz: Some(6400.0),
        unit: Some(Unit::G),
        scale: Some(0.5),
        encoding: Some(s16),
        channels: None,
    };
    let raw = RawLayout {
        packing: s16,
        header_bytes: 4,
        at: None,
        rate_hz: 6400.0,
        unit: Unit::G,
        scale: 0.5,
        channels: 2,
    };
    let timed = RawLayout {
        packing: Packing {
            sample: SampleType::F64,
            order: ByteOrder::Big,
        },
        header_bytes: 10,
        at: Some(RawTime {
            offset: 2,
            unit: TimeUnit::Microseconds,
        }),
        scale: 1.0,
        ..raw.clone()
    };
    match file {
        "block-cbor" => Some(Encoding::Cbor),
        "block-json" => Some(Encoding::Json),
        "block-mapped" => Some(Encoding::JsonMapped(
            JsonMap::new(&all, Fixed::default(), TimeUnit::Nanoseconds).unwrap(),
        )),
        "block-mapped-fixed" => {
            let pointers = [(Key::At, "/t"), (Key::Samples, "/d/0")];
            Some(Encoding::JsonMapped(
                JsonMap::new(&pointers, fixed, TimeUnit::Milliseconds).unwrap(),
            ))
        }
        "block-raw" => Some(Encoding::Raw(raw)),
        "block-raw-time" => Some(Encoding::Raw(timed)),
        _ => None,
    }
}

fn read(case: &Case, block: &mut Block) -> Result<(), Refusal> {
    match case.kind.as_str() {
        "block" => {
            let encoding = match encoding(&case.file) {
                Some(encoding) => encoding,
                None => Encoding::detect(&case.payload)?,
            };
            assert_eq!(encoding.form(), case.form, "{}", case.file);
            block::decode_into(block, &case.payload, &encoding, &limits())
        }
        "speed" => speed::decode(&case.payload).map(drop),
        "process" => process::decode(&case.payload).map(drop),
        "command" => command::decode(&case.payload).map(drop),
        other => panic!("{other:?} is no kind"),
    }
}

#[test]
fn every_refused_payload_is_refused_for_its_reason_at_its_byte() {
    // One block serves all, so that nothing of a refused payload reaches the next.
    let mut block = Block::empty();
    let mut wrong = Vec::new();
    for case in cases() {
        let expected = (case.reason.code(), case.offset, case.key.as_deref());
        let got = read(&case, &mut block)
            .map_err(|refusal| (refusal.reason.code(), refusal.offset, refusal.key));
        if got != Err(expected) {
            wrong.push(format!(
                "{} {}: {got:?} for {expected:?}",
                case.file, case.name
            ));
        }
        if case.kind == "block" && !block.samples.is_empty() {
            wrong.push(format!("{} {}: left half a block", case.file, case.name));
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

#[test]
fn every_reason_is_met_twice_in_each_encoding_it_can_occur_in_and_in_no_other() {
    let mut met: BTreeMap<(Reason, Form), usize> = BTreeMap::new();
    for case in cases() {
        *met.entry((case.reason, case.form)).or_default() += 1;
    }
    let possible: BTreeSet<(Reason, Form)> = Reason::ALL
        .iter()
        .flat_map(|reason| reason.occurs_in().iter().map(|form| (*reason, *form)))
        .collect();
    let unmet: Vec<_> = possible
        .iter()
        .filter(|pair| met.get(pair).copied().unwrap_or(0) < 2)
        .collect();
    assert!(unmet.is_empty(), "met less than twice: {unmet:?}");
    let unforeseen: Vec<_> = met.keys().filter(|pair| !possible.contains(pair)).collect();
    assert!(
        unforeseen.is_empty(),
        "not in the table beside Reason: {unforeseen:?}"
    );
}

#[test]
fn no_case_of_the_corpus_is_left_out_of_the_manifest() {
    let listed: BTreeSet<String> = cases().into_iter().map(|case| case.file).collect();
    let there: BTreeSet<String> = fs::read_dir(folder())
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .filter(|path| {
            path.extension().is_some_and(|e| e == "txt") && path.file_stem().unwrap() != "manifest"
        })
        .map(|path| path.file_stem().unwrap().to_string_lossy().into_owned())
        .collect();
    assert_eq!(listed, there);
}
