//! What goes wrong with a machine, one file a kind.
//!
//! A fault states its growth in its own unit, makes its waves for each point that hears it, and tells the lines to
//! expect. A further kind is a file here, a line in [`Fault`] and one in [`Fault::kind`].

mod expected;
mod imbalance;

pub use expected::{Expected, Seen};
pub use imbalance::Imbalance;

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
    fn expected(&self, asset: &Asset, draw: &Draw) -> Vec<Expected>;
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
}

impl Fault {
    /// What kind it is.
    #[must_use]
    pub fn kind(&self) -> &dyn Kind {
        match self {
            Fault::Imbalance(fault) => fault,
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
