//! Plays a world to an MQTT 3.1.1 broker, at QoS 1, each message when it arrives in simulated time.
//!
//! In: deliveries in order of arrival, a broker, a pace. Out: publishes, and how it went. The world runs in a thread
//! of its own, some hundred messages ahead. What falls due while there is no broker is dropped, as a sensor's would
//! be, and counted; so is what the broker had not acknowledged when a connection broke. A first connection that does
//! not come about ends the play with the reason; later ones are tried again, 0.5 to 60 s apart.
//!
//! What the client library does to the careless, and the rule held against each (read in the source of rumqttc
//! 0.25.1): it drops or replays what it holds after a reconnect, so every connection gets a client of its own; its
//! `publish` can deadlock the task that polls, so only `try_publish` is used; its `poll` is not safe to cancel, so
//! one is kept, pinned, until it is done; packet ids that come round stop it, which the flight window prevents.

mod broker;
mod connection;
mod flight;
mod pace;
mod source;
mod waits;

pub use broker::{Broker, Lost};
pub use pace::Pace;

use std::future::Future;
use std::pin::Pin;
use std::time::{Duration, Instant};

use tokio::time::sleep_until;

use crate::transport::Delivery;
use connection::End;
use source::Source;
use waits::Waits;

/// A play is told to be late from here on.
const BEHIND: Duration = Duration::from_secs(2);

/// What happens on the way.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Happened {
    /// The broker took us; so many messages were dropped while there was none.
    Connected {
        /// Messages dropped since the last connection, unacknowledged ones among them.
        dropped: u64,
    },
    /// The connection is lost.
    Lost {
        /// Why.
        why: Lost,
        /// When it is tried again.
        wait: Duration,
    },
    /// Messages go out later than they are due by so much, true time: machine or broker is too slow for the pace.
    Behind {
        /// How late the last one was.
        by: Duration,
    },
}

/// How a play went.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Summary {
    /// Messages the broker acknowledged.
    pub published: u64,
    /// Messages that fell due while there was no broker.
    pub dropped: u64,
    /// Messages sent and not acknowledged when a connection ended; the broker may have them.
    pub unanswered: u64,
    /// The latest a message went out after it was due, true time.
    pub latest: Duration,
}

/// Why a play ended that was not asked to.
#[derive(Debug, thiserror::Error)]
pub enum PlayFault {
    /// The first connection did not come about.
    #[error("broker {host}:{port}: {why}")]
    Broker {
        /// Name or address.
        host: String,
        /// TCP port.
        port: u16,
        /// Why.
        #[source]
        why: Lost,
    },
    /// The machine gives us no thread.
    #[error("no thread for the simulation: {cause}; end other programs")]
    Thread {
        /// Why.
        #[source]
        cause: std::io::Error,
    },
    /// The simulation broke off.
    #[error(
        "the simulation broke off; its message stands above, please report it with scenario and seed"
    )]
    World,
}

/// A play on its way.
struct Player<'a, F> {
    broker: &'a Broker,
    source: Source,
    pace: Pace,
    summary: Summary,
    /// Whether we were told to stop.
    stopped: bool,
    /// Messages dropped since the last connection.
    dropped: u64,
    behind: bool,
    connected_once: bool,
    tell: F,
}

/// Plays `world` until it is over or `stop` comes; tells on the way through `tell`.
///
/// # Errors
/// [`PlayFault`]: no thread, no first connection, or a simulation that broke off.
pub async fn play(
    world: impl Iterator<Item = Delivery> + Send + 'static,
    broker: &Broker,
    pace: Pace,
    stop: impl Future<Output = ()>,
    tell: impl FnMut(&Happened),
) -> Result<Summary, PlayFault> {
    let mut player = Player {
        broker,
        source: Source::start(world)?,
        pace,
        summary: Summary::default(),
        stopped: false,
        dropped: 0,
        behind: false,
        connected_once: false,
        tell,
    };
    let mut waits = Waits::new(pace.start_ns.unsigned_abs());
    tokio::pin!(stop);
    loop {
        let began = Instant::now();
        let why = match player.connection(stop.as_mut()).await {
            End::Done => break,
            End::Lost(why) => why,
        };
        if !player.connected_once {
            return Err(PlayFault::Broker {
                host: broker.host.clone(),
                port: broker.port,
                why,
            });
        }
        let wait = waits.after(began.elapsed(), why.refused());
        (player.tell)(&Happened::Lost { why, wait });
        player.without_broker(wait, stop.as_mut()).await;
        if player.stopped || player.source.over() {
            break;
        }
    }
    player.source.finish()?;
    Ok(player.summary)
}

impl<F: FnMut(&Happened)> Player<'_, F> {
    /// Takes the next message if it is due.
    fn take_due(&mut self) -> Option<Delivery> {
        let due = self.pace.due(self.source.peek()?);
        let late = Instant::now().checked_duration_since(due)?;
        self.summary.latest = self.summary.latest.max(late);
        if late > BEHIND && !self.behind {
            (self.tell)(&Happened::Behind { by: late });
        }
        self.behind = late > if self.behind { BEHIND / 4 } else { BEHIND };
        self.source.take()
    }

    /// Waits until the next message is due, or there is none any more. Safe to cancel.
    async fn due(&mut self) {
        self.source.made().await;
        if let Some(at_ns) = self.source.peek() {
            sleep_until(self.pace.due(at_ns).into()).await;
        }
    }

    /// Drops what is due.
    fn drop_due(&mut self) {
        while self
            .source
            .peek()
            .is_some_and(|at_ns| self.pace.due(at_ns) <= Instant::now())
        {
            drop(self.source.take());
            self.dropped += 1;
            self.summary.dropped += 1;
        }
    }

    /// Drops what falls due within `wait`, unless it is over or stopped before.
    async fn without_broker(
        &mut self,
        wait: Duration,
        mut stop: Pin<&mut impl Future<Output = ()>>,
    ) {
        let until = Instant::now() + wait;
        while !self.stopped && !self.source.over() {
            self.drop_due();
            tokio::select! {
                () = self.due(), if !self.source.over() => {}
                () = stop.as_mut() => self.stopped = true,
                () = sleep_until(until.into()) => return,
            }
        }
    }
}
