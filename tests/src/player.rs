//! Plays a recording into a broker, as often as needed, at another time.
//!
//! Time stamps inside payloads and arrivals are shifted by one whole multiple of 60 s, so readings fall on the same
//! samples; each further loop by the length of its samples more, so the stream goes on without a seam: `seq`
//! counts up and `at` is contiguous.

use std::thread;
use std::time::{Duration, Instant, SystemTime, UNIX_EPOCH};

use humward_wire::block::{Block, Encoding, Limits, SampleEncoding, decode, encode_cbor};
use humward_wire::recording::{Header, Record, header, open, record};
use humward_wire::speed;

use crate::listener::Listener;

const MINUTE_NS: i64 = 60_000_000_000;

/// One message and when it is to arrive.
#[derive(Debug, Clone, PartialEq)]
pub struct Timed {
    /// When, ns since 1970.
    pub arrival: i64,
    /// Its topic.
    pub topic: String,
    /// Its bytes.
    pub payload: Vec<u8>,
}

/// A recording taken apart.
#[derive(Debug, Clone)]
pub struct Player {
    header: Header,
    messages: Vec<Timed>,
    length_ns: i64,
    blocks: u64,
}

fn as_block(payload: &[u8]) -> Option<Block> {
    decode(
        payload,
        &Encoding::detect(payload).ok()?,
        &Limits::default(),
    )
    .ok()
}

impl Player {
    /// Reads a recording of one stream of blocks and the speeds beside it.
    pub fn new(bytes: &[u8]) -> Self {
        let (header, reader) = open(bytes).expect("a recording");
        let mut messages = Vec::new();
        let (mut length_ns, mut blocks) = (0.0, 0);
        for item in reader {
            let Record::Message {
                arrival,
                topic,
                payload,
            } = item.expect("a whole recording").1
            else {
                continue;
            };
            if let Some(block) = as_block(payload) {
                length_ns += block.frames() as f64 / block.rate_hz * 1e9;
                blocks += 1;
            }
            messages.push(Timed {
                arrival,
                topic: topic.to_owned(),
                payload: payload.to_vec(),
            });
        }
        assert!(blocks > 0, "the recording holds blocks");
        Self {
            header,
            messages,
            length_ns: (length_ns).round() as i64,
            blocks,
        }
    }

    /// The shift, ns, that brings the start of the recording into the present minute.
    pub fn shift_to_now(&self) -> i64 {
        let now = SystemTime::now()
            .duration_since(UNIX_EPOCH)
            .expect("a clock after 1970")
            .as_nanos();
        let now = i64::try_from(now).expect("a clock before 2262");
        let first = self.messages.first().map_or(0, |message| message.arrival);
        (now - first).div_euclid(MINUTE_NS) * MINUTE_NS
    }

    /// The messages of the first `seconds`, looped, `shift_ns` later.
    pub fn messages(&self, shift_ns: i64, seconds: f64) -> Vec<Timed> {
        let first = self.messages.first().map_or(0, |message| message.arrival);
        let end = first + shift_ns + (seconds * 1e9) as i64;
        let mut all = Vec::new();
        for turn in 0.. {
            let by = shift_ns + turn * self.length_ns;
            for message in &self.messages {
                let arrival = message.arrival + by;
                if arrival > end {
                    return all;
                }
                let payload = shifted(&message.payload, by, turn as u64 * self.blocks);
                all.push(Timed {
                    arrival,
                    topic: message.topic.clone(),
                    payload,
                });
            }
        }
        all
    }

    /// The same messages as a recording.
    pub fn recording(&self, messages: &[Timed]) -> Vec<u8> {
        let mut bytes = header(&self.header);
        for Timed {
            arrival,
            topic,
            payload,
        } in messages
        {
            bytes.extend(record(&Record::Message {
                arrival: *arrival,
                topic,
                payload,
            }));
        }
        bytes
    }
}

fn shifted(payload: &[u8], by_ns: i64, seq: u64) -> Vec<u8> {
    if let Some(mut block) = as_block(payload) {
        block.at = block.at.map(|at| at + by_ns);
        block.seq = block.seq.map(|own| own + seq);
        return encode_cbor(&block, SampleEncoding::F32);
    }
    let speed = speed::decode(payload).expect("a block or a speed");
    match speed.at {
        Some(at) => format!("{{\"at\": {}, \"rpm\": {:?}}}", at + by_ns, speed.rpm).into_bytes(),
        None => payload.to_vec(),
    }
}

/// Publishes each message when its time has come, counted from now; one whose time has passed goes at once.
pub fn play(listener: &Listener, messages: &[Timed]) {
    let began = Instant::now();
    let first = messages.first().map_or(0, |message| message.arrival);
    for message in messages {
        let due = Duration::from_nanos(u64::try_from(message.arrival - first).unwrap_or(0));
        thread::sleep(due.saturating_sub(began.elapsed()));
        listener.publish(&message.topic, false, message.payload.clone());
    }
}

#[cfg(test)]
mod tests {
    use humward_wire::block::{Block, SampleEncoding, Unit, encode_cbor};
    use humward_wire::id::Id;
    use humward_wire::recording::{Header, Record, header, record};

    use super::{MINUTE_NS, Player, as_block};

    /// 2025-12-01T00:00:00Z in ns: a whole minute in years a sensor may name.
    const BEGAN: i64 = 29_409_120 * MINUTE_NS;

    #[test]
    fn a_looped_recording_goes_on_without_a_seam() {
        let site = Id::new("harbour").expect("a test id");
        let mut bytes = header(&Header {
            site,
            root: None,
            config_hash: None,
            epoch: None,
            truth: None,
        });
        for i in 0..3 {
            let at = i * 250_000_000;
            let samples = vec![0.5; 1024];
            let block = Block {
                at: Some(BEGAN + at),
                seq: Some(i as u64),
                rate_hz: 4096.0,
                unit: Unit::G,
                samples,
                ..Block::empty()
            };
            let payload = encode_cbor(&block, SampleEncoding::F32);
            bytes.extend(record(&Record::Message {
                arrival: BEGAN + at + 250_000_000,
                topic: "humward/v1/harbour/block/P-1/de",
                payload: &payload,
            }));
        }
        let messages = Player::new(&bytes).messages(5 * MINUTE_NS, 1.5);
        let blocks: Vec<Block> = messages
            .iter()
            .filter_map(|message| as_block(&message.payload))
            .collect();
        assert_eq!(blocks.len(), 7);
        for (i, block) in blocks.iter().enumerate() {
            assert_eq!(
                block.at,
                Some(BEGAN + 5 * MINUTE_NS + i as i64 * 250_000_000)
            );
            assert_eq!(block.seq, Some(i as u64));
            assert_eq!(
                messages[i].arrival,
                BEGAN + 5 * MINUTE_NS + (i as i64 + 1) * 250_000_000
            );
        }
    }
}
