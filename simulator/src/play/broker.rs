//! Where the broker is, and why it may not take us.

use std::time::Duration;

use rumqttc::{ConnectReturnCode, ConnectionError, MqttOptions, NetworkOptions};

use super::flight::PACKETS;

/// Longest wait for a connection and its acknowledgement, s.
const CONNECT_WITHIN_S: u64 = 10;
/// Signs of life when nothing else is sent.
const KEEP_ALIVE: Duration = Duration::from_secs(20);
/// Largest packet taken in, bytes: we subscribe to nothing.
const LARGEST_IN: usize = 64 * 1024;
/// Largest packet sent, bytes: twice the largest block.
const LARGEST_OUT: usize = 2 * 1024 * 1024;

/// Where the broker is and who we are to it.
#[derive(Clone)]
pub struct Broker {
    /// Name or address.
    pub host: String,
    /// TCP port.
    pub port: u16,
    /// User name and password.
    pub login: Option<(String, String)>,
    /// Our client id; of two clients with one id the broker ends the older.
    pub client_id: String,
}

impl std::fmt::Debug for Broker {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Broker")
            .field("host", &self.host)
            .field("port", &self.port)
            .field("client_id", &self.client_id)
            .field("user", &self.login.as_ref().map(|(user, _)| user))
            .finish_non_exhaustive()
    }
}

impl Broker {
    pub(super) fn options(&self) -> MqttOptions {
        let mut options = MqttOptions::new(&self.client_id, &self.host, self.port);
        options
            .set_keep_alive(KEEP_ALIVE)
            .set_max_packet_size(LARGEST_IN, LARGEST_OUT)
            .set_inflight(PACKETS);
        if let Some((user, password)) = &self.login {
            options.set_credentials(user, password);
        }
        options
    }

    /// Silence after which a connection is given up.
    pub(super) fn silence() -> Duration {
        KEEP_ALIVE * 3
    }
}

pub(super) fn network() -> NetworkOptions {
    let mut network = NetworkOptions::new();
    network.set_tcp_nodelay(true);
    network.set_connection_timeout(CONNECT_WITHIN_S);
    network
}

/// Why a connection did not come about or ended.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum Lost {
    /// The broker does not know us or does not want us.
    #[error("refused: {why}; give --username and --password-file as in the broker's accounts")]
    Account {
        /// In its words.
        why: &'static str,
    },
    /// It does not like something else about us.
    #[error("refused: {why}; {remedy}")]
    Refused {
        /// In its words.
        why: &'static str,
        /// What to do.
        remedy: &'static str,
    },
    /// Nothing answers there.
    #[error("no connection: {cause}; start the broker, or give its --host and --port")]
    Unreachable {
        /// What the network says.
        cause: String,
    },
    /// Nothing came for three keep-alives.
    #[error("nothing came for three keep-alives; check the network")]
    Silent,
    /// Anything else.
    #[error("{cause}; check the broker's log")]
    Broken {
        /// What the client says.
        cause: String,
    },
}

impl Lost {
    /// Whether trying again soon is of no use.
    pub(super) fn refused(&self) -> bool {
        match self {
            Lost::Account { .. } | Lost::Refused { .. } => true,
            Lost::Unreachable { .. } | Lost::Silent | Lost::Broken { .. } => false,
        }
    }
}

impl From<ConnectionError> for Lost {
    fn from(error: ConnectionError) -> Lost {
        match error {
            ConnectionError::ConnectionRefused(code) => match code {
                ConnectReturnCode::BadUserNamePassword => Lost::Account {
                    why: "bad user name or password",
                },
                ConnectReturnCode::NotAuthorized => Lost::Account {
                    why: "not authorised",
                },
                ConnectReturnCode::BadClientId => Lost::Refused {
                    why: "client id not accepted",
                    remedy: "give another --client-id",
                },
                ConnectReturnCode::RefusedProtocolVersion => Lost::Refused {
                    why: "MQTT 3.1.1 not accepted",
                    remedy: "let the broker accept MQTT 3.1.1 on this port",
                },
                ConnectReturnCode::Success | ConnectReturnCode::ServiceUnavailable => {
                    Lost::Broken {
                        cause: "the broker is not ready for connections".to_owned(),
                    }
                }
            },
            ConnectionError::Io(cause) => Lost::Unreachable {
                cause: cause.to_string(),
            },
            ConnectionError::NetworkTimeout => Lost::Unreachable {
                cause: format!("no answer within {CONNECT_WITHIN_S} s"),
            },
            ConnectionError::FlushTimeout => Lost::Broken {
                cause: "the broker takes no more bytes".to_owned(),
            },
            ConnectionError::NotConnAck(_) => Lost::Refused {
                why: "the other side does not answer as a broker would",
                remedy: "give the --port of its MQTT listener without encryption",
            },
            ConnectionError::MqttState(state) => Lost::Broken {
                cause: state.to_string(),
            },
            ConnectionError::Tls(cause) => Lost::Broken {
                cause: cause.to_string(),
            },
            ConnectionError::RequestsDone => Lost::Broken {
                cause: "the client was dropped".to_owned(),
            },
        }
    }
}
