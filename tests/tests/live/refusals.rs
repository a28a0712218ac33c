//! What does not fit is refused, counted, told once, and harms nothing.

use humward_tests::blocks::{BLOCK_NS, quarter_ns, sine};
use humward_tests::broker::Broker;
use humward_tests::daemon::Daemon;
use humward_tests::listener::Listener;
use humward_wire::out::{Gateway, GatewayEvent, GatewayEventKind, Status};

use crate::{BLOCKS, GATEWAY, GATEWAY_EVENTS, site};

fn told(listener: &Listener, reason: &str) -> GatewayEvent {
    let fits = |event: &GatewayEvent| {
        event.kind == GatewayEventKind::PayloadRefused && event.reason.as_deref() == Some(reason)
    };
    let what = format!("the event that tells of {reason}");
    listener
        .wait_for(&what, GATEWAY_EVENTS, |heard| fits(&heard.read()))
        .read()
}

fn counted(listener: &Listener, reason: &str, count: u64) {
    let what = format!("{count} x {reason} among the gateway's losses");
    listener.wait_for(&what, GATEWAY, |heard| {
        heard
            .read::<Gateway>()
            .losses
            .iter()
            .any(|loss| loss.reason == reason && loss.count == count)
    });
}

/// Blocks are still read after whatever came before.
fn still_reads(listener: &Listener) {
    let start = quarter_ns() - 8 * BLOCK_NS;
    for i in 0..12 {
        listener.publish(BLOCKS, false, sine(start + i * BLOCK_NS, 1.0));
    }
    listener.wait_for("a good reading in the status", "status/P-1", |heard| {
        heard
            .read::<Status>()
            .points
            .iter()
            .any(|point| point.quality == humward_wire::out::Quality::Good)
    });
}

#[test]
fn malformed_payloads_are_counted_by_reason_and_the_first_of_each_is_told_with_topic_and_offset() {
    let broker = Broker::start();
    let listener = Listener::connect(broker.port(), "listener", "humward/#");
    let mut daemon = Daemon::start(&site(broker.port()));
    daemon.wait_for_log("subscribed to");
    let mut cut = sine(quarter_ns(), 1.0);
    cut.truncate(cut.len() - 1);
    listener.publish(BLOCKS, false, cut.clone());
    listener.publish(BLOCKS, false, cut);
    listener.publish(BLOCKS, false, "\u{1}");
    listener.publish(BLOCKS, false, "");
    listener.publish(BLOCKS, false, sine(quarter_ns() - 3600 * 4 * BLOCK_NS, 1.0));
    listener.publish("humward/v1/harbour/speed/P-1", false, "fast");
    let first = told(&listener, "truncated");
    assert_eq!(first.topic.as_deref(), Some(BLOCKS));
    assert!(first.offset.is_some());
    for reason in ["unknown_encoding", "empty", "far_from_arrival"] {
        told(&listener, reason);
    }
    still_reads(&listener);
    counted(&listener, "truncated", 2);
    let tellings = listener
        .heard(GATEWAY_EVENTS)
        .iter()
        .filter(|heard| heard.read::<GatewayEvent>().reason.as_deref() == Some("truncated"))
        .count();
    assert_eq!(tellings, 1, "the second of a kind is counted, not told");
    assert!(daemon.runs());
    assert!(
        daemon.log().contains(&format!("{BLOCKS}: payload refused")),
        "{}",
        daemon.log()
    );
}

#[test]
fn a_retained_block_and_a_topic_nobody_knows_are_refused() {
    let broker = Broker::start();
    let listener = Listener::connect(broker.port(), "listener", "humward/#");
    listener.publish(BLOCKS, true, sine(quarter_ns(), 30.0));
    listener.wait_for("the block to be retained", BLOCKS, |_| true);
    let _daemon = Daemon::start(&site(broker.port()));
    assert_eq!(told(&listener, "retained").topic.as_deref(), Some(BLOCKS));
    listener.publish(
        "humward/v1/harbour/block/P-1/drive-edn",
        false,
        sine(quarter_ns(), 1.0),
    );
    let unknown = told(&listener, "unknown_topic");
    assert_eq!(
        unknown.topic.as_deref(),
        Some("humward/v1/harbour/block/P-1/drive-edn")
    );
    still_reads(&listener);
    counted(&listener, "retained", 1);
}

#[test]
fn a_packet_too_large_ends_its_session_once_and_blocks_come_in_again() {
    let broker = Broker::start();
    let listener = Listener::connect(broker.port(), "listener", "humward/v1/harbour/+/+");
    let daemon = Daemon::start(&site(broker.port()));
    daemon.wait_for_log("subscribed to");
    listener.publish(BLOCKS, false, vec![0; 1_100_000]);
    let event = told(&listener, "packet_too_large");
    assert!(event.text.contains("shorter blocks"), "{}", event.text);
    let restored = |heard: &humward_tests::listener::Heard| {
        heard.read::<GatewayEvent>().kind == GatewayEventKind::IngestRestored
    };
    listener.wait_for("the ingest connection to be back", GATEWAY_EVENTS, restored);
    let status = Listener::connect(broker.port(), "status", "humward/v1/harbour/#");
    still_reads(&status);
    counted(&status, "packet_too_large", 1);
}
