//! Whether the machine runs, and what a stop does to what stands open: it is held, and goes on afterwards.
//!
//! In: speeds and levels. Out: one event for the asset when judging pauses and something is open, one when it goes
//! on. Nothing rings by it, and with nothing open nothing is told but the state.

use alloc::vec::Vec;

use super::{AssetJudge, Context, Judging, Operating, message, watch::WatchState};
use crate::{
    action::Action,
    plan::Measure,
    reading::{Doubt, Reading},
};

/// With which judged reading after a stop or start judging goes on. Common practice, no source.
const RESUME_READINGS: u8 = 2;

impl AssetJudge {
    /// Lets the state keep up with a reading: by run signal and speed, else by the level.
    ///
    /// The asset's strongest velocity counts: this reading's and that of every other point of about the same time.
    pub(super) fn level(
        &mut self,
        context: Context<'_>,
        point: usize,
        reading: &Reading,
        actions: &mut Vec<Action>,
    ) {
        let spec = context.plan.spec();
        let signal = self.run_signal(context, reading.end);
        if let Some(changed) = self.running.settle(spec, reading.end, signal) {
            if changed {
                self.running_changed(context, actions);
            }
            return;
        }
        let believable = |reading: &Reading| !reading.doubts.iter().any(Doubt::is_instrument);
        let Some((velocity, _)) = reading.velocity.filter(|_| believable(reading)) else {
            return;
        };
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
        if self.running.by_level(&spec.running, reading.end, strongest) {
            self.running_changed(context, actions);
        }
    }

    /// The operating state has changed: what is not held and no longer judged is held, told once for the asset.
    pub(super) fn running_changed(&mut self, context: Context<'_>, actions: &mut Vec<Action>) {
        self.changed = true;
        let runs = self.running.state() == Operating::Running;
        if !runs {
            let stands = self.running.state() == Operating::Stopped;
            let held = self.judging == Judging::Suspended && !stands;
            self.judging = Judging::Suspended;
            if stands {
                for watch in &mut self.watches {
                    watch.disarm();
                }
            }
            // What rang by an armed limit rings on while starting and coasting follow each other.
            if !held && self.watches.iter().any(WatchState::rings) {
                self.hold_all(true);
                self.asset_event(context, message::AssetChange::Suspended, actions);
            }
        } else if self.judging == Judging::Suspended {
            self.judging = Judging::Resuming {
                left: RESUME_READINGS,
                until: None,
            };
        }
    }

    fn hold_all(&mut self, held: bool) {
        for watch in &mut self.watches {
            watch.hold(held);
        }
    }

    /// Counts a judged reading towards going on after a stop or start; `true` when watches are judged.
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
                if self.watches.iter().any(WatchState::is_held) {
                    self.hold_all(false);
                    self.asset_event(context, message::AssetChange::Resumed, actions);
                }
                true
            }
        }
    }
}
