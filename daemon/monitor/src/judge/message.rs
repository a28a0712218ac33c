//! Events, alarms and evidence in the words of the contract.

mod held;
mod instrument;

use alloc::{
    format,
    string::{String, ToString},
    vec::Vec,
};

use humward_wire::{
    id::Id,
    out::{
        ADVISORY, Alarm, Event, Evidence, Finding, Header, Instant, Limit, MAX_EVENT, MAX_EVIDENCE,
        Quality, RunState, Running, Severity, Standing, State, Transition,
    },
};

pub(super) use held::{AssetChange, asset_event, held_alarm};
pub(super) use instrument::{sensor_event, sensor_watch};

use super::{
    AssetJudge, Context, Operating,
    account::{self, Account},
    announce::Turn,
    beside::beside,
    sentence,
    watch::Change,
};
use crate::{
    analysis::{Taken, Traces},
    input::{GapCause, Identity},
    reading::{Reading, ShaftSpeed},
};

/// The loss a block that was not taken whole counts under.
pub(super) const fn loss_of(taken: Taken) -> Option<&'static str> {
    match taken {
        Taken::Whole => None,
        Taken::Late => Some("late"),
        Taken::Empty => Some("no_samples"),
        Taken::Uncalibrated => Some("uncalibrated"),
        Taken::NoChannel => Some("no_channel"),
        Taken::RateUnusable => Some("rate_unusable"),
    }
}

/// The loss a gap on our side counts under.
pub(super) const fn gap_of(cause: GapCause) -> &'static str {
    match cause {
        GapCause::Shed => "shed",
        GapCause::LinkLost => "link_lost",
        GapCause::Restart => "restart",
    }
}

/// Id of the asset's event number `n`.
pub(super) fn event_id(identity: &Identity, n: u64) -> Id {
    let text = format!("{}-{n}", identity.epoch);
    match Id::new(&text) {
        Ok(id) => id,
        // Digits and a hyphen, at most 41 characters: always an id; the gateway's own stands in for the impossible.
        Err(_) => identity.gateway.clone(),
    }
}

/// The shaft speed in a message, with its quality.
pub(super) const fn told_speed(speed: ShaftSpeed) -> (Option<f64>, Quality) {
    match speed {
        ShaftSpeed::Reported(rpm) => (Some(rpm), Quality::Good),
        ShaftSpeed::Nominal(rpm) => (Some(rpm), Quality::NotVerified),
    }
}

/// Whether and how fast the machine turns.
pub(super) fn running(judge: &AssetJudge, speed: Option<ShaftSpeed>) -> Running {
    let state = match judge.running.state() {
        Operating::Unknown => RunState::Unknown,
        Operating::Stopped => RunState::Stopped,
        Operating::Starting => RunState::Starting,
        Operating::Running => RunState::Running,
        Operating::Coasting => RunState::Coasting,
    };
    let (rpm, rpm_quality) = speed.map_or((None, Quality::Missing), told_speed);
    Running {
        state,
        state_code: state.code(),
        since: judge.running.since().map(|since| Instant(since.ns())),
        operating: None,
        rpm,
        rpm_quality,
    }
}

fn header(context: Context<'_>, at: Instant) -> Header {
    let Context { identity, plan, .. } = context;
    Header::new::<Event>(
        identity.gateway.clone(),
        identity.epoch,
        identity.site.clone(),
        Some(plan.id().clone()),
        at,
    )
}

fn event(
    context: Context<'_>,
    n: u64,
    id: Id,
    at: Instant,
    transition: Transition,
    finding: Finding,
) -> Event {
    let event = Event {
        header: header(context, at),
        n,
        id,
        transition,
        transition_code: transition.code(),
        from_n: None,
        to_n: None,
        finding,
    };
    event.fit(MAX_EVENT).0
}

/// A finding with nothing in it but its standing and the machine's state.
fn bare(
    judge: &AssetJudge,
    standing: Standing,
    speed: Option<ShaftSpeed>,
    text: String,
) -> Finding {
    Finding {
        text,
        occurrence: None,
        lead: None,
        point: None,
        watch: None,
        standing,
        latched: false,
        value: None,
        limit: None,
        normal: None,
        since: None,
        readings: 0,
        running: running(judge, speed),
        lines: Vec::new(),
        also: Vec::new(),
        against: Vec::new(),
        checks: Vec::new(),
        truncated: false,
        advisory: ADVISORY.into(),
    }
}

