//! The plant with its sensors going through time, and the messages they send.
//!
//! In: a checked scenario. Out: [`Delivery`] after delivery in order of arrival, until the scenario's duration is
//! over and everything sent until then has arrived - or for ever, when endless. Memory does not grow with time. All
//! points of all assets see the same ticks, so machines on one foundation shake each other and one supply drives them
//! all.

use humward_wire::id::{Id, IdFault};
use humward_wire::topic::{TopicFault, Topics};

use crate::plant::{Heard, Plant, heard};
use crate::random::Draw;
use crate::scenario::{Point, Scenario};
use crate::sensor::Sensor;
use crate::transport::{Arrivals, Blocks, Delivery, Values, Way, ns};
use crate::wave::{Stretch, TICK_S, Tick};

/// Why there is no world of a scenario: names that [`crate::scenario::parse`] refuses.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum WorldFault {
    /// Site, asset or point.
    #[error("{name:?}: {cause}")]
    Name {
        /// What it is called.
        name: String,
        /// Why that is no id.
        #[source]
        cause: IdFault,
    },
    /// The root of the topics.
    #[error("root {root:?}: {cause}")]
    Root {
        /// The root.
        root: String,
        /// Why it cannot be one.
        #[source]
        cause: TopicFault,
    },
}

fn id(name: &str) -> Result<Id, WorldFault> {
    Id::new(name).map_err(|cause| WorldFault::Name {
        name: name.to_owned(),
        cause,
    })
}

/// One sensor on its way.
struct Listening {
    waves: Vec<Heard>,
    sensor: Sensor,
    blocks: Blocks,
    way: Way,
    /// True sampling interval, s.
    step_s: f64,
    /// Samples so far.
    taken: u64,
    buffer: Vec<f64>,
}

impl Listening {
    /// Takes the samples that fall into the tick, and sends the blocks that are whole.
    fn listen(&mut self, ticks: &[Tick], end_s: f64, arrivals: &mut Arrivals) {
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
        self.sensor.sense(stretch, &mut self.buffer);
        self.taken = until;
        let (sensor, way) = (&self.sensor, &mut self.way);
        let mut whole = Vec::new();
        self.blocks.take(
            stretch,
            &self.buffer,
            |at_s| sensor.bias_volts(at_s),
            |block| whole.push(block),
        );
        for block in whole {
            way.send(block, &self.blocks, arrivals);
        }
    }
}

/// The running plant with its sensors.
pub struct World {
    plant: Plant,
    listening: Vec<Listening>,
    values: Vec<Values>,
    arrivals: Arrivals,
    start_ns: i64,
    ticks: u64,
    /// Ticks in all; `None`: for ever.
    last: Option<u64>,
}

impl World {
    /// The plant of `scenario` at its own start and for its own duration.
    ///
    /// # Errors
    /// [`WorldFault`], which a checked scenario does not have.
    pub fn new(scenario: &Scenario) -> Result<World, WorldFault> {
        World::starting(scenario, scenario.start_ns())
    }

    /// The same plant for its own duration, started at `start_ns`, ns since 1970 UTC.
    ///
    /// # Errors
    /// As [`World::new`].
    pub fn starting(scenario: &Scenario, start_ns: i64) -> Result<World, WorldFault> {
        let mut world = World::endless(scenario, start_ns)?;
        world.last = Some((scenario.duration.0 / TICK_S - 1e-6).ceil().max(0.0) as u64);
        Ok(world)
    }

    /// The same plant for ever, started at `start_ns`, ns since 1970 UTC.
    ///
    /// # Errors
    /// As [`World::new`].
    pub fn endless(scenario: &Scenario, start_ns: i64) -> Result<World, WorldFault> {
        let topics = Topics::new(&scenario.root, &id(&scenario.site)?).map_err(|cause| {
            WorldFault::Root {
                root: scenario.root.clone(),
                cause,
            }
        })?;
        let root = Draw::new(scenario.seed);
        let mut listening = Vec::new();
        let mut values = Vec::new();
        for (index, asset) in scenario.assets.iter().enumerate() {
            let (name, here) = (id(&asset.id)?, root.part(&asset.id));
            let told = Values::new(asset, &topics, start_ns, &here);
            values.push(told.map_err(|cause| WorldFault::Name {
                name: asset.id.clone(),
                cause,
            })?);
            for point in &asset.points {
                let topic = topics.block(&name, &id(&point.id)?);
                let draw = here.part(&point.id);
                let way = Way::new(point, topic, start_ns, &draw);
                listening.push(listen(heard(scenario, index, point), point, way, &draw));
            }
        }
        Ok(World {
            plant: Plant::new(scenario),
            listening,
            values,
            arrivals: Arrivals::default(),
            start_ns,
            ticks: 0,
            last: None,
        })
    }

    /// How far it is, s after its start.
    #[must_use]
    pub fn at_s(&self) -> f64 {
        self.ticks as f64 * TICK_S
    }

    fn over(&self) -> bool {
        self.last.is_some_and(|last| self.ticks >= last)
    }

    fn advance(&mut self) {
        let ticks = self.plant.advance();
        self.ticks += 1;
        let end_s = self.at_s();
        for (values, tick) in self.values.iter_mut().zip(&ticks) {
            values.tell(tick, &mut self.arrivals);
        }
        for listening in &mut self.listening {
            listening.listen(&ticks, end_s, &mut self.arrivals);
        }
        if self.over() {
            for listening in &mut self.listening {
                listening.way.finish(&mut self.arrivals);
            }
        }
    }
}

fn listen(waves: Vec<Heard>, point: &Point, way: Way, draw: &Draw) -> Listening {
    Listening {
        waves,
        sensor: Sensor::new(point, draw),
        blocks: Blocks::new(point),
        way,
        step_s: 1.0 / point.true_rate_hz(),
        taken: 0,
        buffer: Vec::new(),
    }
}

impl Iterator for World {
    type Item = Delivery;

    /// The next message. What is yet to be sent arrives later than now, so nothing overtakes it.
    fn next(&mut self) -> Option<Delivery> {
        loop {
            if self.over() {
                return self.arrivals.pop_until(i64::MAX);
            }
            let now_ns = self.start_ns.saturating_add(ns(self.at_s()));
            if let Some(delivery) = self.arrivals.pop_until(now_ns) {
                return Some(delivery);
            }
            self.advance();
        }
    }
}
