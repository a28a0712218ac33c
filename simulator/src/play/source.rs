//! The world in a thread of its own, some hundred messages ahead, so that a hiccup of the machine does not show.

use std::thread::{self, JoinHandle};

use tokio::sync::mpsc;
use tokio::sync::mpsc::error::TryRecvError;

use super::PlayFault;
use crate::transport::Delivery;

/// Messages made in advance.
const AHEAD: usize = 300;

/// Where the messages come from.
#[derive(Debug)]
pub(super) struct Source {
    deliveries: mpsc::Receiver<Delivery>,
    thread: Option<JoinHandle<()>>,
    next: Option<Delivery>,
    over: bool,
}

impl Source {
    /// Starts the thread.
    pub(super) fn start(
        world: impl Iterator<Item = Delivery> + Send + 'static,
    ) -> Result<Source, PlayFault> {
        let (ahead, deliveries) = mpsc::channel(AHEAD);
        let thread = thread::Builder::new()
            .name("world".to_owned())
            .spawn(move || {
                for delivery in world {
                    if ahead.blocking_send(delivery).is_err() {
                        return;
                    }
                }
            })
            .map_err(|cause| PlayFault::Thread { cause })?;
        Ok(Source {
            deliveries,
            thread: Some(thread),
            next: None,
            over: false,
        })
    }

    /// Whether there is nothing left.
    pub(super) fn over(&self) -> bool {
        self.over && self.next.is_none()
    }

    /// When the next message arrives, ns since 1970 UTC, if it is made already.
    pub(super) fn peek(&mut self) -> Option<i64> {
        if self.next.is_none() && !self.over {
            match self.deliveries.try_recv() {
                Ok(delivery) => self.next = Some(delivery),
                Err(TryRecvError::Empty) => {}
                Err(TryRecvError::Disconnected) => self.over = true,
            }
        }
        self.next.as_ref().map(|delivery| delivery.arrival_ns)
    }

    /// Waits until the next message is made, or there is none any more. Safe to cancel: nothing is lost.
    pub(super) async fn made(&mut self) {
        if self.next.is_none() && !self.over {
            match self.deliveries.recv().await {
                Some(delivery) => self.next = Some(delivery),
                None => self.over = true,
            }
        }
    }

    /// Takes the next message.
    pub(super) fn take(&mut self) -> Option<Delivery> {
        self.next.take()
    }

    /// Ends it. A world that broke off looks like one that is over: the thread tells which it was.
    pub(super) fn finish(mut self) -> Result<(), PlayFault> {
        let ended = self.over;
        drop(self.deliveries);
        match self.thread.take() {
            Some(thread) if ended => thread.join().map_err(|_| PlayFault::World),
            // It ends by itself with its next message: nobody takes it any more.
            Some(_) | None => Ok(()),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::Source;
    use crate::play::PlayFault;
    use crate::transport::Delivery;

    fn delivery(arrival_ns: i64) -> Delivery {
        Delivery {
            arrival_ns,
            topic: "a".to_owned(),
            payload: Vec::new(),
        }
    }

    fn end(world: impl Iterator<Item = Delivery> + Send + 'static) -> (i64, Result<(), PlayFault>) {
        let mut source = Source::start(world).unwrap();
        let runtime = tokio::runtime::Builder::new_current_thread()
            .build()
            .unwrap();
        let mut taken = 0;
        while !source.over() {
            runtime.block_on(source.made());
            taken += i64::from(source.take().is_some());
        }
        (taken, source.finish())
    }

    #[test]
    fn a_world_that_breaks_off_is_not_taken_for_one_that_is_over() {
        let (taken, ended) = end((0..1000).map(delivery));
        assert!(taken == 1000 && ended.is_ok());
        let (taken, ended) = end((0..1000).map(|at| {
            assert!(at < 500, "the world of a test breaks off");
            delivery(at)
        }));
        assert!(taken == 500 && matches!(ended, Err(PlayFault::World)));
    }

    #[test]
    fn a_source_that_is_let_go_early_ends_well() {
        let source = Source::start((0..).map(delivery)).unwrap();
        assert!(source.finish().is_ok());
    }
}
