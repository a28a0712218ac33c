//! A pump set and the group whose foundation it shares.

use alloc::{format, string::String, vec::Vec};

use humward_wire::id::Id;

use super::{
    Measure, PointPlan, WatchPlan, WatchSpec, ZoneLimits,
    fault::{Code, Part, PlanFault},
};
use crate::time::Span;

/// How it is known that a machine runs.
///
/// A fresh speed decides first: above `from_rpm` it turns, and runs once that has held still. Without one the level decides: the asset's
/// strongest velocity at or above `from_mm_s` means running, below 0.7 of that stopped, between them as it was.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct RunningRule {
    /// At this speed and above it runs, r/min.
    pub from_rpm: f64,
    /// At this velocity and above it runs when no fresh speed is known, mm/s rms.
    pub from_mm_s: f64,
    /// How long a reported speed stays fresh.
    pub speed_valid: Span,
}

/// How danger is watched for while a machine starts.
///
/// Running limits do not hold then; a watch of velocity, acceleration or high band in rms that has a danger limit
/// stays armed at `factor` times it. Two to three times for 5 s to 10 s is common practice, from memory: API 670
/// multiplies its limits by 2 or 3 while a machine runs up.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct StartingRule {
    /// The armed limit as a multiple of the danger limit, 2 to 3.
    pub factor: f64,
    /// How long it must be passed, 5 s to 30 s.
    pub after: Span,
    /// How long a start lasts after the run signal rises while no speed is reported, 1 s to 10 min.
    pub signal_for: Span,
}

impl StartingRule {
    /// Danger at three times its limit for 10 s; a start whose speed nobody reports lasts 30 s.
    pub const USUAL: Self = Self {
        factor: 3.0,
        after: Span::from_secs(10),
        signal_for: Span::from_secs(30),
    };

    /// The limit a watch is armed at, in its unit; `None` when it is not.
    pub fn armed(&self, watch: &WatchSpec) -> Option<f64> {
        let danger = watch.limits.danger()?;
        match watch.measure {
            Measure::VelocityRms | Measure::AccelerationRms | Measure::HighBandRms => {
                Some(self.factor * danger.value())
            }
            Measure::VelocityPeak
            | Measure::AccelerationPeak
            | Measure::Crest
            | Measure::Kurtosis
            | Measure::Band(_)
            | Measure::Bearing(_) => None,
        }
    }
}

/// The speeds a machine runs at, r/min.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SpeedRange {
    /// The lowest.
    pub lowest: f64,
    /// The one that stands for it when none is reported.
    pub nominal: f64,
    /// The highest.
    pub highest: f64,
}

/// An asset as asked for.
#[derive(Debug, Clone, PartialEq)]
pub struct AssetSpec {
    /// Its id: the tag on its plate.
    pub id: Id,
    /// What people call it and where it stands.
    pub name: String,
    /// Its speeds, r/min.
    pub speed: SpeedRange,
    /// How it is known that it runs.
    pub running: RunningRule,
    /// The process value that tells whether it runs: 0.5 or more means running. It comes before speed and level.
    pub run_signal: Option<Id>,
    /// How danger is watched for while it starts.
    pub starting: StartingRule,
    /// The zones velocity is told in.
    pub zones: Option<ZoneLimits>,
    /// Length of a reading; readings end on its absolute multiples.
    pub reading_every: Span,
    /// How often the status is told when nothing changes.
    pub status_every: Span,
    /// How long a point may send nothing, or nothing usable, before its sensor alarm.
    pub sensor_after: Span,
    /// Its points, in the order of their index.
    pub points: Vec<PointPlan>,
    /// Its watches.
    pub watches: Vec<WatchPlan>,
}

/// A checked asset.
#[derive(Debug, Clone, PartialEq)]
pub struct AssetPlan {
    spec: AssetSpec,
}

