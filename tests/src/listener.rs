//! A client that hears everything and can publish.

use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::{Arc, Condvar, Mutex, MutexGuard, PoisonError};
use std::thread::{self, JoinHandle};
use std::time::{Duration, Instant};

use humward_wire::out::Message as OutMessage;
use rumqttc::{Client, Connection, Event, Incoming, MqttOptions, QoS};

use crate::SOON;

/// One message heard.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Heard {
    /// Its topic.
    pub topic: String,
    /// Its bytes.
    pub payload: Vec<u8>,
    /// Whether the broker had kept it from before we listened.
    pub retained: bool,
}

impl Heard {
    /// The message as one of ours.
    pub fn read<M: OutMessage>(&self) -> M {
        M::from_json(&self.payload).unwrap_or_else(|error| {
            panic!(
                "{}: {error}: {}",
                self.topic,
                String::from_utf8_lossy(&self.payload)
            )
        })
    }
}

#[derive(Debug, Default)]
struct Inside {
    heard: Vec<Heard>,
    subscribed: u32,
}

/// A listener; connects again after a cut and hears everything retained then once more.
pub struct Listener {
    client: Client,
    inside: Arc<(Mutex<Inside>, Condvar)>,
    stop: Arc<AtomicBool>,
    thread: Option<JoinHandle<()>>,
}

impl std::fmt::Debug for Listener {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Listener")
            .field("heard", &self.mark())
            .finish_non_exhaustive()
    }
}

impl Listener {
    /// Connects to the broker on this port, as `name`, and hears what matches `filter`.
    pub fn connect(port: u16, name: &str, filter: &str) -> Self {
        let mut options = MqttOptions::new(name, "127.0.0.1", port);
        options
            .set_keep_alive(Duration::from_secs(30))
            .set_max_packet_size(8 << 20, 8 << 20)
            .set_inflight(1000);
        let (client, connection) = Client::new(options, 1000);
        let inside: Arc<(Mutex<Inside>, Condvar)> = Arc::default();
        let stop = Arc::new(AtomicBool::new(false));
        let thread = thread::spawn({
            let (client, inside, stop, filter) = (
                client.clone(),
                Arc::clone(&inside),
                Arc::clone(&stop),
                filter.to_owned(),
            );
            move || listen(&client, connection, &inside, &stop, &filter)
        });
        let listener = Self {
            client,
            inside,
            stop,
            thread: Some(thread),
        };
        listener.wait("the subscription", |inside| {
            (inside.subscribed > 0).then_some(())
        });
        listener
    }

    /// Who publishes for us, for a thread of its own.
    pub fn publisher(&self) -> Client {
        self.client.clone()
    }

    /// Publishes at QoS 1.
    pub fn publish(&self, topic: &str, retain: bool, payload: impl Into<Vec<u8>>) {
        self.client
            .publish(topic, QoS::AtLeastOnce, retain, payload)
            .expect("the listener is connected");
    }

    /// Everything heard so far on topics that end so.
    pub fn heard(&self, ending: &str) -> Vec<Heard> {
        self.lock()
            .heard
            .iter()
            .filter(|heard| heard.topic.ends_with(ending))
            .cloned()
            .collect()
    }

    /// How many messages have been heard so far; a place to listen on from.
    pub fn mark(&self) -> usize {
        self.lock().heard.len()
    }

    /// Waits for a message on a topic that ends so.
    pub fn wait_for(&self, what: &str, ending: &str, fits: impl Fn(&Heard) -> bool) -> Heard {
        self.wait_from(0, what, ending, fits)
    }

    /// Waits for a message heard after `mark`.
    pub fn wait_from(
        &self,
        mark: usize,
        what: &str,
        ending: &str,
        fits: impl Fn(&Heard) -> bool,
    ) -> Heard {
        self.wait(what, |inside| {
            inside
                .heard
                .iter()
                .skip(mark)
                .find(|heard| heard.topic.ends_with(ending) && fits(heard))
                .cloned()
        })
    }

    fn wait<T>(&self, what: &str, find: impl Fn(&Inside) -> Option<T>) -> T {
        let began = Instant::now();
        let mut inside = self.lock();
        loop {
            if let Some(found) = find(&inside) {
                return found;
            }
            let topics: Vec<&str> = inside
                .heard
                .iter()
                .map(|heard| heard.topic.as_str())
                .collect();
            assert!(
                began.elapsed() < SOON,
                "waited {SOON:?} for {what}; heard {topics:?}"
            );
            let waited = self
                .inside
                .1
                .wait_timeout(inside, Duration::from_millis(500));
            inside = waited.unwrap_or_else(PoisonError::into_inner).0;
        }
    }

    fn lock(&self) -> MutexGuard<'_, Inside> {
        self.inside.0.lock().unwrap_or_else(PoisonError::into_inner)
    }
}

impl Drop for Listener {
    fn drop(&mut self) {
        self.stop.store(true, Ordering::Relaxed);
        // A client that is not connected cannot say goodbye; its thread looks at `stop` by itself.
        drop(self.client.try_disconnect());
        if let Some(thread) = self.thread.take() {
            drop(thread.join());
        }
    }
}

fn listen(
    client: &Client,
    mut connection: Connection,
    inside: &(Mutex<Inside>, Condvar),
    stop: &AtomicBool,
    filter: &str,
) {
    while !stop.load(Ordering::Relaxed) {
        let Ok(event) = connection.recv_timeout(Duration::from_millis(200)) else {
            continue;
        };
        match event {
            Ok(Event::Incoming(Incoming::ConnAck(_))) => {
                client
                    .try_subscribe(filter, QoS::AtLeastOnce)
                    .expect("there is room to subscribe");
            }
            Ok(Event::Incoming(Incoming::SubAck(_))) => {
                inside
                    .0
                    .lock()
                    .unwrap_or_else(PoisonError::into_inner)
                    .subscribed += 1;
                inside.1.notify_all();
            }
            Ok(Event::Incoming(Incoming::Publish(publish))) => {
                let heard = Heard {
                    topic: publish.topic,
                    payload: publish.payload.to_vec(),
                    retained: publish.retain,
                };
                inside
                    .0
                    .lock()
                    .unwrap_or_else(PoisonError::into_inner)
                    .heard
                    .push(heard);
                inside.1.notify_all();
            }
            Ok(Event::Incoming(_) | Event::Outgoing(_)) => {}
            // The broker is away: try again in a moment.
            Err(_) => thread::sleep(Duration::from_millis(100)),
        }
    }
}
