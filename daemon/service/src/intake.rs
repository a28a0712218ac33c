//! The one stamping task: everything that comes in gets its arrival here, in one order.
//!
//! In: messages and link changes from the connections, ticks, steps of the wall clock. Out: letters in the
//! workers' mailboxes. What cannot go in is counted by a stable word: `retained`, `unknown_topic`, `shed`. A
//! source whose blocks were shed gets one gap, before the next of its blocks that goes in or at the next tick.
//! Never waits for a worker or for the keeper of messages: what the latter has no room for is tried again.

use std::collections::{BTreeMap, VecDeque};
use std::sync::Arc;
use std::sync::mpsc::{SyncSender, TrySendError};
use std::time::Duration;

use humward_monitor::time::{Arrival, Span};
use humward_wire::out::{GatewayEventKind, Instant, Link};
use tokio::sync::{mpsc, watch};

use crate::clock::{Clock, Moment, Stamp, pause_until};
use crate::commit::Outcome;
use crate::gateway::{Book, HEARTBEAT, Told};
use crate::mailbox::Mailbox;
use crate::mqtt::Standing;
use crate::mqtt::ingest::Arrived;
use crate::route::{About, GroupIndex, Route, Routes};
use crate::worker::Letter;

/// Deadlines are looked at this often, in true time.
pub const TICK: Duration = Duration::from_millis(250);
/// After this long without shedding, more of it is news again.
const SHED_QUIET: Span = Span::from_secs(600);

/// Outcomes held back at most while the keeper is slow; states beyond them are said at the next heartbeat.
const WAITING: usize = 256;

/// The stamping task.
#[derive(Debug)]
pub struct Intake {
    clock: Clock,
    routes: Routes,
    /// One box per worker; group `g` belongs to worker `g` modulo their number.
    boxes: Vec<Arc<Mailbox<Letter>>>,
    book: Arc<Book>,
    to: SyncSender<Outcome>,
    waiting: VecDeque<Outcome>,
    shed: BTreeMap<String, (Arc<Route>, u64)>,
    last_shed: Option<Arrival>,
    lost_since: Option<Arrival>,
    was_up: bool,
    told_down: bool,
    beat: Option<Arrival>,
}

impl Intake {
    /// An intake that has seen nothing yet.
    pub fn new(
        clock: Clock,
        routes: Routes,
        boxes: Vec<Arc<Mailbox<Letter>>>,
        book: Arc<Book>,
        to: SyncSender<Outcome>,
    ) -> Self {
        Self {
            clock,
            routes,
            boxes,
            book,
            to,
            waiting: VecDeque::new(),
            shed: BTreeMap::new(),
            last_shed: None,
            lost_since: None,
            was_up: false,
            told_down: false,
            beat: None,
        }
    }

    /// Runs until told to stop, then reads what has still come, stops the workers and gives the last stamp.
    pub async fn run(
        mut self,
        mut arrived: mpsc::Receiver<Arrived>,
        mut standing: mpsc::Receiver<Standing>,
        mut stop: watch::Receiver<bool>,
    ) -> Clock {
        let mut last = Moment::now();
        loop {
            tokio::select! {
                Some(message) = arrived.recv() => self.take(message),
                Some(standing) = standing.recv() => self.publish_link(&standing),
                () = pause_until(last, TICK) => {
                    last = Moment::now();
                    self.tick();
                }
                _ = stop.changed() => break,
            }
            self.flush();
        }
        while let Ok(message) = arrived.try_recv() {
            self.take(message);
        }
        let last = self.stamp();
        self.tell_shed(last.arrival, true);
        for mailbox in &self.boxes {
            mailbox.control(Letter::Stop, |_| false);
        }
        while let Some(outcome) = self.waiting.pop_front() {
            if self.to.send(outcome).is_err() {
                break;
            }
        }
        self.clock
    }

    /// Stamps now. A step of the wall clock goes to every group before anything stamped after it.
    fn stamp(&mut self) -> Stamp {
        let (step, stamp) = self.clock.stamp();
        if let Some(step) = step {
            let seconds = step.by_ns as f64 / 1e9;
            tracing::warn!("the wall clock was set by {seconds:+.1} s");
            self.all(&Letter::ClockStep(step.arrival, step.by_ns));
            let text = format!(
                "the wall clock was set by {seconds:+.1} s; check the time source if this was not meant"
            );
            self.waiting.push_back(Outcome::Told(
                stamp.arrival,
                Told::new(GatewayEventKind::ClockStep, text),
            ));
        }
        stamp
    }

