//! Everything of a point that depends on its sample rate: plans, sums, and the run of frames.

use alloc::vec::Vec;

use humward_signal::{
    frame::{FrameFault, Scratch},
    lowband::LowBandState,
};

use super::{evidence::Waveform, format::Format, plans::Plans, sums::Sums};

/// A run of frames without a gap.
#[derive(Debug)]
pub(super) struct Run {
    pub(super) filled: usize,
    pub(super) low: LowBandState,
    pub(super) low_given: usize,
}

/// Everything that depends on the sample rate.
#[derive(Debug)]
pub(super) struct Machinery {
    pub(super) plans: Plans,
    pub(super) sums: Sums,
    pub(super) last: Sums,
    pub(super) frame: Vec<f32>,
    pub(super) low_out: Vec<f32>,
    pub(super) waveform: Waveform,
}

impl Machinery {
    /// Everything one full frame gives.
    pub(super) fn frame_done(
        &mut self,
        run: &mut Run,
        scratch: &mut Scratch,
    ) -> Result<(), FrameFault> {
        let Self {
            plans,
            sums,
            frame,
            low_out,
            waveform,
            ..
        } = self;
        low_out.clear();
        plans.frame.transform(frame, scratch)?;
        plans.frame.accumulate_psd(scratch, &mut sums.psd)?;
        if let (Some(plan), Some(envelope)) = (&plans.envelope, &mut sums.envelope) {
            plan.accumulate(scratch, envelope)?;
        }
        plans.low.push_frame(scratch, &mut run.low, low_out)?;
        let unsettled = plans
            .low
            .settle_samples()
            .saturating_sub(run.low_given)
            .min(low_out.len());
        run.low_given = run.low_given.saturating_add(low_out.len());
        let settled = &low_out[unsettled..];
        sums.velocity.push(settled);
        waveform.push(settled);
        Ok(())
    }
}

/// One channel of interleaved samples.
pub(super) struct Channel<'a> {
    pub(super) samples: &'a [f32],
    pub(super) channel: usize,
    pub(super) channels: usize,
}

impl Channel<'_> {
    pub(super) const fn len(&self) -> usize {
        self.samples.len() / self.channels
    }

    /// Converts the samples from `from` on into `place`, m/s2 about the pivot.
    pub(super) fn convert(&self, from: usize, place: &mut [f32], format: Format, pivot: f32) {
        if self.channels == 1 {
            let samples = &self.samples[from..from + place.len()];
            for (slot, raw) in place.iter_mut().zip(samples) {
                *slot = format.convert(*raw, pivot);
            }
        } else {
            let samples = self.samples[from * self.channels + self.channel..]
                .iter()
                .step_by(self.channels);
            for (slot, raw) in place.iter_mut().zip(samples) {
                *slot = format.convert(*raw, pivot);
            }
        }
    }
}
