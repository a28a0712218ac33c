//! What is kept of outcomes, and that nothing let go goes untold.

use std::sync::Arc;

use humward_monitor::input::Identity;
use humward_monitor::time::{Arrival, SECOND};
use humward_wire::id::Id;
use humward_wire::out::{Gateway, GatewayEvent, GatewayEventKind, GatewayState, Message as _};
use humward_wire::topic::Topics;

use super::{Committer, Outcome, channel};
use crate::gateway::{Book, Constants, Told};
use crate::outbox::{Memory, Sending, Shared};

fn id(text: &str) -> Id {
    Id::new(text).expect("a test id")
}

fn committer(capacity: usize) -> (std::sync::mpsc::SyncSender<Outcome>, Committer) {
    let (to, from) = channel();
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
    let committer = Committer {
        from,
        outbox: Shared::new(Box::new(Memory::new(capacity))),
        book: Arc::new(Book::new(constants, 1)),
        topics: Topics::new("humward/v1", &id("harbour")).expect("a test root"),
    };
    (to, committer)
}

fn told(second: i64, text: &str) -> Outcome {
    Outcome::Told(
        Arrival::from_ns(second * SECOND),
        Told::new(GatewayEventKind::ClockStep, text.into()),
    )
}

fn keep(committer: &Committer, outcomes: Vec<Outcome>, overflow: &mut Option<super::Overflow>) {
    committer.keep(outcomes, overflow);
}

/// Delivers everything that waits.
fn deliver(outbox: &Shared) -> Vec<Sending> {
    let mut sent = Vec::new();
    while let Some(sending) = { outbox.lock().next() } {
        outbox.lock().acknowledged(sending.id);
        sent.push(sending);
    }
    sent
}

fn events(sent: &[Sending]) -> Vec<GatewayEvent> {
    let letters = sent.iter().filter(|sending| !sending.retain);
    letters
        .map(|sending| GatewayEvent::from_json(&sending.payload).expect("an event of ours"))
        .collect()
}

#[test]
fn events_are_numbered_in_the_order_they_are_kept_and_the_state_says_the_last_number() {
    let (_to, committer) = committer(100_000);
    keep(&committer, vec![told(1, "a"), told(2, "b")], &mut None);
    let sent = deliver(&committer.outbox);
    let numbers: Vec<u64> = events(&sent).iter().map(|event| event.n).collect();
    assert_eq!(numbers, [1, 2]);
    let state = sent
        .iter()
        .find(|sending| sending.retain)
        .expect("the gateway's state");
    assert_eq!(
        Gateway::from_json(&state.payload)
            .expect("a state of ours")
            .last_n,
        2
    );
}

#[test]
fn the_last_word_is_offline() {
    let (to, committer) = committer(100_000);
    let outbox = committer.outbox.clone();
    to.send(Outcome::Beat(Arrival::from_ns(SECOND), 0))
        .expect("the committer is there");
    to.send(Outcome::Offline(Arrival::from_ns(2 * SECOND)))
        .expect("the committer is there");
    drop(to);
    committer.run();
    let sent = deliver(&outbox);
    let states: Vec<GatewayState> = sent
        .iter()
        .map(|sending| {
            Gateway::from_json(&sending.payload)
                .expect("a state of ours")
                .state
        })
        .collect();
    assert_eq!(states, [GatewayState::Offline]);
}

#[test]
fn what_a_full_outbox_let_go_is_counted_at_once_and_told_when_there_is_room_again() {
    let (_to, committer) = committer(2_000);
    let mut overflow = None;
    let long = "x".repeat(400);
    for second in 0..10 {
        keep(&committer, vec![told(second, &long)], &mut overflow);
    }
    let lost = committer.book.count("outbox_full");
    assert!(lost > 0 && lost < 10, "{lost} let go");
    let delivered = events(&deliver(&committer.outbox));
    assert_eq!(delivered.len() as u64 + lost, 10);
    assert_eq!(
        delivered.last().map(|event| event.n),
        Some(10),
        "the oldest are let go, not the newest"
    );
    keep(
        &committer,
        vec![Outcome::Beat(Arrival::from_ns(20 * SECOND), 0)],
        &mut overflow,
    );
    let omitted = events(&deliver(&committer.outbox));
    assert_eq!(omitted.len(), 1);
    assert_eq!(
        (omitted[0].kind, omitted[0].count),
        (GatewayEventKind::Omitted, Some(lost))
    );
    assert_eq!(omitted[0].reason.as_deref(), Some("outbox_full"));
    keep(
        &committer,
        vec![Outcome::Beat(Arrival::from_ns(30 * SECOND), 0)],
        &mut overflow,
    );
    assert!(
        events(&deliver(&committer.outbox)).is_empty(),
        "it is told once"
    );
}
