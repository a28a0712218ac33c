//! Danger while a machine starts or coasts: what is absolute and in rms stays armed at a multiple of its limit.
//!
//! In: readings that running limits do not judge. Out: at most one ring per watch and start. A start is judged by
//! every reading that is believable or a lower bound, credited with the part of it that lies in the start; a coasting
//! machine by lower bounds alone. What rings leaves being held; running limits take over when judging goes on.

use alloc::vec::Vec;

use super::{AssetJudge, Context, Operating, announce::Turn};
use crate::{action::Action, analysis::Traces, plan::Persistence, reading::Reading};

/// The limit a watch was armed at when it rang.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Armed {
    /// In the measure's unit.
    pub(super) limit: f64,
    /// The multiple of danger it is.
    pub(super) factor: f64,
    /// Whether the machine was starting or coasting.
    pub(super) during: Operating,
}

impl Armed {
    /// How a sentence names the time it rang in.
    pub(super) const fn during(&self) -> &'static str {
        match self.during {
            Operating::Coasting => "coasting",
            Operating::Unknown | Operating::Stopped | Operating::Starting | Operating::Running => {
                "starting"
            }
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
        let Some((during, from, to)) = self.running.changing(reading.start, reading.end) else {
            return;
        };
        let bound = reading.doubts.is_a_bound();
        let judged = bound || (during == Operating::Starting && reading.doubts.only_moving());
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
