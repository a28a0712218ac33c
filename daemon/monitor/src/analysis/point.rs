//! The analysis of one point: blocks in, readings out.

use alloc::vec::Vec;

use humward_signal::{
    frame::{FrameFault, Scratch},
    lowband::LowBandState,
};
use humward_wire::block::Block;

use super::{
    continuity::{Continuity, Joint},
    evidence::{self, Traces, Waveform},
    format::Format,
    plans::Plans,
    sums::Sums,
};
use crate::{
    plan::PointSpec,
    reading::{Doubt, Doubts, Reading, ShaftSpeed},
    time::{Arrival, SignalTime, Span},
};

/// Least time the last blocks of a reading are waited for.
const GRACE: Span = Span::from_secs(2);

/// What became of a block.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Taken {
    /// Its samples were taken in.
    Whole,
    /// It was seen already or came too late: not used.
    Late,
    /// Its unit needs a calibration the point does not have.
    Uncalibrated,
    /// It has no such channel.
    NoChannel,
    /// Its rate cannot serve the point.
    RateUnusable,
}

/// One open reading.
#[derive(Debug)]
struct Open {
    start: SignalTime,
    end: SignalTime,
    gaps: u32,
    doubts: Doubts,
    format: Format,
}

/// A run of frames without a gap.
#[derive(Debug)]
struct Run {
    filled: usize,
    low: LowBandState,
    low_given: usize,
}

/// Everything that depends on the sample rate.
#[derive(Debug)]
struct Machinery {
    plans: Plans,
    sums: Sums,
    last: Sums,
    frame: Vec<f32>,
    low_out: Vec<f32>,
    waveform: Waveform,
}

/// The speed that stands for a stretch of time, and whether it moved in it.
pub trait Speeds {
    /// From `start` to `end`.
    fn over(&self, start: SignalTime, end: SignalTime) -> (ShaftSpeed, bool);
}

/// One block as it reaches a point.
#[derive(Clone, Copy)]
pub struct Arriving<'a> {
    /// The block.
    pub block: &'a Block,
    /// Signal time of its first sample.
    pub at: SignalTime,
    /// When it arrived.
    pub arrival: Arrival,
    /// The speeds of the asset.
    pub speeds: &'a dyn Speeds,
}

impl core::fmt::Debug for Arriving<'_> {
    fn fmt(&self, f: &mut core::fmt::Formatter<'_>) -> core::fmt::Result {
        f.debug_struct("Arriving")
            .field("at", &self.at)
            .field("arrival", &self.arrival)
            .finish_non_exhaustive()
    }
}

/// The disposable state of one point.
#[derive(Debug)]
pub struct PointAnalysis {
    every: Span,
    lowest_rpm: f64,
    continuity: Continuity,
    machinery: Option<Machinery>,
    run: Option<Run>,
    open: Option<Open>,
    pivot: f32,
    last_end: Option<SignalTime>,
    /// Signal time after the last sample, when its block arrived, and that block's length.
    newest: Option<(SignalTime, Arrival, Span)>,
}

impl PointAnalysis {
    /// Nothing seen yet; readings of length `every`, waveform kept for shafts down to `lowest_rpm`.
    pub fn new(every: Span, lowest_rpm: f64) -> Self {
        Self {
            every,
            lowest_rpm,
            continuity: Continuity::default(),
            machinery: None,
            run: None,
            open: None,
            pivot: 0.0,
            last_end: None,
            newest: None,
        }
    }

