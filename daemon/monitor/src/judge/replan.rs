//! What stays of an asset's state when its plan changes.

use alloc::vec::Vec;

use humward_wire::id::Id;

use super::{AssetJudge, Context, Tally, message, sensor::SensorState, watch::WatchState};
use crate::{
    action::Action,
    plan::{AssetPlan, WatchPlan},
    reading::Reading,
};

impl AssetJudge {
    /// Goes over to another plan of the same asset: unchanged watches and points keep their state, an open
    /// occurrence whose watch is gone is withdrawn with an event and its alarm emptied.
    pub fn replan(&mut self, old: &AssetPlan, context: Context<'_>, actions: &mut Vec<Action>) {
        let kept = |plan: &AssetPlan, id: &Id| {
            plan.spec().points.iter().position(|point| point.id() == id)
        };
        for index in 0..self.watches.len() {
            let gone = !context
                .plan
                .spec()
                .watches
                .iter()
                .any(|watch| same_watch(old, context.plan, index, watch));
            if gone {
                self.withdraw(old, context, index, actions);
            }
        }
        let watches = context.plan.spec().watches.iter().map(|watch| {
            let before =
                (0..self.watches.len()).find(|index| same_watch(old, context.plan, *index, watch));
            before.map_or_else(WatchState::default, |index| self.watches[index].clone())
        });
        let watches = watches.collect();
        for (index, point) in old.spec().points.iter().enumerate() {
            if kept(context.plan, point.id()).is_none() && self.sensors[index].open().is_some() {
                self.sensor_withdrawn(old, context, index, actions);
            }
        }
        let points = context
            .plan
            .spec()
            .points
            .iter()
            .map(|point| kept(old, point.id()));
        let places: Vec<Option<usize>> = points.collect();
        let take = |place: &Option<usize>, from: &[Option<Reading>]| {
            place.and_then(|place| from[place].clone())
        };
        self.latest = places
            .iter()
            .map(|place| take(place, &self.latest))
            .collect();
        self.last_running = places
            .iter()
            .map(|place| take(place, &self.last_running))
            .collect();
        let sensor = |place: &Option<usize>| {
            place.map_or_else(
                || SensorState::new(context.arrival),
                |place| self.sensors[place].clone(),
            )
        };
        self.sensors = places.iter().map(sensor).collect();
        self.tallies = alloc::vec![Tally::default(); places.len()];
        self.watches = watches;
        self.changed = true;
    }

    /// The asset is no longer in the plan: everything open is withdrawn.
    pub fn retire(&mut self, context: Context<'_>, actions: &mut Vec<Action>) {
        for index in 0..self.watches.len() {
            self.withdraw(context.plan, context, index, actions);
        }
        for point in 0..self.sensors.len() {
            if self.sensors[point].open().is_some() {
                self.sensor_withdrawn(context.plan, context, point, actions);
            }
        }
    }

    fn withdraw(
        &mut self,
        old: &AssetPlan,
        context: Context<'_>,
        index: usize,
        actions: &mut Vec<Action>,
    ) {
        if let Some(closed) = self.watches[index].withdraw() {
            self.n += 1;
            let id = message::event_id(context.identity, self.n);
            let watch = old.spec().watches[index].full_name();
            actions.push(Action::Event(message::withdrawn_event(
                self, context, watch, closed.id, id,
            )));
            actions.push(Action::Alarm {
                asset: old.id().clone(),
                watch: watch.into(),
                open: None,
            });
        }
    }

    fn sensor_withdrawn(
        &mut self,
        old: &AssetPlan,
        context: Context<'_>,
        point: usize,
        actions: &mut Vec<Action>,
    ) {
        if let Some(closed) = self.sensors[point].take_closed() {
            self.n += 1;
            let id = message::event_id(context.identity, self.n);
            let watch = message::sensor_watch(old.spec().points[point].id());
            actions.push(Action::Event(message::withdrawn_event(
                self, context, &watch, closed.id, id,
            )));
            actions.push(Action::Alarm {
                asset: old.id().clone(),
                watch,
                open: None,
            });
        }
    }
}

/// Whether `watch` of the new plan is the old plan's watch `index`, unchanged.
fn same_watch(old: &AssetPlan, new: &AssetPlan, index: usize, watch: &WatchPlan) -> bool {
    let before = &old.spec().watches[index];
    let point = |plan: &AssetPlan, watch: &WatchPlan| {
        let point = &plan.spec().points[watch.spec().point];
        (
            point.clone(),
            watch.spec().limits,
            watch.spec().measure,
            watch.spec().at_least_ms2,
        )
    };
    before.full_name() == watch.full_name() && point(old, before) == point(new, watch)
}
