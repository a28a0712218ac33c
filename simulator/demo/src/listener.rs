//! The listener: a connection of its own that hears what the daemon says, as any console on the plant would.

use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::mpsc::Sender;
use std::thread::{self, JoinHandle};
use std::time::{Duration, Instant};

use rumqttc::{Client, Connection, Event, Incoming, MqttOptions, QoS, RecvTimeoutError};

use crate::fault::DemoFault;
use crate::stage::Happening;

/// Largest message, bytes.
const LARGEST: usize = 1 << 20;
/// How long the broker may take to grant the subscription.
const GRANTED_WITHIN: Duration = Duration::from_secs(10);
/// How often it is looked whether to stop.
const LOOK: Duration = Duration::from_millis(100);

/// A message as the broker carried it.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Heard {
    /// Its topic.
    pub topic: String,
    /// Its bytes.
    pub payload: Vec<u8>,
}

/// A listener on the broker.
pub struct Listener {
    client: Client,
    stop: Arc<AtomicBool>,
    thread: JoinHandle<()>,
}

impl std::fmt::Debug for Listener {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Listener").finish_non_exhaustive()
    }
}

impl Listener {
    /// Connects to the broker on this port as `name` and sends on what matches one of `filters`; returns once all are granted.
    ///
    /// # Errors
    /// No connection, a filter refused, or no answer in time.
    pub fn start(
        name: &str,
        port: u16,
        filters: &[String],
        to: Sender<Happening>,
    ) -> Result<Self, DemoFault> {
        let mut options = MqttOptions::new(name, "127.0.0.1", port);
        options
            .set_keep_alive(Duration::from_secs(30))
            .set_max_packet_size(LARGEST, LARGEST);
        let (client, mut connection) = Client::new(options, 16);
        for filter in filters {
            client
                .try_subscribe(filter, QoS::AtLeastOnce)
                .map_err(|error| DemoFault::Listener(error.to_string()))?;
        }
        granted(&mut connection, filters.len())?;
        let stop = Arc::new(AtomicBool::new(false));
        let thread = thread::Builder::new()
            .name("listener".to_owned())
            .spawn({
                let stop = Arc::clone(&stop);
                move || listen(connection, &to, &stop)
            })
            .map_err(|cause| DemoFault::System {
                what: "a thread",
                cause,
            })?;
        Ok(Self {
            client,
            stop,
            thread,
        })
    }

    /// Says goodbye to the broker.
    pub fn end(self) {
        self.stop.store(true, Ordering::Relaxed);
        // A connection that is gone needs no goodbye, and a listener that broke down has said so itself.
        drop(self.client.try_disconnect());
        drop(self.thread.join());
    }
}

fn granted(connection: &mut Connection, mut wanted: usize) -> Result<(), DemoFault> {
    let began = Instant::now();
    while wanted > 0 {
        match connection.recv_timeout(LOOK) {
            Ok(Ok(Event::Incoming(Incoming::SubAck(ack)))) => {
                let refused = ack
                    .return_codes
                    .iter()
                    .any(|code| matches!(code, rumqttc::SubscribeReasonCode::Failure));
                if refused {
                    return Err(DemoFault::Listener("it refused a subscription".into()));
                }
                wanted -= 1;
            }
            Ok(Ok(Event::Incoming(_) | Event::Outgoing(_))) | Err(RecvTimeoutError::Timeout) => {}
            Ok(Err(error)) => return Err(DemoFault::Listener(error.to_string())),
            Err(RecvTimeoutError::Disconnected) => {
                return Err(DemoFault::Listener("the client ended".into()));
            }
        }
        if began.elapsed() > GRANTED_WITHIN {
            return Err(DemoFault::Listener(format!(
                "no subscription was granted within {} s",
                GRANTED_WITHIN.as_secs()
            )));
        }
    }
    Ok(())
}

fn listen(mut connection: Connection, to: &Sender<Happening>, stop: &AtomicBool) {
    loop {
        let happening = match connection.recv_timeout(LOOK) {
            Ok(Ok(Event::Incoming(Incoming::Publish(publish)))) => Happening::Heard(Heard {
                topic: publish.topic,
                payload: publish.payload.to_vec(),
            }),
            Ok(Ok(Event::Incoming(_) | Event::Outgoing(_))) | Err(RecvTimeoutError::Timeout) => {
                if stop.load(Ordering::Relaxed) {
                    return;
                }
                continue;
            }
            Ok(Err(_)) | Err(RecvTimeoutError::Disconnected) if stop.load(Ordering::Relaxed) => {
                return;
            }
            Ok(Err(error)) => Happening::Lost(error.to_string()),
            Err(RecvTimeoutError::Disconnected) => Happening::Lost("the client ended".into()),
        };
        let lost = matches!(happening, Happening::Lost(_));
        if to.send(happening).is_err() || lost {
            return;
        }
    }
}
