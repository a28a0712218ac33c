//! One connection to the broker, from the first byte to the last.

use std::future::Future;
use std::pin::Pin;
use std::time::{Duration, Instant};

use rumqttc::{AsyncClient, ConnectionError, Event, EventLoop, Incoming, Outgoing, QoS};
use tokio::time::sleep_until;

use super::broker::network;
use super::flight::{Flight, PACKETS};
use super::{Broker, Happened, Lost, Player};

/// Longest wait for the last acknowledgements.
const FINISH_WITHIN: Duration = Duration::from_secs(5);
/// Longest wait for the last packet to be written.
const LEAVE_WITHIN: Duration = Duration::from_secs(1);

/// How a connection ended.
pub(super) enum End {
    /// Nothing is left to send, or we were told to stop.
    Done,
    /// It broke.
    Lost(Lost),
}

/// One poll that owns its event loop, so it can stay pinned across waits and is never dropped half done.
async fn poll(mut events: EventLoop) -> (EventLoop, Result<Event, ConnectionError>) {
    let event = events.poll().await;
    (events, event)
}

impl<F: FnMut(&Happened)> Player<'_, F> {
    /// Connects and publishes what falls due.
    pub(super) async fn connection(&mut self, stop: Pin<&mut impl Future<Output = ()>>) -> End {
        let mut flight = Flight::default();
        let end = self.publish(&mut flight, stop).await;
        self.summary.unanswered += flight.unanswered();
        self.dropped += flight.unanswered();
        end
    }

    async fn publish(
        &mut self,
        flight: &mut Flight,
        mut stop: Pin<&mut impl Future<Output = ()>>,
    ) -> End {
        let (client, mut events) = AsyncClient::new(self.broker.options(), usize::from(PACKETS));
        events.set_network_options(network());
        let mut up = false;
        let mut leaving = false;
        // The last moment to go on, once there is nothing more to send.
        let mut finish: Option<Instant> = None;
        let mut heard = Instant::now();
        let polling = poll(events);
        tokio::pin!(polling);
        loop {
            if up && !leaving {
                if let Err(lost) = self.hand_over(&client, flight) {
                    return End::Lost(lost);
                }
            } else if !up && self.connected_once {
                self.drop_due();
            }
            let last = self.stopped || self.source.over();
            if last && !up {
                return End::Done;
            }
            let now = Instant::now();
            if last && finish.is_none() {
                finish = Some(now + FINISH_WITHIN);
            }
            let too_late = finish.is_some_and(|finish| finish <= now);
            if leaving && too_late {
                return End::Done;
            }
            if last && !leaving && (flight.unanswered() == 0 || too_late) {
                leaving = true;
                finish = Some(now + LEAVE_WITHIN);
                if client.try_disconnect().is_err() {
                    return End::Done;
                }
            }
            let sends = !last
                && if up {
                    flight.has_room()
                } else {
                    self.connected_once
                };
            let (mut events, event) = tokio::select! {
                polled = &mut polling => polled,
                () = self.due(), if sends => continue,
                () = stop.as_mut(), if !self.stopped => {
                    self.stopped = true;
                    continue;
                }
                () = sleep_until(finish.unwrap_or(heard + Broker::silence()).into()) => {
                    if finish.is_some() {
                        continue;
                    }
                    return End::Lost(Lost::Silent);
                }
            };
            let event = match event {
                Ok(event) => event,
                Err(error) => {
                    // What the broker still said before it went counts.
                    while let Some(event) = events.state.events.pop_front() {
                        self.count(&event, flight);
                    }
                    return if leaving {
                        End::Done
                    } else {
                        End::Lost(error.into())
                    };
                }
            };
            if matches!(event, Event::Incoming(_)) {
                heard = Instant::now();
            }
            if let Event::Incoming(Incoming::ConnAck(_)) = event {
                up = true;
                self.connected_once = true;
                let dropped = std::mem::take(&mut self.dropped);
                (self.tell)(&Happened::Connected { dropped });
            }
            if event == Event::Outgoing(Outgoing::Disconnect) {
                return End::Done;
            }
            self.count(&event, flight);
            polling.set(poll(events));
        }
    }

    /// Hands what is due to the client, as far as there is room.
    fn hand_over(&mut self, client: &AsyncClient, flight: &mut Flight) -> Result<(), Lost> {
        while !self.stopped && flight.has_room() {
            let Some(delivery) = self.take_due() else {
                return Ok(());
            };
            let (topic, payload) = (delivery.topic, delivery.payload);
            if let Err(error) = client.try_publish(topic, QoS::AtLeastOnce, false, payload) {
                self.dropped += 1;
                self.summary.dropped += 1;
                return Err(Lost::Broken {
                    cause: error.to_string(),
                });
            }
            flight.handed();
        }
        Ok(())
    }

    fn count(&mut self, event: &Event, flight: &mut Flight) {
        match event {
            Event::Outgoing(Outgoing::Publish(packet)) => flight.written(*packet),
            Event::Incoming(Incoming::PubAck(ack)) => {
                self.summary.published += u64::from(flight.acknowledged(ack.pkid));
            }
            Event::Outgoing(_) | Event::Incoming(_) => {}
        }
    }
}
