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
    pub(super) fn level(
        &mut self,
        context: Context<'_>,
        reading: &Reading,
        actions: &mut Vec<Action>,
    ) {
        let rule = &context.plan.spec().running;
        let Some((velocity, _)) = reading.velocity else {
            return;
        };
        let believable = reading.doubts.is_empty() || reading.doubts.has(Doubt::SpeedMoving);
        if !believable || self.speeds.fresh(reading.end, rule.speed_valid).is_some() {
            return;
        }
        let recent = reading.end.minus(reading.length());
        let others = self
            .latest
            .iter()
            .flatten()
            .filter(|other| other.end >= recent);
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
            Judging::On | Judging::Resuming(_) if !runs => {
                let told = self.judging != Judging::On;
                self.judging = Judging::Suspended;
                if !told && self.any_open() {
                    self.asset_event(context, message::AssetChange::Suspended, actions);
                }
            }
            Judging::Suspended if runs => {
                self.judging = if self.any_open() {
                    Judging::Resuming(RESUME_READINGS)
                } else {
                    Judging::On
                };
            }
            Judging::On | Judging::Resuming(_) | Judging::Suspended => {}
        }
    }

    /// Counts a judged reading towards going on after a stop; `true` when watches are judged.
    pub(super) fn judging_goes_on(
        &mut self,
        context: Context<'_>,
        actions: &mut Vec<Action>,
    ) -> bool {
        match self.judging {
            Judging::On => true,
            Judging::Suspended => false,
            Judging::Resuming(left) if left > 1 => {
                self.judging = Judging::Resuming(left - 1);
                false
            }
            Judging::Resuming(_) => {
                self.judging = Judging::On;
                self.asset_event(context, message::AssetChange::Resumed, actions);
                true
            }
        }
    }

    pub(super) fn any_open(&self) -> bool {
        self.watches
            .iter()
            .any(|watch| watch.occurrence().is_some())
    }
}
