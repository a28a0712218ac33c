//! Readings for the judge's own tests.

use alloc::vec::Vec;

use crate::{
    reading::{Doubts, Reading, ShaftSpeed},
    time::{Arrival, SECOND, SignalTime},
};

/// The `k`-th reading of 10 s, with nothing in it but a velocity of 1 mm/s rms.
pub(crate) fn reading(k: i64) -> Reading {
    Reading {
        start: SignalTime::from_ns(k * 10 * SECOND),
        end: SignalTime::from_ns((k + 1) * 10 * SECOND),
        closed: Arrival::from_ns((k + 1) * 10 * SECOND),
        samples: (100, 100),
        frames: 1,
        rate_hz: 12_800.0,
        gaps: 0,
        doubts: Doubts::default(),
        speed: ShaftSpeed::Reported(1482.0),
        velocity: Some((1.0, 1.5)),
        acceleration: None,
        high_band_rms: Some(1.0),
        bands: Vec::new(),
        races: [None; 4],
        strongest: Vec::new(),
        resolution_hz: 1.5625,
    }
}
