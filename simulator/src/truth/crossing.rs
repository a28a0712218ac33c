//! When the clean velocity crosses a level.

use serde::Serialize;

use super::moment;
use crate::plant::{Heard, Plant, heard};
use crate::scenario::Scenario;
use crate::wave::{State, TICK_S, velocity_mm_s};

/// Which way.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Direction {
    /// From below.
    Rises,
    /// From above.
    Falls,
}

/// One crossing of a level.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Crossing {
    /// The level, mm/s rms.
    pub mm_s: f64,
    /// Which way.
    pub direction: Direction,
    /// s after the start, to 1 s or a 20 000th of the duration, whichever is longer.
    pub after_s: f64,
    /// The same, RFC 3339.
    pub at: String,
}

/// The clean velocity is computed at most so many times,
const EVALUATIONS: f64 = 20_000.0;
/// and at most this often.
const TICKS_PER_S: u64 = (1.0 / TICK_S) as u64;
/// A level counts as left only this share beyond it, so that a load that wanders crosses once.
const HYSTERESIS: f64 = 0.03;

/// Velocity at start and end, and the crossings, of one point.
pub(super) type Followed = ((f64, f64), Vec<Crossing>);

fn now(waves: &[Heard], states: &[State]) -> f64 {
    velocity_mm_s(
        waves
            .iter()
            .map(|heard| (&*heard.wave, &states[heard.machine])),
    )
}

/// How many ticks lie between two evaluations: whole seconds.
fn every_ticks(duration_s: f64) -> u64 {
    TICKS_PER_S * ((duration_s / EVALUATIONS).ceil() as u64).max(1)
}

/// Goes through the scenario, second by second if it is short; one entry per point, in the order of the scenario.
pub(super) fn follow(scenario: &Scenario, start_ns: i64) -> Vec<Followed> {
    let mut plant = Plant::new(scenario);
    let points: Vec<Vec<Heard>> = scenario
        .assets
        .iter()
        .enumerate()
        .flat_map(|(index, asset)| asset.points.iter().map(move |point| (index, point)))
        .map(|(index, point)| heard(scenario, index, point))
        .collect();
    let states = plant.states();
    let mut followed: Vec<Followed> = points
        .iter()
        .map(|waves| {
            let first = now(waves, &states);
            ((first, first), Vec::new())
        })
        .collect();
    let mut above: Vec<Vec<bool>> = followed
        .iter()
        .map(|((first, _), _)| {
            scenario
                .levels_mm_s
                .iter()
                .map(|level| first >= level)
                .collect()
        })
        .collect();
    let ticks = (scenario.duration.0 / TICK_S) as u64;
    let every = every_ticks(scenario.duration.0);
    for tick in 1..=ticks {
        plant.advance();
        if tick % every != 0 && tick != ticks {
            continue;
        }
        let states = plant.states();
        for ((waves, (ends, crossings)), above) in points.iter().zip(&mut followed).zip(&mut above)
        {
            let value = now(waves, &states);
            ends.1 = value;
            for (level, above) in scenario.levels_mm_s.iter().zip(above) {
                let crossed = if *above {
                    value < level * (1.0 - HYSTERESIS)
                } else {
                    value >= *level
                };
                if crossed {
                    *above = !*above;
                    let after_s = tick as f64 * TICK_S;
                    crossings.push(Crossing {
                        mm_s: *level,
                        direction: if *above {
                            Direction::Rises
                        } else {
                            Direction::Falls
                        },
                        after_s,
                        at: moment(start_ns, after_s),
                    });
                }
            }
        }
    }
    followed
}

#[cfg(test)]
mod tests {
    use super::{EVALUATIONS, TICKS_PER_S, every_ticks};

    #[test]
    fn a_week_is_evaluated_no_more_often_than_five_hours_are() {
        for duration_s in [1.0, 3600.0, 20_000.0, 20_001.0, 604_800.0] {
            let every = every_ticks(duration_s);
            let evaluations = duration_s * TICKS_PER_S as f64 / every as f64;
            assert!(evaluations <= EVALUATIONS, "{duration_s} s: {evaluations}");
            assert_eq!(every % TICKS_PER_S, 0, "{duration_s} s: whole seconds");
        }
        assert_eq!(every_ticks(20_000.0), TICKS_PER_S);
        assert_eq!(every_ticks(604_800.0), 31 * TICKS_PER_S);
    }
}
