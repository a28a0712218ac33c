//! A clock that runs faster, as the demonstration and long tests use it: same rules, less waiting.

use std::time::Duration;

use humward::clock::Clock;
use humward::config::load;
use humward::run::{runtime, serve};
use humward_monitor::time::Arrival;
use humward_tests::broker::Broker;
use humward_tests::listener::Listener;
use humward_wire::out::{Event, Gateway, Transition};
use tokio::sync::oneshot;

use crate::{GATEWAY, site};

#[test]
fn a_minute_of_silence_rings_the_sensor_alarm_within_seconds_at_sixty_times_the_speed_and_the_gateway_shows_it()
 {
    let broker = Broker::start();
    let listener = Listener::connect(broker.port(), "listener", "humward/#");
    let path = humward_tests::folder("faster").join("site.toml");
    std::fs::write(&path, site(broker.port())).expect("the folder takes a file");
    let config = load(&path, &[]).expect("a sound configuration");
    // 2026-01-01T00:00:00Z by `date -u -d 2026-01-01 +%s`.
    let start = Arrival::from_ns(1_767_225_600_000_000_000);
    let (stop, stopped) = oneshot::channel::<()>();
    let daemon = std::thread::spawn(move || {
        runtime()
            .and_then(|runtime| {
                runtime.block_on(serve(config, Clock::scaled(60.0, start), async {
                    // Either word stops it.
                    drop(stopped.await);
                }))
            })
            .map_err(|error| error.to_string())
    });
    let began = std::time::Instant::now();
    let raised = listener.wait_for("the sensor alarm", "event/P-1", |heard| {
        heard.read::<Event>().transition == Transition::Raised
    });
    assert!(
        began.elapsed() < Duration::from_secs(30),
        "a minute passes in a second, and a machine under load is slow"
    );
    let event = raised.read::<Event>();
    assert_eq!(event.finding.watch.as_deref(), Some("sensor.de"));
    // The deadline itself is the stamp: a minute of the scaled clock after the connection stood.
    assert!(
        event.header.at.0 >= start.ns() + 60_000_000_000,
        "{}",
        event.header.at
    );
    let gateway = listener
        .wait_for("the factor", GATEWAY, |_| true)
        .read::<Gateway>();
    assert_eq!(gateway.time_factor, 60.0);
    stop.send(()).expect("the daemon still runs");
    assert_eq!(daemon.join().expect("the daemon does not panic"), Ok(()));
}
