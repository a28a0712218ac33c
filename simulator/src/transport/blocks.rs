//! From samples to blocks: a stream, or one block each so often.
//!
//! In: samples, m/s², in stretches that follow each other. Out: [`Block`]s of `block x rate_hz` samples, with the true
//! time of their first sample. A burst begins at the first sample at or after each multiple of `burst_every`.
//! Written: `at`, `seq`, declared `rate`, `unit`, `scale`, `bias` if the point has one, `samples`; integers of 16 bit
//! are the sensor's own codes.

use humward_wire::block::{Block as WireBlock, SampleEncoding, Unit, encode_cbor, encode_json};

use super::ns;
use crate::scenario::{Encoding, Point, SampleUnit};
use crate::wave::{G0, Stretch};

/// A whole block, not yet written.
#[derive(Clone, Debug, PartialEq)]
pub struct Block {
    /// True time of its first sample, s after the start of the scenario.
    pub first_s: f64,
    /// True time of the end of its last, s after the start.
    pub end_s: f64,
    /// What is to be sent; `at` and `seq` are the transport's.
    pub content: WireBlock,
}

/// Samples on their way into blocks.
#[derive(Clone, Debug)]
pub struct Blocks {
    encoding: Encoding,
    rate_hz: f64,
    unit: Unit,
    /// Sample x scale = unit.
    scale: f64,
    /// Samples per m/s².
    per_ms2: f64,
    length: usize,
    burst_every_s: Option<f64>,
    bursts: u64,
    first_s: f64,
    samples: Vec<f32>,
}

impl Blocks {
    /// Nothing collected yet for `point`.
    #[must_use]
    pub fn new(point: &Point) -> Blocks {
        let (unit, ms2_per_unit) = match point.unit {
            SampleUnit::MetrePerSecondSquared => (Unit::MetrePerSecondSquared, 1.0),
            SampleUnit::G => (Unit::G, G0),
        };
        let scale = match point.encoding {
            Encoding::CborS16 => point.step_g() * G0 / ms2_per_unit,
            Encoding::CborF32 | Encoding::Json => 1.0,
        };
        Blocks {
            encoding: point.encoding,
            rate_hz: point.rate_hz,
            unit,
            scale,
            per_ms2: 1.0 / (scale * ms2_per_unit),
            length: point.block_samples(),
            burst_every_s: point.burst_every.map(|every| every.0),
            bursts: 0,
            first_s: 0.0,
            samples: Vec::new(),
        }
    }

    /// Takes samples in and hands each block that is whole to `each`, with the bias voltage `bias` tells for it.
    pub fn take(
        &mut self,
        stretch: Stretch,
        samples: &[f64],
        bias: impl Fn(f64) -> Option<f64>,
        mut each: impl FnMut(Block),
    ) {
        let mut index = 0;
        while index < samples.len() {
            if self.samples.is_empty() {
                index = self.begin(stretch, index);
                if index >= samples.len() {
                    return;
                }
                self.first_s = stretch.at(index);
                self.samples.reserve_exact(self.length);
            }
            let until = samples.len().min(index + self.length - self.samples.len());
            // Codes of 16 bit come out whole: their distance to the sensor's own is far below what a float holds.
            let scaled = samples[index..until].iter();
            self.samples
                .extend(scaled.map(|x| (x * self.per_ms2) as f32));
            index = until;
            if self.samples.len() == self.length {
                each(Block {
                    first_s: self.first_s,
                    end_s: stretch.at(until),
                    content: WireBlock {
                        rate_hz: self.rate_hz,
                        unit: self.unit,
                        scale: self.scale,
                        bias: bias(self.first_s),
                        samples: core::mem::take(&mut self.samples),
                        ..WireBlock::empty()
                    },
                });
            }
        }
    }

    /// The first sample of the stretch, from `index` on, with which a block may begin.
    fn begin(&mut self, stretch: Stretch, index: usize) -> usize {
        let Some(every_s) = self.burst_every_s else {
            return index;
        };
        let due_s = self.bursts as f64 * every_s;
        // A sample that falls on the moment but for rounding counts as on it.
        let place = ((due_s - stretch.first_s) / stretch.step_s - 1e-6).ceil();
        let begin = (place.max(0.0) as usize).max(index);
        if begin < stretch.count {
            self.bursts += 1;
        }
        begin
    }

    /// Writes a block as the point does.
    #[must_use]
    pub fn write(&self, block: &WireBlock) -> Vec<u8> {
        match self.encoding {
            Encoding::CborS16 => encode_cbor(block, SampleEncoding::S16),
            Encoding::CborF32 => encode_cbor(block, SampleEncoding::F32),
            Encoding::Json => encode_json(block),
        }
    }

    /// `at` of a block: the start of the scenario and the time of its first sample, ns since 1970 UTC.
    #[must_use]
    pub fn at_ns(start_ns: i64, block: &Block) -> i64 {
        start_ns.saturating_add(ns(block.first_s))
    }
}
