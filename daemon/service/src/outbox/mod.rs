//! What is to be published, kept until the broker has it.
//!
//! Two kinds of message. A *letter* is said once and kept until its PubAck; letters of one lane leave in order,
//! one unanswered at a time. A *state* is retained by the broker under its topic: only what is true now is
//! ever sent, and all of it again after every connect, so an old value cannot overwrite a newer one.
//! Letters and states leave in turn; a state of lower rank first. Everything not acknowledged is sent
//! again on the next connection. [`Outbox`] is what the publisher sees of it; [`Memory`] keeps it in memory.

mod memory;

pub use memory::Memory;

use std::sync::{Arc, Mutex, MutexGuard, PoisonError};

use bytes::Bytes;
use tokio::sync::Notify;

/// Largest payload that is published; larger ones are refused at the door.
pub const LARGEST: usize = 256 * 1024 - 1024;

/// Order of retained states after a connect, lowest first.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Rank {
    /// The gateway's own state.
    Gateway,
    /// Alarms.
    Alarm,
    /// Statuses.
    Status,
}

/// A message to keep.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Message {
    /// Said once, delivered at least once.
    Letter {
        /// Letters of one lane leave in order, one at a time.
        lane: Arc<str>,
        /// Its topic.
        topic: String,
        /// Its bytes.
        payload: Bytes,
    },
    /// Retained under its topic; empty bytes take it away.
    State {
        /// When it is sent among the others.
        rank: Rank,
        /// Its topic.
        topic: String,
        /// Its bytes.
        payload: Bytes,
    },
}

/// A message to send now.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Sending {
    /// Its number, to acknowledge it by.
    pub id: u64,
    /// Its topic.
    pub topic: String,
    /// Its bytes.
    pub payload: Bytes,
    /// Whether the broker is to retain it.
    pub retain: bool,
}

/// What became of messages handed in.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Kept {
    /// Letters let go to make room, oldest first: how many by topic.
    pub dropped: Vec<(String, u64)>,
    /// Topics of messages too large to publish.
    pub too_large: Vec<String>,
}

/// What waits.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq)]
pub struct Waiting {
    /// Letters not acknowledged.
    pub letters: usize,
    /// Their bytes.
    pub bytes: usize,
    /// States not acknowledged in their present form.
    pub states: usize,
}

/// Messages kept until they are acknowledged.
pub trait Outbox: Send {
    /// Keeps `messages`, in order.
    fn keep(&mut self, messages: Vec<Message>) -> Kept;

    /// A connection began: nothing is on its way, every state is to be sent again.
    fn connected(&mut self);

    /// The next message to send; it is on its way from now on.
    fn next(&mut self) -> Option<Sending>;

    /// The broker has message `id`.
    fn acknowledged(&mut self, id: u64);

    /// Message `id` could not be handed over; it is first in its turn again.
    fn returned(&mut self, id: u64);

    /// What waits.
    fn waiting(&self) -> Waiting;
}

/// The outbox as its two sides share it: who keeps messages and who publishes them.
#[derive(Clone)]
pub struct Shared {
    inside: Arc<Mutex<Box<dyn Outbox>>>,
    changed: Arc<Notify>,
}

impl std::fmt::Debug for Shared {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Shared")
            .field("waiting", &self.lock().waiting())
            .finish_non_exhaustive()
    }
}

impl Shared {
    /// Shares `outbox`.
    pub fn new(outbox: Box<dyn Outbox>) -> Self {
        Self {
            inside: Arc::new(Mutex::new(outbox)),
            changed: Arc::new(Notify::new()),
        }
    }

    /// Keeps `messages` and wakes the publisher.
    pub fn keep(&self, messages: Vec<Message>) -> Kept {
        let kept = self.lock().keep(messages);
        self.changed.notify_one();
        kept
    }

    /// Resolves when messages were kept since the last time.
    pub async fn changed(&self) {
        self.changed.notified().await;
    }

    /// The outbox itself, for one short act.
    pub fn lock(&self) -> MutexGuard<'_, Box<dyn Outbox>> {
        self.inside.lock().unwrap_or_else(PoisonError::into_inner)
    }
}

#[cfg(test)]
mod tests;
