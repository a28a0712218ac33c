//! One pump set of a scenario.

use serde::Deserialize;

use super::{Point, Seconds};
use crate::fault::Fault;

/// A pump set: shaft, vanes, motor, points, faults.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Asset {
    /// Id in the topics.
    pub id: String,
    /// What people call it.
    #[serde(default)]
    pub name: String,
    /// Foundation it stands on with others.
    #[serde(default)]
    pub group: Option<String>,
    /// Speed at which levels are stated, and which it keeps without a schedule, r/min.
    pub rpm: f64,
    /// Points of (time, r/min), linear in between.
    #[serde(default)]
    pub schedule: Vec<(Seconds, f64)>,
    /// Standard deviation of the speed's wander, %.
    #[serde(default = "wander_percent")]
    pub wander_percent: f64,
    /// A slow swing of the speed.
    #[serde(default)]
    pub sway: Option<SwayOf>,
    /// The load's random walk.
    #[serde(default)]
    pub load: LoadWalk,
    /// Vanes of the impeller.
    #[serde(default = "vanes")]
    pub vanes: u32,
    /// Velocity of the healthy machine at nominal speed, mm/s rms.
    #[serde(default = "velocity_mm_s")]
    pub velocity_mm_s: f64,
    /// The driver.
    #[serde(default)]
    pub motor: Option<Motor>,
    /// How often the speed is reported; never if not given.
    #[serde(default)]
    pub speed_every: Option<Seconds>,
    /// Process values sent beside.
    #[serde(default)]
    pub process: Option<Process>,
    /// Sensors.
    #[serde(rename = "point")]
    pub points: Vec<Point>,
    /// What goes wrong with the machine.
    #[serde(rename = "fault", default)]
    pub faults: Vec<Fault>,
}

fn wander_percent() -> f64 {
    0.1
}

fn vanes() -> u32 {
    5
}

fn velocity_mm_s() -> f64 {
    1.3
}

/// A swing of the speed.
#[derive(Clone, Copy, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct SwayOf {
    /// Amplitude, % of the speed.
    pub percent: f64,
    /// Period.
    pub period: Seconds,
}

/// A random walk of the load about its mean.
#[derive(Clone, Copy, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct LoadWalk {
    /// Share of the rated load.
    #[serde(default = "one")]
    pub mean: f64,
    /// Standard deviation.
    #[serde(default)]
    pub walk: f64,
    /// Correlation time.
    #[serde(default = "ten_minutes")]
    pub over: Seconds,
}

fn one() -> f64 {
    1.0
}

fn ten_minutes() -> Seconds {
    Seconds(600.0)
}

impl Default for LoadWalk {
    fn default() -> LoadWalk {
        LoadWalk {
            mean: one(),
            walk: 0.0,
            over: ten_minutes(),
        }
    }
}

/// What drives the pump.
#[derive(Clone, Copy, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Motor {
    /// Its kind.
    pub kind: MotorKind,
    /// Poles of an induction motor.
    #[serde(default = "four")]
    pub poles: u32,
    /// Velocity of its electrical lines at rated load, mm/s rms: twice line, or the first firing line.
    #[serde(default = "electrical_mm_s")]
    pub electrical_mm_s: f64,
    /// Firing angle of a rectifier, degrees.
    #[serde(default = "thirty")]
    pub firing_deg: f64,
}

fn four() -> u32 {
    4
}

fn electrical_mm_s() -> f64 {
    0.3
}

fn thirty() -> f64 {
    30.0
}

/// Kinds of drivers.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum MotorKind {
    /// Induction motor on the mains: slip, twice line.
    Induction,
    /// Induction motor behind an inverter: twice the output frequency, no slip against the mains.
    VariableSpeed,
    /// Direct-current motor behind a fully controlled six-pulse rectifier.
    Rectifier,
}

/// Process values beside the blocks.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Process {
    /// How often.
    pub every: Seconds,
    /// Name of the run bit, if one is sent.
    #[serde(default)]
    pub run: Option<String>,
    /// Flow at rated load, m3/h, if it is sent; goes with speed and load.
    #[serde(default)]
    pub flow_m3_h: Option<f64>,
}

impl Asset {
    /// The speed at which levels are stated, r/min.
    #[must_use]
    pub fn nominal_rpm(&self) -> f64 {
        self.rpm
    }

    /// Points of (s, r/min).
    #[must_use]
    pub fn schedule(&self) -> Vec<(f64, f64)> {
        if self.schedule.is_empty() {
            return vec![(0.0, self.rpm)];
        }
        self.schedule.iter().map(|(at, rpm)| (at.0, *rpm)).collect()
    }

    /// Rated slip of a motor on the mains.
    #[must_use]
    pub fn slip_at(&self, line_hz: f64) -> Option<f64> {
        let motor = self
            .motor
            .filter(|motor| motor.kind == MotorKind::Induction)?;
        Some(1.0 - self.rpm / (120.0 * line_hz / f64::from(motor.poles)))
    }
}
