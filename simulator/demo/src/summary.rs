//! The last page: what was injected and when, what was said and when, what was not said.

use humward_wire::out::{Event, Instant, Severity};

use crate::page::table;
use crate::said::time_of_day;
use crate::story::Story;
use crate::verdict::{Cause, Given, span, turns_in_words};

/// The tables of the summary, as lines of a page.
#[must_use]
pub fn lines(given: &[Given], story: &Story, start_ns: i64) -> Vec<String> {
    let mut lines = vec!["What was injected (from the simulator's own account):".to_owned()];
    lines.extend(table(2, &injected(given, start_ns)));
    lines.push(String::new());
    lines.push("What was said, and how long after the onset:".to_owned());
    let said = said(given, story, start_ns);
    lines.extend(table(2, &said));
    let marked = |row: &Vec<String>| row.last().is_some_and(|cell| cell.ends_with('*'));
    if said.iter().any(marked) {
        lines.push(
            "  * heard at another point than its cause: the machine carries it there".to_owned(),
        );
    }
    lines.push(String::new());
    lines.push("What was not said:".to_owned());
    lines.extend(table(2, &unsaid(given, story)));
    lines
}

fn injected(given: &[Given], start_ns: i64) -> Vec<Vec<String>> {
    let mut rows: Vec<(f64, Vec<String>)> = Vec::new();
    for asset in given {
        for injected in &asset.injected {
            rows.push((
                injected.onset_s,
                vec![
                    time_of_day(Instant(start_ns + (injected.onset_s * 1e9) as i64)),
                    asset.asset.clone(),
                    injected.words.clone(),
                ],
            ));
        }
    }
    rows.sort_by(|a, b| a.0.total_cmp(&b.0));
    let mut rows: Vec<Vec<String>> = rows.into_iter().map(|(_, row)| row).collect();
    for asset in given {
        let (stops, starts) = asset.stops_and_starts;
        if stops + starts > 0 {
            rows.push(vec![
                "by plan".to_owned(),
                asset.asset.clone(),
                turns_in_words((stops, starts)),
            ]);
        } else if asset.injected.is_empty() {
            rows.push(vec![
                "-".to_owned(),
                asset.asset.clone(),
                "nothing".to_owned(),
            ]);
        }
    }
    rows
}

fn said(given: &[Given], story: &Story, start_ns: i64) -> Vec<Vec<String>> {
    if story.events().is_empty() {
        return vec![vec!["nothing".to_owned()]];
    }
    story
        .events()
        .iter()
        .map(|event| {
            let name = event.header.asset.as_ref().map_or("", |id| id.as_str());
            let cause = given
                .iter()
                .find(|asset| asset.asset == name)
                .and_then(|asset| asset.explains(event, start_ns));
            let after = cause.map_or_else(
                || "nothing injected".to_owned(),
                |cause| {
                    let after_ns = event.header.at.0 - start_ns - (cause.onset_s * 1e9) as i64;
                    let mark = if cause.heard_elsewhere(event) {
                        " *"
                    } else {
                        ""
                    };
                    format!("+{}{mark}", span(after_ns / 1_000_000_000))
                },
            );
            vec![
                time_of_day(event.header.at),
                name.to_owned(),
                severity(event).to_owned(),
                event.transition.to_string(),
                event
                    .finding
                    .watch
                    .clone()
                    .unwrap_or_else(|| "-".to_owned()),
                after,
            ]
        })
        .collect()
}

fn severity(event: &Event) -> &'static str {
    match event.finding.standing.severity() {
        Severity::None => "-",
        Severity::Alert => "ALERT",
        Severity::Danger => "DANGER",
    }
}

fn unsaid(given: &[Given], story: &Story) -> Vec<Vec<String>> {
    let mut rows = Vec::new();
    for asset in given {
        let events = story.events_of(&asset.asset);
        let of_machine = events.iter().any(|event| {
            !event
                .finding
                .watch
                .as_deref()
                .is_some_and(|watch| watch.starts_with("sensor."))
        });
        let (stops, starts) = story.stops_and_starts(&asset.asset);
        let only_sensors = !asset.injected.is_empty()
            && asset
                .injected
                .iter()
                .all(|injected| matches!(injected.cause, Cause::Sensor(_)));
        let what = if events.is_empty() && stops + starts > 0 {
            format!(
                "quiet throughout: no event, through {}",
                turns_in_words((stops, starts))
            )
        } else if events.is_empty() {
            "quiet throughout: no event".to_owned()
        } else if only_sensors && !of_machine {
            "no alarm about the machine: the sensor was told as a sensor".to_owned()
        } else {
            continue;
        };
        rows.push(vec![asset.asset.clone(), what]);
    }
    if rows.is_empty() {
        rows.push(vec!["every asset said something".to_owned()]);
    }
    rows
}

/// What the daemon counted as lost, in a sentence.
#[must_use]
pub fn lost(story: &Story) -> String {
    let lost: Vec<String> = story
        .losses()
        .iter()
        .map(|(who, loss)| format!("{who} {} {}", loss.reason, loss.count))
        .collect();
    if lost.is_empty() {
        "Lost on the way: nothing.".to_owned()
    } else {
        format!(
            "Lost on the way, as the daemon counts it: {}.",
            lost.join(", ")
        )
    }
}
