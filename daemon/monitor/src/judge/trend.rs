//! Which reported speeds are believed, and whether they rise, fall or hold still.
//!
//! In: reports newer than all before, r/min in signal time, from several a second to one each 10 s. Out: those
//! believed, and their direction. One bad report is never believed: one that departs by more than 3 % counts when the
//! next departs to the same side, or when it has stood alone for 15 s; of two that depart the nearer counts, which
//! makes what is believed the median of three. Two bad reports in a row are believed. Where the numbers come from:
//! common practice, no source. Checked by the tests in `trend/tests.rs`.

use alloc::vec::Vec;

use crate::time::{Arrival, SECOND, SignalTime, Span};

/// A report departs when it differs by more than this share of the higher of the two.
const DEPARTS: f64 = 0.03;
/// A report that departs and that no other follows is believed after so long.
pub(super) const STANDS: Span = Span::from_secs(15);
/// What rises or falls is told over so long.
pub(super) const WINDOW: Span = Span::from_secs(10);
/// Share of the higher speed by which it must move in a window to rise or fall: four times what a wander of
/// 2 % in 60 s does.
const MOVES: f64 = 0.08;
/// Share of the highest speed within which it holds still: a wander of 2 % to both sides and half of that in noise.
const STILL: f64 = 0.06;
/// Reports closer together than this are one towards the direction: what is kept stays bounded.
const THINNED: Span = Span::from_ns(SECOND / 4);

/// One reported speed.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Report {
    /// When it was measured.
    pub(super) at: SignalTime,
    /// r/min
    pub(super) rpm: f64,
}

/// Where the believed speed goes.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Direction {
    /// Up by more than 8 % of itself in 10 s.
    Rising,
    /// Down by more than 8 % of what it was in 10 s.
    Falling,
    /// Neither.
    Steady,
}

/// A stretch in which the speed stayed within [`STILL`].
#[derive(Debug, Clone, Copy, PartialEq)]
struct Stretch {
    since: SignalTime,
    low: f64,
    high: f64,
}

/// The believed speed of one asset and its recent past.
#[derive(Debug, Clone, PartialEq, Default)]
pub(super) struct Trend {
    believed: Option<Report>,
    unconfirmed: Option<(Report, Arrival)>,
    still: Option<Stretch>,
    /// The last one at least a window old, or the oldest there is, and those after it.
    recent: Vec<Report>,
    /// The clock was set and no report has come since: times of before and after do not compare.
    adrift: bool,
}

impl Trend {
    /// The speed believed last.
    pub(super) const fn believed(&self) -> Option<Report> {
        self.believed
    }

    /// Whether a report waits to be believed: until then nothing is sure.
    pub(super) const fn unsure(&self) -> bool {
        self.unconfirmed.is_some()
    }

    /// Whether the clock was set and no report has come since: until then nothing changes.
    pub(super) const fn adrift(&self) -> bool {
        self.adrift
    }

    /// Takes in a report; below `standstill` r/min all are alike, after `valid` without any it begins anew.
    ///
    /// What is now believed, in order: the one that waited, this one, both or neither. To be handed to
    /// [`believe`](Self::believe) one after the other.
    pub(super) fn report(
        &mut self,
        new: Report,
        arrival: Arrival,
        standstill: f64,
        valid: Span,
    ) -> [Option<Report>; 2] {
        let waiting = self.unconfirmed.take();
        let Some(before) = self
            .believed
            .filter(|before| !self.adrift && new.at.since(before.at) <= valid)
        else {
            *self = Self::default();
            return [None, Some(new)];
        };
        let near = |a: Report, b: Report| {
            let standing = a.rpm < standstill && b.rpm < standstill;
            standing || (a.rpm - b.rpm).abs() <= DEPARTS * a.rpm.max(b.rpm)
        };
        let Some((waited, came)) = waiting else {
            if near(before, new) {
                return [None, Some(new)];
            }
            self.unconfirmed = Some((new, arrival));
            return [None, None];
        };
        if new.at <= waited.at {
            // The same once more: it confirms nothing.
            self.unconfirmed = Some((waited, came));
            return [None, None];
        }
        let stood = new.at.since(waited.at) >= STANDS;
        let same_side = (new.rpm > before.rpm) == (waited.rpm > before.rpm);
        let (first, last) = if near(waited, new) {
            (Some(waited), Some(new))
        } else if stood {
            (Some(waited), None)
        } else if near(before, new) {
            (None, Some(new))
        } else if !same_side {
            (None, None)
        } else if (new.rpm - before.rpm).abs() < (waited.rpm - before.rpm).abs() {
            (None, Some(new))
        } else {
            (Some(waited), None)
        };
        if last.is_none() {
            self.unconfirmed = Some((new, arrival));
        }
        [first, last]
    }

