//! Evidence of an event: spectrum, envelope spectrum and waveform, as CBOR.
//!
//! A CBOR map (RFC 8949) with the keys of the JSON messages; each trace's values are an RFC 8746 typed array,
//! tag 85: 32-bit little-endian floats. Size: at most [`MAX_EVIDENCE`] bytes after [`Evidence::fit`];
//! checked by `tests/contract/evidence.rs`.

use alloc::string::String;
use alloc::vec::Vec;

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

use super::Header;
use crate::id::Id;

mod code;

/// Largest evidence, in bytes of CBOR.
pub const MAX_EVIDENCE: usize = 60 * 1024;
/// Shaft turns of waveform that evidence keeps as long as it can.
pub const TURNS_KEPT: f64 = 10.0;

/// Evenly spaced values along time or frequency.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Trace {
    /// Time or frequency of the first value, in `step_unit`.
    pub start: f64,
    /// Distance between values, in `step_unit`.
    pub step: f64,
    /// `s` or `Hz`.
    pub step_unit: String,
    /// Unit with detector, such as `m/s2 rms`.
    pub unit: String,
    /// Band the trace was filtered to, Hz; null when none.
    pub band_hz: Option<[f64; 2]>,
    /// Width of one bin before thinning, Hz; null for waveforms.
    pub resolution_hz: Option<f64>,
    /// Neighbouring values that each value is the greatest of; 1 when the trace was not thinned.
    pub thinned: u32,
    /// The values; in CBOR one typed array.
    pub values: Vec<f32>,
}

/// What an event rests on.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Evidence {
    /// Who speaks about what.
    #[serde(flatten)]
    pub header: Header,
    /// The event.
    pub event: Id,
    /// The measuring point.
    pub point: Id,
    /// The watch.
    pub watch: Option<String>,
    /// Shaft speed, r/min.
    pub rpm: Option<f64>,
    /// Spectrum of the signal.
    pub spectrum: Option<Trace>,
    /// Spectrum of the squared envelope.
    pub envelope: Option<Trace>,
    /// The signal itself.
    pub waveform: Option<Trace>,
    /// Whether anything was shortened to fit.
    pub truncated: bool,
}

impl Evidence {
    /// Shortens the evidence until its CBOR has at most `max` bytes; tells whether anything was left out.
    ///
    /// Order: the waveform to its first [`TURNS_KEPT`] shaft turns (needs `rpm`); the spectrum, then the envelope
    /// thinned by two, keeping the greater of each pair, down to 512 values each; the waveform halved down to 256
    /// values; spectrum and envelope thinned down to 64; last the waveform, the envelope and the spectrum left out.
    #[must_use]
    pub fn fit(mut self, max: usize) -> (Evidence, bool) {
        let turns = self.values_in_turns();
        let mut step = 0;
        while self.encode().len() > max && step < 10 {
            let taken = match step {
                0 => turns.is_some_and(|keep| shorten(&mut self.waveform, keep)),
                1 => thin(&mut self.spectrum, 512),
                2 => thin(&mut self.envelope, 512),
                3 => {
                    let half = self.waveform.as_ref().map_or(0, |w| w.values.len() / 2);
                    half >= 256 && shorten(&mut self.waveform, half)
                }
                4 => thin(&mut self.spectrum, 64),
                5 => thin(&mut self.envelope, 64),
                6 => self.waveform.take().is_some(),
                7 => self.envelope.take().is_some(),
                _ => self.spectrum.take().is_some(),
            };
            self.truncated |= taken;
            if !taken {
                step += 1;
            }
        }
        let cut = self.truncated;
        (self, cut)
    }

    /// Waveform values in [`TURNS_KEPT`] turns; `None` without a speed or a waveform.
    fn values_in_turns(&self) -> Option<usize> {
        let step = self.waveform.as_ref()?.step;
        let rpm = self.rpm.filter(|rpm| *rpm > 0.0)?;
        let values = TURNS_KEPT * 60.0 / rpm / step;
        // Rounded up; a number beyond any waveform keeps it whole.
        (values.is_finite() && values > 0.0).then_some((values as usize).saturating_add(1))
    }
}

fn shorten(trace: &mut Option<Trace>, keep: usize) -> bool {
    match trace {
        Some(trace) if trace.values.len() > keep => {
            trace.values.truncate(keep);
            true
        }
        Some(_) | None => false,
    }
}

/// Halves a trace, keeping the greater of each pair; refuses below `least` values.
fn thin(trace: &mut Option<Trace>, least: usize) -> bool {
    match trace {
        Some(trace) if trace.values.len() >= 2 * least => {
            trace.values = trace
                .values
                .chunks(2)
                .map(|pair| pair.iter().copied().fold(f32::MIN, f32::max))
                .collect();
            trace.step *= 2.0;
            trace.thinned = trace.thinned.saturating_mul(2);
            true
        }
        Some(_) | None => false,
    }
}
