//! The analysis of one point: blocks in, readings out.

use alloc::{boxed::Box, vec::Vec};

use humward_signal::frame::{FrameFault, Scratch};

use super::{
    arriving::{Arriving, Progress, Speeds, Taken},
    continuity::{Continuity, Joint},
    evidence::{self, Traces, Waveform},
    format::Format,
    machinery::{Channel, Machinery, Run},
    plans::Plans,
    sums::Sums,
};
use crate::{
    plan::PointSpec,
    reading::{Doubt, Doubts, Reading},
    time::{Arrival, SignalTime, Span},
};

/// No block is from after this, 2200-01-01 UTC, ns: what a clock reads beyond it is no time.
const LAST_NS: i64 = 7_258_118_400_000_000_000;
/// No accelerometer samples faster: beyond it a rate is a mistake.
const HIGHEST_RATE_HZ: f64 = 1e6;
/// Share of a sample's length by which it may lie before a reading's border and yet be on it.
const ON_BORDER: f64 = 1e-3;
/// Least time the last blocks of a reading are waited for.
const GRACE: Span = Span::from_secs(2);

/// One open reading.
#[derive(Debug)]
struct Open {
    start: SignalTime,
    end: SignalTime,
    gaps: u32,
    doubts: Doubts,
    format: Format,
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
    ///
    /// As [`advance`](Self::advance), for whoever wants no traces.
    pub fn push(
        &mut self,
        point: &PointSpec,
        arriving: Arriving<'_>,
        scratch: &mut Scratch,
        closed: &mut Vec<Reading>,
    ) -> Taken {
        let mut from = None;
        loop {
            match self.advance(point, arriving, &mut from, scratch) {
                Progress::Closed(reading) => closed.push(*reading),
                Progress::Done(taken) => return taken,
            }
        }
    }

    /// Takes in a block up to the end of the reading in progress, or to its own end.
    ///
    /// `from` is `None` for a new block and keeps the place in it; to be called again until it is
    /// [`Progress::Done`]. Between the calls [`traces`](Self::traces) are those of the reading just closed.
    pub fn advance(
        &mut self,
        point: &PointSpec,
        arriving: Arriving<'_>,
        from: &mut Option<usize>,
        scratch: &mut Scratch,
    ) -> Progress {
        let Arriving {
            block,
            at,
            arrival,
            speeds,
        } = arriving;
        let Some(format) = Format::of(block, point) else {
            return Progress::Done(Taken::Uncalibrated);
        };
        let channels = usize::from(block.channels.max(1));
        let channel = usize::from(point.channel);
        if channel >= channels {
            return Progress::Done(Taken::NoChannel);
        }
        let count = block.samples.len() / channels;
        let mut done = match *from {
            Some(done) => done,
            None => match self.begin(point, arriving, count) {
                Ok((done, reading)) => {
                    *from = Some(done);
                    if let Some(reading) = reading {
                        return Progress::Closed(Box::new(reading));
                    }
                    done
                }
                Err(taken) => return Progress::Done(taken),
            },
        };
        while done < count {
            // Times are whole nanoseconds: a sample within a thousandth of the border before it is on it.
            let told = at.plus(Span::from_secs_f64(
                (done as f64 + ON_BORDER) / block.rate_hz,
            ));
            // A block that follows may tell a time before the border its run has reached: that is jitter.
            let now = self.last_end.map_or(told, |end| told.max(end));
            if let Some(reading) = self.close_if_past(now, point, arrival, speeds) {
                return Progress::Closed(Box::new(reading));
            }
            let end = self.open_at(now, point, format, block.samples[done * channels + channel]);
            let until_end = (end.since(now).secs() * block.rate_hz).ceil().max(1.0) as usize;
            let take = until_end.min(count - done);
            let samples = Channel {
                samples: &block.samples[done * channels..(done + take) * channels],
                channel,
                channels,
            };
            if self.take(&samples, format, scratch).is_err() {
                self.machinery = None;
                self.break_run();
                return Progress::Done(Taken::RateUnusable);
            }
            done += take;
            *from = Some(done);
            if take == until_end
                && let Some(reading) = self.close(point, arrival, speeds)
            {
                return Progress::Closed(Box::new(reading));
            }
        }
        Progress::Done(Taken::Whole)
    }

    /// Joins a new block of `count` samples to what came before; the first sample to use, and the reading that
    /// ends with it.
    fn begin(
        &mut self,
        point: &PointSpec,
        arriving: Arriving<'_>,
        count: usize,
    ) -> Result<(usize, Option<Reading>), Taken> {
        let Arriving {
            block,
            at,
            arrival,
            speeds,
        } = arriving;
        if count == 0 {
            return Err(Taken::Empty);
        }
        if !(0..LAST_NS).contains(&at.ns()) {
            return Err(Taken::Late);
        }
        if !(0.0..=HIGHEST_RATE_HZ).contains(&block.rate_hz) || !self.plan_for(point, block.rate_hz)
        {
            return Err(Taken::RateUnusable);
        }
        let length = Span::from_secs_f64(count as f64 / block.rate_hz);
        let mut closed = None;
        let joint = self.continuity.join(at, length, block.seq, arrival);
        match joint {
            Joint::Late => return Err(Taken::Late),
            Joint::First | Joint::Follows => {}
            Joint::AfterGap(_) => self.break_run(),
            Joint::ClockSetBack => closed = self.clock_set(point, arrival, speeds),
        }
        let mut skip = 0;
        if let Some(last_end) = self.last_end
            && at < last_end
            && joint != Joint::Follows
        {
            skip = ((last_end.since(at).secs() * block.rate_hz).ceil() as usize).min(count);
            self.break_run();
            if skip == count {
                return Err(Taken::Late);
            }
        }
        self.newest = Some((at.plus(length), arrival, length));
        Ok((skip, closed))
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
        self.break_run();
    }

    /// Our own clock was set, and stamps from now on are `jump` further on than time is: what waits goes on
    /// waiting, and a block may be of an earlier time than the one before it.
    pub fn wall_clock_set(&mut self, jump: Span) {
        if let Some((_, arrival, _)) = &mut self.newest {
            *arrival = arrival.plus(jump);
        }
        self.continuity.reset();
        self.last_end = None;
        self.break_run();
    }

    /// The sensor's clock was set back: the reading in progress ends, and earlier ones may follow.
    fn clock_set(
        &mut self,
        point: &PointSpec,
        arrival: Arrival,
        speeds: &dyn Speeds,
    ) -> Option<Reading> {
        self.break_run();
        let closed = self.close(point, arrival, speeds);
        self.last_end = None;
        closed
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
        let (start, end) = self.open.as_ref().map(|open| (open.start, open.end))?;
        if now < start {
            self.clock_set(point, arrival, speeds)
        } else if now >= end {
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

#[cfg(test)]
mod tests;
