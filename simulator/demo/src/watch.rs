//! The daemon itself, on a thread of its own: the same `serve` that `humward run` calls.

use std::panic::{AssertUnwindSafe, catch_unwind};
use std::path::Path;
use std::sync::mpsc::Sender;
use std::thread::{self, JoinHandle};

use humward::clock::Clock;
use humward::config::{Loaded, load_text};
use humward::run::{RunError, runtime, serve};
use humward_monitor::time::Arrival;
use tokio::sync::oneshot;

use crate::fault::DemoFault;
use crate::stage::Happening;

/// What the plant's configuration is called in messages.
const CONFIG_PATH: &str = "config/harbour.toml";
/// The plant's configuration, as it lies in `config/`.
const CONFIG: &str = include_str!("../../../config/harbour.toml");

/// The plant's configuration with the broker of the demo; the environment of the process has no say.
///
/// # Errors
/// The configuration has faults.
pub fn configuration(port: u16) -> Result<Loaded, DemoFault> {
    let broker = [
        ("HUMWARD_BROKER__HOST".to_owned(), "127.0.0.1".to_owned()),
        ("HUMWARD_BROKER__PORT".to_owned(), port.to_string()),
    ];
    load_text(Path::new(CONFIG_PATH), CONFIG, &broker).map_err(DemoFault::Configuration)
}

/// The running daemon.
#[derive(Debug)]
pub struct Watch {
    stop: oneshot::Sender<()>,
    thread: JoinHandle<Result<(), RunError>>,
}

impl Watch {
    /// Starts it by a clock that reads `start_ns` now and runs `factor` times as fast; `to` hears when it has ended.
    ///
    /// # Errors
    /// The system refuses a thread.
    pub fn start(
        config: Loaded,
        factor: f64,
        start_ns: i64,
        to: Sender<Happening>,
    ) -> Result<Self, DemoFault> {
        let clock = Clock::scaled(factor, Arrival::from_ns(start_ns));
        let (stop, stopped) = oneshot::channel::<()>();
        let thread = thread::Builder::new()
            .name("daemon".to_owned())
            .spawn(move || {
                let ended = catch_unwind(AssertUnwindSafe(|| {
                    runtime().and_then(|runtime| {
                        runtime.block_on(serve(config, clock, async {
                            // The demo dropping its end means the same as a word.
                            drop(stopped.await);
                        }))
                    })
                }));
                // Nobody listens any more when the demo has asked for the end.
                drop(to.send(Happening::DaemonEnded));
                ended.unwrap_or(Err(RunError::PartEnded { part: "the daemon" }))
            })
            .map_err(|cause| DemoFault::System {
                what: "a thread",
                cause,
            })?;
        Ok(Self { stop, thread })
    }

    /// Asks it to stop and waits until its last message is delivered.
    ///
    /// # Errors
    /// It had ended by itself, or a part of it.
    pub fn stop(self) -> Result<(), DemoFault> {
        // It may have ended already; then what it says counts.
        let _ = self.stop.send(());
        match self.thread.join() {
            Ok(ended) => Ok(ended?),
            Err(_) => Err(DemoFault::Daemon(RunError::PartEnded {
                part: "the daemon",
            })),
        }
    }
}
