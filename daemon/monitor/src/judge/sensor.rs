//! The instrument alarm of one point: its sensor, cable or link does not give what can be judged.
//!
//! Goes by arrival time, because a dead sensor has no time of its own. Raised when nothing usable has come for
//! as long as the plan allows, or nothing but doubtful readings; cleared when good ones have come for as long again.
//! What is missing by our own doing, and one code for ever on a machine that stands still, are no fault of a sensor.

use humward_wire::{id::Id, refusal::Refusal};

use crate::{
    reading::{Doubt, Reading},
    time::{Arrival, Span},
};

/// What is wrong with a sensor or its link.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Cause {
    /// No block came.
    Silent,
    /// Blocks came and were refused whole.
    Refused(Refusal),
    /// Its blocks come too late or over and over.
    Late,
    /// Its blocks' unit needs a calibration that is not configured.
    Uncalibrated,
    /// Its blocks do not have the configured channel.
    NoChannel,
    /// Its blocks' rate cannot serve the point.
    RateUnusable,
    /// Its blocks hold no samples.
    Empty,
    /// Its readings are doubtful.
    Doubtful(Doubt),
}

/// What the instrument watch does.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum SensorChange {
    /// It has been unusable for long enough.
    Raised(Cause),
    /// It is good again for long enough.
    Cleared,
}

/// An open instrument alarm.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct SensorOccurrence {
    /// Its id; `None` until the raising event has its number.
    pub(super) id: Option<Id>,
    /// Since when nothing usable came.
    pub(super) since: Arrival,
    /// What was wrong when it was raised.
    pub(super) cause: Cause,
}

/// Doubtful readings in a row, at the least two.
#[derive(Debug, Clone, Copy, PartialEq)]
struct Doubtful {
    since: Arrival,
    cause: Cause,
    /// A single doubtful reading is no alarm, however long a reading is.
    least: Span,
}

/// State of one point's instrument alarm.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct SensorState {
    usable: Arrival,
    doubtful: Option<Doubtful>,
    /// The newest payload that was of no use.
    useless: Option<(Arrival, Cause)>,
    /// Samples of the reading in progress are missing by our own doing.
    our_gap: bool,
    good_since: Option<Arrival>,
    open: Option<SensorOccurrence>,
}

impl SensorState {
    /// A sensor that has had its chance since `from`.
    pub(super) const fn new(from: Arrival) -> Self {
        Self {
            usable: from,
            doubtful: None,
            useless: None,
            our_gap: false,
            good_since: None,
            open: None,
        }
    }

    /// The open occurrence.
    pub(super) const fn open(&self) -> Option<&SensorOccurrence> {
        self.open.as_ref()
    }

    /// Gives the open occurrence the id of the event that raised it.
    pub(super) fn name_occurrence(&mut self, id: Id) {
        if let Some(open) = &mut self.open {
            open.id = Some(id);
        }
    }

    /// Forgets what was wrong up to `now`: the link was down, the sensor is not to blame.
    pub(super) fn excuse(&mut self, now: Arrival) {
        self.usable = now;
        self.useless = None;
        self.doubtful = None;
        self.our_gap = true;
    }

    /// We let samples go, or could not receive them: the reading they are missing from is no fault of the sensor.
    pub(super) const fn our_gap(&mut self) {
        self.our_gap = true;
    }

    /// Our stamps jumped by `jump`: whatever waits goes on waiting as long as before.
    pub(super) fn wall_clock_set(&mut self, jump: Span) {
        self.usable = self.usable.plus(jump);
        if let Some(doubtful) = &mut self.doubtful {
            doubtful.since = doubtful.since.plus(jump);
        }
        self.useless = self.useless.map(|(at, cause)| (at.plus(jump), cause));
        self.good_since = self.good_since.map(|since| since.plus(jump));
    }

    /// A usable block came.
    pub(super) const fn block(&mut self, now: Arrival) {
        self.usable = now;
    }

    /// Something came that is of no use. A doubled or late block among good ones is no fault.
    pub(super) fn useless(&mut self, now: Arrival, cause: Cause) {
        self.useless = Some((now, cause));
        if cause != Cause::Late {
            self.good_since = None;
        }
    }

    /// A reading was closed; it clears the alarm when good ones have come for `after`.
    pub(super) fn reading(
        &mut self,
        reading: &Reading,
        after: Span,
        stands_still: bool,
    ) -> Option<SensorChange> {
        let now = reading.closed;
        let our_gap = core::mem::take(&mut self.our_gap);
        let blames = |doubt: &Doubt| doubt.is_instrument() && *doubt != Doubt::Short;
        let short = reading.doubts.has(Doubt::Short).then_some(Doubt::Short);
        match reading.doubts.iter().find(blames).or(short) {
            Some(Doubt::Flat) if stands_still => {
                // It may have stood already when the flat signal began, before the stop was known.
                let flat = |doubtful: &Doubtful| doubtful.cause == Cause::Doubtful(Doubt::Flat);
                self.doubtful = self.doubtful.filter(|doubtful| !flat(doubtful));
                None
            }
            Some(Doubt::Short) if our_gap => None,
            Some(doubt) => {
                self.good_since = None;
                self.doubtful = Some(Doubtful {
                    since: self.doubtful.map_or(now, |before| before.since),
                    cause: Cause::Doubtful(doubt),
                    least: reading.length().times(2),
                });
                None
            }
            None => {
                self.doubtful = None;
                let since = *self.good_since.get_or_insert(now);
                (self.open.is_some() && now.since(since) >= after).then_some(SensorChange::Cleared)
            }
        }
    }

    /// When the alarm is due if nothing better comes; `None` while one is open.
    pub(super) fn due(&self, after: Span) -> Option<Arrival> {
        if self.open.is_some() {
            return None;
        }
        let silent = self.usable.plus(after);
        Some(
            self.doubtful
                .map_or(silent, |doubtful| silent.min(doubtful.due(after))),
        )
    }

    /// Opens the alarm that has become due.
    pub(super) fn raise(&mut self, now: Arrival, after: Span) -> SensorChange {
        let doubtful = self.doubtful.filter(|doubtful| doubtful.due(after) <= now);
        let (since, cause) = match (doubtful, self.useless) {
            (Some(doubtful), _) => (doubtful.since, doubtful.cause),
            // What came in the first half of the silence does not explain the rest of it.
            (None, Some((at, cause))) if now.since(at).times(2) <= after => (self.usable, cause),
            (None, _) => (self.usable, Cause::Silent),
        };
        self.good_since = None;
        self.open = Some(SensorOccurrence {
            id: None,
            since,
            cause,
        });
        SensorChange::Raised(cause)
    }

    /// Takes out the occurrence that has cleared.
    pub(super) fn take_closed(&mut self) -> Option<SensorOccurrence> {
        self.doubtful = None;
        self.open.take()
    }

    /// Whether what comes now is usable.
    pub(super) const fn good(&self) -> bool {
        self.open.is_none() && self.doubtful.is_none()
    }
}

impl Doubtful {
    fn due(&self, after: Span) -> Arrival {
        self.since.plus(after.max(self.least))
    }
}
