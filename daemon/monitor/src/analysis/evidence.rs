//! What a reading leaves behind for evidence: its spectra and the newest stretch of velocity.

use alloc::vec::Vec;

use humward_wire::out::Trace;

use super::{plans::Plans, sums::Sums};

/// Turns of the slowest shaft that the kept waveform covers, as far as [`MOST_SAMPLES`] allows.
const TURNS: f64 = 12.0;
/// Most low-rate samples kept a point: 32 KiB.
const MOST_SAMPLES: usize = 8192;
/// Fewest.
const FEWEST_SAMPLES: usize = 1024;

/// Spectra and waveform of one point's last reading.
#[derive(Debug, Clone, PartialEq)]
pub struct Traces {
    /// Velocity spectrum, mm/s rms a line.
    pub spectrum: Trace,
    /// Squared-envelope amplitude spectrum, (m/s2)2 peak.
    pub envelope: Option<Trace>,
    /// Weighted velocity, mm/s, at the low rate; its last value is half a frame before the reading's end at most.
    pub waveform: Trace,
}

/// The newest velocity samples of a run.
#[derive(Debug, Default)]
pub(super) struct Waveform {
    samples: Vec<f32>,
    most: usize,
}

impl Waveform {
    /// Room for [`TURNS`] turns at `lowest_rpm`.
    pub(super) fn for_speed(low_rate_hz: f64, lowest_rpm: f64) -> Self {
        let wanted = (TURNS * 60.0 / lowest_rpm * low_rate_hz).ceil();
        Self {
            samples: Vec::new(),
            most: (wanted as usize).clamp(FEWEST_SAMPLES, MOST_SAMPLES),
        }
    }

    pub(super) fn clear(&mut self) {
        self.samples.clear();
    }

    pub(super) fn push(&mut self, samples: &[f32]) {
        self.samples.extend_from_slice(samples);
        if self.samples.len() > 2 * self.most {
            self.samples.drain(..self.samples.len() - self.most);
        }
    }

    fn newest(&self) -> Vec<f32> {
        self.samples[self.samples.len().saturating_sub(self.most)..].to_vec()
    }
}

/// Makes the traces of a closed reading; `None` when it held no frame.
pub(super) fn traces(plans: &Plans, sums: &Sums, waveform: &Waveform) -> Option<Traces> {
    if sums.psd.frames() == 0 {
        return None;
    }
    let df = sums.psd.resolution_hz();
    let velocity = |k: usize| {
        let hz = k as f64 * df;
        let line = humward_signal::units::velocity_mm_s(sums.psd.line_amplitude(k), hz);
        (line / core::f64::consts::SQRT_2) as f32
    };
    let bins = ((2000.0 / df) as usize).min(sums.psd.bins() - 1);
    let spectrum = Trace {
        start: 0.0,
        step: df,
        step_unit: "Hz".into(),
        unit: "mm/s rms".into(),
        band_hz: None,
        resolution_hz: Some(df),
        thinned: 1,
        values: (0..=bins).map(velocity).collect(),
    };
    let envelope = sums
        .envelope
        .as_ref()
        .zip(plans.envelope.as_ref())
        .map(|(envelope, plan)| {
            let df = envelope.resolution_hz();
            let bins = ((1000.0 / df) as usize).min(envelope.bins() - 1);
            let (from, to) = plan.band_hz();
            Trace {
                start: 0.0,
                step: df,
                step_unit: "Hz".into(),
                unit: "(m/s2)2 peak".into(),
                band_hz: Some([from, to]),
                resolution_hz: Some(df),
                thinned: 1,
                values: (0..=bins).map(|k| envelope.amplitude(k) as f32).collect(),
            }
        });
    let waveform = Trace {
        start: 0.0,
        step: 1.0 / plans.low.low_rate_hz(),
        step_unit: "s".into(),
        unit: "mm/s".into(),
        band_hz: None,
        resolution_hz: None,
        thinned: 1,
        values: waveform.newest(),
    };
    Some(Traces {
        spectrum,
        envelope,
        waveform,
    })
}
