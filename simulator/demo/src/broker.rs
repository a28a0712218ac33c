//! The broker inside the demo: MQTT 3.1.1 on 127.0.0.1, nothing kept on disk, its own log silent.
//!
//! The library gives no way to stop a broker: its threads live until the process ends, so its clients leave first.
//! What a subscriber has not read is let go beyond [`SEGMENTS`] x [`SEGMENT_BYTES`] a subscription (read in the
//! source of rumqttd 0.20): half a minute of this plant and more, and the counter in each block shows what is lost.

use std::collections::HashMap;
use std::net::{Ipv4Addr, SocketAddr, TcpListener, TcpStream};
use std::thread::{self, JoinHandle};
use std::time::{Duration, Instant};

use rumqttd::{Config, ConnectionSettings, RouterConfig, ServerSettings};

use crate::fault::DemoFault;

/// Bytes of one piece of a subscription's backlog.
pub const SEGMENT_BYTES: usize = 4 << 20;
/// Pieces of a subscription's backlog.
pub const SEGMENTS: usize = 10;
/// Largest packet, bytes; the daemon takes as much.
const LARGEST: usize = 1 << 20;
/// Other ports that are tried when the free one was taken meanwhile.
const TRIES: usize = 5;
/// How long the broker may take to listen.
const LISTENS_WITHIN: Duration = Duration::from_secs(10);

/// A running broker.
#[derive(Debug)]
pub struct Broker {
    port: u16,
}

impl Broker {
    /// Starts one on this port, or on a free one.
    ///
    /// # Errors
    /// The port is in use or not ours to take; the system refuses a thread; the broker does not come up.
    pub fn start(port: Option<u16>) -> Result<Self, DemoFault> {
        let mut last = None;
        for _ in 0..if port.is_some() { 1 } else { TRIES } {
            let port = free(port.unwrap_or(0))?;
            match launch(port) {
                Ok(()) => return Ok(Self { port }),
                Err(fault) => last = Some(fault),
            }
        }
        Err(last.unwrap_or_else(|| DemoFault::Broker {
            port: port.unwrap_or(0),
            why: "no port was tried".into(),
        }))
    }

    /// Its port.
    #[must_use]
    pub const fn port(&self) -> u16 {
        self.port
    }
}

/// A port nobody listens on: `port` itself, or any for 0.
fn free(port: u16) -> Result<u16, DemoFault> {
    TcpListener::bind((Ipv4Addr::LOCALHOST, port))
        .and_then(|listener| listener.local_addr())
        .map(|address| address.port())
        .map_err(|cause| DemoFault::Port { port, cause })
}

fn launch(port: u16) -> Result<(), DemoFault> {
    let mut broker = rumqttd::Broker::new(settings(port));
    let thread = thread::Builder::new()
        .name("broker".to_owned())
        .spawn(move || broker.start().map_err(|error| error.to_string()))
        .map_err(|cause| DemoFault::System {
            what: "a thread",
            cause,
        })?;
    let began = Instant::now();
    loop {
        if thread.is_finished() {
            return Err(DemoFault::Broker {
                port,
                why: ended(thread),
            });
        }
        if TcpStream::connect((Ipv4Addr::LOCALHOST, port)).is_ok() {
            return Ok(());
        }
        if began.elapsed() > LISTENS_WITHIN {
            return Err(DemoFault::Broker {
                port,
                why: format!("it does not listen after {} s", LISTENS_WITHIN.as_secs()),
            });
        }
        thread::sleep(Duration::from_millis(5));
    }
}

/// Why a broker ended that never should.
fn ended(thread: JoinHandle<Result<(), String>>) -> String {
    match thread.join() {
        Ok(Ok(())) => "it could not listen".into(),
        Ok(Err(error)) => error,
        Err(_) => "it broke down".into(),
    }
}

fn settings(port: u16) -> Config {
    let connections = ConnectionSettings {
        connection_timeout_ms: 10_000,
        max_payload_size: LARGEST,
        max_inflight_count: 100,
        auth: None,
        external_auth: None,
        dynamic_filters: true,
    };
    let server = ServerSettings {
        name: "demo".to_owned(),
        listen: SocketAddr::from((Ipv4Addr::LOCALHOST, port)),
        tls: None,
        next_connection_delay_ms: 1,
        connections,
    };
    Config {
        id: 0,
        router: RouterConfig {
            max_connections: 100,
            max_outgoing_packet_count: 200,
            max_segment_size: SEGMENT_BYTES,
            max_segment_count: SEGMENTS,
            ..RouterConfig::default()
        },
        v4: Some(HashMap::from([("demo".to_owned(), server)])),
        ..Config::default()
    }
}

#[cfg(test)]
mod tests {
    use std::net::TcpListener;

    use super::Broker;

    #[test]
    fn a_port_in_use_is_told_with_its_number_and_a_remedy() {
        let taken = TcpListener::bind("127.0.0.1:0").unwrap();
        let port = taken.local_addr().unwrap().port();
        let told = Broker::start(Some(port)).unwrap_err().to_string();
        assert!(
            told.starts_with(&format!("port {port} of 127.0.0.1 cannot be listened on: ")),
            "{told}"
        );
        assert!(
            told.ends_with("leave --port out, or choose a free one"),
            "{told}"
        );
    }

    #[test]
    fn two_brokers_without_a_port_listen_on_two() {
        let (one, other) = (Broker::start(None).unwrap(), Broker::start(None).unwrap());
        assert_ne!(one.port(), other.port());
    }
}