    /// The report that has stood alone long enough by `now`, signal time; to be believed.
    pub(super) fn stood(&mut self, now: SignalTime) -> Option<Report> {
        let stood = |(waiting, _): &mut (Report, Arrival)| now.since(waiting.at) >= STANDS;
        self.unconfirmed.take_if(stood).map(|(report, _)| report)
    }

    /// When the report that waits is to be believed because no other came.
    pub(super) fn due(&self) -> Option<Arrival> {
        self.unconfirmed.map(|(_, came)| came.plus(STANDS))
    }

    /// The report that was [`due`](Self::due) by `now`; to be believed.
    pub(super) fn overdue(&mut self, now: Arrival) -> Option<Report> {
        let due = |(_, came): &mut (Report, Arrival)| came.plus(STANDS) <= now;
        self.unconfirmed.take_if(due).map(|(report, _)| report)
    }

    /// Believes a report: from now on it is the speed.
    pub(super) fn believe(&mut self, report: Report) {
        let alone = Stretch {
            since: report.at,
            low: report.rpm,
            high: report.rpm,
        };
        let wider = self.still.map_or(alone, |still| Stretch {
            low: still.low.min(report.rpm),
            high: still.high.max(report.rpm),
            ..still
        });
        let holds = wider.high - wider.low <= STILL * wider.high;
        self.still = Some(if holds { wider } else { alone });
        let crowded = match self.recent[..] {
            [.., before, last] => last.at.since(before.at) < THINNED,
            [] | [_] => false,
        };
        if crowded {
            self.recent.pop();
        }
        self.recent.push(report);
        let old = |kept: &&Report| report.at.since(kept.at) >= WINDOW;
        let past = self.recent.iter().take_while(old).count();
        self.recent.drain(..past.saturating_sub(1));
        self.believed = Some(report);
    }

    /// Where the speed goes: its change over the last window, or since the report before when that is longer ago.
    pub(super) fn direction(&self) -> Direction {
        let (Some(first), Some(last)) = (self.recent.first(), self.believed) else {
            return Direction::Steady;
        };
        let windows = last.at.since(first.at).max(WINDOW).secs() / WINDOW.secs();
        let moved = (last.rpm - first.rpm) / windows;
        let enough = MOVES * last.rpm.max(first.rpm);
        if moved > enough {
            Direction::Rising
        } else if -moved > enough {
            Direction::Falling
        } else {
            Direction::Steady
        }
    }

    /// When the speed had held still for `span`, counted from `from` at the earliest; `None` while it has not by `now`.
    ///
    /// A speed is known to hold until its newest report; once that has stood for 15 s, until `now`.
    pub(super) fn held(&self, from: SignalTime, now: SignalTime, span: Span) -> Option<SignalTime> {
        let (Report { at, .. }, still) = self.believed.zip(self.still)?;
        let until = if now.since(at) >= STANDS { now } else { at };
        let held = still.since.max(from).plus(span);
        (held <= until).then_some(held)
    }

    /// Our clock was set, `forward` or `back`: the speed stays, its past no longer tells how long anything took.
    pub(super) fn wall_clock_set(&mut self, forward: Span, back: Span) {
        let moved = |Report { at, rpm }| Report {
            at: at.plus(forward).minus(back),
            rpm,
        };
        *self = Self {
            believed: self.believed.map(moved),
            adrift: true,
            ..Self::default()
        };
    }
}

#[cfg(test)]
mod tests;
