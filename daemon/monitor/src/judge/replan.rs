//! What stays of an asset's state when its plan changes.

use alloc::vec::Vec;

use super::{AssetJudge, Context, Tally, message, sensor::SensorState, watch::WatchState};
use crate::{
    action::Action,
    plan::{AssetPlan, BandPlan, PointPlan, WatchPlan},
    reading::Reading,
};

impl AssetJudge {
    /// Goes over to another plan of the same asset.
    ///
    /// A watch of the same name and measure keeps its open occurrence and is held against the new limits from now
    /// on; where anything it is judged by has changed its timers start anew. An open occurrence whose watch is
    /// gone is withdrawn with an event and its alarm emptied. What a point last read stays with an unchanged point.
    pub fn replan(&mut self, old: &AssetPlan, context: Context<'_>, actions: &mut Vec<Action>) {
        let (before, now) = (old.spec(), context.plan.spec());
        for (index, watch) in before.watches.iter().enumerate() {
            if !now
                .watches
                .iter()
                .any(|new| is_same(old, watch, context.plan, new))
            {
                self.withdraw(old, context, index, actions);
            }
        }
        let watches = now.watches.iter().map(|new| {
            let same = |watch: &WatchPlan| is_same(old, watch, context.plan, new);
            let Some(place) = before.watches.iter().position(same) else {
                return WatchState::default();
            };
            let mut state = self.watches[place].clone();
            if !judges_alike(old, &before.watches[place], context.plan, new) {
                state.restart_timers();
            }
            state
        });
        self.watches = watches.collect();
        let kept = |point: &PointPlan| before.points.iter().position(|old| old.id() == point.id());
        let places: Vec<Option<usize>> = now.points.iter().map(kept).collect();
        for index in 0..before.points.len() {
            if !places.contains(&Some(index)) {
                self.sensor_withdrawn(old, context, index, actions);
            }
        }
        let unchanged = |new: usize| {
            places[new].filter(|place| reads_alike(&before.points[*place], &now.points[new]))
        };
        let readings = |from: &[Option<Reading>]| {
            let points = 0..places.len();
            points.map(|new| from[unchanged(new)?].clone()).collect()
        };
        self.latest = readings(&self.latest);
        self.last_running = readings(&self.last_running);
        let sensor = |place: &Option<usize>| {
            place.map_or_else(
                || SensorState::new(context.arrival),
                |place| self.sensors[place].clone(),
            )
        };
        self.sensors = places.iter().map(sensor).collect();
        self.tallies = alloc::vec![Tally::default(); places.len()];
        self.changed = true;
    }

    /// The asset is no longer in the plan: everything open is withdrawn.
    pub fn retire(&mut self, context: Context<'_>, actions: &mut Vec<Action>) {
        for index in 0..self.watches.len() {
            self.withdraw(context.plan, context, index, actions);
        }
        for point in 0..self.sensors.len() {
            self.sensor_withdrawn(context.plan, context, point, actions);
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

/// Whether two watches ask the same question: same name at the same point, same measure.
fn is_same(old: &AssetPlan, before: &WatchPlan, new: &AssetPlan, now: &WatchPlan) -> bool {
    let measure = match (band(old, before), band(new, now)) {
        (None, None) => before.spec().measure == now.spec().measure,
        (before, now) => before == now,
    };
    before.full_name() == now.full_name() && measure
}

/// The band a watch is about, if it is about one.
fn band<'a>(plan: &'a AssetPlan, watch: &WatchPlan) -> Option<&'a BandPlan> {
    let point = &plan.spec().points[watch.spec().point];
    watch.spec().band(point.spec())
}

/// Whether a reading means the same to both: limits, persistence and how the point reads.
fn judges_alike(old: &AssetPlan, before: &WatchPlan, new: &AssetPlan, now: &WatchPlan) -> bool {
    let rules = |watch: &WatchPlan| {
        let spec = watch.spec();
        let after = (spec.alert_after, spec.danger_after, spec.clear_after);
        (spec.limits, spec.at_least_ms2, after)
    };
    let (then, point) = (&old.spec().points, &new.spec().points);
    rules(before) == rules(now)
        && old.spec().reading_every == new.spec().reading_every
        && reads_alike(&then[before.spec().point], &point[now.spec().point])
}

/// Whether a point reads as before; what people call it does not matter.
fn reads_alike(before: &PointPlan, now: &PointPlan) -> bool {
    let mut spec = now.spec().clone();
    spec.name.clone_from(&before.spec().name);
    *before.spec() == spec
}
