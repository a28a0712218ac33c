//! What a scenario injects: the truth a watch is measured against.
//!
//! In: a checked scenario and its start. Out: faults with onset, law and lines; sensor and transport faults; stops and
//! starts; and when the clean velocity of each point (10 Hz to 1 kHz, mm/s rms, no sensor, no noise realisation) crosses
//! the levels asked for. Computed in closed form from the same waves that make the samples, never from samples.
//! Checked by `tests/physics.py`, which integrates rendered signals with scipy and compares.

mod crossing;

pub use crossing::{Crossing, Direction};

use core::fmt::Display;

use serde::Serialize;

use crate::fault::Expected;
use crate::random::Draw;
use crate::scenario::{Asset, Scenario, Window};
use crate::wave::GrowthLaw;

/// The truth of a scenario.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Truth {
    /// Always true: this signal was never measured.
    pub simulated: bool,
    /// Name of the scenario.
    pub scenario: String,
    /// What happens, in a sentence.
    pub about: String,
    /// Its seed.
    pub seed: u64,
    /// When it starts, RFC 3339.
    pub start: String,
    /// How long it goes on, s.
    pub duration_s: f64,
    /// Nominal frequency of the supply, Hz.
    pub line_hz: f64,
    /// Its pump sets.
    pub assets: Vec<AssetTruth>,
}

/// The truth of one pump set.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct AssetTruth {
    /// Its id.
    pub asset: String,
    /// What people call it.
    pub name: String,
    /// Nominal speed, r/min.
    pub rpm: f64,
    /// Points of (s after the start, r/min) the speed goes through.
    pub speed: Vec<(f64, f64)>,
    /// Faults of the machine.
    pub faults: Vec<FaultTruth>,
    /// Its sensors.
    pub points: Vec<PointTruth>,
}

/// The truth of one fault.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct FaultTruth {
    /// Its kind.
    pub kind: String,
    /// The point it sits at, or the whole machine.
    pub point: Option<String>,
    /// What the severity is.
    pub severity: String,
    /// Severity at the onset.
    pub from: f64,
    /// Severity at the end of growth.
    pub to: f64,
    /// Growth law.
    pub law: String,
    /// When it begins, s after the start, and as a time.
    pub onset_s: f64,
    /// The same, RFC 3339.
    pub onset: String,
    /// When it has grown out, s after the start.
    pub full_s: f64,
    /// Lines to expect at nominal speed.
    pub lines: Vec<Expected>,
}

/// The truth of one sensor.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct PointTruth {
    /// Its id.
    pub point: String,
    /// Declared rate, samples/s.
    pub rate_hz: f64,
    /// What its oscillator really does, samples/s.
    pub true_rate_hz: f64,
    /// Clean velocity at the start and at the end, mm/s rms.
    pub velocity_mm_s: (f64, f64),
    /// When it crosses the levels asked for.
    pub crossings: Vec<Crossing>,
    /// Faults of the sensor.
    pub sensor: Vec<Trouble>,
    /// Faults on the way.
    pub transport: Vec<Trouble>,
}

/// The truth of something wrong with a sensor or on the way.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Trouble {
    /// What it is.
    pub kind: String,
    /// When it begins, s after the start.
    pub at_s: f64,
    /// When it ends, s after the start; `None` when it never does.
    pub until_s: Option<f64>,
    /// All of it in one clause.
    pub text: String,
}

impl Trouble {
    fn of(kind: &str, window: Window, text: &impl Display) -> Trouble {
        Trouble {
            kind: kind.to_owned(),
            at_s: window.at_s(),
            until_s: Some(window.until_s()).filter(|until| until.is_finite()),
            text: text.to_string(),
        }
    }
}

/// RFC 3339 of a moment, ns since 1970, to the millisecond.
fn rfc3339(ns: i64) -> String {
    jiff::Timestamp::from_millisecond(ns.div_euclid(1_000_000))
        .map_or_else(|_| ns.to_string(), |at| format!("{at:.3}"))
}

/// The moment `at_s` seconds after `start_ns`.
#[must_use]
pub(crate) fn moment(start_ns: i64, at_s: f64) -> String {
    rfc3339(start_ns.saturating_add((at_s * 1e9) as i64))
}

/// The truth of `scenario` when it starts at `start_ns`.
#[must_use]
pub fn tell(scenario: &Scenario, start_ns: i64) -> Truth {
    let mut followed = crossing::follow(scenario, start_ns).into_iter();
    let assets = scenario
        .assets
        .iter()
        .map(|asset| AssetTruth {
            asset: asset.id.clone(),
            name: asset.name.clone(),
            rpm: asset.rpm,
            speed: asset.schedule(),
            faults: faults(scenario, asset, start_ns),
            points: asset
                .points
                .iter()
                .map(|point| {
                    let (velocity_mm_s, crossings) = followed.next().unwrap_or_default();
                    PointTruth {
                        point: point.id.clone(),
                        rate_hz: point.rate_hz,
                        true_rate_hz: point.true_rate_hz(),
                        velocity_mm_s,
                        crossings,
                        sensor: point
                            .sensor_faults
                            .iter()
                            .map(|fault| Trouble::of(fault.name(), fault.window(), fault))
                            .collect(),
                        transport: point
                            .transport_faults
                            .iter()
                            .map(|fault| Trouble::of(fault.name(), fault.window(), fault))
                            .collect(),
                    }
                })
                .collect(),
        })
        .collect();
    Truth {
        simulated: true,
        scenario: scenario.name.clone(),
        about: scenario.about.clone(),
        seed: scenario.seed,
        start: rfc3339(start_ns),
        duration_s: scenario.duration.0,
        line_hz: scenario.line_hz,
        assets,
    }
}

fn faults(scenario: &Scenario, asset: &Asset, start_ns: i64) -> Vec<FaultTruth> {
    let root = Draw::new(scenario.seed).part(&asset.id);
    asset
        .faults
        .iter()
        .enumerate()
        .map(|(number, fault)| {
            let kind = fault.kind();
            let growth = kind.growth();
            let law = match growth.law {
                GrowthLaw::Step => "step",
                GrowthLaw::Linear => "linear",
                GrowthLaw::Exponential => "exponential",
            };
            FaultTruth {
                kind: fault.word().to_owned(),
                point: kind.point().map(str::to_owned),
                severity: kind.severity().to_owned(),
                from: if growth.law == GrowthLaw::Step {
                    growth.to
                } else {
                    growth.from
                },
                to: growth.to,
                law: law.to_owned(),
                onset_s: growth.onset.0,
                onset: moment(start_ns, growth.onset.0),
                full_s: growth.full_s(),
                lines: kind.expected(
                    asset,
                    scenario.line_hz,
                    &root.part(&format!("fault {number}")),
                ),
            }
        })
        .collect()
}
