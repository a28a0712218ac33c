//! The two connections to the broker, MQTT 3.1.1.
//!
//! [`ingest`] brings blocks in on a persistent session; [`publish`] takes messages out on a clean one. What the
//! client library does to a daemon that may lose no event, and the rule held against each (all read in the
//! source of rumqttc 0.25.1):
//!
//! * It drops what it holds at a ConnAck without session, and replays an oversize packet for ever: every
//!   connection gets a new client; on an error the events already there are read, then both are dropped.
//! * Publishing from the task that polls can deadlock: only `try_publish`, into a queue larger than our window.
//! * Polling is not safe to cancel: one poll is kept, pinned, until it is done; waits run beside it.
//! * A packet-id collision stops it silently: [`window`] never lets one come about.
//! * Packets over its limits break the loop: [`LARGEST_IN`] and [`LARGEST_OUT`] are set; larger ones are refused
//!   before they reach it, and a larger one coming in ends the session that holds it.
//! * It reconnects without waiting: [`backoff`]. Keep-alive runs only while polled: a connection that
//!   brought nothing for three keep-alives is given up.

pub mod backoff;
pub mod ingest;
pub mod publish;
pub mod tls;
pub mod window;

use std::sync::Arc;
use std::time::Duration;

use rumqttc::mqttbytes::Error as PacketError;
use rumqttc::{
    ConnectReturnCode, ConnectionError, Event, EventLoop, MqttOptions, NetworkOptions, StateError,
    TlsConfiguration, Transport,
};

/// Largest packet taken in, bytes.
pub const LARGEST_IN: usize = 1024 * 1024;
/// Largest packet sent, bytes.
pub const LARGEST_OUT: usize = 256 * 1024;
/// Longest wait for a connection and its acknowledgement, s.
const CONNECT_WITHIN_S: u64 = 10;

/// Where the broker is and how it knows us.
#[derive(Clone)]
pub struct Settings {
    /// Name or address.
    pub host: String,
    /// TCP port.
    pub port: u16,
    /// Seconds between signs of life when nothing else is sent.
    pub keep_alive: Duration,
    /// User name and password.
    pub login: Option<(String, String)>,
    /// Encryption and whom to trust.
    pub tls: Option<Arc<rustls::ClientConfig>>,
}

impl std::fmt::Debug for Settings {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Settings")
            .field("host", &self.host)
            .field("port", &self.port)
            .field("user", &self.login.as_ref().map(|(user, _)| user))
            .field("tls", &self.tls.is_some())
            .finish_non_exhaustive()
    }
}

impl Settings {
    fn options(&self, client_id: &str, clean_session: bool) -> MqttOptions {
        let mut options = MqttOptions::new(client_id, &self.host, self.port);
        options
            .set_keep_alive(self.keep_alive)
            .set_clean_session(clean_session)
            .set_max_packet_size(LARGEST_IN, LARGEST_OUT)
            .set_inflight(window::PACKET_IDS);
        if let Some((user, password)) = &self.login {
            options.set_credentials(user, password);
        }
        if let Some(tls) = &self.tls {
            options.set_transport(Transport::tls_with_config(TlsConfiguration::Rustls(
                Arc::clone(tls),
            )));
        }
        options
    }

    /// Silence after which a connection is given up.
    fn silence(&self) -> Duration {
        self.keep_alive * 3
    }
}

fn network() -> NetworkOptions {
    let mut network = NetworkOptions::new();
    network.set_tcp_nodelay(true);
    network.set_connection_timeout(CONNECT_WITHIN_S);
    network
}

/// One poll that owns its event loop, so it can stay pinned across waits and is never dropped half done.
async fn poll(mut events: EventLoop) -> (EventLoop, Result<Event, ConnectionError>) {
    let event = events.poll().await;
    (events, event)
}

/// Why a connection ended.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum Ended {
    /// We were told to stop.
    #[error("stopped")]
    Stopped,
    /// The broker knows us and does not want us.
    #[error("the broker refused us: {0}; check user name, password and the broker's access rules")]
    Refused(String),
    /// A packet larger than [`LARGEST_IN`] came in.
    #[error(
        "a packet of {0} bytes came in, more than {LARGEST_IN}; let its sensor send shorter blocks"
    )]
    TooLarge(usize),
    /// Nothing came for three keep-alives.
    #[error("nothing came from the broker for three keep-alives; check the network")]
    Silent,
    /// Anything else.
    #[error("{0}")]
    Broken(String),
}

impl From<ConnectionError> for Ended {
    fn from(error: ConnectionError) -> Self {
        match error {
            ConnectionError::ConnectionRefused(code) => match code {
                ConnectReturnCode::BadUserNamePassword => {
                    Self::Refused("bad user name or password".into())
                }
                ConnectReturnCode::NotAuthorized => Self::Refused("not authorised".into()),
                ConnectReturnCode::BadClientId => Self::Refused("client id not accepted".into()),
                ConnectReturnCode::RefusedProtocolVersion => {
                    Self::Refused("it does not speak MQTT 3.1.1".into())
                }
                ConnectReturnCode::Success | ConnectReturnCode::ServiceUnavailable => {
                    Self::Broken("the broker is not ready for connections".into())
                }
            },
            ConnectionError::MqttState(StateError::Deserialization(
                PacketError::PayloadSizeLimitExceeded(bytes),
            )) => Self::TooLarge(bytes),
            ConnectionError::MqttState(state) => Self::Broken(state.to_string()),
            ConnectionError::NetworkTimeout => Self::Broken(format!(
                "no answer within {CONNECT_WITHIN_S} s; check host, port and network"
            )),
            ConnectionError::FlushTimeout => {
                Self::Broken("the broker takes no more bytes; check its load".into())
            }
            ConnectionError::Tls(error) => {
                Self::Broken(format!("TLS: {error}; check ca_file and the host name"))
            }
            ConnectionError::Io(error) => Self::Broken(error.to_string()),
            ConnectionError::NotConnAck(_) => {
                Self::Broken("the other side does not answer as a broker would".into())
            }
            ConnectionError::RequestsDone => Self::Broken("the client was dropped".into()),
        }
    }
}

/// How a connection stands, as told to the rest of the daemon.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Standing {
    /// Connected, and subscribed where that is wanted.
    Up,
    /// Lost; the next try follows.
    Down(String),
    /// Refused by the broker.
    Refused(String),
}

/// A stable number from a name, to seed jitter with (FNV-1a, 64 bit).
pub(crate) fn seed(name: &str) -> u64 {
    name.bytes().fold(0xcbf2_9ce4_8422_2325, |hash, byte| {
        (hash ^ u64::from(byte)).wrapping_mul(0x0100_0000_01b3)
    })
}
