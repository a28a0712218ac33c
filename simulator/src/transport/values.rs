//! Speeds and process values of one machine.
//!
//! Speed: the true one with a reading error of 0.02 % (common practice, no source), to 0.01 r/min. Run bit: whether
//! the motor has power ([`powered`]). Flow: rated flow x speed / nominal x load (affinity of flow and speed, from memory), to 0.01 m3/h. Each at
//! multiples of its interval, the first at the start.

use humward_wire::id::{Id, IdFault};
use humward_wire::topic::Topics;
use serde_json::{Value, json};

use super::{Arrivals, Delivery, latency_ns, ns};
use crate::machine::powered;
use crate::random::Draw;
use crate::scenario::{Asset, Process};
use crate::wave::Tick;

/// Standard deviation of a speed reading, relative.
pub const SPEED_ERROR: f64 = 2e-4;

/// Something told at multiples of an interval.
#[derive(Clone, Copy, Debug)]
struct Every {
    interval_s: f64,
    told: u64,
}

impl Every {
    /// The next moment it is told, if that lies before `end_s`.
    fn due(&mut self, end_s: f64) -> Option<f64> {
        let at_s = self.told as f64 * self.interval_s;
        (at_s < end_s).then(|| {
            self.told += 1;
            at_s
        })
    }
}

/// What one machine tells beside its blocks.
#[derive(Clone, Debug)]
pub struct Values {
    start_ns: i64,
    speed_topic: String,
    process_topic: String,
    schedule: Vec<(f64, f64)>,
    speed: Option<Every>,
    process: Option<(Every, Process)>,
    draw: Draw,
    latency: Draw,
}

impl Values {
    /// What `asset` tells in a scenario that starts at `start_ns`.
    ///
    /// # Errors
    /// The asset's id is none; a checked scenario has good ones.
    pub fn new(
        asset: &Asset,
        topics: &Topics,
        start_ns: i64,
        draw: &Draw,
    ) -> Result<Values, IdFault> {
        let id = Id::new(&asset.id)?;
        let every = |interval_s: f64| Every {
            interval_s,
            told: 0,
        };
        Ok(Values {
            start_ns,
            speed_topic: topics.speed(&id),
            process_topic: topics.process(&id),
            schedule: asset.schedule(),
            speed: asset.speed_every.map(|interval| every(interval.0)),
            process: asset
                .process
                .clone()
                .map(|process| (every(process.every.0), process)),
            draw: draw.part("values"),
            latency: draw.part("values latency"),
        })
    }

    /// Tells what is due within the tick.
    pub fn tell(&mut self, tick: &Tick, arrivals: &mut Arrivals) {
        let end_s = tick.to.at_s;
        while let Some(at_s) = self.speed.as_mut().and_then(|every| every.due(end_s)) {
            let rpm = 60.0 * tick.at(at_s).shaft_hz * (1.0 + SPEED_ERROR * self.draw.normal());
            let at = self.start_ns.saturating_add(ns(at_s));
            let message = json!({"at": at, "rpm": hundredths(rpm)});
            self.send(at, self.speed_topic.clone(), &message, arrivals);
        }
        while let Some(at_s) = self
            .process
            .as_mut()
            .and_then(|(every, _)| every.due(end_s))
        {
            self.tell_process(tick, at_s, arrivals);
        }
    }

    fn tell_process(&mut self, tick: &Tick, at_s: f64, arrivals: &mut Arrivals) {
        let Some((_, process)) = &self.process else {
            return;
        };
        let at = self.start_ns.saturating_add(ns(at_s));
        let run = process.run.as_ref().map(|name| {
            let value = powered(&self.schedule, at_s);
            json!({"at": at, "name": name, "value": value})
        });
        let flow = process.flow_m3_h.map(|rated| {
            let state = tick.at(at_s);
            let value = hundredths(rated * state.shaft_hz / state.nominal_hz * state.load);
            json!({"at": at, "name": "flow", "value": value, "unit": "m3/h"})
        });
        for message in run.into_iter().chain(flow) {
            self.send(at, self.process_topic.clone(), &message, arrivals);
        }
    }

    fn send(&mut self, at: i64, topic: String, message: &Value, arrivals: &mut Arrivals) {
        arrivals.push(Delivery {
            arrival_ns: at.saturating_add(latency_ns(&mut self.latency)),
            topic,
            payload: message.to_string().into_bytes(),
        });
    }
}

fn hundredths(value: f64) -> f64 {
    (value * 100.0).round() / 100.0
}
