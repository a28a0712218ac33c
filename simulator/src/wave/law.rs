//! How strong a wave is at a moment: growth with time, speed, load, and whether the machine is powered.

use serde::Deserialize;

use super::State;
use crate::scenario::Seconds;

/// How a severity gets from `from` to `to`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum GrowthLaw {
    /// At once.
    Step,
    /// In proportion to time.
    Linear,
    /// By equal factors in equal times: exponential degradation, Gebraeel et al. 2005 (from memory).
    Exponential,
}

/// A stated growth: nothing before `onset`, then from `from` to `to` within `over`, then `to` for good.
#[derive(Clone, Copy, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Growth {
    /// When it begins, after the start of the scenario.
    #[serde(default)]
    pub onset: Seconds,
    /// How long it grows.
    #[serde(default)]
    pub over: Seconds,
    /// Its law.
    #[serde(default = "step")]
    pub law: GrowthLaw,
    /// Severity at the onset; unit and meaning are the fault's.
    #[serde(default)]
    pub from: f64,
    /// Severity at the end.
    pub to: f64,
}

fn step() -> GrowthLaw {
    GrowthLaw::Step
}

impl Growth {
    /// A severity that never changes.
    #[must_use]
    pub const fn constant(value: f64) -> Growth {
        Growth {
            onset: Seconds(f64::NEG_INFINITY),
            over: Seconds(0.0),
            law: GrowthLaw::Step,
            from: value,
            to: value,
        }
    }

    /// Severity `at_s` seconds after the start of the scenario.
    #[must_use]
    pub fn at(&self, at_s: f64) -> f64 {
        let since = at_s - self.onset.0;
        if since < 0.0 {
            return 0.0;
        }
        if since >= self.over.0 || self.law == GrowthLaw::Step {
            return self.to;
        }
        let share = since / self.over.0;
        match self.law {
            GrowthLaw::Step => self.to,
            GrowthLaw::Linear => self.from + (self.to - self.from) * share,
            GrowthLaw::Exponential => self.from * (self.to / self.from).powf(share),
        }
    }

    /// When it has reached its end, s after the start.
    #[must_use]
    pub fn full_s(&self) -> f64 {
        match self.law {
            GrowthLaw::Step => self.onset.0,
            GrowthLaw::Linear | GrowthLaw::Exponential => self.onset.0 + self.over.0,
        }
    }
}

/// What the load does to a wave.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum LoadLaw {
    /// Nothing.
    Indifferent,
    /// Grows by `gain` x its distance from the best point: hydraulic forces off the design flow.
    OffBest {
        /// Factor is 1 + gain |load - 1|.
        gain: f64,
    },
    /// In proportion to the load: forces of the torque.
    Torque,
}

/// When a wave is there at all.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Gate {
    /// Always: it comes from elsewhere.
    Always,
    /// While the shaft turns.
    Turning,
    /// While the shaft turns and the motor has power.
    Powered,
}

/// The strength of a wave relative to what it is at nominal speed, rated load and full growth 1.
#[derive(Clone, Copy, Debug)]
pub struct Law {
    /// Severity over time.
    pub growth: Growth,
    /// Severity to factor.
    pub shape: fn(f64) -> f64,
    /// Factor goes with (speed / nominal)^power.
    pub speed_power: f64,
    /// Load.
    pub load: LoadLaw,
    /// When at all.
    pub gate: Gate,
}

fn itself(severity: f64) -> f64 {
    severity
}

impl Law {
    /// Always the same, as long as the shaft turns at nominal speed; goes with speed^`power` otherwise.
    #[must_use]
    pub fn steady(power: f64) -> Law {
        Law {
            growth: Growth::constant(1.0),
            shape: itself,
            speed_power: power,
            load: LoadLaw::Indifferent,
            gate: Gate::Turning,
        }
    }

    /// The same whatever the machine does.
    #[must_use]
    pub fn elsewhere() -> Law {
        Law {
            gate: Gate::Always,
            ..Law::steady(0.0)
        }
    }

    /// Follows a growth, its severity taken as the factor.
    #[must_use]
    pub fn growing(growth: Growth, power: f64) -> Law {
        Law {
            growth,
            ..Law::steady(power)
        }
    }

    /// The factor in `state`.
    #[must_use]
    pub fn factor(&self, state: &State) -> f64 {
        let open = match self.gate {
            Gate::Always => true,
            Gate::Turning => state.shaft_hz > 0.0,
            Gate::Powered => state.shaft_hz > 0.0 && state.powered,
        };
        if !open {
            return 0.0;
        }
        let speed = match self.speed_power {
            0.0 => 1.0,
            power => (state.shaft_hz / state.nominal_hz).powf(power),
        };
        let load = match self.load {
            LoadLaw::Indifferent => 1.0,
            LoadLaw::OffBest { gain } => 1.0 + gain * (state.load - 1.0).abs(),
            LoadLaw::Torque => state.load.max(0.0),
        };
        (self.shape)(self.growth.at(state.at_s)) * speed * load
    }
}

#[cfg(test)]
mod tests {
    use super::{Growth, GrowthLaw};
    use crate::scenario::Seconds;

    #[test]
    fn growth_is_nothing_before_its_onset_and_its_end_for_good_after_it() {
        let mut growth = Growth {
            onset: Seconds(10.0),
            over: Seconds(20.0),
            law: GrowthLaw::Exponential,
            from: 1.0,
            to: 16.0,
        };
        let at = |growth: &Growth, s: f64| growth.at(s);
        assert_eq!(at(&growth, 9.99), 0.0);
        assert!(
            (at(&growth, 20.0) - 4.0).abs() < 1e-12,
            "half way: the geometric mean"
        );
        assert_eq!((at(&growth, 30.0), at(&growth, 1e6)), (16.0, 16.0));
        growth.law = GrowthLaw::Linear;
        assert!(
            (at(&growth, 20.0) - 8.5).abs() < 1e-12,
            "half way: the arithmetic mean"
        );
        growth.law = GrowthLaw::Step;
        assert_eq!((at(&growth, 10.0), growth.full_s()), (16.0, 10.0));
    }
}
