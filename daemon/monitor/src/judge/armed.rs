//! Danger while running limits do not hold: what is absolute and in rms stays armed at a multiple of its limit.
//!
//! In: readings that running limits do not judge while the machine turns: it starts or coasts, or its speed moves or
//! is not sure. Out: at most one ring per watch until it stands or is judged again. Every reading counts that is
//! believable or a lower bound, credited with the part of it in which the machine turned; a machine that has begun to
//! coast is judged by lower bounds alone for two minutes, as it may pass a resonance on its way to standstill. A speed
//! that hunts, so that starting and coasting follow each other, keeps the credit. What rings leaves being held; running
//! limits take over when judging goes on.

use alloc::vec::Vec;

use super::{AssetJudge, Context, Operating, announce::Turn, running::Unsettled};
use crate::{action::Action, analysis::Traces, plan::Persistence, reading::Reading};

/// The limit a watch was armed at when it rang.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Armed {
    /// In the measure's unit.
    pub(super) limit: f64,
    /// The multiple of danger it is.
    pub(super) factor: f64,
    /// What the machine was doing.
    pub(super) during: Operating,
}

impl Armed {
    /// How a sentence names the time it rang in.
    pub(super) const fn during(&self) -> &'static str {
        match self.during {
            Operating::Coasting => "coasting",
            Operating::Running => "its speed is unsteady",
            Operating::Unknown | Operating::Stopped | Operating::Starting => "starting",
        }
    }
}

impl AssetJudge {
    /// Holds a reading that running limits do not judge against the armed ones.
    pub(super) fn judge_armed(
        &mut self,
        context: Context<'_>,
        point: usize,
        reading: &Reading,
        traces: &dyn Fn() -> Option<Traces>,
        actions: &mut Vec<Action>,
    ) {
        let spec = context.plan.spec();
        let Some(unsettled) = self.running.unsettled(reading.start, reading.end) else {
            return;
        };
        let Unsettled {
            during, from, to, ..
        } = unsettled;
        let bound = reading.doubts.is_a_bound();
        let judged = bound || (reading.doubts.only_moving() && !unsettled.passing);
        if !judged {
            return;
        }
        let after = Persistence::Time(spec.starting.after);
        for (index, watch) in spec.watches.iter().enumerate() {
            let armed = spec.starting.armed(watch.spec());
            let value = reading.value(watch.spec().measure);
            let here = watch.spec().point == point;
            let Some((limit, value)) = armed.zip(value).filter(|_| here) else {
                continue;
            };
            // A lower bound below the limit says nothing.
            if bound && value < limit {
                continue;
            }
            let held = value >= limit;
            let change = self.watches[index].judge_armed(held, reading, from, to, after);
            if let Some(change) = change {
                let armed = Armed {
                    limit,
                    factor: spec.starting.factor,
                    during,
                };
                let turn = Turn {
                    change,
                    armed: Some(armed),
                };
                self.watch_changed(context, index, reading, turn, traces, actions);
            }
        }
    }
}
