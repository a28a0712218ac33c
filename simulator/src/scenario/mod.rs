//! Scenarios: what is to happen, in TOML, checked before anything is made of it.
//!
//! A scenario names assets with their points and faults, how sensors and transport misbehave, and one seed. Times are
//! text such as `"90s"` or `"1h 20min"`, counted from the start. Unknown keys are faults. The catalogue is compiled
//! in; a file of one's own works alike. Checked by `tests/scenarios.rs`.

mod asset;
mod catalogue;
mod fault;
mod load;
mod point;
mod seconds;
mod window;

pub use asset::{Asset, LoadWalk, Motor, MotorKind, Process, SwayOf};
pub use catalogue::{Entry, catalogue, find};
pub use fault::ScenarioFault;
use load::is_id;
pub(crate) use load::{LONGEST_S, within};
pub use load::{load, parse};
pub use point::{Bearing, Encoding, Point, SampleUnit};
pub use seconds::Seconds;
pub use window::Window;

use serde::Deserialize;

use humward_wire::id::Id;

/// A whole scenario.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Scenario {
    /// The name it was found under.
    #[serde(skip)]
    pub name: String,
    /// One sentence: what happens.
    pub about: String,
    /// Site in the topics.
    pub site: String,
    /// Root of the topics.
    #[serde(default = "root")]
    pub root: String,
    /// Seed of everything drawn.
    pub seed: u64,
    /// When it starts, RFC 3339, unless told otherwise at the command line.
    #[serde(default = "start")]
    pub start: String,
    /// How long it goes on.
    pub duration: Seconds,
    /// Clean velocities, mm/s rms, whose crossing the truth tells.
    #[serde(default)]
    pub levels_mm_s: Vec<f64>,
    /// Frequency of the supply, Hz.
    #[serde(default = "line_hz")]
    pub line_hz: f64,
    /// Share of a machine's lines that its neighbours on the same foundation feel.
    #[serde(default = "foundation")]
    pub foundation: f64,
    /// The pump sets.
    #[serde(rename = "asset")]
    pub assets: Vec<Asset>,
}

fn root() -> String {
    "humward/v1".to_owned()
}

fn start() -> String {
    "2026-03-02T03:00:00Z".to_owned()
}

fn line_hz() -> f64 {
    50.0
}

fn foundation() -> f64 {
    0.05
}

impl Scenario {
    /// The start, ns since 1970 UTC; a checked scenario has one.
    #[must_use]
    pub fn start_ns(&self) -> i64 {
        humward_wire::time::parse(&self.start).unwrap_or(humward_wire::time::EARLIEST_NS)
    }

    /// The site as an id; a checked scenario has one.
    ///
    /// # Errors
    /// As [`Id::new`].
    pub fn site_id(&self) -> Result<Id, humward_wire::id::IdFault> {
        Id::new(&self.site)
    }
}
