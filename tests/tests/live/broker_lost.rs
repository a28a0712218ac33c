//! The broker goes away and comes back; a connection is cut before an acknowledgement arrives.

use std::thread;
use std::time::Duration;

use humward_tests::blocks::Stream;
use humward_tests::broker::Broker;
use humward_tests::daemon::Daemon;
use humward_tests::listener::{Heard, Listener};
use humward_tests::proxy::Proxy;
use humward_wire::out::{Event, GatewayEvent, GatewayEventKind, Quality, Status, Transition};

use crate::{BLOCKS, GATEWAY_EVENTS, site};

fn good(heard: &Heard) -> bool {
    heard
        .read::<Status>()
        .points
        .iter()
        .any(|point| point.quality == Quality::Good)
}

#[test]
fn a_broker_that_was_away_is_found_again_and_the_gap_is_told_once() {
    let mut broker = Broker::start();
    let listener = Listener::connect(broker.port(), "listener", "humward/#");
    let mut daemon = Daemon::start(&site(broker.port()));
    daemon.wait_for_log("subscribed to");
    // Half a minute in the long run of the tests.
    let long = std::env::var("HUMWARD_LONG").is_ok_and(|long| long == "yes");
    let outage = Duration::from_secs(if long { 30 } else { 5 });
    let stream = Stream::start(&listener, BLOCKS, 1.0);
    listener.wait_for("a good reading", "status/P-1", good);
    broker.stop();
    daemon.wait_for_log("ingest connection:");
    thread::sleep(outage);
    let mark = listener.mark();
    broker.restart();
    let lost = listener.wait_from(mark, "the loss to be told", GATEWAY_EVENTS, |heard| {
        heard.read::<GatewayEvent>().kind == GatewayEventKind::IngestLost
    });
    let restored = listener.wait_from(mark, "the return to be told", GATEWAY_EVENTS, |heard| {
        heard.read::<GatewayEvent>().kind == GatewayEventKind::IngestRestored
    });
    let (lost, restored) = (lost.read::<GatewayEvent>(), restored.read::<GatewayEvent>());
    assert_eq!(restored.n, lost.n + 1);
    assert_eq!(restored.from, lost.from);
    assert!(
        restored
            .seconds
            .is_some_and(|seconds| seconds >= outage.as_secs_f64()),
        "{restored:?}"
    );
    listener.wait_from(
        mark,
        "a good reading after the gap",
        "status/P-1",
        |heard| {
            let status = heard.read::<Status>();
            let gap = status
                .losses
                .iter()
                .any(|loss| loss.reason == "link_lost" && loss.count == 1);
            // A reading that closed after the return, on the arrival axis.
            let closed = |age: u32| status.header.at.0 - (i64::from(age) + 1) * 1_000_000_000;
            let after = |age: u32| restored.until.is_some_and(|until| closed(age) > until.0);
            gap && status
                .points
                .iter()
                .any(|point| point.quality == Quality::Good && point.age_s.is_some_and(after))
        },
    );
    drop(stream);
    assert!(daemon.runs());
    let of = |kind| {
        let events = listener.heard(GATEWAY_EVENTS);
        events
            .iter()
            .filter(|heard| heard.read::<GatewayEvent>().kind == kind)
            .count()
    };
    assert_eq!(
        (
            of(GatewayEventKind::IngestLost),
            of(GatewayEventKind::IngestRestored)
        ),
        (1, 1)
    );
    assert!(
        listener.heard("event/P-1").is_empty(),
        "a lost broker is no alarm of the asset or its sensors"
    );
}

#[test]
fn an_event_whose_acknowledgement_was_cut_off_is_sent_again_and_order_is_kept() {
    let broker = Broker::start();
    let listener = Listener::connect(broker.port(), "listener", "humward/#");
    let proxy = Proxy::start(broker.port());
    // Few statuses, so that what waits unanswered stays within the window.
    let daemon = Daemon::start(
        &site(proxy.port()).replace("status_every = \"1s\"", "status_every = \"1min\""),
    );
    daemon.wait_for_log("publish connected");
    daemon.wait_for_log("subscribed to");
    listener.wait_for("the first status", "status/P-1", |_| true);
    let events = |listener: &Listener| -> Vec<(u64, Transition)> {
        let heard = listener.heard("event/P-1");
        heard
            .iter()
            .map(|heard| heard.read::<Event>())
            .map(|event| (event.n, event.transition))
            .collect()
    };
    proxy.hold_back(true);
    let stream = Stream::start(&listener, BLOCKS, 4.0);
    listener.wait_for("the alarm", "event/P-1", |heard| {
        heard.read::<Event>().transition == Transition::Raised
    });
    stream.set(0.5);
    // The asset's next event may not leave before the first is acknowledged, which it never is.
    daemon.wait_for_log("cleared");
    assert_eq!(events(&listener), [(1, Transition::Raised)]);
    proxy.hold_back(false);
    proxy.cut();
    listener.wait_for("the end", "event/P-1", |heard| {
        heard.read::<Event>().transition == Transition::Cleared
    });
    drop(stream);
    let (raised, cleared) = ((1, Transition::Raised), (2, Transition::Cleared));
    assert_eq!(events(&listener), [raised, raised, cleared]);
}
