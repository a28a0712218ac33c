//! Keeps what a step or the gateway has to say, before anything of it is published.
//!
//! One thread takes outcomes from a bounded channel, as many at once as have come, and hands them to the outbox in
//! one act. When it is slow the channel fills, the worker waits, and its mailbox lets blocks go, counted.

use std::sync::Arc;
use std::sync::mpsc::{Receiver, SyncSender, sync_channel};

use humward_monitor::Action;
use humward_monitor::time::Arrival;
use humward_wire::out::{GatewayEventKind, Message as _};
use humward_wire::topic::Topics;

use crate::gateway::{Book, Told};
use crate::message;
use crate::outbox::{Kept, Message, Rank, Shared};

/// Outcomes that may wait.
const CHANNEL: usize = 256;

/// Something to keep.
#[derive(Debug)]
pub enum Outcome {
    /// Actions of one step, in order, and when the step was.
    Actions(Arrival, Vec<Action>),
    /// An event of the gateway.
    Told(Arrival, Told),
    /// The gateway's state is to be said again; so many bytes wait for the workers.
    Beat(Arrival, usize),
    /// The last word: the gateway is offline.
    Offline(Arrival),
}

/// The channel outcomes go through.
pub fn channel() -> (SyncSender<Outcome>, Receiver<Outcome>) {
    sync_channel(CHANNEL)
}

/// Who keeps outcomes.
#[derive(Debug)]
pub struct Committer {
    /// Where they come from.
    pub from: Receiver<Outcome>,
    /// Where they are kept.
    pub outbox: Shared,
    /// The gateway's account.
    pub book: Arc<Book>,
    /// Our topics.
    pub topics: Topics,
}

impl Committer {
    /// Runs until every sender is gone.
    pub fn run(self) {
        let mut overflow: Option<Overflow> = None;
        while let Ok(first) = self.from.recv() {
            let outcomes = std::iter::once(first)
                .chain(self.from.try_iter().take(CHANNEL))
                .collect();
            self.keep(outcomes, &mut overflow);
        }
    }

    fn keep(&self, outcomes: Vec<Outcome>, overflow: &mut Option<Overflow>) {
        let mut at = Arrival::from_ns(i64::MIN);
        let mut messages = Vec::new();
        for outcome in outcomes {
            at = at.max(self.messages(outcome, &mut messages));
        }
        let kept = self.outbox.keep(messages);
        self.account(at, kept, overflow);
    }

    fn messages(&self, outcome: Outcome, messages: &mut Vec<Message>) -> Arrival {
        match outcome {
            Outcome::Actions(at, actions) => {
                for action in &actions {
                    log(action);
                    messages.extend(message::of(action, &self.topics));
                }
                at
            }
            Outcome::Told(at, told) => {
                messages.extend(self.letter(at, told));
                messages.push(self.state(self.book.state(at)));
                at
            }
            Outcome::Beat(at, waiting) => {
                self.book.measure(at, waiting);
                messages.push(self.state(self.book.state(at)));
                at
            }
            Outcome::Offline(at) => {
                messages.push(self.state(self.book.offline(at)));
                at
            }
        }
    }

    fn letter(&self, at: Arrival, told: Told) -> Option<Message> {
        let event = self.book.event(at, told)?;
        let topic = self
            .topics
            .event_gateway(&self.book.constants().identity.gateway);
        Some(Message::Letter {
            lane: topic.as_str().into(),
            topic,
            payload: event.to_json().into(),
        })
    }

    fn state(&self, gateway: humward_wire::out::Gateway) -> Message {
        let topic = self.topics.gateway(&self.book.constants().identity.gateway);
        Message::State {
            rank: Rank::Gateway,
            topic,
            payload: gateway.to_json().into(),
        }
    }

    /// Counts what the outbox let go; tells of it once there is room again, when the telling can be heard.
    fn account(&self, at: Arrival, kept: Kept, overflow: &mut Option<Overflow>) {
        for topic in &kept.too_large {
            self.book.lost("message_too_large", 1);
            tracing::error!("a message for {topic} is too large to publish and was left out");
        }
        let dropped: u64 = kept.dropped.iter().map(|(_, count)| count).sum();
        if dropped > 0 {
            self.book.lost("outbox_full", dropped);
            let overflow = overflow.get_or_insert_with(|| {
                tracing::error!("the outbox is full: the oldest messages are let go; restore the broker or raise outbox_mib");
                Overflow { from: at, count: 0 }
            });
            overflow.count += dropped;
        } else if self.outbox.lock().waiting().letters == 0
            && let Some(Overflow { from, count }) = overflow.take()
        {
            let text = format!(
                "{count} messages were let go because the outbox was full; raise outbox_mib or restore the broker sooner"
            );
            let told = Told {
                span: (Some(from), Some(at)),
                reason: Some("outbox_full".into()),
                count: Some(count),
                ..Told::new(GatewayEventKind::Omitted, text)
            };
            let letter = self.letter(at, told);
            self.outbox.keep(letter.into_iter().collect());
        }
    }
}

struct Overflow {
    from: Arrival,
    count: u64,
}

/// One line of the log per event.
fn log(action: &Action) {
    if let Action::Event(event) = action {
        tracing::info!(
            "event {} {}: {}",
            event.id,
            event.transition,
            event.finding.text
        );
    }
}

#[cfg(test)]
mod tests;
