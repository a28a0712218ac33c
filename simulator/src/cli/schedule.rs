//! What a play will inject and when, in order of time.

use crate::scenario::Scenario;
use crate::truth::{Direction, Truth, moment};

/// A moment, s after the start, and what happens then.
fn moments(scenario: &Scenario, truth: &Truth) -> Vec<(f64, String)> {
    let mut all = Vec::new();
    for (asset, told) in scenario.assets.iter().zip(&truth.assets) {
        for fault in &told.faults {
            let place = fault
                .point
                .as_ref()
                .map_or(String::new(), |at| format!("/{at}"));
            all.push((
                fault.onset_s,
                format!("{}{place}: {} begins", told.asset, fault.kind),
            ));
            if fault.full_s > fault.onset_s {
                all.push((
                    fault.full_s,
                    format!("{}{place}: {} is grown out", told.asset, fault.kind),
                ));
            }
        }
        let speeds = told.speed.windows(2).filter(|pair| pair[0].1 != pair[1].1);
        all.extend(speeds.map(|pair| {
            let text = format!(
                "{}: speed goes from {:.0} to {:.0} r/min",
                told.asset, pair[0].1, pair[1].1
            );
            (pair[0].0, text)
        }));
        for (point, told_point) in asset.points.iter().zip(&told.points) {
            let here = format!("{}/{}", told.asset, point.id);
            for fault in &point.sensor_faults {
                let text = format!("{here}: sensor {fault}");
                all.push((fault.window().at_s(), text));
            }
            for fault in &point.transport_faults {
                let text = format!("{here}: transport {fault}");
                all.push((fault.window().at_s(), text));
            }
            for crossing in &told_point.crossings {
                let way = match crossing.direction {
                    Direction::Rises => "rises above",
                    Direction::Falls => "falls below",
                };
                let text = format!("{here}: clean velocity {way} {} mm/s rms", crossing.mm_s);
                all.push((crossing.after_s, text));
            }
        }
    }
    all.sort_by(|a, b| a.0.total_cmp(&b.0));
    all
}

/// A line for each moment before `until_s`, with its time when the play starts at `start_ns`; one line when nothing
/// happens.
pub(super) fn schedule(
    scenario: &Scenario,
    truth: &Truth,
    start_ns: i64,
    until_s: f64,
) -> Vec<String> {
    let mut moments = moments(scenario, truth);
    moments.retain(|(after_s, _)| *after_s < until_s);
    if moments.is_empty() {
        return vec!["nothing is injected: all machines and sensors stay well".to_owned()];
    }
    moments
        .into_iter()
        .map(|(after_s, text)| format!("{}  {text}", moment(start_ns, after_s)))
        .collect()
}