    /// Takes in one block; readings it completes are appended to `closed`.
    pub fn push(
        &mut self,
        point: &PointSpec,
        arriving: Arriving<'_>,
        scratch: &mut Scratch,
        closed: &mut Vec<Reading>,
    ) -> Taken {
        let Arriving {
            block,
            at,
            arrival,
            speeds,
        } = arriving;
        let Some(format) = Format::of(block, point) else {
            return Taken::Uncalibrated;
        };
        let channels = usize::from(block.channels.max(1));
        let channel = usize::from(point.channel);
        if channel >= channels {
            return Taken::NoChannel;
        }
        let rate_hz = block.rate_hz;
        if !self.plan_for(point, rate_hz) {
            return Taken::RateUnusable;
        }
        let count = block.samples.len() / channels;
        let length = Span::from_secs_f64(count as f64 / rate_hz);
        let mut skip = 0;
        match self.continuity.join(at, length, block.seq) {
            Joint::Late => return Taken::Late,
            Joint::First | Joint::Follows => {}
            Joint::AfterGap(gap) => {
                if gap == Span::ZERO {
                    self.last_end = None;
                }
                self.break_run();
            }
        }
        if let Some(last_end) = self.last_end
            && at < last_end
        {
            skip = ((last_end.since(at).secs() * rate_hz).ceil() as usize).min(count);
            self.break_run();
            if skip == count {
                return Taken::Late;
            }
        }
        self.newest = Some((at.plus(length), arrival, length));
        let mut done = skip;
        while done < count {
            let now = at.plus(Span::from_secs_f64(done as f64 / rate_hz));
            closed.extend(self.close_if_past(now, point, arrival, speeds));
            let end = self.open_at(now, point, format, block.samples[done * channels + channel]);
            // Times are whole nanoseconds: a sample that lies within a thousandth of the border is on it.
            let until_end = ((end.since(now).secs() * rate_hz) - 1e-3).ceil().max(1.0) as usize;
            let take = until_end.min(count - done);
            let samples = Channel {
                samples: &block.samples[done * channels..(done + take) * channels],
                channel,
                channels,
            };
            if self.take(&samples, format, scratch).is_err() {
                self.machinery = None;
                self.break_run();
                return Taken::RateUnusable;
            }
            done += take;
            if take == until_end {
                closed.extend(self.close(point, arrival, speeds));
            }
        }
        Taken::Whole
    }

    /// When the reading in progress will have waited long enough for its last blocks.
    pub fn overdue(&self) -> Option<Arrival> {
        let (open, (next, arrival, length)) = (self.open.as_ref()?, self.newest?);
        let grace = if length.times(2) > GRACE {
            length.times(2)
        } else {
            GRACE
        };
        Some(arrival.plus(open.end.since(next)).plus(grace))
    }

    /// Closes the reading in progress with what has come.
    pub fn close_overdue(
        &mut self,
        point: &PointSpec,
        now: Arrival,
        speeds: &dyn Speeds,
    ) -> Option<Reading> {
        self.close(point, now, speeds)
    }

    /// Samples are known to be missing: the next block begins a new run.
    pub fn gap(&mut self) {
        self.continuity.reset();
        self.break_run();
    }

    /// Spectra and waveform of the last reading that held a frame.
    pub fn traces(&self) -> Option<Traces> {
        let machinery = self.machinery.as_ref()?;
        evidence::traces(&machinery.plans, &machinery.last, &machinery.waveform)
    }

    /// Makes sure the plans are those of `rate_hz`; `false` when that rate cannot serve.
    fn plan_for(&mut self, point: &PointSpec, rate_hz: f64) -> bool {
        let fits = self
            .machinery
            .as_ref()
            .is_some_and(|m| (m.plans.rate_hz - rate_hz).abs() <= 1e-6 * rate_hz);
        if fits {
            return true;
        }
        let Ok(plans) = Plans::new(point, rate_hz) else {
            return false;
        };
        let had_one = self.machinery.is_some();
        self.machinery = Some(Machinery {
            sums: Sums::new(&plans),
            last: Sums::new(&plans),
            frame: alloc::vec![0.0; point.frame],
            low_out: Vec::new(),
            waveform: Waveform::for_speed(plans.low.low_rate_hz(), self.lowest_rpm),
            plans,
        });
        self.continuity.reset();
        self.break_run();
        if had_one && let Some(open) = &mut self.open {
            open.doubts.insert(Doubt::RateChanged);
        }
        true
    }

    fn break_run(&mut self) {
        if self.run.take().is_some()
            && let Some(open) = &mut self.open
        {
            open.gaps += 1;
        }
        if let Some(machinery) = &mut self.machinery {
            machinery.waveform.clear();
        }
    }

    /// Closes the open reading if `now` does not lie in it.
    fn close_if_past(
        &mut self,
        now: SignalTime,
        point: &PointSpec,
        arrival: Arrival,
        speeds: &dyn Speeds,
    ) -> Option<Reading> {
        let past = self
            .open
            .as_ref()
            .is_some_and(|open| now >= open.end || now < open.start);
        if past {
            self.close(point, arrival, speeds)
        } else {
            None
        }
    }