impl AssetPlan {
    /// Checks what spans points and watches: speeds that rise, spans in range, ids and names used once,
    /// and that every answer asked for can be had with the rates, frames, bands and sensors given.
    ///
    /// # Errors
    /// Every fault found, each with its key.
    pub fn new(spec: AssetSpec) -> Result<Self, Vec<PlanFault>> {
        let mut faults = Vec::new();
        let mut fault = |code, key, read: String, allowed: String| {
            faults.push(PlanFault {
                code,
                part: Part::Own,
                key,
                read,
                allowed,
            });
        };
        let SpeedRange {
            lowest,
            nominal,
            highest,
        } = spec.speed;
        let rising =
            lowest > 0.0 && nominal >= lowest && highest >= nominal && highest <= 100_000.0;
        if !rising {
            fault(
                Code::OutOfRange,
                "speed",
                format!("{lowest}, {nominal}, {highest}"),
                "lowest, nominal and highest, r/min, rising, above 0 to 100000".into(),
            );
        }
        if !(spec.running.from_rpm >= 0.0 && spec.running.from_rpm <= lowest) {
            fault(
                Code::OutOfRange,
                "running_from_rpm",
                format!("{}", spec.running.from_rpm),
                format!("0 to the lowest speed, {lowest} r/min"),
            );
        }
        if !(spec.running.from_mm_s.is_finite() && spec.running.from_mm_s > 0.0) {
            fault(
                Code::OutOfRange,
                "running_from_mm_s",
                format!("{}", spec.running.from_mm_s),
                "above 0 mm/s rms".into(),
            );
        }
        if !(2.0..=3.0).contains(&spec.starting.factor) {
            fault(
                Code::OutOfRange,
                "starting_factor",
                format!("{}", spec.starting.factor),
                "2 to 3 times danger".into(),
            );
        }
        let spans = [
            ("starting_after", spec.starting.after, 5, 30),
            ("starting_for", spec.starting.signal_for, 1, 600),
            ("reading_every", spec.reading_every, 1, 3600),
            ("status_every", spec.status_every, 1, 86_400),
            ("sensor_after", spec.sensor_after, 1, 30 * 86_400),
            ("speed_valid", spec.running.speed_valid, 1, 30 * 86_400),
        ];
        for (key, span, least, most) in spans {
            if !(Span::from_secs(least)..=Span::from_secs(most)).contains(&span) {
                fault(
                    Code::OutOfRange,
                    key,
                    format!("{} s", span.secs()),
                    format!("{least} s to {most} s"),
                );
            }
        }
        for (i, point) in spec.points.iter().enumerate() {
            if spec.points[..i]
                .iter()
                .any(|earlier| earlier.id() == point.id())
            {
                faults.push(twice(
                    Part::Point(i),
                    "id",
                    point.id().as_str(),
                    "each point id once in its asset",
                ));
            }
        }
        for (i, watch) in spec.watches.iter().enumerate() {
            if spec.watches[..i]
                .iter()
                .any(|earlier| earlier.full_name() == watch.full_name())
            {
                faults.push(twice(
                    Part::Watch(i),
                    "name",
                    watch.full_name(),
                    "each watch name once at its point",
                ));
            }
        }
        if rising {
            faults.extend(super::feasible::faults(&spec));
        }
        if faults.is_empty() {
            Ok(Self { spec })
        } else {
            Err(faults)
        }
    }

    /// The asset as it was asked for, now known to be sound.
    pub const fn spec(&self) -> &AssetSpec {
        &self.spec
    }

    /// Its id.
    pub const fn id(&self) -> &Id {
        &self.spec.id
    }
}

/// Assets that share a foundation: the unit of thread, order and replay.
#[derive(Debug, Clone, PartialEq)]
pub struct GroupPlan {
    id: Id,
    assets: Vec<AssetPlan>,
}

impl GroupPlan {
    /// A group of checked assets.
    ///
    /// # Errors
    /// An asset id used twice.
    pub fn new(id: Id, assets: Vec<AssetPlan>) -> Result<Self, Vec<PlanFault>> {
        let mut faults = Vec::new();
        for (i, asset) in assets.iter().enumerate() {
            if assets[..i].iter().any(|earlier| earlier.id() == asset.id()) {
                faults.push(twice(
                    Part::Own,
                    "id",
                    asset.id().as_str(),
                    "each asset id once in the site",
                ));
            }
        }
        if faults.is_empty() {
            Ok(Self { id, assets })
        } else {
            Err(faults)
        }
    }

    /// Its id.
    pub const fn id(&self) -> &Id {
        &self.id
    }

    /// Its assets, in the order of their index.
    pub fn assets(&self) -> &[AssetPlan] {
        &self.assets
    }
}

fn twice(part: Part, key: &'static str, read: &str, allowed: &str) -> PlanFault {
    PlanFault {
        code: Code::Twice,
        part,
        key,
        read: read.into(),
        allowed: allowed.into(),
    }
}
