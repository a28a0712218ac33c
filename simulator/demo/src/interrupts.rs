//! Ctrl-C, and the system's word to end: told once to the one that prints, who lets everybody leave in order.

use std::sync::mpsc::Sender;
use std::thread;

use tokio::signal::unix::{SignalKind, signal};

use crate::fault::DemoFault;
use crate::stage::Happening;

/// Tells `to` of SIGINT or SIGTERM, once.
///
/// # Errors
/// The system refuses a signal or a thread.
pub fn watch(to: Sender<Happening>) -> Result<(), DemoFault> {
    let refused = |cause| DemoFault::System {
        what: "signals",
        cause,
    };
    let runtime = humward::run::runtime()?;
    let (mut interrupt, mut terminate) = {
        let _inside = runtime.enter();
        (
            signal(SignalKind::interrupt()).map_err(refused)?,
            signal(SignalKind::terminate()).map_err(refused)?,
        )
    };
    thread::Builder::new()
        .name("signals".to_owned())
        .spawn(move || {
            runtime.block_on(async {
                tokio::select! {
                    _ = interrupt.recv() => {}
                    _ = terminate.recv() => {}
                }
            });
            // Nobody listens any more when the demo is at its end already.
            drop(to.send(Happening::Interrupted));
        })
        .map_err(|cause| DemoFault::System {
            what: "a thread",
            cause,
        })?;
    Ok(())
}
