//! Messages for the demo's own tests, as the broker would carry them.

use humward_wire::id::Id;
use humward_wire::out::{
    Event, Finding, Header, Instant, Limit, Line, Measured, Message as _, Quality, RunState,
    Running, Severity, Standing, State, Status, Transition,
};

use crate::listener::Heard;

/// 2026-03-02T03:00:00Z by `date -u -d 2026-03-02T03:00 +%s`.
pub(crate) const START_NS: i64 = 1_772_420_400_000_000_000;

pub(crate) fn id(text: &str) -> Id {
    Id::new(text).unwrap()
}

fn header(asset: &str, at_s: i64) -> Header {
    Header {
        schema: Event::SCHEMA.to_owned(),
        gateway: id("gw-1"),
        epoch: 0,
        site: id("harbour"),
        asset: Some(id(asset)),
        at: Instant(START_NS + at_s * 1_000_000_000),
    }
}

fn running(state: RunState) -> Running {
    Running {
        state,
        state_code: state.code(),
        since: None,
        operating: None,
        rpm: Some(1482.0),
        rpm_quality: Quality::Good,
    }
}

/// An event of a watch with a value of `measure`, as the broker carries it.
pub(crate) fn event(
    asset: &str,
    n: u64,
    at_s: i64,
    told: (Transition, Severity),
    watch: &str,
    measure: &str,
) -> Event {
    let (transition, severity) = told;
    Event {
        header: header(asset, at_s),
        n,
        id: id(&format!("0-{n}")),
        transition,
        transition_code: transition.code(),
        from_n: None,
        to_n: None,
        finding: Finding {
            text: format!("{severity} {asset} {watch} {n}."),
            occurrence: Some(id("0-1")),
            lead: None,
            point: None,
            watch: (!watch.is_empty()).then(|| watch.to_owned()),
            standing: Standing::new(State::Unack, severity),
            latched: false,
            value: Some(Measured {
                measure: measure.to_owned(),
                value: Some(23.14),
                unit: "dB".to_owned(),
                quality: Quality::Good,
            }),
            limit: Some(Limit {
                value: 20.0,
                unit: "dB".to_owned(),
            }),
            normal: None,
            since: None,
            readings: 6,
            running: running(RunState::Running),
            lines: vec![Line {
                label: "outer race rate".to_owned(),
                frequency_hz: 88.54,
                order: Some(3.585),
                strength_db: Some(23.14),
                strength: Some(0.704),
                unit: "m/s2 rms".to_owned(),
                band_hz: [2000.0, 5000.0],
                resolution_hz: 1.5625,
            }],
            also: Vec::new(),
            against: Vec::new(),
            checks: Vec::new(),
            truncated: false,
            advisory: String::new(),
        },
    }
}

/// A status in this running state.
pub(crate) fn status(asset: &str, at_s: i64, state: RunState) -> Heard {
    let status = Status {
        header: header(asset, at_s),
        asset_name: asset.to_owned(),
        valid_until: Instant(START_NS),
        last_n: 0,
        open: Vec::new(),
        open_count: 0,
        running: running(state),
        last_running: None,
        judged_share_24h: None,
        points: Vec::new(),
        stale: Vec::new(),
        losses: Vec::new(),
        truncated: false,
    };
    Heard {
        topic: format!("humward/v1/harbour/status/{asset}"),
        payload: status.to_json(),
    }
}

/// An event as it is heard.
pub(crate) fn heard(event: &Event) -> Heard {
    let asset = event.header.asset.as_ref().unwrap();
    Heard {
        topic: format!("humward/v1/harbour/event/{asset}"),
        payload: event.to_json(),
    }
}
