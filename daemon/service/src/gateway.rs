//! What the gateway says about itself: its retained state, and its own events with their own numbers.
//!
//! [`Book`] is where everybody counts what was lost; counters are words of the wire, so the same word stands in
//! the log, in the losses of `gateway/<id>` and in an event. The state is `blind` while nothing comes in.

use std::collections::BTreeMap;
use std::sync::atomic::{AtomicU64, Ordering};
use std::sync::{Mutex, MutexGuard, PoisonError};
use std::time::Duration;

use humward_monitor::input::Identity;
use humward_monitor::time::Arrival;
use humward_wire::id::Id;
use humward_wire::out::{
    Gateway, GatewayEvent, GatewayEventKind, GatewayState, Header, Instant, Link, Load, Loss,
};

/// The gateway speaks at least this often.
pub const HEARTBEAT: Duration = Duration::from_secs(30);
/// Different reasons counted apart; the rest are counted together, so a counter cannot grow without bound.
const REASONS: usize = 200;

/// Something to tell about the gateway; number and name are given when it is kept.
#[derive(Debug, Clone, PartialEq)]
pub struct Told {
    /// What happened.
    pub kind: GatewayEventKind,
    /// One sentence for people.
    pub text: String,
    /// From when until when.
    pub span: (Option<Arrival>, Option<Arrival>),
    /// Stable word for the cause.
    pub reason: Option<String>,
    /// The topic it is about.
    pub topic: Option<String>,
    /// Byte of the payload at fault.
    pub offset: Option<usize>,
    /// How often.
    pub count: Option<u64>,
}

impl Told {
    /// A kind and a sentence, nothing else.
    pub fn new(kind: GatewayEventKind, text: String) -> Self {
        Self {
            kind,
            text,
            span: (None, None),
            reason: None,
            topic: None,
            offset: None,
            count: None,
        }
    }
}

/// How busy one worker is; counted by it, read by the book.
#[derive(Debug, Default)]
pub struct Meter {
    busy_ns: AtomicU64,
    blocks: AtomicU64,
}

impl Meter {
    /// A letter took so long.
    pub fn worked(&self, time: Duration) {
        self.busy_ns.fetch_add(
            u64::try_from(time.as_nanos()).unwrap_or(u64::MAX),
            Ordering::Relaxed,
        );
    }

    /// A block was accepted.
    pub fn accepted(&self) {
        self.blocks.fetch_add(1, Ordering::Relaxed);
    }
}

/// What does not change while the daemon runs.
#[derive(Debug, Clone)]
pub struct Constants {
    /// Who we are.
    pub identity: Identity,
    /// Hash of the configuration.
    pub config_hash: String,
    /// When we started.
    pub started: Arrival,
    /// How much faster than true time the clock runs.
    pub time_factor: f64,
}

#[derive(Debug)]
struct Inside {
    last_n: u64,
    losses: BTreeMap<String, u64>,
    ingest: Link,
    publish: Link,
    load: Load,
    measured: (Arrival, u64, u64),
}

/// The gateway's account of itself, shared by everything that counts.
#[derive(Debug)]
pub struct Book {
    constants: Constants,
    meters: Vec<Meter>,
    inside: Mutex<Inside>,
}

impl Book {
    /// A new account for so many workers.
    pub fn new(constants: Constants, workers: usize) -> Self {
        let measured = (constants.started, 0, 0);
        Self {
            constants,
            meters: (0..workers).map(|_| Meter::default()).collect(),
            inside: Mutex::new(Inside {
                last_n: 0,
                losses: BTreeMap::new(),
                ingest: Link::Down,
                publish: Link::Down,
                load: Load {
                    busy_share: None,
                    blocks_per_s: None,
                    waiting_bytes: 0,
                },
                measured,
            }),
        }
    }

    /// What does not change.
    pub const fn constants(&self) -> &Constants {
        &self.constants
    }

    /// The meter of one worker.
    pub fn meter(&self, worker: usize) -> Option<&Meter> {
        self.meters.get(worker)
    }

