//! What goes in, what is let go, and how both are told; no broker, no worker, no waiting.

use std::sync::Arc;
use std::sync::mpsc::{Receiver, sync_channel};

use bytes::Bytes;
use humward_monitor::input::{Identity, Source};
use humward_monitor::time::Arrival;
use humward_wire::id::Id;
use humward_wire::out::GatewayEventKind;
use humward_wire::topic::Topics;

use super::Intake;
use crate::clock::Clock;
use crate::commit::Outcome;
use crate::gateway::{Book, Constants};
use crate::mailbox::Mailbox;
use crate::mqtt::Standing;
use crate::mqtt::ingest::Arrived;
use crate::route::{About, Route, Routes};
use crate::worker::Letter;

const BLOCKS: &str = "humward/v1/harbour/block/P-1/de";

struct Bench {
    intake: Intake,
    mailbox: Arc<Mailbox<Letter>>,
    book: Arc<Book>,
    outcomes: Receiver<Outcome>,
}

fn id(text: &str) -> Id {
    Id::new(text).expect("a test id")
}

/// An intake with one worker's mailbox of 100 bytes behind it, watching one point and its speed.
fn bench() -> Bench {
    let mut routes = Routes::new(Topics::new("humward/v1", &id("harbour")).expect("a test root"));
    routes.add_asset(id("P-1"), 0);
    let source = Source {
        asset: id("P-1"),
        source: id("de"),
    };
    routes.add(Route {
        topic: BLOCKS.into(),
        group: 0,
        about: About::Block(source, None),
    });
    routes.add(Route {
        topic: "speed".into(),
        group: 0,
        about: About::Speed(id("P-1")),
    });
    let identity = Identity {
        gateway: id("gw-1"),
        site: id("harbour"),
        epoch: 0,
    };
    let started = Arrival::from_ns(0);
    let constants = Constants {
        identity,
        config_hash: String::new(),
        started,
        time_factor: 1.0,
    };
    let book = Arc::new(Book::new(constants, 1));
    let mailbox = Arc::new(Mailbox::new(100));
    let (to, outcomes) = sync_channel(100);
    let intake = Intake::new(
        Clock::new(),
        routes,
        vec![Arc::clone(&mailbox)],
        Arc::clone(&book),
        to,
    );
    Bench {
        intake,
        mailbox,
        book,
        outcomes,
    }
}

impl Bench {
    fn publish(&mut self, topic: &str, bytes: usize, retained: bool) {
        let payload = Bytes::from(vec![0; bytes]);
        self.intake.take(Arrived::Publish {
            topic: topic.into(),
            payload,
            retained,
        });
        self.intake.flush();
    }

    /// Kinds of the gateway's events so far.
    fn told(&self) -> Vec<GatewayEventKind> {
        let kind = |outcome| match outcome {
            Outcome::Told(_, told) => Some(told.kind),
            Outcome::Actions(..) | Outcome::Beat(..) | Outcome::Offline(_) => None,
        };
        self.outcomes.try_iter().filter_map(kind).collect()
    }

    /// The letters in the box, in short.
    fn letters(&self) -> Vec<String> {
        self.mailbox.control(Letter::Stop, |_| false);
        let mut letters = Vec::new();
        loop {
            letters.push(match self.mailbox.take() {
                Letter::Stop => return letters,
                Letter::Payload { route, payload, .. } => {
                    format!("{} bytes on {}", payload.len(), route.topic)
                }
                Letter::Shed { blocks, .. } => format!("{blocks} shed"),
                Letter::Link(_, up) => format!("link {up}"),
                Letter::ClockStep(_, by) => format!("clock step {by}"),
                Letter::Tick(_) => "tick".into(),
            });
        }
    }
}

#[test]
fn blocks_that_find_no_room_become_one_gap_in_front_of_the_next_that_goes_in() {
    let mut bench = bench();
    bench.publish(BLOCKS, 80, false);
    bench.publish(BLOCKS, 80, false);
    bench.publish(BLOCKS, 80, false);
    assert_eq!(bench.letters(), [format!("80 bytes on {BLOCKS}")]);
    bench.publish(BLOCKS, 70, false);
    assert_eq!(
        bench.letters(),
        ["2 shed".to_owned(), format!("70 bytes on {BLOCKS}")]
    );
    assert_eq!(bench.book.count("shed"), 2);
    assert_eq!(
        bench.told(),
        [GatewayEventKind::SamplesShed],
        "shedding is told once, not per block"
    );
}

#[test]
fn a_source_that_stays_silent_after_shedding_is_told_its_gap_at_a_tick_once_the_box_has_drained() {
    let mut bench = bench();
    bench.publish(BLOCKS, 80, false);
    bench.publish(BLOCKS, 80, false);
    bench.intake.tick();
    assert_eq!(
        bench.letters(),
        [format!("80 bytes on {BLOCKS}"), "tick".to_owned()]
    );
    bench.intake.tick();
    bench.intake.tick();
    assert_eq!(bench.letters(), ["1 shed", "tick"]);
}

#[test]
fn retained_blocks_and_commands_are_refused_and_a_retained_speed_is_passed_on_for_its_own_time_to_be_read()
 {
    let mut bench = bench();
    bench.publish(BLOCKS, 10, true);
    bench.publish("humward/v1/harbour/command/scada/P-1", 10, true);
    bench.publish("speed", 10, true);
    assert_eq!(bench.letters(), ["10 bytes on speed"]);
    assert_eq!(bench.book.count("retained"), 2);
    assert_eq!(
        bench.told(),
        [GatewayEventKind::PayloadRefused],
        "the first of a kind is told"
    );
}

#[test]
fn a_lost_link_is_told_to_every_group_and_as_one_event_however_often_the_next_tries_fail() {
    let mut bench = bench();
    let link = |bench: &mut Bench, standing| {
        bench.intake.take(Arrived::Link(standing));
        bench.intake.flush();
    };
    link(&mut bench, Standing::Up);
    for _ in 0..3 {
        link(&mut bench, Standing::Down("away".into()));
    }
    link(&mut bench, Standing::Up);
    assert_eq!(bench.letters(), ["link true", "link false", "link true"]);
    assert_eq!(
        bench.told(),
        [
            GatewayEventKind::IngestLost,
            GatewayEventKind::IngestRestored
        ]
    );
}

#[test]
fn a_broker_that_is_away_at_the_start_blinds_the_groups_but_nothing_was_lost() {
    let mut bench = bench();
    bench
        .intake
        .take(Arrived::Link(Standing::Down("not yet".into())));
    bench
        .intake
        .take(Arrived::Link(Standing::Refused("not you".into())));
    bench.intake.take(Arrived::Link(Standing::Up));
    bench.intake.flush();
    assert_eq!(bench.letters(), ["link false", "link true"]);
    assert!(bench.told().is_empty());
}

#[test]
fn a_slow_keeper_of_messages_does_not_stop_the_intake_and_is_told_later() {
    let mut bench = bench();
    let (to, outcomes) = sync_channel(1);
    bench.intake.to = to;
    bench.outcomes = outcomes;
    bench.publish("one", 1, false);
    bench.intake.take(Arrived::TooLarge(2_000_000));
    bench.intake.flush();
    assert_eq!(bench.told(), [GatewayEventKind::PayloadRefused]);
    bench.intake.flush();
    assert_eq!(bench.told(), [GatewayEventKind::PayloadRefused]);
    assert!(bench.intake.waiting.is_empty());
}