/// The event of a machine watch that changed on `reading`.
pub(super) fn watch_event(
    judge: &AssetJudge,
    context: Context<'_>,
    index: usize,
    reading: &Reading,
    Turn { change, armed }: Turn,
    id: Id,
) -> Event {
    let plan = &context.plan.spec().watches[index];
    let spec = plan.spec();
    let state = &judge.watches[index];
    let occurrence = state.occurrence();
    let (transition, kind) = match change {
        Change::Raised(_) => (Transition::Raised, State::Unack),
        Change::Worsened => (Transition::Worsened, State::Unack),
        Change::Reraised => (Transition::Reraised, State::Unack),
        Change::Eased => (Transition::Eased, State::Unack),
        Change::Cleared => (Transition::Cleared, State::Norm),
    };
    let severity = state.severity();
    let limit = match (change, severity) {
        (Change::Eased, _) => spec.limits.danger(),
        (_, Severity::Danger) => spec.limits.danger().or(spec.limits.alert()),
        _ => spec.limits.alert().or(spec.limits.danger()),
    };
    let limit = armed.map_or(limit.map(|limit| limit.value()), |armed| Some(armed.limit));
    let account = Account {
        context,
        plan,
        reading,
        limit,
        armed,
        beside: beside(judge, context, index, reading),
        change,
        severity,
    };
    let since = occurrence.map(|open| Instant(open.since.ns()));
    let before = occurrence.and_then(|open| open.before);
    let until = state.back_since().map(|back| Instant(back.ns()));
    let story = account::Story {
        since,
        before,
        until,
    };
    let finding = Finding {
        text: account::text(&account, &story),
        occurrence: occurrence.and_then(|open| open.id.clone()),
        point: Some(context.plan.spec().points[spec.point].id().clone()),
        watch: Some(plan.full_name().into()),
        value: Some(account::value(&account)),
        limit: limit.map(|value| Limit {
            value,
            unit: spec.quantity.unit().into(),
        }),
        since,
        readings: match armed {
            Some(_) => state.armed_readings(),
            None => state.readings(change),
        },
        lines: account::lines(&account),
        also: account::also(&account),
        against: account::against(&account),
        checks: account::checks(&account)
            .iter()
            .map(ToString::to_string)
            .collect(),
        ..bare(
            judge,
            Standing::new(kind, severity),
            Some(reading.speed),
            String::new(),
        )
    };
    event(
        context,
        judge.n,
        id,
        Instant(reading.end.ns()),
        transition,
        finding,
    )
}

/// The retained state that goes with an event.
pub(super) fn alarm_of(event: &Event) -> Alarm {
    let mut header = event.header.clone();
    header.schema = <Alarm as humward_wire::out::Message>::SCHEMA.into();
    Alarm {
        header,
        n: event.n,
        event: event.id.clone(),
        finding: event.finding.clone(),
    }
    .fit(MAX_EVENT)
    .0
}

/// The event of an occurrence whose watch or asset is no longer in the plan.
pub(super) fn withdrawn_event(
    judge: &AssetJudge,
    context: Context<'_>,
    watch: &str,
    occurrence: Option<Id>,
    id: Id,
) -> Event {
    let place = sentence::place("WITHDRAWN", context.plan, None);
    let what = format!("{place}: {watch} is no longer in the configuration, its alarm is closed.");
    let text = sentence::join(&[what]);
    let finding = Finding {
        occurrence,
        watch: Some(watch.into()),
        ..bare(
            judge,
            Standing::new(State::Norm, Severity::None),
            None,
            text,
        )
    };
    event(
        context,
        judge.n,
        id,
        Instant(context.arrival.ns()),
        Transition::Withdrawn,
        finding,
    )
}

/// Spectra and waveform that go with an event.
pub(super) fn evidence(
    context: Context<'_>,
    index: usize,
    reading: &Reading,
    event: Id,
    traces: Traces,
) -> Evidence {
    let plan = &context.plan.spec().watches[index];
    let mut header = header(context, Instant(reading.end.ns()));
    header.schema = <Evidence as humward_wire::out::Message>::SCHEMA.into();
    Evidence {
        header,
        event,
        point: context.plan.spec().points[plan.spec().point].id().clone(),
        watch: Some(plan.full_name().into()),
        rpm: told_speed(reading.speed).0,
        spectrum: Some(traces.spectrum),
        envelope: traces.envelope,
        waveform: Some(traces.waveform),
        truncated: false,
    }
    .fit(MAX_EVIDENCE)
    .0
}

/// The word a sentence begins with.
pub(super) const fn severity_word(severity: Severity) -> &'static str {
    match severity {
        Severity::None => "CLEARED",
        Severity::Alert => "ALERT",
        Severity::Danger => "DANGER",
    }
}