    /// Counts a loss; true when it is the first of its reason.
    pub fn lost(&self, reason: &str, count: u64) -> bool {
        let mut inside = self.lock();
        if let Some(counted) = inside.losses.get_mut(reason) {
            *counted = counted.saturating_add(count);
            return false;
        }
        let room = inside.losses.len() < REASONS;
        let counted = inside
            .losses
            .entry(if room {
                reason.to_owned()
            } else {
                "other".to_owned()
            })
            .or_default();
        *counted = counted.saturating_add(count);
        room
    }

    /// How often something was lost.
    pub fn count(&self, reason: &str) -> u64 {
        self.lock().losses.get(reason).copied().unwrap_or(0)
    }

    /// The connection messages come in by stands like this now.
    pub fn ingest(&self, link: Link) {
        self.lock().ingest = link;
    }

    /// The connection messages go out by stands like this now.
    pub fn publish(&self, link: Link) {
        self.lock().publish = link;
    }

    /// The stamp of the last measurement, for words that are said when no stamp can be had.
    pub fn last_stamp(&self) -> Arrival {
        self.lock().measured.0
    }

    /// Measures the load since the last time.
    pub fn measure(&self, now: Arrival, waiting_bytes: usize) {
        let busy: u64 = self
            .meters
            .iter()
            .map(|meter| meter.busy_ns.load(Ordering::Relaxed))
            .sum();
        let blocks: u64 = self
            .meters
            .iter()
            .map(|meter| meter.blocks.load(Ordering::Relaxed))
            .sum();
        let mut inside = self.lock();
        let (then, busy_then, blocks_then) = inside.measured;
        let seconds = now.since(then).secs();
        if seconds > 0.0 {
            let available = seconds / self.constants.time_factor * self.meters.len().max(1) as f64;
            inside.load.busy_share = Some(((busy - busy_then) as f64 / 1e9 / available).min(1.0));
            inside.load.blocks_per_s = Some((blocks - blocks_then) as f64 / seconds);
            inside.measured = (now, busy, blocks);
        }
        inside.load.waiting_bytes = waiting_bytes as u64;
    }

    /// The state as of `at`: `blind` while nothing comes in.
    pub fn state(&self, at: Arrival) -> Gateway {
        let blind = self.lock().ingest != Link::Up;
        self.message(
            at,
            if blind {
                GatewayState::Blind
            } else {
                GatewayState::Online
            },
        )
    }

    /// The state to be left behind: by the will, or on a clean stop.
    pub fn offline(&self, at: Arrival) -> Gateway {
        let mut message = self.message(at, GatewayState::Offline);
        message.ingest = Link::Down;
        message.publish = Link::Down;
        message
    }

    fn message(&self, at: Arrival, state: GatewayState) -> Gateway {
        let inside = self.lock();
        Gateway {
            header: self.header::<Gateway>(at),
            state,
            state_code: state.code(),
            version: env!("CARGO_PKG_VERSION").to_owned(),
            config_hash: self.constants.config_hash.clone(),
            started: Instant(self.constants.started.ns()),
            last_n: inside.last_n,
            load: inside.load.clone(),
            losses: inside
                .losses
                .iter()
                .map(|(reason, count)| Loss {
                    reason: reason.clone(),
                    count: *count,
                })
                .collect(),
            time_factor: self.constants.time_factor,
            heartbeat_s: HEARTBEAT.as_secs_f64(),
            ingest: inside.ingest,
            publish: inside.publish,
            certificates: Vec::new(),
        }
    }

