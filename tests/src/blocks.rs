//! Made-up signals: a steady sine, as blocks on the usual topic of one point.

use std::time::{SystemTime, UNIX_EPOCH};

use humward_wire::block::{Block, SampleEncoding, Unit, encode_cbor};

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
