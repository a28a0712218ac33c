//! Whether the story came out as meant: what was said, held against what was injected.
//!
//! The rules know kinds of faults and no asset: an asset with nothing injected says nothing; a bearing's pit is told
//! by a bearing watch as an alert and gets worse to danger; a sensor's fault is told by that sensor's own watch; any
//! other event needs an injected cause that had begun; a machine that stops and starts is heard to do so.

use humward_sim::fault::Fault;
use humward_sim::scenario::Scenario;
use humward_wire::out::{Event, Severity, Transition};

use crate::said::time_of_day;
use crate::story::Story;

/// What kind of cause was injected.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Cause {
    /// A pit in a race of the bearing at a point.
    Bearing,
    /// Another fault of the machine that is to ring.
    Machine,
    /// Something that is there and harmless, and must not ring.
    Harmless,
    /// A fault of the sensor at this point.
    Sensor(String),
}

/// One thing injected.
#[derive(Debug, Clone, PartialEq)]
pub struct Injected {
    /// When it began, s after the start.
    pub onset_s: f64,
    /// What it is.
    pub cause: Cause,
    /// The point it sits at; `None` when the whole machine has it.
    pub point: Option<String>,
    /// The same for people.
    pub words: String,
}

impl Injected {
    /// Whether an event tells it from another point than its own: the machine carries it there.
    #[must_use]
    pub fn heard_elsewhere(&self, event: &Event) -> bool {
        let told = event.finding.point.as_ref().map(|id| id.as_str());
        self.point
            .as_deref()
            .zip(told)
            .is_some_and(|(own, told)| own != told)
    }
}

/// What an asset was given to tell.
#[derive(Debug, Clone, PartialEq)]
pub struct Given {
    /// Its id.
    pub asset: String,
    /// What people call it.
    pub name: String,
    /// What was injected, in the order of onset.
    pub injected: Vec<Injected>,
    /// How often its schedule takes it to rest, and up again.
    pub stops_and_starts: (usize, usize),
}

impl Given {
    /// What explains an event: the latest cause of its kind that had begun, as its place in `injected`.
    #[must_use]
    pub fn explains(&self, event: &Event, start_ns: i64) -> Option<&Injected> {
        let after_s = (event.header.at.0 - start_ns) as f64 / 1e9;
        let watch = event.finding.watch.as_deref().unwrap_or("");
        self.injected.iter().rev().find(|injected| {
            injected.onset_s <= after_s
                && match &injected.cause {
                    Cause::Sensor(point) => watch == format!("sensor.{point}"),
                    Cause::Bearing | Cause::Machine => !watch.starts_with("sensor."),
                    Cause::Harmless => false,
                }
        })
    }
}

/// What each asset of the scenario is given to tell.
#[must_use]
pub fn given(scenario: &Scenario) -> Vec<Given> {
    scenario
        .assets
        .iter()
        .map(|asset| {
            let mut injected: Vec<Injected> = asset.faults.iter().map(of_machine).collect();
            for point in &asset.points {
                injected.extend(point.sensor_faults.iter().map(|fault| Injected {
                    onset_s: fault.window().at_s(),
                    cause: Cause::Sensor(point.id.clone()),
                    point: Some(point.id.clone()),
                    words: format!("sensor {}: {}", point.id, fault.name()),
                }));
            }
            injected.sort_by(|a, b| a.onset_s.total_cmp(&b.onset_s));
            Given {
                asset: asset.id.clone(),
                name: asset.name.clone(),
                injected,
                stops_and_starts: stops_and_starts(&asset.schedule(), scenario.duration.0),
            }
        })
        .collect()
}

fn of_machine(fault: &Fault) -> Injected {
    let kind = fault.kind();
    let growth = kind.growth();
    let cause = match fault {
        Fault::OuterRace(_) | Fault::InnerRace(_) => Cause::Bearing,
        Fault::Electrical(_) | Fault::Knocks(_) => Cause::Harmless,
        Fault::Imbalance(_)
        | Fault::Misalignment(_)
        | Fault::Looseness(_)
        | Fault::VanePass(_)
        | Fault::Cavitation(_) => Cause::Machine,
    };
    let place = kind
        .point()
        .map_or_else(String::new, |point| format!(" at {point}"));
    let full_s = growth.full_s();
    let growing = if full_s > growth.onset.0 {
        format!(", growing for {}", span((full_s - growth.onset.0) as i64))
    } else {
        String::new()
    };
    Injected {
        onset_s: growth.onset.0,
        cause,
        point: kind.point().map(str::to_owned),
        words: format!("{}{place}{growing}", fault.word()),
    }
}

