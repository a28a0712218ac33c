//! Recordings read back as written, and a damaged one gives up no whole record.

use humward_wire::recording::{self, Header, Record, RecordingFault};

use crate::samples::id;

fn header() -> Header {
    Header {
        site: id("north"),
        root: None,
        config_hash: Some("5f0c".into()),
        epoch: Some(0),
        truth: None,
    }
}

fn records() -> Vec<Record<'static>> {
    vec![
        Record::Plan {
            arrival: 90,
            config_hash: "5f0c",
        },
        Record::Started { arrival: 100 },
        Record::Link {
            arrival: 100,
            up: true,
        },
        Record::Message {
            arrival: 120,
            topic: "humward/v1/north/speed/P-103A",
            payload: b"1482.3",
        },
        Record::Gap {
            arrival: 130,
            topic: "humward/v1/north/block/P-103A/de",
            reason: "shed",
            blocks: Some(3),
        },
        Record::ClockStep {
            arrival: 140,
            by: -2_000_000_000,
        },
        Record::Message {
            arrival: 150,
            topic: "plant/7",
            payload: &[0; 300],
        },
    ]
}

/// A recording and the byte each record starts at.
pub(crate) fn written() -> (Vec<u8>, Vec<usize>) {
    let mut bytes = recording::header(&header());
    let mut starts = Vec::new();
    for record in records() {
        starts.push(bytes.len());
        bytes.extend(recording::record(&record));
    }
    (bytes, starts)
}

#[test]
fn a_recording_reads_back_as_written_with_the_byte_of_each_record() {
    let (bytes, starts) = written();
    let (read, reader) = recording::open(&bytes).unwrap();
    assert_eq!(read, header());
    let read: Vec<_> = reader.map(Result::unwrap).collect();
    assert_eq!(read, starts.into_iter().zip(records()).collect::<Vec<_>>());
}

#[test]
fn a_recording_cut_at_any_byte_keeps_every_whole_record_and_tells_the_cut_one() {
    let (bytes, starts) = written();
    for length in starts[0]..bytes.len() {
        let whole = starts
            .iter()
            .skip(1)
            .filter(|start| **start <= length)
            .count();
        let (_, reader) = recording::open(&bytes[..length]).unwrap();
        let read: Vec<_> = reader.collect();
        let records: Vec<_> = read
            .iter()
            .filter_map(|r| r.as_ref().ok())
            .map(|(_, record)| record.clone())
            .collect();
        assert_eq!(records, self::records()[..whole], "cut at {length}");
        let told: Vec<_> = read.into_iter().filter_map(Result::err).collect();
        let cut = starts.iter().all(|start| *start != length);
        let expected = if cut {
            vec![RecordingFault::Truncated {
                offset: starts[whole],
            }]
        } else {
            vec![]
        };
        assert_eq!(told, expected, "cut at {length}");
    }
    for length in 0..starts[0] {
        assert!(
            matches!(
                recording::open(&bytes[..length]),
                Err(RecordingFault::NotOurs { .. })
            ),
            "cut at {length}"
        );
    }
}

#[test]
fn a_file_that_is_no_recording_is_refused_at_its_byte() {
    let offset = |bytes: &[u8]| recording::open(bytes).map(|(header, _)| header);
    assert_eq!(
        offset(b"RIFF....WAVE"),
        Err(RecordingFault::NotOurs { offset: 0 })
    );
    assert_eq!(
        offset(b"\xa1\x66format\x63wav"),
        Err(RecordingFault::NotOurs { offset: 8 })
    );
    let mut newer = recording::header(&header());
    let place = newer.windows(7).position(|w| w == b"version").unwrap() + 7;
    newer[place] = 2;
    assert_eq!(
        offset(&newer),
        Err(RecordingFault::Version {
            version: 2,
            offset: place
        })
    );
}

#[test]
fn a_foreign_or_disordered_record_is_told_with_its_byte_and_ends_the_reading() {
    let start = recording::header(&header());
    for (items, fault) in [
        (
            &b"\xa1\x65other\x01"[..],
            RecordingFault::Record {
                offset: start.len(),
            },
        ),
        (
            &b"\x82\x01\x61t"[..],
            RecordingFault::Record {
                offset: start.len(),
            },
        ),
        (
            &b"\x83\x01\x61t\x61p"[..],
            RecordingFault::Record {
                offset: start.len(),
            },
        ),
        (
            &b"\x18\x20"[..],
            RecordingFault::Record {
                offset: start.len(),
            },
        ),
    ] {
        let bytes = [&start[..], items].concat();
        let read: Vec<_> = recording::open(&bytes).unwrap().1.collect();
        assert_eq!(read, [Err(fault)]);
    }
    let later = recording::record(&Record::Started { arrival: 10 });
    let earlier = recording::record(&Record::Started { arrival: 7 });
    let bytes = [&start[..], &later, &earlier, &later].concat();
    let read: Vec<_> = recording::open(&bytes).unwrap().1.collect();
    assert_eq!(read.len(), 2);
    assert_eq!(
        read[1],
        Err(RecordingFault::Order {
            offset: start.len() + later.len(),
            back: 3
        })
    );
}
