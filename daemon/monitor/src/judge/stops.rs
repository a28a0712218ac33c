//! Whether the machine runs, and what a stop does to what stands open: it is held, and goes on afterwards.
//!
//! In: speeds and levels. Out: one event for the asset when judging pauses, one when it goes on. Nothing rings by it.

use alloc::vec::Vec;

use super::{AssetJudge, Context, Judging, Operating, message};
use crate::{
    action::Action,
    plan::Measure,
    reading::{Doubt, Reading},
};

/// Judged readings after a stop before what was suspended goes on. Common practice, no source.
const RESUME_READINGS: u8 = 2;

impl AssetJudge {
    /// Tells from the level whether the machine runs, where no fresh speed or run signal does.
    ///
    /// The asset's strongest velocity counts: this reading's and that of every other point of about the same time.
    pub(super) fn level(
        &mut self,
        context: Context<'_>,
        point: usize,
        reading: &Reading,
        actions: &mut Vec<Action>,
    ) {
        let rule = &context.plan.spec().running;
        let Some((velocity, _)) = reading.velocity else {
            return;
        };
        let believable = |reading: &Reading| !reading.doubts.iter().any(Doubt::is_instrument);
        if !believable(reading) || self.run_signal_fresh(context, reading.end) {
            return;
        }
        if let Some(rpm) = self.speeds.fresh(reading.end, rule.speed_valid) {
            // It decided when it was reported, unless a run signal that has gone stale since stood before it.
            if self.running.by_speed(rule, reading.end, rpm) {
                self.running_changed(context, actions);
            }
            return;
        }
        let recent = reading.end.minus(reading.length());
        let others = self
            .latest
            .iter()
            .enumerate()
            .filter(|(other, _)| *other != point)
            .filter_map(|(_, latest)| latest.as_ref())
            .filter(|other| other.end >= recent && believable(other));
        let strongest = others
            .filter_map(|other| other.value(Measure::VelocityRms))
            .fold(velocity, f64::max);
        if self.running.by_level(rule, reading.end, strongest) {
            self.running_changed(context, actions);
        }
    }

    pub(super) fn running_changed(&mut self, context: Context<'_>, actions: &mut Vec<Action>) {
        self.changed = true;
        let runs = self.running.state() == Operating::Running;
        match self.judging {
            Judging::On | Judging::Resuming { .. } if !runs => {
                let told = self.judging != Judging::On;
                self.judging = Judging::Suspended;
                if !told && self.any_open() {
                    self.asset_event(context, message::AssetChange::Suspended, actions);
                }
            }
            Judging::Suspended if runs => {
                self.judging = if self.any_open() {
                    Judging::Resuming {
                        left: RESUME_READINGS,
                        until: None,
                    }
                } else {
                    Judging::On
                };
            }
            Judging::On | Judging::Resuming { .. } | Judging::Suspended => {}
        }
    }

    /// Counts a judged reading towards going on after a stop; `true` when watches are judged.
    ///
    /// Readings of several points that end together are one.
    pub(super) fn judging_goes_on(
        &mut self,
        context: Context<'_>,
        reading: &Reading,
        actions: &mut Vec<Action>,
    ) -> bool {
        match self.judging {
            Judging::On => true,
            Judging::Suspended => false,
            Judging::Resuming { until, .. } if until.is_some_and(|until| reading.end <= until) => {
                false
            }
            Judging::Resuming { left, .. } if left > 1 => {
                self.judging = Judging::Resuming {
                    left: left - 1,
                    until: Some(reading.end),
                };
                false
            }
            Judging::Resuming { .. } => {
                self.judging = Judging::On;
                self.asset_event(context, message::AssetChange::Resumed, actions);
                true
            }
        }
    }

    /// Whether a machine watch has an open occurrence.
    pub(super) fn any_open(&self) -> bool {
        self.watches
            .iter()
            .any(|watch| watch.occurrence().is_some())
    }
}
