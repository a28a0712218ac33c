//! What goes wrong with a machine, one file a kind.
//!
//! A fault states its growth in its own unit, makes its waves for each point that hears it, and tells the lines to
//! expect. A further kind is a file here, a line in [`Fault`] and one in [`Fault::kind`].

mod cavitation;
mod electrical;
mod expected;
mod imbalance;
mod knocks;
mod looseness;
mod misalignment;
mod race;
mod vane_pass;

pub use cavitation::Cavitation;
pub use electrical::Electrical;
pub use expected::{Expected, Seen};
pub use imbalance::Imbalance;
pub use knocks::Knocks;
pub use looseness::{Looseness, clipped_cosine};
pub use misalignment::Misalignment;
pub use race::{FELT, FLOOR, InnerRace, OuterRace, PIT, RacePit};
pub use vane_pass::VanePass;

use std::sync::Arc;

use serde::Deserialize;

use crate::machine::Path;
use crate::random::Draw;
use crate::scenario::{Asset, Point};
use crate::wave::{Growth, GrowthLaw, Wave};

/// Where a fault's waves are to be heard.
#[derive(Debug)]
pub struct Seat<'a> {
    /// The machine that has the fault.
    pub asset: &'a Asset,
    /// The point that hears it: of that machine or of a neighbour.
    pub point: &'a Point,
    /// The way there.
    pub path: Arc<Path>,
    /// Whether impacts get there, and how strong: 1 at the fault's own point, less at others, 0 at a neighbour's.
    pub impact_gain: f64,
    /// Nominal frequency of the supply, Hz.
    pub line_hz: f64,
    /// Draws of the fault: the same at every point.
    pub draw: Draw,
    /// Draws of the fault as heard at this point.
    pub local: Draw,
}

/// One kind of fault.
pub trait Kind {
    /// Its growth; the severity's unit is the kind's.
    fn growth(&self) -> &Growth;
    /// The point it sits at; `None` when the whole machine has it.
    fn point(&self) -> Option<&str>;
    /// Its waves at a seat.
    fn waves(&self, seat: &Seat<'_>) -> Vec<Box<dyn Wave>>;
    /// The lines to expect at nominal speed, in closed form.
    fn expected(&self, asset: &Asset, line_hz: f64, draw: &Draw) -> Vec<Expected>;
    /// What the severity is, with its unit.
    fn severity(&self) -> &'static str;
    /// Adds what does not fit.
    fn check(&self, asset: &Asset, faults: &mut Vec<String>);
}

/// A fault of a scenario.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(tag = "kind", rename_all = "kebab-case")]
pub enum Fault {
    /// Mass off the axis.
    Imbalance(Imbalance),
    /// Shafts that do not meet.
    Misalignment(Misalignment),
    /// A foot or cap that lifts.
    Looseness(Looseness),
    /// Vanes heard too well.
    VanePass(VanePass),
    /// Vapour at the impeller.
    Cavitation(Cavitation),
    /// A pit in the outer ring of a bearing.
    OuterRace(OuterRace),
    /// A pit in the inner ring of a bearing.
    InnerRace(InnerRace),
    /// The motor's electrical lines.
    Electrical(Electrical),
    /// Knocks from outside: no defect.
    Knocks(Knocks),
}

impl Fault {
    /// What kind it is.
    #[must_use]
    pub fn kind(&self) -> &dyn Kind {
        match self {
            Fault::Imbalance(fault) => fault,
            Fault::Misalignment(fault) => fault,
            Fault::Looseness(fault) => fault,
            Fault::VanePass(fault) => fault,
            Fault::Cavitation(fault) => fault,
            Fault::OuterRace(fault) => fault,
            Fault::InnerRace(fault) => fault,
            Fault::Electrical(fault) => fault,
            Fault::Knocks(fault) => fault,
        }
    }

    /// Its word in scenarios and truth.
    #[must_use]
    pub fn word(&self) -> &'static str {
        match self {
            Fault::Imbalance(_) => "imbalance",
            Fault::Misalignment(_) => "misalignment",
            Fault::Looseness(_) => "looseness",
            Fault::VanePass(_) => "vane-pass",
            Fault::Cavitation(_) => "cavitation",
            Fault::OuterRace(_) => "outer-race",
            Fault::InnerRace(_) => "inner-race",
            Fault::Electrical(_) => "electrical",
            Fault::Knocks(_) => "knocks",
        }
    }

    /// Adds what does not fit the asset.
    pub fn check(&self, asset: &Asset, faults: &mut Vec<String>) {
        self.kind().check(asset, faults);
    }
}

/// Adds what is wrong with a growth whose severity may lie in `low..=high`.
pub(crate) fn check_growth(
    kind: &str,
    asset: &Asset,
    growth: &Growth,
    low: f64,
    high: f64,
    faults: &mut Vec<String>,
) {
    let here = format!("asset {}: {kind}", asset.id);
    for (what, value) in [("from", growth.from), ("to", growth.to)] {
        crate::scenario::within(
            faults,
            &format!("{here}: growth.{what}"),
            value,
            low,
            high,
            "",
        );
    }
    if growth.law == GrowthLaw::Exponential && growth.from.min(growth.to) <= 0.0 {
        faults.push(format!(
            "{here}: exponential growth from {} never gets anywhere; begin above 0",
            growth.from
        ));
    }
}

/// Adds a fault unless the asset has the point.
pub(crate) fn check_point(kind: &str, asset: &Asset, point: &str, faults: &mut Vec<String>) {
    if !asset.points.iter().any(|there| there.id == point) {
        let there: Vec<&str> = asset.points.iter().map(|point| point.id.as_str()).collect();
        faults.push(format!(
            "asset {}: {kind}: point {point} is none of the asset's; allowed: {}",
            asset.id,
            there.join(", ")
        ));
    }
}
