//! What is said when judging of an asset pauses and goes on: one event, and every alarm that is held.

use alloc::{format, string::String};

use humward_wire::{
    id::Id,
    out::{
        Alarm, Event, Finding, Instant, Limit, MAX_EVENT, Message, Quality, Severity, Standing,
        State, Transition,
    },
};

use super::{bare, event, header, severity_word};
use crate::{
    judge::{
        AssetJudge, Context, Operating, account,
        sentence::{self, clock, two_digits},
        watch::WatchState,
        words,
    },
    plan::Quantity,
};

/// What happens to an asset as a whole.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(in crate::judge) enum AssetChange {
    /// Judging paused.
    Suspended,
    /// Judging goes on.
    Resumed,
}

/// The event of an asset whose judging paused or goes on.
pub(in crate::judge) fn asset_event(
    judge: &AssetJudge,
    context: Context<'_>,
    change: AssetChange,
    id: Id,
) -> Event {
    let open = judge
        .watches
        .iter()
        .filter(|watch| watch.occurrence().is_some())
        .count();
    let severities = judge.watches.iter().map(WatchState::severity);
    let worst = severities.max().unwrap_or(Severity::None);
    let at = judge
        .running
        .since()
        .map_or(context.arrival.ns(), |since| since.ns());
    let since = clock(Instant(at), Instant(context.arrival.ns()));
    let alarms = if open == 1 {
        "1 open alarm is"
    } else {
        &format!("{open} open alarms are")
    };
    let severity = severity_word(worst);
    let doing = match judge.running.state() {
        Operating::Unknown | Operating::Stopped => "stopped",
        Operating::Starting => "starting",
        Operating::Running => "running",
        Operating::Coasting => "coasting",
    };
    let (transition, state, text) = match change {
        AssetChange::Suspended => {
            let place = sentence::place(&format!("{severity} held"), context.plan, None);
            let text = format!(
                "{place}: {doing} since {since}. {alarms} held, not ended; judging goes on when it runs steadily again."
            );
            (Transition::Suspended, State::Dsupr, text)
        }
        AssetChange::Resumed => {
            let place = sentence::place(&format!("{severity} open"), context.plan, None);
            let text = format!("{place}: {doing} again since {since}. {alarms} judged again.");
            (Transition::Resumed, State::Unack, text)
        }
    };
    let text = sentence::join(&[text]);
    let finding = bare(judge, Standing::new(state, worst), None, text);
    event(context, judge.n, id, Instant(at), transition, finding)
}

/// The retained state of an open occurrence whose judging paused or goes on; `None` where nothing is open.
pub(in crate::judge) fn held_alarm(
    judge: &AssetJudge,
    context: Context<'_>,
    index: usize,
    change: AssetChange,
    id: Id,
) -> Option<Alarm> {
    let state = &judge.watches[index];
    let occurrence = state.occurrence()?;
    let plan = &context.plan.spec().watches[index];
    let spec = plan.spec();
    let point = context.plan.spec().points[spec.point].spec();
    let now = Instant(context.arrival.ns());
    let (kind, word) = match change {
        AssetChange::Suspended => (State::Dsupr, "held until the machine runs steadily again"),
        AssetChange::Resumed => (State::Unack, "judged again, the machine runs"),
    };
    let since = Instant(occurrence.since.ns());
    let severity = state.severity();
    let value = judge.last_running[spec.point]
        .as_ref()
        .map(|reading| account::measured(point, spec, reading, Quality::Stale));
    let said = value.as_ref().and_then(|value| value.value);
    let said = match spec.quantity {
        Quantity::Ratio | Quantity::Decibel => String::new(),
        Quantity::VelocityRms
        | Quantity::VelocityPeak
        | Quantity::AccelerationRms
        | Quantity::AccelerationPeak => said.map_or_else(String::new, |said| {
            format!(" (last {} {})", two_digits(said), spec.quantity.unit())
        }),
    };
    let text = format!(
        "{}: {}{said} over its limits since {}, {word}.",
        sentence::place(severity_word(severity), context.plan, Some(point)),
        words::phrase(spec.measure, point),
        clock(since, now),
    );
    let limit = match severity {
        Severity::Danger => spec.limits.danger().or(spec.limits.alert()),
        Severity::None | Severity::Alert => spec.limits.alert().or(spec.limits.danger()),
    };
    let finding = Finding {
        occurrence: occurrence.id.clone(),
        point: Some(point.id.clone()),
        watch: Some(plan.full_name().into()),
        value,
        limit: limit.map(|limit| Limit {
            value: limit.value(),
            unit: spec.quantity.unit().into(),
        }),
        since: Some(since),
        ..bare(
            judge,
            Standing::new(kind, severity),
            None,
            sentence::join(&[text]),
        )
    };
    let mut header = header(context, now);
    header.schema = Alarm::SCHEMA.into();
    let alarm = Alarm {
        header,
        n: judge.n,
        event: id,
        finding,
    };
    Some(alarm.fit(MAX_EVENT).0)
}