    /// Sees to it that the reading `now` lies in is open, and tells its end; `first` is its first raw value.
    fn open_at(
        &mut self,
        now: SignalTime,
        point: &PointSpec,
        format: Format,
        first: f32,
    ) -> SignalTime {
        let end = now.next_multiple(self.every);
        match &mut self.open {
            Some(open) => {
                if open.format != format {
                    // Rails of another scale: only the sensor's own range could still tell clipping.
                    open.format = Format {
                        rails: None,
                        ..format
                    };
                }
                open.end
            }
            None => {
                if self.run.is_none() {
                    self.pivot = format.convert(first, 0.0);
                }
                if let Some(machinery) = &mut self.machinery {
                    machinery
                        .sums
                        .clear(format.rails_about(self.pivot, point.range_ms2));
                }
                let start = end.minus(self.every);
                self.open = Some(Open {
                    start,
                    end,
                    gaps: 0,
                    doubts: Doubts::default(),
                    format,
                });
                end
            }
        }
    }

    /// Takes in samples that lie in the open reading and follow the last ones of the run.
    fn take(
        &mut self,
        samples: &Channel<'_>,
        format: Format,
        scratch: &mut Scratch,
    ) -> Result<(), FrameFault> {
        let Some(machinery) = &mut self.machinery else {
            return Ok(());
        };
        let n = machinery.frame.len();
        let run = self.run.get_or_insert_with(|| Run {
            filled: 0,
            low: machinery.plans.low.start(),
            low_given: 0,
        });
        let mut done = 0;
        while done < samples.len() {
            let part = (samples.len() - done).min(n - run.filled);
            let place = &mut machinery.frame[run.filled..run.filled + part];
            samples.convert(done, place, format, self.pivot);
            machinery.sums.statistics.push(place);
            run.filled += part;
            done += part;
            if run.filled == n {
                machinery.frame_done(run, scratch)?;
                machinery.frame.copy_within(n / 2.., 0);
                run.filled = n / 2;
            }
        }
        Ok(())
    }

    fn close(
        &mut self,
        point: &PointSpec,
        arrival: Arrival,
        speeds: &dyn Speeds,
    ) -> Option<Reading> {
        let open = self.open.take()?;
        self.last_end = Some(open.end);
        let machinery = self.machinery.as_mut()?;
        let (plans, sums) = (&machinery.plans, &machinery.sums);
        let summary = sums.statistics.summary();
        let samples = sums.statistics.count();
        let expected = (self.every.secs() * plans.rate_hz).round() as u64;
        let (speed, moving) = speeds.over(open.start, open.end);
        let mut doubts = open.doubts;
        let mut doubt_if = |condition: bool, doubt| {
            if condition {
                doubts.insert(doubt);
            }
        };
        doubt_if(samples * 2 < expected, Doubt::Short);
        doubt_if(moving, Doubt::SpeedMoving);
        doubt_if(summary.as_ref().is_some_and(Sums::is_flat), Doubt::Flat);
        let rails_hold = open.format.rails.is_some() || point.range_ms2.is_some();
        doubt_if(
            rails_hold && summary.as_ref().is_some_and(Sums::is_clipped),
            Doubt::Clipped,
        );
        let settled = sums.velocity.count() * plans.low.factor() as u64 * 2 >= samples.max(1);
        let reading = Reading {
            start: open.start,
            end: open.end,
            closed: arrival,
            samples: (samples, expected),
            frames: sums.psd.frames(),
            rate_hz: plans.rate_hz,
            gaps: open.gaps,
            doubts,
            speed,
            velocity: if settled {
                sums.velocity.rms().zip(sums.velocity.peak())
            } else {
                None
            },
            acceleration: summary
                .as_ref()
                .and_then(|summary| Sums::acceleration(summary, self.pivot)),
            high_band_rms: sums.high_band(plans.rate_hz),
            bands: sums.bands(&point.bands, speed),
            races: sums.races(point, speed),
            strongest: sums.strongest(point.velocity_from_hz),
            resolution_hz: plans.frame.resolution_hz(),
        };
        if reading.frames > 0 {
            core::mem::swap(&mut machinery.sums, &mut machinery.last);
        }
        Some(reading)
    }
}

impl Machinery {
    /// Everything one full frame gives.
    fn frame_done(&mut self, run: &mut Run, scratch: &mut Scratch) -> Result<(), FrameFault> {
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
struct Channel<'a> {
    samples: &'a [f32],
    channel: usize,
    channels: usize,
}

impl Channel<'_> {
    const fn len(&self) -> usize {
        self.samples.len() / self.channels
    }

    /// Converts the samples from `from` on into `place`, m/s2 about the pivot.
    fn convert(&self, from: usize, place: &mut [f32], format: Format, pivot: f32) {
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
