//! The simulator plays to a real broker: everything arrives, a lost broker is counted, a refusal is told.

use std::collections::BTreeMap;
use std::sync::mpsc::{Receiver, channel};
use std::thread::{self, JoinHandle};
use std::time::Duration;

use humward_sim::play::{Broker as To, Happened, Lost, Pace, PlayFault, Summary, play};
use humward_sim::scenario::{Scenario, parse};
use humward_sim::world::World;
use humward_tests::SOON;
use humward_tests::broker::Broker;
use humward_tests::listener::{Heard, Listener};
use tokio::sync::oneshot;

/// Ten blocks and five speeds a second of simulated time.
fn scenario(duration: &str) -> Scenario {
    let text = format!(
        "about = \"a test\"\nsite = \"harbour\"\nseed = 5\nduration = \"{duration}\"\n\
         [[asset]]\nid = \"P-1\"\nrpm = 1482\nspeed_every = \"200ms\"\n\
         [[asset.point]]\nid = \"de\"\nrate_hz = 1000\nblock = \"100ms\""
    );
    parse("test", &text).expect("a sound scenario")
}

/// A play in a thread of its own.
struct Played {
    happened: Receiver<Happened>,
    stop: oneshot::Sender<()>,
    thread: JoinHandle<Result<Summary, PlayFault>>,
}

fn start(world: World, start_ns: i64, factor: f64, to: To) -> Played {
    let (tell, happened) = channel();
    let (stop, stopped) = oneshot::channel::<()>();
    let thread = thread::spawn(move || {
        let runtime = tokio::runtime::Builder::new_current_thread()
            .enable_all()
            .build()
            .expect("a runtime");
        runtime.block_on(play(
            world,
            &to,
            Pace::now(start_ns, factor),
            async {
                // Only a word stops it, not a test that has let go of the other end.
                if stopped.await.is_err() {
                    std::future::pending::<()>().await;
                }
            },
            // The test may have heard enough.
            |happened| drop(tell.send(happened.clone())),
        ))
    });
    Played {
        happened,
        stop,
        thread,
    }
}

impl Played {
    fn next(&self) -> Happened {
        self.happened.recv_timeout(SOON).expect("something happens")
    }

    fn end(self) -> Summary {
        let played = self.thread.join().expect("the play does not panic");
        played.expect("the play goes to its end")
    }
}

fn to(port: u16) -> To {
    To {
        host: "127.0.0.1".to_owned(),
        port,
        login: None,
        client_id: "simulator".to_owned(),
    }
}

fn by_topic(messages: impl Iterator<Item = (String, Vec<u8>)>) -> BTreeMap<String, Vec<Vec<u8>>> {
    let mut all: BTreeMap<String, Vec<Vec<u8>>> = BTreeMap::new();
    for (topic, payload) in messages {
        all.entry(topic).or_default().push(payload);
    }
    all
}

#[test]
fn every_message_of_a_play_reaches_the_broker_once_and_in_order_at_forty_times_the_speed() {
    let broker = Broker::start();
    let listener = Listener::connect(broker.port(), "listener", "humward/#");
    let scenario = scenario("60s");
    let world = || World::new(&scenario).expect("a world");
    let played = start(world(), scenario.start_ns(), 40.0, to(broker.port()));
    assert_eq!(played.next(), Happened::Connected { dropped: 0 });
    let summary = played.end();
    assert_eq!(
        (summary.published, summary.dropped, summary.unanswered),
        (900, 0, 0)
    );
    let last = world().last().expect("messages").payload;
    listener.wait_for("the last message", "P-1/de", |heard: &Heard| {
        heard.payload == last
    });
    let heard = listener
        .heard("")
        .into_iter()
        .map(|heard| (heard.topic, heard.payload));
    let sent = world().map(|delivery| (delivery.topic, delivery.payload));
    assert!(by_topic(heard) == by_topic(sent));
}

#[test]
fn a_broker_that_goes_away_costs_what_falls_due_meanwhile_and_the_play_goes_on() {
    let mut broker = Broker::start();
    let scenario = scenario("200s");
    let world = World::new(&scenario).expect("a world");
    let played = start(world, scenario.start_ns(), 20.0, to(broker.port()));
    assert_eq!(played.next(), Happened::Connected { dropped: 0 });
    thread::sleep(Duration::from_secs(1));
    broker.stop();
    let lost = played.next();
    assert!(
        matches!(lost, Happened::Lost { wait, .. } if wait >= Duration::from_millis(250)),
        "{lost:?}"
    );
    broker.restart();
    let again = loop {
        match played.next() {
            Happened::Connected { dropped } => break dropped,
            Happened::Lost { .. } | Happened::Behind { .. } => {}
        }
    };
    let listener = Listener::connect(broker.port(), "listener", "humward/#");
    listener.wait_for("blocks after the return", "block/P-1/de", |_| true);
    let summary = played.end();
    // A wait of at least a quarter of a second is 5 s of simulated time: 75 messages, less what a slow machine is late.
    assert!(again >= 40, "{again}");
    assert_eq!(summary.dropped + summary.unanswered, again);
    assert_eq!(summary.published + again, 3000);
}

#[test]
fn a_play_told_to_stop_ends_with_its_account() {
    let broker = Broker::start();
    let scenario = scenario("1s");
    let world = World::endless(&scenario, scenario.start_ns()).expect("a world");
    let played = start(world, scenario.start_ns(), 20.0, to(broker.port()));
    assert_eq!(played.next(), Happened::Connected { dropped: 0 });
    thread::sleep(Duration::from_secs(1));
    let Played { stop, thread, .. } = played;
    stop.send(()).expect("the play still runs");
    let summary = thread
        .join()
        .expect("the play does not panic")
        .expect("it ends well");
    assert!(summary.published >= 100, "{summary:?}");
    assert_eq!((summary.dropped, summary.unanswered), (0, 0));
}

#[test]
fn a_broker_that_refuses_ends_the_play_with_its_reason() {
    let broker = Broker::with("password_file /dev/null\n");
    let scenario = scenario("5s");
    let world = World::new(&scenario).expect("a world");
    let login = Some(("pump".to_owned(), "wrong".to_owned()));
    let refused = To {
        login,
        ..to(broker.port())
    };
    let played = start(world, scenario.start_ns(), 1.0, refused);
    let fault = played
        .thread
        .join()
        .expect("the play does not panic")
        .expect_err("it is refused");
    let text = fault.to_string();
    assert!(
        matches!(
            fault,
            PlayFault::Broker {
                why: Lost::Account { .. },
                ..
            }
        ),
        "{text}"
    );
    assert!(
        text.contains("refused: ") && text.contains("--password-file"),
        "{text}"
    );
}
