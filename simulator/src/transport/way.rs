//! The way of one sensor's blocks, with what goes wrong on it.

use super::{Arrivals, Block, Blocks, Delivery, TransportFault, latency_ns, ns};
use crate::random::Draw;
use crate::scenario::{Point, Window};

/// Earliest and latest second arrival of a doubled block after the first, s.
pub const DOUBLED_AFTER_S: (f64, f64) = (5e-3, 50e-3);
/// A block that changed places arrives so long after the one it let pass, ns.
const PASSED_NS: i64 = 1_000_000;

/// One fault at work, with draws of its own.
#[derive(Clone, Debug)]
struct AtWork {
    fault: TransportFault,
    window: Window,
    draw: Draw,
    done: bool,
}

/// The way of one sensor's blocks to the broker.
#[derive(Clone, Debug)]
pub struct Way {
    topic: String,
    start_ns: i64,
    seq: u64,
    latency: Draw,
    faults: Vec<AtWork>,
    /// When the last block would have arrived had nothing held it up: the next arrives after that.
    last_ns: i64,
    held: Option<Delivery>,
}

impl Way {
    /// The way of the blocks of `point` to `topic`, in a scenario that starts at `start_ns`.
    #[must_use]
    pub fn new(point: &Point, topic: String, start_ns: i64, draw: &Draw) -> Way {
        let draw = draw.part("transport");
        let faults = point
            .transport_faults
            .iter()
            .enumerate()
            .map(|(number, fault)| AtWork {
                fault: fault.clone(),
                window: fault.window(),
                draw: draw.part(&format!("fault {number}")),
                done: false,
            })
            .collect();
        Way {
            topic,
            start_ns,
            seq: 0,
            latency: draw.part("latency"),
            faults,
            last_ns: i64::MIN,
            held: None,
        }
    }

    /// Sends a block, written as `blocks` does.
    pub fn send(&mut self, mut block: Block, blocks: &Blocks, arrivals: &mut Arrivals) {
        let first_s = block.first_s;
        let mut set_ns = 0_i64;
        let (mut lost, mut doubled, mut late_ns, mut reordered) = (false, None, 0_i64, false);
        for work in &mut self.faults {
            if !work.window.holds(first_s) {
                continue;
            }
            match &work.fault {
                TransportFault::Lost(fault) => lost |= work.draw.happens(fault.share),
                TransportFault::Doubled(fault) => {
                    let after = work.draw.between(DOUBLED_AFTER_S.0, DOUBLED_AFTER_S.1);
                    doubled = work
                        .draw
                        .happens(fault.share)
                        .then_some(ns(after))
                        .or(doubled);
                }
                TransportFault::Reordered(fault) => reordered |= work.draw.happens(fault.share),
                TransportFault::Late(fault) => {
                    if work.draw.happens(fault.share) {
                        late_ns += ns(fault.by.0);
                    }
                }
                TransportFault::ClockStep(fault) => set_ns += ns(fault.by_s),
                TransportFault::CounterRestart(_) => {
                    if !core::mem::replace(&mut work.done, true) {
                        self.seq = 0;
                    }
                }
            }
        }
        let at_ns = Blocks::at_ns(self.start_ns, &block);
        block.content.at = Some(at_ns.saturating_add(set_ns));
        block.content.seq = Some(self.seq);
        self.seq += 1;
        let sent_ns = self.start_ns.saturating_add(ns(block.end_s));
        let arrival_ns = sent_ns
            .saturating_add(latency_ns(&mut self.latency))
            .max(self.last_ns);
        if lost {
            return;
        }
        self.last_ns = arrival_ns;
        let delivery = Delivery {
            arrival_ns: arrival_ns.saturating_add(late_ns),
            topic: self.topic.clone(),
            payload: blocks.write(&block.content),
        };
        if let Some(after_ns) = doubled {
            arrivals.push(Delivery {
                arrival_ns: delivery.arrival_ns.saturating_add(after_ns),
                ..delivery.clone()
            });
        }
        match self.held.take() {
            None if reordered => self.held = Some(delivery),
            held => {
                let passed_ns = delivery.arrival_ns.saturating_add(PASSED_NS);
                arrivals.push(delivery);
                if let Some(held) = held {
                    arrivals.push(later(held, passed_ns));
                }
            }
        }
    }

    /// Sends what still waits for a block to let pass: there is none any more.
    pub fn finish(&mut self, arrivals: &mut Arrivals) {
        if let Some(held) = self.held.take() {
            arrivals.push(held);
        }
    }
}

/// The same message, not before `arrival_ns`.
fn later(delivery: Delivery, arrival_ns: i64) -> Delivery {
    Delivery {
        arrival_ns: delivery.arrival_ns.max(arrival_ns),
        ..delivery
    }
}
