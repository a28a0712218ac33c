//! How a shaft turns: its schedule, wander, sway, load, and an induction motor's slip.
//!
//! Speed is the schedule (r/min, linear between its points) x supply / nominal for a motor on the mains
//! x (1 - s load) / (1 - s) for its slip x (1 + wander). Load: an Ornstein-Uhlenbeck walk about its mean. Turns are
//! the integral of speed, trapezoidal at ticks of [`TICK_S`]. Checked by `tests/physics.rs`.

use core::f64::consts::TAU;

use super::Supply;
use super::supply::wander;
use crate::random::Draw;
use crate::scenario::Asset;
use crate::wave::{State, TICK_S, Tick};

/// A shaft on its way.
#[derive(Clone, Debug)]
pub struct Motion {
    schedule: Vec<(f64, f64)>,
    wander: f64,
    sway: (f64, f64, f64),
    load_mean: f64,
    load_walk: (f64, f64),
    load_off: f64,
    slip: Option<f64>,
    supply_nominal_hz: f64,
    off: f64,
    draw: Draw,
    state: State,
    ticks: u64,
}

/// Correlation time of the speed's wander, s.
const WANDER_S: f64 = 15.0;

impl Motion {
    /// The shaft of `asset` at the start of the scenario.
    #[must_use]
    pub fn new(asset: &Asset, supply: &Supply, draw: &Draw) -> Motion {
        let mut draw = draw.part("motion");
        let wander_share = asset.wander_percent / 100.0;
        let sway = asset.sway.map_or((0.0, 1.0, 0.0), |sway| {
            (sway.percent / 100.0, sway.period.0, draw.angle())
        });
        let nominal_hz = asset.nominal_rpm() / 60.0;
        let (line_turns, line_hz) = supply.now();
        let mut motion = Motion {
            schedule: asset.schedule(),
            wander: wander_share,
            sway,
            load_mean: asset.load.mean,
            load_walk: (asset.load.walk, asset.load.over.0),
            load_off: asset.load.walk * draw.normal(),
            slip: asset.slip_at(supply.nominal_hz()),
            supply_nominal_hz: supply.nominal_hz(),
            off: wander_share * draw.normal(),
            draw,
            state: State {
                at_s: 0.0,
                turns: 0.0,
                shaft_hz: 0.0,
                nominal_hz,
                load: 1.0,
                powered: powered(&asset.schedule(), 0.0),
                line_turns,
                line_hz,
            },
            ticks: 0,
        };
        motion.state.load = motion.load();
        motion.state.shaft_hz = motion.speed_hz(0.0, line_hz);
        motion
    }

    /// The machine now.
    #[must_use]
    pub fn state(&self) -> &State {
        &self.state
    }

    fn load(&self) -> f64 {
        (self.load_mean + self.load_off).clamp(0.05, 1.4)
    }

    fn scheduled_rpm(&self, at_s: f64) -> f64 {
        let after = self.schedule.partition_point(|(at, _)| *at <= at_s);
        match (
            after.checked_sub(1).and_then(|i| self.schedule.get(i)),
            self.schedule.get(after),
        ) {
            (Some((t0, r0)), Some((t1, r1))) => r0 + (r1 - r0) * (at_s - t0) / (t1 - t0),
            (Some((_, rpm)), None) | (None, Some((_, rpm))) => *rpm,
            (None, None) => 0.0,
        }
    }

    fn speed_hz(&self, at_s: f64, line_hz: f64) -> f64 {
        let electrical = self.slip.map_or(1.0, |slip| {
            line_hz / self.supply_nominal_hz * (1.0 - slip * self.load()) / (1.0 - slip)
        });
        let (depth, period_s, angle) = self.sway;
        let sway = depth * (TAU * at_s / period_s + angle).sin();
        (self.scheduled_rpm(at_s) / 60.0 * electrical * (1.0 + self.off + sway)).max(0.0)
    }

    /// Goes on by one tick, along with the supply that was advanced before.
    pub fn advance(&mut self, supply: &Supply) -> Tick {
        let from = self.state;
        self.ticks += 1;
        let at_s = self.ticks as f64 * TICK_S;
        let step_s = at_s - from.at_s;
        self.off = wander(self.off, (self.wander, WANDER_S), step_s, &mut self.draw);
        self.load_off = wander(self.load_off, self.load_walk, step_s, &mut self.draw);
        let (line_turns, line_hz) = supply.now();
        let shaft_hz = self.speed_hz(at_s, line_hz);
        self.state = State {
            at_s,
            turns: from.turns + 0.5 * (from.shaft_hz + shaft_hz) * step_s,
            shaft_hz,
            load: self.load(),
            powered: powered(&self.schedule, at_s),
            line_turns,
            line_hz,
            ..from
        };
        Tick {
            from,
            to: self.state,
        }
    }
}

/// Whether the motor has power: the schedule goes to anything but standstill; a machine that runs down has
/// none.
#[must_use]
pub fn powered(schedule: &[(f64, f64)], at_s: f64) -> bool {
    let after = schedule.partition_point(|(at, _)| *at <= at_s);
    schedule
        .get(after)
        .or(schedule.last())
        .is_some_and(|(_, rpm)| *rpm > 0.0)
}

#[cfg(test)]
mod tests {
    use super::powered;

    #[test]
    fn a_motor_has_power_while_it_runs_up_and_none_while_it_runs_down() {
        let schedule = [
            (0.0, 0.0),
            (60.0, 0.0),
            (70.0, 1482.0),
            (300.0, 1482.0),
            (312.0, 0.0),
            (400.0, 0.0),
        ];
        for (at_s, power) in [
            (0.0, false),
            (59.9, false),
            (60.0, true),
            (200.0, true),
            (300.0, false),
            (306.0, false),
            (500.0, false),
        ] {
            assert_eq!(powered(&schedule, at_s), power, "{at_s} s");
        }
        assert!(powered(&[(0.0, 1482.0)], 1e6));
    }
}
