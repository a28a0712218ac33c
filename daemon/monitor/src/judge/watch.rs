//! One watch and its open occurrence: when it is raised, worsens, eases and clears.
//!
//! In: judged readings of the watch's point. Out: at most one change a reading. A reading that was
//! clipped is only a lower bound: it can push towards danger, never away from it.

use humward_wire::{id::Id, out::Severity};

use crate::{
    judge::counter::Counter,
    plan::{Limit, Measure, Persistence, WatchPlan},
    reading::{Doubt, Reading},
    time::SignalTime,
};

/// What happened to a watch's occurrence.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Change {
    /// A new occurrence, at this severity.
    Raised(Severity),
    /// From alert to danger.
    Worsened,
    /// Danger that was held is there again while the machine starts.
    Reraised,
    /// From danger back to alert.
    Eased,
    /// Back to normal: the occurrence is closed.
    Cleared,
}

/// One life of an alarm.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Occurrence {
    /// Its id, that of the event which raised it; `None` until that event has its number.
    pub(super) id: Option<Id>,
    /// When the condition began.
    pub(super) since: SignalTime,
    /// The last value before the condition began, in the measure's unit; `None` when it held from the first reading on.
    pub(super) before: Option<f64>,
    /// Whether it is held: the machine did not run since, or has only just begun to.
    pub(super) held: bool,
    /// High-band acceleration when it was raised, m/s2 rms: what must not have risen for a bearing to be back.
    high_band_at_raise: Option<f64>,
}

/// The lasting state of one watch.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct WatchState {
    severity: Severity,
    occurrence: Option<Occurrence>,
    quiet: Option<f64>,
    alert: Counter,
    danger: Counter,
    ease: Counter,
    clear: Counter,
    /// Over the limit armed while the machine starts.
    armed: Counter,
}

/// How far the high band may stand above its value at the raise for a bearing to count as back: 25 %,
/// common practice, no source.
const HIGH_BAND_BACK: f64 = 1.25;

impl Default for WatchState {
    fn default() -> Self {
        Self {
            severity: Severity::None,
            occurrence: None,
            quiet: None,
            alert: Counter::default(),
            danger: Counter::default(),
            ease: Counter::default(),
            clear: Counter::default(),
            armed: Counter::default(),
        }
    }
}

impl WatchState {
    /// How bad it is now.
    pub(super) const fn severity(&self) -> Severity {
        self.severity
    }

    /// The open occurrence.
    pub(super) const fn occurrence(&self) -> Option<&Occurrence> {
        self.occurrence.as_ref()
    }

    /// Holds the open occurrence, or lets it go on.
    pub(super) const fn hold(&mut self, held: bool) {
        if let Some(open) = &mut self.occurrence {
            open.held = held;
        }
    }

    /// Whether an occurrence is open and held.
    pub(super) fn is_held(&self) -> bool {
        self.occurrence.as_ref().is_some_and(|open| open.held)
    }

    /// Whether an occurrence is open and not held.
    pub(super) fn rings(&self) -> bool {
        self.occurrence.as_ref().is_some_and(|open| !open.held)
    }

    /// Forgets how long the armed limit has been passed: another start or stop begins.
    pub(super) fn disarm(&mut self) {
        self.armed.reset();
    }

    /// Gives the open occurrence the id of the event that raised it.
    pub(super) fn name_occurrence(&mut self, id: Id) {
        if let Some(open) = &mut self.occurrence {
            open.id = Some(id);
        }
    }

    /// Forgets how far each persistence has come; what stands open stays.
    pub(super) fn restart_timers(&mut self) {
        self.alert.reset();
        self.danger.reset();
        self.ease.reset();
        self.clear.reset();
        self.armed.reset();
    }

    /// Closes whatever is open, because its watch or asset is no longer there.
    pub(super) fn withdraw(&mut self) -> Option<Occurrence> {
        let open = self.occurrence.take();
        *self = Self::default();
        open
    }

    /// Readings on which the condition behind a change has held.
    pub(super) const fn readings(&self, change: Change) -> u32 {
        match change {
            Change::Raised(Severity::Danger) | Change::Worsened => self.danger.held(),
            Change::Raised(_) => self.alert.held(),
            Change::Reraised => self.armed.held(),
            Change::Eased => self.ease.held(),
            Change::Cleared => self.clear.held(),
        }
    }

    /// Readings on which the armed limit has been passed.
    pub(super) const fn armed_readings(&self) -> u32 {
        self.armed.held()
    }

    /// Judges the part `from` to `to` of a reading by the armed limit, which it passes or not.
    pub(super) fn judge_armed(
        &mut self,
        passed: bool,
        reading: &Reading,
        from: SignalTime,
        to: SignalTime,
        after: Persistence,
    ) -> Option<Change> {
        if !self.armed.feed_part(passed, from, to, after) {
            return None;
        }
        let change = match self.severity {
            Severity::None => Change::Raised(Severity::Danger),
            Severity::Alert => Change::Worsened,
            Severity::Danger if self.is_held() => Change::Reraised,
            Severity::Danger => return None,
        };
        self.become_severe(
            Severity::Danger,
            self.armed.since().unwrap_or(from),
            reading,
        );
        self.hold(false);
        Some(change)
    }

