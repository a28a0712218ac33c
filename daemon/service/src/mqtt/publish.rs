//! The connection that takes messages out.
//!
//! Clean session, fixed client id. The will says `offline`; after every ConnAck the outbox starts anew with what
//! is true now. One task hands over and polls; at most [`super::window::WINDOW`] messages are unanswered,
//! and a message leaves the outbox on its PubAck only. To finish it waits until nothing is left, then
//! disconnects, so the will stays unsaid.

use rumqttc::{AsyncClient, Event, Incoming, LastWill, Outgoing, QoS};
use tokio::sync::{mpsc, watch};

use super::backoff::Backoff;
use super::window::{PACKET_IDS, Window};
use super::{Ended, Settings, Standing, network, poll, seed};
use crate::clock::{Moment, pause, pause_until};
use crate::outbox::Shared;

/// The message the broker publishes for us when we vanish.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Will {
    /// Its topic.
    pub topic: String,
    /// Its bytes.
    pub payload: Vec<u8>,
}

/// The publish connection.
pub struct Publish {
    /// Where the broker is.
    pub settings: Settings,
    /// Our fixed client id.
    pub client_id: String,
    /// What is to be published.
    pub outbox: Shared,
    /// What is said for us when we vanish, as of now.
    pub will: Box<dyn Fn() -> Will + Send + Sync>,
    /// Where we tell how the connection stands.
    pub tell: mpsc::Sender<Standing>,
    /// True once we are to end as soon as nothing is left to send.
    pub finish: watch::Receiver<bool>,
}

impl std::fmt::Debug for Publish {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Publish")
            .field("client_id", &self.client_id)
            .finish_non_exhaustive()
    }
}

impl Publish {
    /// Runs until finished, connecting again for ever.
    pub async fn run(mut self) {
        let mut backoff = Backoff::new(seed(&self.client_id));
        loop {
            let began = Moment::now();
            let ended = self.connection().await;
            let (wait, standing) = match &ended {
                Ended::Stopped => return,
                Ended::Refused(why) => (backoff.refused(), Standing::Refused(why.clone())),
                Ended::TooLarge(_) | Ended::Silent | Ended::Broken(_) => (
                    backoff.after(began.elapsed()),
                    Standing::Down(ended.to_string()),
                ),
            };
            tracing::warn!(
                "publish connection: {ended}; next try in {:.1} s",
                wait.as_secs_f64()
            );
            self.tell(standing).await;
            pause(wait).await;
        }
    }

    async fn connection(&mut self) -> Ended {
        let mut options = self.settings.options(&self.client_id, true);
        let will = (self.will)();
        options.set_last_will(LastWill::new(
            will.topic,
            will.payload,
            QoS::AtLeastOnce,
            true,
        ));
        let (client, mut events) = AsyncClient::new(options, usize::from(PACKET_IDS));
        events.set_network_options(network());
        let silence = self.settings.silence();
        let mut window = Window::default();
        let mut up = false;
        let mut leaving = false;
        let mut last = Moment::now();
        let polling = poll(events);
        tokio::pin!(polling);
        loop {
            if up && !leaving {
                if let Err(ended) = self.hand_over(&client, &mut window) {
                    return ended;
                }
                if *self.finish.borrow() && window.is_empty() {
                    leaving = true;
                    if let Err(error) = client.try_disconnect() {
                        return Ended::Broken(error.to_string());
                    }
                }
            }
            let (mut events, event) = tokio::select! {
                polled = &mut polling => polled,
                () = self.outbox.changed() => continue,
                _ = self.finish.changed() => continue,
                () = pause_until(last, silence) => return Ended::Silent,
            };
            let event = match event {
                Ok(event) => event,
                Err(error) => {
                    while let Some(event) = events.state.events.pop_front() {
                        if let Err(ended) = self.settle(&event, &mut window) {
                            return ended;
                        }
                    }
                    return if leaving {
                        Ended::Stopped
                    } else {
                        error.into()
                    };
                }
            };
            if matches!(event, Event::Incoming(_)) {
                last = Moment::now();
            }
            if let Event::Incoming(Incoming::ConnAck(_)) = event {
                tracing::info!(
                    "publish connected to {}:{}",
                    self.settings.host,
                    self.settings.port
                );
                self.outbox.lock().connected();
                up = true;
                self.tell(Standing::Up).await;
            }
            if leaving && event == Event::Outgoing(Outgoing::Disconnect) {
                return Ended::Stopped;
            }
            if let Err(ended) = self.settle(&event, &mut window) {
                return ended;
            }
            polling.set(poll(events));
        }
    }

    fn hand_over(&self, client: &AsyncClient, window: &mut Window) -> Result<(), Ended> {
        while window.has_room() {
            let Some(message) = self.outbox.lock().next() else {
                return Ok(());
            };
            let payload: Vec<u8> = message.payload.into();
            if let Err(error) =
                client.try_publish(message.topic, QoS::AtLeastOnce, message.retain, payload)
            {
                self.outbox.lock().returned(message.id);
                return Err(Ended::Broken(format!(
                    "cannot hand a message over: {error}"
                )));
            }
            window.handed(message.id);
        }
        Ok(())
    }

    fn settle(&self, event: &Event, window: &mut Window) -> Result<(), Ended> {
        let done = match event {
            Event::Outgoing(Outgoing::Publish(packet)) => window.written(*packet),
            Event::Incoming(Incoming::PubAck(ack)) => window
                .acknowledged(ack.pkid)
                .map(|id| self.outbox.lock().acknowledged(id)),
            Event::Outgoing(_) | Event::Incoming(_) => Ok(()),
        };
        done.map_err(|fault| Ended::Broken(fault.to_string()))
    }

    async fn tell(&self, standing: Standing) {
        if self.tell.send(standing).await.is_err() {
            tracing::debug!("the intake has ended; nobody hears how the publish connection stands");
        }
    }
}
