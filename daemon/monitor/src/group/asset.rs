//! One asset of a group: its points' analysis and its judge, and the way a block takes through both.
//!
//! The analysis may be thrown away; what the judge holds must last.

use alloc::vec::Vec;

use humward_signal::frame::Scratch;
use humward_wire::block::Block;

use crate::{
    action::Action,
    analysis::{Arriving, PointAnalysis, Progress, Speeds},
    judge::{AssetJudge, Context, SpeedTrack},
    plan::AssetPlan,
    reading::ShaftSpeed,
    time::SignalTime,
};

/// One asset's state: what may be thrown away and what must last.
pub(super) struct Asset {
    /// One analysis per point, in the order of the plan.
    pub(super) points: Vec<PointAnalysis>,
    /// The lasting state.
    pub(super) judge: AssetJudge,
}

/// The speeds of one asset, as its analysis asks for them.
struct AssetSpeeds<'a> {
    plan: &'a AssetPlan,
    track: &'a SpeedTrack,
}

impl Speeds for AssetSpeeds<'_> {
    fn over(&self, start: SignalTime, end: SignalTime) -> (ShaftSpeed, bool) {
        self.track.over(start, end, self.plan)
    }
}

impl Asset {
    /// Takes in a block at one of its points; the loss it counts under, if any.
    pub(super) fn push(
        &mut self,
        context: Context<'_>,
        point: usize,
        block: &Block,
        at: SignalTime,
        scratch: &mut Scratch,
        actions: &mut Vec<Action>,
    ) -> Option<&'static str> {
        let plan = context.plan.spec().points[point].spec();
        let mut from = None;
        loop {
            let speeds = AssetSpeeds {
                plan: context.plan,
                track: self.judge.speeds(),
            };
            let arriving = Arriving {
                block,
                at,
                arrival: context.arrival,
                speeds: &speeds,
            };
            let analysis = &mut self.points[point];
            match analysis.advance(plan, arriving, &mut from, scratch) {
                Progress::Closed(reading) => {
                    let traces = || analysis.traces();
                    self.judge
                        .reading(context, point, *reading, &traces, actions);
                }
                Progress::Done(taken) => return self.judge.block(point, taken, context.arrival),
            }
        }
    }

    /// Closes the reading of a point that waits for its last blocks.
    pub(super) fn close_overdue(
        &mut self,
        context: Context<'_>,
        point: usize,
        actions: &mut Vec<Action>,
    ) {
        let plan = context.plan.spec().points[point].spec();
        let speeds = AssetSpeeds {
            plan: context.plan,
            track: self.judge.speeds(),
        };
        let reading = self.points[point].close_overdue(plan, context.arrival, &speeds);
        if let Some(reading) = reading {
            let analysis = &self.points[point];
            self.judge
                .reading(context, point, reading, &|| analysis.traces(), actions);
        }
    }
}
