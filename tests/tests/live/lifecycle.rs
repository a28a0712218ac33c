//! Coming up, going down on purpose, vanishing; and what is retained between.

use humward_tests::broker::Broker;
use humward_tests::daemon::Daemon;
use humward_tests::listener::Listener;
use humward_wire::out::{Gateway, GatewayState, Outcome, Reply, Status};

use crate::{GATEWAY, site};

fn state(listener: &Listener, mark: usize, wanted: GatewayState) -> Gateway {
    let what = format!("{wanted} on the gateway's topic");
    listener
        .wait_from(mark, &what, GATEWAY, |heard| {
            heard.read::<Gateway>().state == wanted
        })
        .read()
}

#[test]
fn the_gateway_says_online_when_it_watches_and_offline_when_it_is_stopped_on_purpose() {
    let broker = Broker::start();
    let listener = Listener::connect(broker.port(), "listener", "humward/#");
    let daemon = Daemon::start(&site(broker.port()));
    let online = state(&listener, 0, GatewayState::Online);
    assert_eq!((online.time_factor, online.heartbeat_s), (1.0, 30.0));
    let mark = listener.mark();
    assert_eq!(daemon.stop().code(), Some(0));
    let offline = state(&listener, mark, GatewayState::Offline);
    assert!(
        offline.header.at > online.header.at,
        "{offline:?} is not the will of the start"
    );
    let late = Listener::connect(broker.port(), "late", "humward/#");
    assert!(
        late.wait_for("the last word", GATEWAY, |heard| heard.retained)
            .read::<Gateway>()
            == offline
    );
}

#[test]
fn the_broker_says_offline_for_a_gateway_that_vanished() {
    let broker = Broker::start();
    let listener = Listener::connect(broker.port(), "listener", "humward/#");
    let daemon = Daemon::start(&site(broker.port()));
    state(&listener, 0, GatewayState::Online);
    let mark = listener.mark();
    daemon.kill();
    state(&listener, mark, GatewayState::Offline);
}

#[test]
fn what_is_true_now_is_retained_for_who_comes_later_and_an_alarm_of_an_earlier_run_is_emptied() {
    let broker = Broker::start();
    let before = Listener::connect(broker.port(), "before", "humward/#");
    let stale = "humward/v1/harbour/alarm/P-1/velocity.de";
    before.publish(stale, true, "left by an earlier run");
    before.wait_for("the stale alarm", stale, |heard| !heard.payload.is_empty());
    let _daemon = Daemon::start(&site(broker.port()));
    before.wait_for("the alarm to be emptied", stale, |heard| {
        heard.payload.is_empty()
    });
    before.wait_for("a status", "status/P-1", |_| true);
    let later = Listener::connect(broker.port(), "later", "humward/#");
    let status = later
        .wait_for("the retained status", "status/P-1", |heard| heard.retained)
        .read::<Status>();
    assert_eq!(
        (status.asset_name.as_str(), status.open_count),
        ("cooling water pump", 0)
    );
    later.wait_for("the retained gateway", GATEWAY, |heard| heard.retained);
    assert!(later.heard(stale).is_empty(), "nothing is open");
}

#[test]
fn a_status_is_answered_and_a_command_the_configuration_does_not_allow_is_refused_with_a_reason() {
    let broker = Broker::start();
    let listener = Listener::connect(broker.port(), "listener", "humward/#");
    let daemon = Daemon::start(&site(broker.port()));
    daemon.wait_for_log("subscribed to");
    let answer = |command: &str| {
        let mark = listener.mark();
        listener.publish("humward/v1/harbour/command/scada/P-1", false, command);
        listener
            .wait_from(mark, "the answer", "reply/scada/P-1", |_| true)
            .read::<Reply>()
    };
    let done = answer(r#"{"id": "c-1", "do": "status"}"#);
    assert_eq!(
        (done.outcome, done.id.map(|id| id.to_string())),
        (Outcome::Ok, Some("c-1".into()))
    );
    let shelved = answer(
        r#"{"id": "c-2", "do": "shelve", "watch": "velocity.de", "until": "2030-01-01T00:00:00Z", "by": "shift lead"}"#,
    );
    assert_eq!(
        (shelved.outcome, shelved.id.map(|id| id.to_string())),
        (Outcome::Refused, Some("c-2".into()))
    );
    assert!(shelved.reason.is_some_and(|why| why.contains("commands")));
    let unread = answer(r#"{"id": "c-3", "do": "explode"}"#);
    assert_eq!(unread.outcome, Outcome::Refused);
    assert_eq!(unread.offset, Some(20), "the verb stands at byte 20");
}
