//! The plant: supply, machines and sensors going through time together, and the messages they send.
//!
//! In: a checked scenario. Out: [`Delivery`] after delivery in order of arrival, until the scenario's duration is
//! over - or for ever, when endless. Memory does not grow with time. All points of all assets see the same ticks, so
//! machines on one foundation shake each other and one supply drives them all.

use std::collections::VecDeque;

use crate::plant::{Heard, Plant, heard};
use crate::random::Draw;
use crate::scenario::{Asset, Point, Scenario};
use crate::sensor::Sensor;
use crate::transport::Delivery;
use crate::wave::{Stretch, Tick};

/// One sensor on its way.
struct Listening {
    waves: Vec<Heard>,
    sensor: Sensor,
    /// True sampling interval, s.
    step_s: f64,
    /// Samples so far.
    taken: u64,
    buffer: Vec<f64>,
}

impl Listening {
    /// The samples that fall into the tick, as the sensor gives them.
    fn listen(&mut self, ticks: &[Tick]) -> &[f64] {
        let end_s = ticks[0].to.at_s;
        let until = (end_s / self.step_s).ceil().max(0.0) as u64;
        let count = until.saturating_sub(self.taken) as usize;
        let stretch = Stretch {
            first_s: self.taken as f64 * self.step_s,
            step_s: self.step_s,
            count,
        };
        self.buffer.clear();
        self.buffer.resize(count, 0.0);
        for heard in &mut self.waves {
            heard
                .wave
                .add(&ticks[heard.machine], stretch, &mut self.buffer);
        }
        self.sensor
            .sense(stretch.first_s, stretch.step_s, &mut self.buffer);
        self.taken = until;
        &self.buffer
    }
}

/// The running plant with its sensors.
pub struct World {
    plant: Plant,
    listening: Vec<Listening>,
    ready: VecDeque<Delivery>,
}

impl World {
    /// The plant of `scenario` at its start.
    #[must_use]
    pub fn new(scenario: &Scenario) -> World {
        let root = Draw::new(scenario.seed);
        let mut listening = Vec::new();
        for (index, asset) in scenario.assets.iter().enumerate() {
            for point in &asset.points {
                let draw = root.part(&asset.id).part(&point.id);
                listening.push(listen(scenario, index, asset, point, &draw));
            }
        }
        World {
            plant: Plant::new(scenario),
            listening,
            ready: VecDeque::new(),
        }
    }
}

fn listen(scenario: &Scenario, index: usize, _: &Asset, point: &Point, draw: &Draw) -> Listening {
    Listening {
        waves: heard(scenario, index, point),
        sensor: Sensor::new(point, draw),
        step_s: 1.0 / point.true_rate_hz(),
        taken: 0,
        buffer: Vec::new(),
    }
}

impl Iterator for World {
    type Item = Delivery;

    fn next(&mut self) -> Option<Delivery> {
        let ticks = self.plant.advance();
        for listening in &mut self.listening {
            listening.listen(&ticks);
        }
        self.ready.pop_front()
    }
}