    /// Numbers and names an event that is about to be kept.
    ///
    /// Events are numbered in the order they are kept, so only who keeps them may call this.
    pub fn event(&self, at: Arrival, told: Told) -> Option<GatewayEvent> {
        let n = {
            let mut inside = self.lock();
            inside.last_n += 1;
            inside.last_n
        };
        let (from, until) = told.span;
        Some(GatewayEvent {
            header: self.header::<GatewayEvent>(at),
            n,
            id: Id::new(&format!("{}-{n}", self.constants.identity.epoch)).ok()?,
            kind: told.kind,
            kind_code: told.kind.code(),
            text: told.text,
            from: from.map(|from| Instant(from.ns())),
            until: until.map(|until| Instant(until.ns())),
            seconds: from
                .zip(until)
                .map(|(from, until)| until.since(from).secs()),
            reason: told.reason,
            topic: told.topic,
            offset: told.offset.map(|offset| offset as u64),
            count: told.count,
            from_n: None,
            to_n: None,
        })
    }

    fn header<M: humward_wire::out::Message>(&self, at: Arrival) -> Header {
        let Identity {
            gateway,
            site,
            epoch,
        } = &self.constants.identity;
        Header::new::<M>(
            gateway.clone(),
            *epoch,
            site.clone(),
            None,
            Instant(at.ns()),
        )
    }

    fn lock(&self) -> MutexGuard<'_, Inside> {
        self.inside.lock().unwrap_or_else(PoisonError::into_inner)
    }
}

#[cfg(test)]
mod tests {
    use std::time::Duration;

    use humward_monitor::input::Identity;
    use humward_monitor::time::{Arrival, SECOND};
    use humward_wire::id::Id;
    use humward_wire::out::{GatewayEventKind, GatewayState, Link};

    use super::{Book, Constants, REASONS, Told};

    fn book() -> Book {
        let id = |text: &str| Id::new(text).expect("a test id");
        let identity = Identity {
            gateway: id("gw-1"),
            site: id("harbour"),
            epoch: 7,
        };
        let started = Arrival::from_ns(100 * SECOND);
        Book::new(
            Constants {
                identity,
                config_hash: "0".into(),
                started,
                time_factor: 1.0,
            },
            2,
        )
    }

    #[test]
    fn the_gateway_is_blind_until_blocks_can_come_in_and_again_when_they_cannot() {
        let book = book();
        let at = Arrival::from_ns(101 * SECOND);
        book.publish(Link::Up);
        assert_eq!(book.state(at).state, GatewayState::Blind);
        book.ingest(Link::Up);
        assert_eq!(book.state(at).state, GatewayState::Online);
        book.ingest(Link::Waiting);
        assert_eq!(book.state(at).state, GatewayState::Blind);
        assert_eq!(
            (book.offline(at).state, book.offline(at).publish),
            (GatewayState::Offline, Link::Down)
        );
    }

    #[test]
    fn own_events_count_up_from_one_under_the_epoch() {
        let book = book();
        let ids: Vec<String> = (0..3)
            .filter_map(|_| {
                book.event(
                    Arrival::from_ns(0),
                    Told::new(GatewayEventKind::Started, "up".into()),
                )
            })
            .map(|event| event.id.to_string())
            .collect();
        assert_eq!(ids, ["7-1", "7-2", "7-3"]);
        assert_eq!(book.state(Arrival::from_ns(0)).last_n, 3);
    }

    #[test]
    fn only_the_first_loss_of_a_reason_is_news_and_reasons_are_bounded() {
        let book = book();
        assert!(book.lost("bad_syntax", 1));
        assert!(!book.lost("bad_syntax", 2));
        assert_eq!(book.count("bad_syntax"), 3);
        for i in 0..2 * REASONS {
            book.lost(&format!("made-up-{i}"), 1);
        }
        assert_eq!(book.state(Arrival::from_ns(0)).losses.len(), REASONS + 1);
    }

    #[test]
    fn the_busy_share_is_work_over_the_time_of_all_workers() {
        let book = book();
        let meter = book.meter(1).expect("two workers");
        meter.worked(Duration::from_secs(5));
        meter.accepted();
        book.measure(Arrival::from_ns(110 * SECOND), 0);
        let load = book.state(Arrival::from_ns(110 * SECOND)).load;
        assert_eq!(
            (load.busy_share, load.blocks_per_s),
            (Some(0.25), Some(0.1))
        );
    }
}