    fn take(&mut self, arrived: Arrived) {
        let stamp = self.stamp();
        match arrived {
            Arrived::Publish {
                topic,
                payload,
                retained,
            } => {
                let Some(route) = self.routes.find(&topic) else {
                    self.refuse(stamp.arrival, "unknown_topic", &topic, "no point, speed or command of the configuration has this topic; correct the sender or map it");
                    return;
                };
                let replay = matches!(route.about, About::Block(..) | About::Command { .. });
                if retained && replay {
                    self.refuse(
                        stamp.arrival,
                        "retained",
                        &topic,
                        "a retained block or command is an old one; publish it without retain",
                    );
                    return;
                }
                self.post(route, stamp, payload, retained);
            }
            Arrived::Link(standing) => self.ingest_link(stamp.arrival, &standing),
            Arrived::TooLarge(bytes) => {
                let text = format!(
                    "a packet of {bytes} bytes ended the connection; let its sensor send shorter blocks"
                );
                self.tell_first(stamp.arrival, "packet_too_large", None, text);
            }
            Arrived::FilterRefused(filter) => {
                let text = format!(
                    "the broker refused the subscription to {filter}; check its access rules"
                );
                self.tell_first(stamp.arrival, "subscription_refused", Some(filter), text);
            }
        }
    }

    fn post(&mut self, route: Arc<Route>, stamp: Stamp, payload: bytes::Bytes, retained: bool) {
        let Some(mailbox) = self.mailbox(route.group).map(Arc::clone) else {
            return;
        };
        let bytes = payload.len();
        let held = self.shed.contains_key(&route.topic);
        // The gap goes in front of the first block after it, so it may only go when that block can, too.
        if held && mailbox.has_room(bytes) {
            self.tell_gap(&route.topic, stamp.arrival);
        }
        let letter = Letter::Payload {
            route,
            stamp,
            payload,
            retained,
        };
        if let Err(Letter::Payload { route, .. }) = mailbox.post(letter, bytes) {
            self.book.lost("shed", 1);
            if self
                .last_shed
                .is_none_or(|last| stamp.arrival.since(last) > SHED_QUIET)
            {
                tracing::warn!(
                    "the workers cannot keep up: samples are let go, first on {}",
                    route.topic
                );
                let told = Told {
                    topic: Some(route.topic.clone()),
                    reason: Some("shed".into()),
                    ..Told::new(
                        GatewayEventKind::SamplesShed,
                        "the box cannot keep up and lets samples go; see the load, watch fewer points or use a faster box".into(),
                    )
                };
                self.waiting.push_back(Outcome::Told(stamp.arrival, told));
            }
            self.last_shed = Some(stamp.arrival);
            if matches!(route.about, About::Block(..)) {
                let entry = self.shed.entry(route.topic.clone()).or_insert((route, 0));
                entry.1 += 1;
            }
        }
    }

    fn tell_gap(&mut self, topic: &str, arrival: Arrival) {
        if let Some((route, blocks)) = self.shed.remove(topic)
            && let Some(mailbox) = self.mailbox(route.group)
        {
            mailbox.control(
                Letter::Shed {
                    route,
                    arrival,
                    blocks,
                },
                |_| false,
            );
        }
    }

    /// Tells the gaps of sources that sent nothing since, once their box has drained to half.
    fn tell_shed(&mut self, arrival: Arrival, all: bool) {
        let drained = |route: &Route| {
            self.mailbox(route.group)
                .is_some_and(|mailbox| mailbox.is_half_empty())
        };
        let topics: Vec<String> = self
            .shed
            .iter()
            .filter(|(_, (route, _))| all || drained(route))
            .map(|(topic, _)| topic.clone())
            .collect();
        for topic in topics {
            self.tell_gap(&topic, arrival);
        }
    }

    fn mailbox(&self, group: GroupIndex) -> Option<&Arc<Mailbox<Letter>>> {
        self.boxes.get(group % self.boxes.len().max(1))
    }

