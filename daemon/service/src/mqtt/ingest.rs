//! The connection that brings blocks, speeds and commands in.
//!
//! Persistent session, fixed client id, QoS 1: what comes while we are away waits at the broker. Subscribes after
//! every ConnAck without a session, after the first of this process, and again when a subscription had been refused;
//! each SubAck code is read. Hands everything on to the intake; knows no stamp and no meaning.
//! A packet beyond [`super::LARGEST_IN`] would come again for ever on a persistent session: the session is
//! ended once by a clean connect, which loses what else waited in it, and that is told as a lost link.

use std::collections::VecDeque;

use bytes::Bytes;
use rumqttc::{AsyncClient, Event, Incoming, Outgoing, QoS, SubscribeReasonCode};
use tokio::sync::{mpsc, watch};

use super::backoff::Backoff;
use super::{Ended, Settings, Standing, network, poll, seed};
use crate::clock::{Moment, pause, pause_until};

/// Filters per SUBSCRIBE packet.
const FILTERS_AT_ONCE: usize = 32;

/// What the connection hands on, in the order it came.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Arrived {
    /// A message.
    Publish {
        /// Its topic.
        topic: String,
        /// Its bytes.
        payload: Bytes,
        /// Whether it was an old one the broker kept.
        retained: bool,
    },
    /// How the connection stands now.
    Link(Standing),
    /// A packet of so many bytes was too large to take in.
    TooLarge(usize),
    /// The broker refused a subscription.
    FilterRefused(String),
}

/// The ingest connection.
#[derive(Debug)]
pub struct Ingest {
    /// Where the broker is.
    pub settings: Settings,
    /// Our fixed client id.
    pub client_id: String,
    /// What to subscribe to.
    pub filters: Vec<String>,
    /// Where it goes.
    pub to: mpsc::Sender<Arrived>,
    /// True once we are to stop.
    pub stop: watch::Receiver<bool>,
}

impl Ingest {
    /// Runs until told to stop, connecting again for ever.
    pub async fn run(mut self) {
        let mut backoff = Backoff::new(seed(&self.client_id));
        let mut subscribed = false;
        let mut end_session = false;
        loop {
            let began = Moment::now();
            let ended = self.connection(end_session, &mut subscribed).await;
            let session_ended = end_session && ended == Ended::Stopped && !*self.stop.borrow();
            if session_ended {
                end_session = false;
                subscribed = false;
                continue;
            }
            let wait = match &ended {
                Ended::Stopped => return,
                Ended::Refused(_) => backoff.refused(),
                Ended::TooLarge(_) | Ended::Silent | Ended::Broken(_) => {
                    backoff.after(began.elapsed())
                }
            };
            tracing::warn!(
                "ingest connection: {ended}; next try in {:.1} s",
                wait.as_secs_f64()
            );
            if let Ended::TooLarge(bytes) = ended {
                end_session = true;
                self.hand_on(Arrived::TooLarge(bytes)).await;
            }
            let standing = match &ended {
                Ended::Refused(why) => Standing::Refused(why.clone()),
                Ended::Stopped | Ended::TooLarge(_) | Ended::Silent | Ended::Broken(_) => {
                    Standing::Down(ended.to_string())
                }
            };
            self.hand_on(Arrived::Link(standing)).await;
            tokio::select! {
                () = pause(wait) => {}
                _ = self.stop.changed() => return,
            }
        }
    }

