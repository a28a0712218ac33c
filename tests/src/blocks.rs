//! Made-up signals: a steady sine, as blocks on the usual topic of one point.

use std::sync::Arc;
use std::sync::atomic::{AtomicBool, AtomicU64, Ordering};
use std::thread::{self, JoinHandle};
use std::time::{Duration, SystemTime, UNIX_EPOCH};

use humward_wire::block::{Block, SampleEncoding, Unit, encode_cbor};
use rumqttc::QoS;

use crate::listener::Listener;

/// Sample rate, Hz.
pub const RATE_HZ: f64 = 8192.0;
/// Samples of a block: a quarter of a second.
pub const SAMPLES: usize = 2048;
/// Length of a block, ns.
pub const BLOCK_NS: i64 = 250_000_000;

/// Now, ns since 1970.
pub fn now_ns() -> i64 {
    let now = SystemTime::now()
        .duration_since(UNIX_EPOCH)
        .expect("a clock after 1970")
        .as_nanos();
    i64::try_from(now).expect("a clock before 2262")
}

/// The wall clock's last quarter second, where a stream of blocks may begin.
pub fn quarter_ns() -> i64 {
    now_ns().div_euclid(BLOCK_NS) * BLOCK_NS
}

/// A 64 Hz sine of `mm_s` rms velocity as a block that begins at `at`, a multiple of a quarter second.
///
/// Acceleration amplitude of a sine: v x sqrt(2) x 2 pi f. 64 Hz has whole periods in a quarter second.
pub fn sine(at: i64, mm_s: f64) -> Vec<u8> {
    let omega = 2.0 * std::f64::consts::PI * 64.0;
    let amplitude = mm_s / 1000.0 * std::f64::consts::SQRT_2 * omega;
    let samples = (0..SAMPLES)
        .map(|i| (amplitude * (omega * i as f64 / RATE_HZ).sin()) as f32)
        .collect();
    let seq = u64::try_from(at / BLOCK_NS).unwrap_or(0);
    let block = Block {
        at: Some(at),
        seq: Some(seq),
        rate_hz: RATE_HZ,
        unit: Unit::MetrePerSecondSquared,
        samples,
        ..Block::empty()
    };
    encode_cbor(&block, SampleEncoding::F32)
}

/// A stream of blocks of one sine, one every quarter second, until dropped, also by a test that fails.
#[derive(Debug)]
pub struct Stream {
    stop: Arc<AtomicBool>,
    mm_s: Arc<AtomicU64>,
    thread: Option<JoinHandle<()>>,
}

impl Stream {
    /// Begins now, on `topic`.
    pub fn start(listener: &Listener, topic: &str, mm_s: f64) -> Self {
        let stop = Arc::new(AtomicBool::new(false));
        let (publisher, topic) = (listener.publisher(), topic.to_owned());
        let level = Arc::new(AtomicU64::new(mm_s.to_bits()));
        let (stopped, mm_s) = (Arc::clone(&stop), Arc::clone(&level));
        let thread = thread::spawn(move || {
            let mut at = quarter_ns() - BLOCK_NS;
            while !stopped.load(Ordering::Relaxed) {
                // A full queue is a broker that is away: the block is lost, as a sensor would lose it.
                drop(publisher.try_publish(
                    &topic,
                    QoS::AtLeastOnce,
                    false,
                    sine(at, f64::from_bits(mm_s.load(Ordering::Relaxed))),
                ));
                at += BLOCK_NS;
                thread::sleep(Duration::from_millis(250));
            }
        });
        Self {
            stop,
            mm_s: level,
            thread: Some(thread),
        }
    }

    /// From the next block on the sine has this velocity, mm/s rms.
    pub fn set(&self, mm_s: f64) {
        self.mm_s.store(mm_s.to_bits(), Ordering::Relaxed);
    }
}

impl Drop for Stream {
    fn drop(&mut self) {
        self.stop.store(true, Ordering::Relaxed);
        if let Some(thread) = self.thread.take() {
            drop(thread.join());
        }
    }
}
