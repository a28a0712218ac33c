//! The instrument alarm of one point: its sensor, cable or link does not give what can be judged.
//!
//! Goes by arrival time, because a dead sensor has no time of its own. Raised when nothing usable has come for
//! as long as the plan allows; cleared when good readings have come for as long again.

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

/// State of one point's instrument alarm.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct SensorState {
    usable: Arrival,
    bad: Option<(Arrival, Cause)>,
    why_not_usable: Cause,
    good_since: Option<Arrival>,
    open: Option<SensorOccurrence>,
}

impl SensorState {
    /// A sensor that has had its chance since `from`.
    pub(super) const fn new(from: Arrival) -> Self {
        Self {
            usable: from,
            bad: None,
            why_not_usable: Cause::Silent,
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

    /// Forgets the silence up to `now`: the link was down, the sensor is not to blame.
    pub(super) fn excuse(&mut self, now: Arrival) {
        self.usable = now;
        self.why_not_usable = Cause::Silent;
    }

    /// A usable block came.
    pub(super) fn block(&mut self, now: Arrival) {
        self.usable = now;
        self.why_not_usable = Cause::Silent;
    }

    /// A block came that is of no use.
    pub(super) fn useless(&mut self, cause: Cause) {
        self.why_not_usable = cause;
        self.good_since = None;
    }

    /// A reading was closed; it clears the alarm when good ones have come for `after`.
    pub(super) fn reading(&mut self, reading: &Reading, after: Span) -> Option<SensorChange> {
        let now = reading.closed;
        // A reading that is short because the stream has only begun or has a known hole is not the sensor's fault.
        let blame = reading
            .doubts
            .iter()
            .find(|doubt| doubt.is_instrument() && *doubt != Doubt::Short);
        match blame {
            Some(doubt) => {
                self.good_since = None;
                let since = self.bad.map_or(now, |(since, _)| since);
                self.bad = Some((since, Cause::Doubtful(doubt)));
                None
            }
            None if reading.doubts.has(Doubt::Short) => None,
            None => {
                self.bad = None;
                let since = *self.good_since.get_or_insert(now);
                if self.open.is_some() && now.since(since) >= after {
                    Some(SensorChange::Cleared)
                } else {
                    None
                }
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
            self.bad
                .map_or(silent, |(since, _)| silent.min(since.plus(after))),
        )
    }

    /// Opens the alarm that has become due.
    pub(super) fn raise(&mut self, now: Arrival, after: Span) -> SensorChange {
        let (since, cause) = match self.bad {
            Some((since, cause)) if since.plus(after) <= now => (since, cause),
            _ => (self.usable, self.why_not_usable),
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
        self.bad = None;
        self.open.take()
    }

    /// Whether what comes now is usable.
    pub(super) const fn good(&self) -> bool {
        self.open.is_none() && self.bad.is_none()
    }
}
