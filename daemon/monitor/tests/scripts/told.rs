//! Actions as lines of text: complete, with values to three digits.

use std::fmt::Write as _;

use humward_monitor::{Action, time::Arrival};
use humward_wire::out::{Alarm, Event, Evidence, Finding, Measured, Status, Trace};

use crate::{drive::Done, inputs::ZERO_NS, language::Command};

/// Every command with what came of it, `none` included.
pub(crate) fn told(commands: &[Command], done: &[Done], several_assets: bool) -> String {
    let mut text = String::new();
    let starts = std::iter::once((None, "start"));
    let all = commands
        .iter()
        .enumerate()
        .map(|(place, command)| (Some(place), command.text.as_str()));
    for (place, what) in starts.chain(all) {
        writeln!(text, "> {what}").unwrap();
        let mut any = false;
        for done in done.iter().filter(|done| done.command == place) {
            any = true;
            text.push_str(&line(done.arrival, &done.action, several_assets));
        }
        if !any {
            text.push_str("none\n");
        }
    }
    text
}

/// One action.
fn line(arrival: Arrival, action: &Action, several_assets: bool) -> String {
    // A status carries the stamp it was made with, a deadline's own where one passed unattended.
    let arrival = match action {
        Action::Status(told) => told.header.at.0,
        Action::Event(_) | Action::Alarm { .. } | Action::Evidence(_) | Action::Reply { .. } => {
            arrival.ns()
        }
    };
    let (asset, told) = match action {
        Action::Event(told) => (told.header.asset.clone(), event(told)),
        Action::Status(told) => (told.header.asset.clone(), status(told)),
        Action::Alarm { asset, watch, open } => {
            let state = open.as_ref().map_or_else(|| "emptied".into(), alarm);
            (Some(asset.clone()), format!("alarm {watch}: {state}"))
        }
        Action::Evidence(told) => (told.header.asset.clone(), evidence(told)),
        Action::Reply {
            asset,
            sender,
            reply,
        } => {
            let id = reply.id.as_ref().map_or("-", |id| id.as_str());
            let reason = reply.reason.as_deref().unwrap_or("-");
            (
                Some(asset.clone()),
                format!("reply {id} to {sender}: {} ({reason})", reply.outcome),
            )
        }
    };
    let asset = asset
        .filter(|_| several_assets)
        .map_or_else(String::new, |asset| format!("{asset} "));
    format!("{} {asset}{told}\n", seconds(arrival))
}

fn event(event: &Event) -> String {
    let at = seconds(event.header.at.0);
    let found = finding(&event.finding);
    let text = &event.finding.text;
    assert!(text.chars().count() <= 300, "{text}");
    format!(
        "event {} {} at {at}: {found}\n    {text}",
        event.n, event.transition
    )
}

fn finding(finding: &Finding) -> String {
    let mut text = format!(
        "{} {}",
        finding.standing.state(),
        finding.standing.severity()
    );
    let mut add = |name: &str, value: Option<String>| {
        if let Some(value) = value {
            write!(text, ", {name} {value}").unwrap();
        }
    };
    add("watch", finding.watch.clone());
    add(
        "occurrence",
        finding.occurrence.as_ref().map(ToString::to_string),
    );
    add("value", finding.value.as_ref().map(measured));
    add(
        "limit",
        finding.limit.as_ref().map(|limit| digits(limit.value)),
    );
    add("since", finding.since.map(|since| seconds(since.0)));
    add(
        "readings",
        (finding.readings > 0).then(|| finding.readings.to_string()),
    );
    let lines: Vec<String> = finding
        .lines
        .iter()
        .map(|line| {
            format!(
                "{} {} Hz {}",
                line.label,
                digits(line.frequency_hz),
                line.strength.map_or("-".into(), digits)
            )
        })
        .collect();
    add("lines", (!lines.is_empty()).then(|| lines.join("; ")));
    add(
        "against",
        (!finding.against.is_empty()).then(|| finding.against.join("; ")),
    );
    text
}

fn alarm(alarm: &Alarm) -> String {
    let standing = alarm.finding.standing;
    format!(
        "{} {} by event {}",
        standing.state(),
        standing.severity(),
        alarm.n
    )
}

fn status(status: &Status) -> String {
    let rpm = status
        .running
        .rpm
        .map_or_else(|| "no speed".into(), |rpm| format!("{rpm:.0} r/min"));
    let since = status
        .running
        .since
        .map_or_else(String::new, |since| format!(" since {}", seconds(since.0)));
    let mut text = format!(
        "status {}{since} {rpm} {}",
        status.running.state, status.running.rpm_quality
    );
    for point in &status.points {
        let values: Vec<String> = point.values.iter().map(measured).collect();
        let age = point
            .age_s
            .map_or_else(|| "-".into(), |age| format!("{age} s"));
        write!(
            text,
            "; {} {} {age} [{}]",
            point.point,
            point.quality,
            values.join(", ")
        )
        .unwrap();
    }
    for open in &status.open {
        let standing = open.standing;
        write!(
            text,
            "; open {} {} {}",
            open.watch,
            standing.state(),
            standing.severity()
        )
        .unwrap();
    }
    if let Some(last) = &status.last_running {
        let values: Vec<String> = last.values.iter().map(measured).collect();
        write!(
            text,
            "; last running {} [{}]",
            seconds(last.at.0),
            values.join(", ")
        )
        .unwrap();
    }
    if !status.stale.is_empty() {
        write!(text, "; stale {}", status.stale.join(" ")).unwrap();
    }
    for loss in &status.losses {
        write!(text, "; lost {} {}", loss.count, loss.reason).unwrap();
    }
    if let Some(share) = status.judged_share_24h {
        write!(text, "; judged {share:.2}").unwrap();
    }
    write!(text, "; last_n {}", status.last_n).unwrap();
    text
}

fn evidence(evidence: &Evidence) -> String {
    let trace = |trace: &Option<Trace>| {
        let Some(trace) = trace else {
            return "-".to_owned();
        };
        let values = trace.values.iter().copied().enumerate();
        let (place, highest) = values
            .max_by(|a, b| a.1.total_cmp(&b.1))
            .unwrap_or_default();
        let size = format!(
            "{} x {} {}",
            trace.values.len(),
            digits(trace.step),
            trace.step_unit
        );
        match trace.step_unit.as_str() {
            "Hz" => format!(
                "{size} ({} {} at {} Hz)",
                digits(f64::from(highest)),
                trace.unit,
                digits(place as f64 * trace.step)
            ),
            _ => size,
        }
    };
    format!(
        "evidence {} of {}: spectrum {}, envelope {}, waveform {}",
        evidence.event,
        evidence.point,
        trace(&evidence.spectrum),
        trace(&evidence.envelope),
        trace(&evidence.waveform)
    )
}

fn measured(value: &Measured) -> String {
    let number = value.value.map_or_else(|| "-".into(), digits);
    format!(
        "{} {number} {} {}",
        value.measure, value.unit, value.quality
    )
}

/// Three significant digits.
fn digits(value: f64) -> String {
    if value.abs() < 1e-6 {
        return "0".into(); // what rounding leaves depends on the machine
    }
    let rounded: f64 = format!("{value:.2e}").parse().unwrap();
    format!("{rounded}")
}

/// Seconds of the script, to the millisecond.
fn seconds(ns: i64) -> String {
    let text = format!("{:.3}", (ns - ZERO_NS) as f64 / 1e9);
    text.trim_end_matches('0').trim_end_matches('.').to_owned()
}
