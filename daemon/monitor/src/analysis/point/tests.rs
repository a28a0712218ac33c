//! Blocks of one point to readings.

extern crate std;

use std::{f64::consts::TAU, vec::Vec};

use humward_signal::{bearing::BearingOrders, frame::Scratch};
use humward_wire::{
    block::{Block, Unit},
    id::Id,
};

use super::PointAnalysis;
use crate::{
    analysis::{Arriving, Speeds},
    plan::{Calibration, PointSpec},
    reading::{Reading, ShaftSpeed},
    time::{Arrival, SignalTime, Span},
};

const RATE_HZ: f64 = 12_000.0;
const RPM: f64 = 1797.0;

struct Steady;

impl Speeds for Steady {
    fn over(&self, _: SignalTime, _: SignalTime) -> (ShaftSpeed, bool) {
        (ShaftSpeed::Reported(RPM), false)
    }
}

/// A bearing whose rates lie within 2 % of 3, 4 and 5 x shaft: eight elements of 0.2656 on a pitch of 1.122.
fn point() -> PointSpec {
    let id = Id::new("de").expect("an id");
    PointSpec {
        id: id.clone(),
        name: "drive end".into(),
        source: id,
        channel: 0,
        rate_hz: None,
        frame: 8192,
        calibration: Calibration::FromUnit,
        range_ms2: None,
        noise_ug_rthz: None,
        velocity_from_hz: 10.0,
        bearing: BearingOrders::from_geometry(8, 0.2656, 1.122, 0.0).ok(),
        envelope_hz: Some((2000.0, 5500.0)),
        bands: Vec::new(),
    }
}

/// Readings of 1 s of ten seconds of a signal in blocks of 100 ms; `late_ms` is how late each block's own time is.
fn readings(signal: impl Fn(f64) -> f64, late_ms: impl Fn(i64) -> i64) -> Vec<Reading> {
    let mut analysis = PointAnalysis::new(Span::from_secs(1), RPM);
    let (mut scratch, mut closed) = (Scratch::new(), Vec::new());
    for k in 0..100 {
        let start_ns = 1_796_094_000_000_000_000 + k * 100_000_000;
        let block = Block {
            rate_hz: RATE_HZ,
            unit: Unit::MetrePerSecondSquared,
            samples: (0..1200)
                .map(|i| signal((k * 1200 + i) as f64 / RATE_HZ) as f32)
                .collect(),
            ..Block::empty()
        };
        let arriving = Arriving {
            block: &block,
            at: SignalTime::from_ns(start_ns + late_ms(k) * 1_000_000),
            arrival: Arrival::from_ns(start_ns + 120_000_000),
            speeds: &Steady,
        };
        analysis.push(&point(), arriving, &mut scratch, &mut closed);
    }
    closed
}

#[test]
fn jitter_of_a_sensors_clock_costs_no_velocity() {
    let sine = |t: f64| (TAU * 30.0 * t).sin();
    for readings in [
        readings(sine, |_| 0),
        readings(sine, |k| 4 * (k % 2)),
        readings(sine, |k| (k * 7) % 11 - 5),
    ] {
        assert!(readings.len() >= 9, "{}", readings.len());
        for reading in &readings[2..] {
            assert!(
                reading.velocity.is_some() && reading.gaps == 0,
                "{reading:?}"
            );
        }
    }
}