    async fn connection(&mut self, end_session: bool, subscribed: &mut bool) -> Ended {
        let (client, mut events) =
            AsyncClient::new(self.settings.options(&self.client_id, end_session), 8);
        events.set_network_options(network());
        let silence = self.settings.silence();
        let mut subscribing = Subscribing::default();
        let mut last = Moment::now();
        let polling = poll(events);
        tokio::pin!(polling);
        loop {
            let (mut events, event) = tokio::select! {
                polled = &mut polling => polled,
                () = pause_until(last, silence) => return Ended::Silent,
                _ = self.stop.changed() => {
                    // The broker keeps the session; it sees the socket close after this packet.
                    if client.try_disconnect().is_ok() {
                        tokio::select! { _ = &mut polling => {} () = pause(std::time::Duration::from_millis(200)) => {} }
                    }
                    return Ended::Stopped;
                }
            };
            let event = match event {
                Ok(event) => event,
                Err(error) => {
                    while let Some(event) = events.state.events.pop_front() {
                        if let Event::Incoming(Incoming::Publish(publish)) = event {
                            self.publish(publish).await;
                        }
                    }
                    return error.into();
                }
            };
            if matches!(event, Event::Incoming(_)) {
                last = Moment::now();
            }
            match event {
                Event::Incoming(Incoming::Publish(publish)) => self.publish(publish).await,
                Event::Incoming(Incoming::ConnAck(_)) if end_session => return Ended::Stopped,
                Event::Incoming(Incoming::ConnAck(ack)) => {
                    tracing::info!(
                        "ingest connected to {}:{}, {} session",
                        self.settings.host,
                        self.settings.port,
                        if ack.session_present { "kept" } else { "new" }
                    );
                    if ack.session_present && *subscribed {
                        self.hand_on(Arrived::Link(Standing::Up)).await;
                    } else {
                        *subscribed = false;
                        subscribing = Subscribing::new(&self.filters);
                        if let Err(ended) = subscribing.next(&client) {
                            return ended;
                        }
                    }
                }
                Event::Incoming(Incoming::SubAck(ack)) => {
                    for refused in subscribing.answered(&ack.return_codes) {
                        tracing::error!(
                            "the broker refused the subscription to {refused}; check its access rules"
                        );
                        self.hand_on(Arrived::FilterRefused(refused)).await;
                    }
                    if subscribing.is_done() {
                        if subscribing.granted == 0 && !self.filters.is_empty() {
                            return Ended::Refused("every subscription".into());
                        }
                        *subscribed = subscribing.granted == self.filters.len();
                        tracing::info!(
                            "subscribed to {} of {} filters",
                            subscribing.granted,
                            self.filters.len()
                        );
                        self.hand_on(Arrived::Link(Standing::Up)).await;
                    } else if let Err(ended) = subscribing.next(&client) {
                        return ended;
                    }
                }
                Event::Incoming(_) | Event::Outgoing(Outgoing::Publish(_)) | Event::Outgoing(_) => {
                }
            }
            polling.set(poll(events));
        }
    }

    async fn publish(&self, publish: rumqttc::Publish) {
        self.hand_on(Arrived::Publish {
            topic: publish.topic,
            payload: publish.payload,
            retained: publish.retain,
        })
        .await;
    }

    async fn hand_on(&self, arrived: Arrived) {
        if self.to.send(arrived).await.is_err() {
            tracing::debug!("the intake has ended; a last message is let go");
        }
    }
}

/// Filters still to be subscribed to, one packet at a time.
#[derive(Debug, Default)]
struct Subscribing {
    waiting: VecDeque<String>,
    asked: Vec<String>,
    granted: usize,
}

impl Subscribing {
    fn new(filters: &[String]) -> Self {
        Self {
            waiting: filters.iter().cloned().collect(),
            ..Self::default()
        }
    }

    fn next(&mut self, client: &AsyncClient) -> Result<(), Ended> {
        self.asked = self
            .waiting
            .drain(..self.waiting.len().min(FILTERS_AT_ONCE))
            .collect();
        let filters = self.asked.iter().map(|path| rumqttc::SubscribeFilter {
            path: path.clone(),
            qos: QoS::AtLeastOnce,
        });
        client
            .try_subscribe_many(filters)
            .map_err(|error| Ended::Broken(format!("cannot subscribe: {error}")))
    }

    /// Reads the answer to the last packet; gives the filters refused. A code that is missing is a refusal.
    fn answered(&mut self, codes: &[SubscribeReasonCode]) -> Vec<String> {
        let mut refused = Vec::new();
        for (index, filter) in self.asked.drain(..).enumerate() {
            match codes.get(index) {
                Some(SubscribeReasonCode::Success(_)) => self.granted += 1,
                Some(SubscribeReasonCode::Failure) | None => refused.push(filter),
            }
        }
        refused
    }

    fn is_done(&self) -> bool {
        self.waiting.is_empty() && self.asked.is_empty()
    }
}

#[cfg(test)]
mod tests {
    use rumqttc::{QoS, SubscribeReasonCode};

    use super::Subscribing;

    #[test]
    fn a_refused_filter_is_named_and_a_missing_code_counts_as_a_refusal() {
        let mut subscribing = Subscribing {
            asked: ["a", "b", "c"].map(String::from).to_vec(),
            ..Subscribing::default()
        };
        let codes = [
            SubscribeReasonCode::Success(QoS::AtLeastOnce),
            SubscribeReasonCode::Failure,
        ];
        assert_eq!(subscribing.answered(&codes), ["b", "c"]);
        assert_eq!((subscribing.granted, subscribing.is_done()), (1, true));
    }
}