    /// Judges one reading of the watch's point.
    ///
    /// A reading without a value for the measure, or doubtful in a way that leaves no bound, changes nothing.
    pub(super) fn judge(&mut self, plan: &WatchPlan, reading: &Reading) -> Option<Change> {
        let spec = plan.spec();
        let value = reading.value(spec.measure)?;
        let lower_bound = reading.doubts.has(Doubt::Clipped);
        if lower_bound && !(reading.doubts.only_clipped() && spec.quantity.clipping_only_lowers()) {
            return None;
        }
        if !lower_bound && !reading.doubts.is_empty() {
            return None;
        }
        let counts = Self::counts(plan, reading);
        let over =
            |limit: Option<Limit>| counts && limit.is_some_and(|limit| value >= limit.value());
        let (over_alert, over_danger) = (over(spec.limits.alert()), over(spec.limits.danger()));
        if lower_bound {
            return over_danger
                .then(|| self.rise(plan, reading, true, true))
                .flatten();
        }
        let risen = self.rise(plan, reading, over_alert, over_danger);
        let nothing_pending = self.alert.since().is_none() && self.danger.since().is_none();
        if nothing_pending {
            self.quiet = Some(value);
        }
        risen.or_else(|| self.fall(plan, reading, value, counts))
    }

    /// Whether the value carries weight: a bearing line below its least strength does not.
    fn counts(plan: &WatchPlan, reading: &Reading) -> bool {
        match (plan.spec().measure, plan.spec().at_least_ms2) {
            (Measure::Bearing(race), Some(least)) => {
                reading.line(race).is_some_and(|line| line.ms2 >= least)
            }
            _ => true,
        }
    }

    fn rise(
        &mut self,
        plan: &WatchPlan,
        reading: &Reading,
        over_alert: bool,
        over_danger: bool,
    ) -> Option<Change> {
        let spec = plan.spec();
        let alert_met = self.alert.feed(over_alert, reading, spec.alert_after);
        let danger_met = self.danger.feed(over_danger, reading, spec.danger_after);
        let (target, since) = if danger_met && spec.limits.danger().is_some() {
            (Severity::Danger, self.danger.since())
        } else if alert_met && spec.limits.alert().is_some() {
            (Severity::Alert, self.alert.since())
        } else {
            return None;
        };
        if target <= self.severity {
            return None;
        }
        let change = if self.severity == Severity::None {
            Change::Raised(target)
        } else {
            Change::Worsened
        };
        let since = self.alert.since().or(since).unwrap_or(reading.start);
        self.become_severe(target, since, reading);
        Some(change)
    }

    fn become_severe(&mut self, severity: Severity, since: SignalTime, reading: &Reading) {
        self.severity = severity;
        self.ease.reset();
        self.clear.reset();
        if self.occurrence.is_none() {
            self.occurrence = Some(Occurrence {
                id: None,
                since,
                before: self.quiet,
                held: false,
                high_band_at_raise: reading.high_band_rms,
            });
        }
    }

    fn fall(
        &mut self,
        plan: &WatchPlan,
        reading: &Reading,
        value: f64,
        counts: bool,
    ) -> Option<Change> {
        if self.severity == Severity::None {
            return None;
        }
        let spec = plan.spec();
        let back = |limit: Option<Limit>| {
            limit.is_some_and(|limit| !counts || value < limit.value() - spec.limits.deadband())
                && self.high_band_back(spec.measure, reading)
        };
        let lowest = spec.limits.alert().or(spec.limits.danger());
        // A danger whose limit was taken out of the plan is none any more.
        let back_from_danger = spec.limits.danger().is_none() || back(spec.limits.danger());
        let back_from_all = back(lowest);
        let eased = self.ease.feed(back_from_danger, reading, spec.clear_after);
        let cleared = self.clear.feed(back_from_all, reading, spec.clear_after);
        if cleared {
            self.severity = Severity::None;
            self.alert.reset();
            self.danger.reset();
            Some(Change::Cleared)
        } else if eased && self.severity == Severity::Danger && spec.limits.alert().is_some() {
            self.severity = Severity::Alert;
            self.danger.reset();
            Some(Change::Eased)
        } else {
            None
        }
    }

    /// When the value came back below what the open occurrence stands for; `None` while it is not.
    pub(super) const fn back_since(&self) -> Option<SignalTime> {
        self.clear.since()
    }

    /// Takes out the occurrence a [`Change::Cleared`] has closed.
    pub(super) fn take_closed(&mut self) -> Option<Occurrence> {
        if self.severity == Severity::None {
            self.occurrence.take()
        } else {
            None
        }
    }

    /// A bearing line that sinks in a rising floor is not back: the high band must be back, too.
    fn high_band_back(&self, measure: Measure, reading: &Reading) -> bool {
        let Measure::Bearing(_) = measure else {
            return true;
        };
        match (
            self.occurrence.as_ref().and_then(|o| o.high_band_at_raise),
            reading.high_band_rms,
        ) {
            (Some(at_raise), Some(now)) => now <= HIGH_BAND_BACK * at_raise,
            (Some(_), None) => false,
            (None, _) => true,
        }
    }
}
