//! Sample messages of every kind, as a demonstration plant would send them.

use humward_wire::id::Id;
use humward_wire::out::{
    ADVISORY, Alarm, Certificate, Event, Evidence, Finding, Gateway, GatewayEvent,
    GatewayEventKind, GatewayState, Header, Instant, LastRunning, Limit, Line, Link, Load, Loss,
    Measured, Message, Open, Outcome, PointStatus, Quality, Reply, RunState, Running, Severity,
    Standing, State, Status, Trace, Transition, Zoned,
};

const AT: Instant = Instant(1_796_094_480_250_000_000);

pub(crate) fn id(text: &str) -> Id {
    Id::new(text).unwrap()
}

pub(crate) fn header<M: Message>(asset: Option<&str>) -> Header {
    Header::new::<M>(id("north-gw-1"), 0, id("north"), asset.map(id), AT)
}

pub(crate) fn measured(measure: &str, value: f64, unit: &str) -> Measured {
    Measured {
        measure: measure.into(),
        value: Some(value),
        unit: unit.into(),
        quality: Quality::Good,
    }
}

pub(crate) fn line(label: &str) -> Line {
    Line {
        label: label.into(),
        frequency_hz: 107.364_8,
        order: Some(3.585_3),
        strength_db: Some(24.312_3),
        strength: Some(0.834_5),
        unit: "m/s2".into(),
        band_hz: [2000.0, 5000.0],
        resolution_hz: 1.464_84,
    }
}

pub(crate) fn running() -> Running {
    Running {
        state: RunState::Running,
        state_code: RunState::Running.code(),
        since: Some(Instant(1_796_094_000_000_000_000)),
        operating: None,
        rpm: Some(1482.3),
        rpm_quality: Quality::Good,
    }
}

pub(crate) fn finding() -> Finding {
    Finding {
        text: "ALERT P-103A cooling water pump, drive end: outer race line 24 dB over the floor. Advisory only.".into(),
        occurrence: Some(id("0-1")),
        lead: None,
        point: Some(id("drive-end")),
        watch: Some("outer-race.drive-end".into()),
        standing: Standing::new(State::Unack, Severity::Alert),
        latched: false,
        value: Some(measured("outer-race", 24.312_345_6, "dB")),
        limit: Some(Limit { value: 15.0, unit: "dB".into() }),
        normal: None,
        since: Some(AT),
        readings: 3,
        running: running(),
        lines: vec![line("outer race 1x"), line("outer race 2x")],
        also: vec![Zoned { value: measured("velocity", 0.213_456, "mm/s rms"), zone: Some("A".into()) }],
        against: vec!["velocity is low".into()],
        checks: vec!["grease the bearing and listen again".into()],
        truncated: false,
        advisory: ADVISORY.into(),
    }
}

pub(crate) fn event() -> Event {
    Event {
        header: header::<Event>(Some("P-103A")),
        n: 1,
        id: id("0-1"),
        transition: Transition::Raised,
        transition_code: Transition::Raised.code(),
        from_n: None,
        to_n: None,
        finding: finding(),
    }
}

pub(crate) fn alarm() -> Alarm {
    Alarm {
        header: header::<Alarm>(Some("P-103A")),
        n: 1,
        event: id("0-1"),
        finding: finding(),
    }
}

pub(crate) fn point(name: &str) -> PointStatus {
    PointStatus {
        point: id(name),
        quality: Quality::Good,
        age_s: Some(12),
        values: vec![
            measured("velocity_rms", 2.134_56, "mm/s rms"),
            measured("high_band_rms", 5.678_9, "m/s2 rms"),
        ],
        not_verified: vec!["rate".into()],
    }
}

pub(crate) fn status() -> Status {
    Status {
        header: header::<Status>(Some("P-103A")),
        asset_name: "cooling water pump".into(),
        valid_until: Instant(AT.0 + 90_000_000_000),
        last_n: 1,
        open: vec![Open {
            occurrence: id("0-1"),
            watch: "outer-race.drive-end".into(),
            standing: Standing::new(State::Unack, Severity::Alert),
            since: AT,
        }],
        open_count: 1,
        running: running(),
        last_running: None,
        judged_share_24h: Some(0.987_654_3),
        points: ["motor-nde", "motor-de", "pump-de", "pump-nde"]
            .map(point)
            .to_vec(),
        stale: vec![],
        losses: vec![],
        truncated: false,
    }
}

pub(crate) fn last_running() -> LastRunning {
    LastRunning {
        at: AT,
        rpm: Some(1482.3),
        values: vec![measured("velocity.pump-de", 2.1, "mm/s rms"); 4],
    }
}

pub(crate) fn gateway() -> Gateway {
    Gateway {
        header: header::<Gateway>(None),
        state: GatewayState::Online,
        state_code: GatewayState::Online.code(),
        version: "0.1.0".into(),
        config_hash: "5f0c".into(),
        started: AT,
        last_n: 2,
        load: Load {
            busy_share: Some(0.123_456_7),
            blocks_per_s: Some(48.0),
            waiting_bytes: 0,
        },
        losses: vec![Loss {
            reason: "truncated".into(),
            count: 2,
        }],
        time_factor: 1.0,
        heartbeat_s: 30.0,
        ingest: Link::Up,
        publish: Link::Up,
        certificates: vec![Certificate {
            name: "broker".into(),
            days_left: 71,
        }],
    }
}

pub(crate) fn gateway_event() -> GatewayEvent {
    GatewayEvent {
        header: header::<GatewayEvent>(None),
        n: 2,
        id: id("0-2"),
        kind: GatewayEventKind::IngestRestored,
        kind_code: GatewayEventKind::IngestRestored.code(),
        text: "messages come in again after 30 s".into(),
        from: Some(AT),
        until: Some(Instant(AT.0 + 30_000_000_000)),
        seconds: Some(30.0),
        reason: None,
        topic: None,
        offset: None,
        count: None,
        from_n: None,
        to_n: None,
    }
}

pub(crate) fn reply() -> Reply {
    Reply {
        header: header::<Reply>(Some("P-103A")),
        id: Some(id("c-1")),
        outcome: Outcome::Superseded,
        outcome_code: Outcome::Superseded.code(),
        reason: Some("occurrence 0-1 has closed".into()),
        offset: None,
        occurrence: Some(id("0-1")),
        event: None,
    }
}

pub(crate) fn trace(values: usize, step: f64, step_unit: &str) -> Trace {
    Trace {
        start: 0.0,
        step,
        step_unit: step_unit.into(),
        unit: "m/s2 rms".into(),
        band_hz: Some([2000.0, 5000.0]),
        resolution_hz: (step_unit == "Hz").then_some(1.5 * step),
        thinned: 1,
        values: (0..values).map(|i| (i as f32 * 0.37).sin()).collect(),
    }
}

pub(crate) fn evidence() -> Evidence {
    Evidence {
        header: header::<Evidence>(Some("P-103A")),
        event: id("0-1"),
        point: id("drive-end"),
        watch: Some("outer-race.drive-end".into()),
        rpm: Some(1482.3),
        spectrum: Some(trace(1000, 3.125, "Hz")),
        envelope: Some(trace(500, 1.5625, "Hz")),
        waveform: Some(trace(4000, 1.0 / 25_600.0, "s")),
        truncated: false,
    }
}
