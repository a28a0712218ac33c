//! The simulator on a thread of its own, at the plant's pace, through the same `play` as `humward-sim play`.

use std::panic::{AssertUnwindSafe, catch_unwind};
use std::sync::mpsc::Sender;
use std::thread::{self, JoinHandle};

use humward_sim::play::{Broker, Happened, Pace, Summary, play};
use humward_sim::world::World;
use tokio::sync::oneshot;

use crate::fault::DemoFault;
use crate::stage::Happening;

/// The running simulator.
#[derive(Debug)]
pub struct Player {
    stop: oneshot::Sender<()>,
    thread: JoinHandle<()>,
}

impl Player {
    /// Plays `world` to the broker on `port`; `to` hears how it goes and when it is over.
    ///
    /// # Errors
    /// The system refuses a thread.
    pub fn start(
        world: World,
        port: u16,
        pace: Pace,
        to: Sender<Happening>,
    ) -> Result<Self, DemoFault> {
        let (stop, stopped) = oneshot::channel::<()>();
        let thread = thread::Builder::new()
            .name("simulator".to_owned())
            .spawn(move || {
                let told = to.clone();
                let tell = move |happened: &Happened| {
                    // The one that prints ends after us, or does not care any more.
                    drop(told.send(Happening::Playing(happened.clone())));
                };
                // Nobody would hear of a thread that broke down in silence.
                let played =
                    catch_unwind(AssertUnwindSafe(|| run(world, port, pace, stopped, tell)))
                        .unwrap_or_else(
                            |_| Err("it broke down; its last words stand above".into()),
                        );
                drop(to.send(Happening::Played(played)));
            })
            .map_err(|cause| DemoFault::System {
                what: "a thread",
                cause,
            })?;
        Ok(Self { stop, thread })
    }

    /// Stops it and waits until it has said goodbye to the broker.
    pub fn end(self) {
        // It may be over already, and has told how it ended.
        let _ = self.stop.send(());
        drop(self.thread.join());
    }
}

fn run(
    world: World,
    port: u16,
    pace: Pace,
    stopped: oneshot::Receiver<()>,
    tell: impl FnMut(&Happened),
) -> Result<Summary, String> {
    let broker = Broker {
        host: "127.0.0.1".to_owned(),
        port,
        login: None,
        client_id: "humward-demo-plant".to_owned(),
    };
    let runtime = humward::run::runtime().map_err(|error| error.to_string())?;
    let stop = async {
        drop(stopped.await);
    };
    runtime
        .block_on(play(world, &broker, pace, stop, tell))
        .map_err(|error| error.to_string())
}
