//! What is said about a sensor: that it gives nothing to judge by, and that it does again.

use alloc::{
    format,
    string::{String, ToString},
    vec::Vec,
};

use humward_wire::{
    id::Id,
    out::{Event, Finding, Instant, Severity, Standing, State, Transition},
};

use super::{bare, event};
use crate::judge::{
    AssetJudge, Context,
    sensor::SensorChange,
    sentence::{self, clock},
    words,
};

/// Name of a point's instrument watch.
pub(in crate::judge) fn sensor_watch(point: &Id) -> String {
    let mut name = format!("sensor.{point}");
    name.truncate(64);
    name
}

/// The event of a point's instrument watch.
pub(in crate::judge) fn sensor_event(
    judge: &AssetJudge,
    context: Context<'_>,
    point: usize,
    change: SensorChange,
    id: Id,
) -> Event {
    let plan = context.plan.spec().points[point].spec();
    let open = judge.sensors[point].open();
    let now = Instant(context.arrival.ns());
    let since = open.map(|open| Instant(open.since.ns()));
    let began = since.map_or_else(String::new, |since| format!(" since {}", clock(since, now)));
    let (transition, standing, text, checks) = match change {
        SensorChange::Raised(cause) => {
            let place = sentence::place("ALERT", context.plan, Some(plan));
            let what = format!("{place}: no usable signal{began}, {}.", words::cause(cause));
            let meanwhile = words::meanwhile(cause).to_string();
            let checks = words::sensor_checks(cause);
            let text = sentence::with_checks(&[what, meanwhile], "Next", &checks);
            let standing = Standing::new(State::Unack, Severity::Alert);
            (Transition::Raised, standing, text, checks)
        }
        SensorChange::Cleared => {
            let place = sentence::place("CLEARED", context.plan, Some(plan));
            let what = format!("{place}: the sensor is good again; it had not been{began}.");
            let standing = Standing::new(State::Norm, Severity::None);
            (
                Transition::Cleared,
                standing,
                sentence::join(&[what]),
                Vec::new(),
            )
        }
    };
    let finding = Finding {
        occurrence: open.and_then(|open| open.id.clone()),
        point: Some(plan.id.clone()),
        watch: Some(sensor_watch(&plan.id)),
        since,
        checks: checks.iter().map(ToString::to_string).collect(),
        ..bare(judge, standing, None, text)
    };
    event(context, judge.n, id, now, transition, finding)
}
