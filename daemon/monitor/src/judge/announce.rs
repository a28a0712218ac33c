//! Numbers what happened and says it: event, retained alarm, evidence.

use alloc::vec::Vec;

use humward_wire::{
    id::Id,
    out::{Event, Severity},
};

use super::{AssetJudge, Context, armed::Armed, message, sensor::SensorChange, watch::Change};
use crate::{action::Action, analysis::Traces, plan::AssetPlan, reading::Reading};

/// What a reading did to a watch, and the armed limit if it was that.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Turn {
    pub(super) change: Change,
    pub(super) armed: Option<Armed>,
}

impl AssetJudge {
    pub(super) fn watch_changed(
        &mut self,
        context: Context<'_>,
        index: usize,
        reading: &Reading,
        turn: Turn,
        traces: &dyn Fn() -> Option<Traces>,
        actions: &mut Vec<Action>,
    ) {
        self.n += 1;
        self.changed = true;
        let id = message::event_id(context.identity, self.n);
        if matches!(turn.change, Change::Raised(_)) {
            self.watches[index].name_occurrence(id.clone());
        }
        let event = message::watch_event(self, context, index, reading, turn, id.clone());
        let closed = self.watches[index].take_closed().is_some();
        let full_name = context.plan.spec().watches[index].full_name();
        let open = (!closed).then(|| message::alarm_of(&event));
        actions.push(Action::Event(event));
        actions.push(Action::Alarm {
            asset: context.plan.id().clone(),
            watch: full_name.into(),
            open,
        });
        if matches!(
            turn.change,
            Change::Raised(_) | Change::Worsened | Change::Reraised
        ) && let Some(traces) = traces()
        {
            actions.push(Action::Evidence(message::evidence(
                context, index, reading, id, traces,
            )));
        }
    }

    pub(super) fn sensor_changed(
        &mut self,
        context: Context<'_>,
        point: usize,
        change: SensorChange,
        actions: &mut Vec<Action>,
    ) {
        self.n += 1;
        self.changed = true;
        let id = message::event_id(context.identity, self.n);
        if matches!(change, SensorChange::Raised(_)) {
            self.sensors[point].name_occurrence(id.clone());
        }
        let event = message::sensor_event(self, context, point, change, id);
        if change == SensorChange::Cleared {
            self.sensors[point].take_closed();
        }
        self.push_sensor_event(
            context.plan,
            context.plan.spec().points[point].id(),
            event,
            actions,
        );
    }

    fn push_sensor_event(
        &self,
        plan: &AssetPlan,
        point: &Id,
        event: Event,
        actions: &mut Vec<Action>,
    ) {
        let stands = event.finding.standing.severity() != Severity::None;
        let open = stands.then(|| message::alarm_of(&event));
        actions.push(Action::Event(event));
        actions.push(Action::Alarm {
            asset: plan.id().clone(),
            watch: message::sensor_watch(point),
            open,
        });
    }

    pub(super) fn asset_event(
        &mut self,
        context: Context<'_>,
        change: message::AssetChange,
        actions: &mut Vec<Action>,
    ) {
        self.n += 1;
        self.changed = true;
        let id = message::event_id(context.identity, self.n);
        actions.push(Action::Event(message::asset_event(
            self,
            context,
            change,
            id.clone(),
        )));
        for index in 0..self.watches.len() {
            if let Some(alarm) = message::held_alarm(self, context, index, change, id.clone()) {
                let watch = context.plan.spec().watches[index].full_name().into();
                actions.push(Action::Alarm {
                    asset: context.plan.id().clone(),
                    watch,
                    open: Some(alarm),
                });
            }
        }
    }
}
