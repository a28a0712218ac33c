//! Supply and machines going through time together, and what each point hears of them.
//!
//! In: a checked scenario. Out: one [`Tick`] per machine and step, the machines' [`State`]s, and the waves that reach
//! a point: of its own machine, its faults, its drive, and of every neighbour on the same foundation. No sensor and no
//! message: the truth is computed from here. Everything is drawn from the seed and the names of asset and point.

use std::sync::Arc;

use crate::fault::Seat;
use crate::machine::{Motion, Path, Supply, background, electrical, healthy};
use crate::random::Draw;
use crate::scenario::{Point, Scenario};
use crate::wave::{Growth, Law, State, TICK_S, Tick, Wave};

/// A wave and the machine that drives it.
pub struct Heard {
    /// Index of the machine in the scenario.
    pub machine: usize,
    /// The wave.
    pub wave: Box<dyn Wave>,
}

/// Machines, supply and time, without a sensor: what the truth is computed from.
#[derive(Debug)]
pub struct Plant {
    supply: Supply,
    motions: Vec<Motion>,
}

impl Plant {
    /// The plant of `scenario` at its start.
    #[must_use]
    pub fn new(scenario: &Scenario) -> Plant {
        let root = Draw::new(scenario.seed);
        let supply = Supply::new(scenario.line_hz, root.part("supply"));
        let motions = scenario
            .assets
            .iter()
            .map(|asset| Motion::new(asset, &supply, &root.part(&asset.id)))
            .collect();
        Plant { supply, motions }
    }

    /// Goes on by one tick; one entry per asset.
    pub fn advance(&mut self) -> Vec<Tick> {
        self.supply.advance(TICK_S);
        self.motions
            .iter_mut()
            .map(|motion| motion.advance(&self.supply))
            .collect()
    }

    /// The machines now.
    #[must_use]
    pub fn states(&self) -> Vec<State> {
        self.motions.iter().map(|motion| *motion.state()).collect()
    }
}

/// Everything point `point` of asset `index` hears: its own machine, its faults, its neighbours on the foundation.
#[must_use]
pub fn heard(scenario: &Scenario, index: usize, point: &Point) -> Vec<Heard> {
    let root = Draw::new(scenario.seed);
    let own = &scenario.assets[index];
    let here = root.part(&own.id).part(&point.id);
    let rate_hz = point.true_rate_hz();
    let path = Path::drawn(here.part("path"), rate_hz).times(point.share);
    let mut all = vec![Heard {
        machine: index,
        wave: Box::new(background(
            &here,
            own.nominal_rpm() / 60.0,
            scenario.line_hz,
            rate_hz,
        )),
    }];
    for (machine, asset) in scenario.assets.iter().enumerate() {
        let neighbour = machine != index;
        if neighbour && (own.group.is_none() || own.group != asset.group) {
            continue;
        }
        let way = if neighbour {
            let felt = here.part("foundation").part(&asset.id).gain_db(3.0);
            path.times(scenario.foundation * felt)
        } else {
            path.clone()
        };
        let way = Arc::new(way);
        let mut add = |waves: Vec<Box<dyn Wave>>| {
            all.extend(waves.into_iter().map(|wave| Heard { machine, wave }));
        };
        let machine_here = here.part(&asset.id);
        add(healthy(asset, point, &way, &machine_here));
        let usual = asset.motor.map_or(0.0, |motor| motor.electrical_mm_s);
        let law = Law::growing(Growth::constant(usual), 0.0);
        add(electrical(
            asset,
            scenario.line_hz,
            law,
            &way,
            &machine_here,
        ));
        for (number, fault) in asset.faults.iter().enumerate() {
            let kind = fault.kind();
            let name = format!("fault {number}");
            let at_seat = kind.point().is_none_or(|seat| seat == point.id);
            let impact_gain = if neighbour {
                0.0
            } else if at_seat {
                1.0
            } else {
                here.part(&name).between(0.12, 0.3)
            };
            add(kind.waves(&Seat {
                asset,
                point,
                path: Arc::clone(&way),
                impact_gain,
                line_hz: scenario.line_hz,
                draw: root.part(&asset.id).part(&name),
                local: machine_here.part(&name),
            }));
        }
    }
    all
}
