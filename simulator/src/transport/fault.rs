//! What can go wrong on the way.

use core::fmt;

use serde::Deserialize;

use crate::scenario::{Seconds, Window, within};

/// Something wrong on the way.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(tag = "kind", rename_all = "kebab-case")]
pub enum TransportFault {
    /// Blocks that never arrive.
    Lost(Share),
    /// Blocks that arrive twice, the second time 5 to 50 ms later.
    Doubled(Share),
    /// Blocks that change places with the next.
    Reordered(Share),
    /// Blocks that arrive later.
    Late(Slow),
    /// The sensor's clock is off by so much.
    ClockStep(Shift),
    /// The sensor starts anew: its counter begins at 0.
    CounterRestart(Restart),
}

/// A share of blocks.
#[derive(Clone, Copy, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Share {
    /// When it begins.
    #[serde(default)]
    pub at: Seconds,
    /// When it ends; never if not given.
    #[serde(default)]
    pub until: Option<Seconds>,
    /// Share of blocks, 0 to 1.
    pub share: f64,
}

/// Blocks that arrive later.
#[derive(Clone, Copy, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Slow {
    /// When it begins.
    #[serde(default)]
    pub at: Seconds,
    /// When it ends; never if not given.
    #[serde(default)]
    pub until: Option<Seconds>,
    /// Share of blocks, 0 to 1; all if not given.
    #[serde(default = "all")]
    pub share: f64,
    /// By how much.
    pub by: Seconds,
}

fn all() -> f64 {
    1.0
}

/// A clock that was set wrong.
#[derive(Clone, Copy, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Shift {
    /// When it is set.
    pub at: Seconds,
    /// When it is set right again; never if not given.
    #[serde(default)]
    pub until: Option<Seconds>,
    /// By how many seconds; forward if positive.
    pub by_s: f64,
}

/// A sensor that starts anew.
#[derive(Clone, Copy, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Restart {
    /// When.
    pub at: Seconds,
}

impl fmt::Display for TransportFault {
    /// What it is and when, in one clause.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.name())?;
        match self {
            TransportFault::Lost(fault)
            | TransportFault::Doubled(fault)
            | TransportFault::Reordered(fault) => {
                write!(f, ", {} % of blocks", 100.0 * fault.share)?;
            }
            TransportFault::Late(fault) => write!(
                f,
                " by {} s, {} % of blocks",
                fault.by.0,
                100.0 * fault.share
            )?,
            TransportFault::ClockStep(fault) => write!(f, " of {} s", fault.by_s)?,
            TransportFault::CounterRestart(fault) => return write!(f, " at {} s", fault.at.0),
        }
        write!(f, ", {}", self.window())
    }
}

impl TransportFault {
    /// What people call it.
    #[must_use]
    pub fn name(&self) -> &'static str {
        match self {
            TransportFault::Lost(_) => "lost",
            TransportFault::Doubled(_) => "doubled",
            TransportFault::Reordered(_) => "reordered",
            TransportFault::Late(_) => "late",
            TransportFault::ClockStep(_) => "clock step",
            TransportFault::CounterRestart(_) => "counter restart",
        }
    }

    /// When it is there.
    #[must_use]
    pub fn window(&self) -> Window {
        match self {
            TransportFault::Lost(fault)
            | TransportFault::Doubled(fault)
            | TransportFault::Reordered(fault) => Window::new(fault.at, fault.until),
            TransportFault::Late(fault) => Window::new(fault.at, fault.until),
            TransportFault::ClockStep(fault) => Window::new(fault.at, fault.until),
            TransportFault::CounterRestart(fault) => Window::new(fault.at, None),
        }
    }

    /// Adds what does not fit.
    pub fn check(&self, here: &str, faults: &mut Vec<String>) {
        let here = format!("{here}: transport {}", self.name());
        self.window().check(&here, faults);
        let mut number = |key: &str, value: f64, low: f64, high: f64, unit: &str| {
            within(faults, &format!("{here}: {key}"), value, low, high, unit);
        };
        match self {
            TransportFault::Lost(fault)
            | TransportFault::Doubled(fault)
            | TransportFault::Reordered(fault) => number("share", fault.share, 0.0, 1.0, ""),
            TransportFault::Late(fault) => {
                number("share", fault.share, 0.0, 1.0, "");
                number("by", fault.by.0, 0.0, 86_400.0, "s");
            }
            TransportFault::ClockStep(fault) => number("by_s", fault.by_s, -1e8, 1e8, "s"),
            TransportFault::CounterRestart(_) => {}
        }
    }
}