/// How often a schedule of (s, r/min) comes to rest, and leaves it, before the end.
fn stops_and_starts(schedule: &[(f64, f64)], end_s: f64) -> (usize, usize) {
    let (mut stops, mut starts) = (0, 0);
    for pair in schedule.windows(2) {
        if pair[1].0 > end_s {
            break;
        }
        stops += usize::from(pair[0].1 > 0.0 && pair[1].1 == 0.0);
        starts += usize::from(pair[0].1 == 0.0 && pair[1].1 > 0.0);
    }
    (stops, starts)
}

/// Seconds in words, in the unit in which they are at least two: `95 s`, `4 min 10 s`.
#[must_use]
pub fn span(seconds: i64) -> String {
    match (seconds / 60, seconds % 60) {
        (0 | 1, _) => format!("{seconds} s"),
        (minutes, 0) => format!("{minutes} min"),
        (minutes, rest) => format!("{minutes} min {rest} s"),
    }
}

/// Stops and starts in words: `1 stop and 2 starts`.
#[must_use]
pub fn turns_in_words((stops, starts): (usize, usize)) -> String {
    let many = |count: usize| if count == 1 { "" } else { "s" };
    format!(
        "{stops} stop{} and {starts} start{}",
        many(stops),
        many(starts)
    )
}

/// What came out otherwise than meant, a sentence each; none when all is as meant.
#[must_use]
pub fn differences(given: &[Given], story: &Story, start_ns: i64) -> Vec<String> {
    let mut differences = Vec::new();
    for asset in given {
        let events = story.events_of(&asset.asset);
        for event in &events {
            if asset.explains(event, start_ns).is_none() {
                differences.push(format!(
                    "{} said {} {} at {}, and nothing that was injected explains it",
                    asset.asset,
                    event.transition,
                    event
                        .finding
                        .watch
                        .as_deref()
                        .unwrap_or("of the whole asset"),
                    time_of_day(event.header.at),
                ));
            }
        }
        for injected in &asset.injected {
            differences.extend(
                missing(asset, injected, &events, start_ns)
                    .map(|what| format!("{}: {}, and {what}", asset.asset, injected.words)),
            );
        }
        let told = story.stops_and_starts(&asset.asset);
        let planned = asset.stops_and_starts;
        if told.0 < planned.0 || told.1 < planned.1 {
            differences.push(format!(
                "{} made {}; its status told {}",
                asset.asset,
                turns_in_words(planned),
                turns_in_words(told)
            ));
        }
    }
    differences
}

/// What should have been said of a cause and was not.
fn missing(
    asset: &Given,
    injected: &Injected,
    events: &[&Event],
    start_ns: i64,
) -> Option<&'static str> {
    let mine = || {
        events
            .iter()
            .filter(|event| asset.explains(event, start_ns) == Some(injected))
    };
    match injected.cause {
        Cause::Bearing => {
            let by_bearing = |event: &Event| {
                event
                    .finding
                    .value
                    .as_ref()
                    .is_some_and(|value| value.measure.starts_with("bearing."))
            };
            let Some(alert) = mine().find(|event| {
                event.transition == Transition::Raised
                    && event.finding.standing.severity() == Severity::Alert
                    && by_bearing(event)
            }) else {
                return Some("no alert of a bearing watch came");
            };
            if alert.finding.lines.is_empty() {
                return Some("its alert came without a line as evidence");
            }
            let danger = mine().any(|event| {
                event.finding.standing.severity() == Severity::Danger && event.n > alert.n
            });
            (!danger).then_some("its alert never became danger")
        }
        Cause::Machine => (!mine().any(|event| event.transition == Transition::Raised))
            .then_some("no alarm about the machine came"),
        Cause::Sensor(_) => (!mine().any(|event| event.transition == Transition::Raised))
            .then_some("no alarm about the sensor came"),
        Cause::Harmless => None,
    }
}

#[cfg(test)]
mod tests;