    fn tick(&mut self) {
        let stamp = self.stamp();
        self.tell_shed(stamp.arrival, false);
        for mailbox in &self.boxes {
            mailbox.control(Letter::Tick(stamp.arrival), |last| {
                matches!(last, Letter::Tick(_))
            });
        }
        let heartbeat = Span::from_secs_f64(HEARTBEAT.as_secs_f64() * self.clock.factor());
        if self
            .beat
            .is_none_or(|last| stamp.arrival.since(last) >= heartbeat)
        {
            self.say_state(stamp.arrival);
        }
    }

    fn say_state(&mut self, arrival: Arrival) {
        self.beat = Some(arrival);
        if self.waiting.len() >= WAITING {
            return;
        }
        let waiting = self.boxes.iter().map(|mailbox| mailbox.waiting()).sum();
        self.waiting.push_back(Outcome::Beat(arrival, waiting));
    }

    fn ingest_link(&mut self, arrival: Arrival, standing: &Standing) {
        self.book.ingest(link(standing));
        match standing {
            Standing::Up => {
                self.was_up = true;
                if let Some(since) = self.lost_since.take() {
                    let seconds = arrival.since(since).secs();
                    let told = Told {
                        span: (Some(since), Some(arrival)),
                        ..Told::new(
                            GatewayEventKind::IngestRestored,
                            format!(
                                "blocks can come in again after {seconds:.0} s; samples of that time may be missing"
                            ),
                        )
                    };
                    self.waiting.push_back(Outcome::Told(arrival, told));
                }
                self.told_down = false;
                self.all(&Letter::Link(arrival, true));
            }
            Standing::Down(why) | Standing::Refused(why) => {
                if !self.told_down {
                    self.told_down = true;
                    self.all(&Letter::Link(arrival, false));
                }
                if self.was_up && self.lost_since.is_none() {
                    self.lost_since = Some(arrival);
                    let told = Told {
                        span: (Some(arrival), None),
                        ..Told::new(
                            GatewayEventKind::IngestLost,
                            format!(
                                "no block can come in since {}: {why}",
                                Instant(arrival.ns())
                            ),
                        )
                    };
                    self.waiting.push_back(Outcome::Told(arrival, told));
                }
            }
        }
        self.say_state(arrival);
    }

    fn publish_link(&mut self, standing: &Standing) {
        self.book.publish(link(standing));
        let arrival = self.stamp().arrival;
        self.say_state(arrival);
    }

    fn refuse(&mut self, arrival: Arrival, reason: &'static str, topic: &str, remedy: &str) {
        self.tell_first(arrival, reason, Some(topic.to_owned()), remedy.to_owned());
    }

    /// Counts a loss; the first of its reason is logged and told.
    fn tell_first(
        &mut self,
        arrival: Arrival,
        reason: &'static str,
        topic: Option<String>,
        text: String,
    ) {
        if self.book.lost(reason, 1) {
            tracing::warn!(
                "{}{text}",
                topic
                    .as_ref()
                    .map(|topic| format!("{topic}: "))
                    .unwrap_or_default()
            );
            let told = Told {
                reason: Some(reason.to_owned()),
                topic,
                ..Told::new(GatewayEventKind::PayloadRefused, text)
            };
            self.waiting.push_back(Outcome::Told(arrival, told));
        }
    }

    fn all(&self, letter: &Letter) {
        for mailbox in &self.boxes {
            mailbox.control(letter.clone(), |_| false);
        }
    }

    fn flush(&mut self) {
        while let Some(outcome) = self.waiting.pop_front() {
            match self.to.try_send(outcome) {
                Ok(()) => {}
                Err(TrySendError::Full(outcome)) => {
                    self.waiting.push_front(outcome);
                    return;
                }
                Err(TrySendError::Disconnected(_)) => {
                    tracing::error!("the keeper of messages has ended");
                    return;
                }
            }
        }
    }
}

fn link(standing: &Standing) -> Link {
    match standing {
        Standing::Up => Link::Up,
        Standing::Down(_) => Link::Waiting,
        Standing::Refused(_) => Link::Refused,
    }
}

#[cfg(test)]
mod tests;
