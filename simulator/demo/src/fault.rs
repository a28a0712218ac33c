//! Why the demo cannot run.

use std::io;

use humward::config::Faults;
use humward::run::RunError;
use humward_sim::scenario::ScenarioFault;
use humward_sim::world::WorldFault;

/// Why the demo cannot run or go on.
#[derive(Debug, thiserror::Error)]
pub enum DemoFault {
    /// Nobody may listen on the port.
    #[error(
        "port {port} of 127.0.0.1 cannot be listened on: {cause}; leave --port out, or choose a free one"
    )]
    Port {
        /// The port; 0 is any.
        port: u16,
        /// The system's answer.
        cause: io::Error,
    },
    /// The broker ended or never answered.
    #[error("the broker inside the demo does not answer on 127.0.0.1:{port}: {why}; run it again")]
    Broker {
        /// Its port.
        port: u16,
        /// What happened.
        why: String,
    },
    /// The plant's configuration has faults.
    #[error(
        "the configuration of the demo's plant has faults, which is a fault of this program:\n{0}"
    )]
    Configuration(Faults),
    /// The scenario has faults.
    #[error("the scenario of the demo has faults, which is a fault of this program: {0}")]
    Scenario(#[from] ScenarioFault),
    /// The scenario makes no world.
    #[error("the scenario of the demo makes no world, which is a fault of this program: {0}")]
    World(#[from] WorldFault),
    /// The daemon ended.
    #[error("the daemon ended: {0}")]
    Daemon(#[from] RunError),
    /// The daemon did not say that it watches.
    #[error(
        "the daemon did not say within {seconds} s that it watches; set HUMWARD_LOG=humward=info to see what it does"
    )]
    NotOnline {
        /// How long it was waited for.
        seconds: u64,
    },
    /// The daemon was stopped and did not say so.
    #[error(
        "the daemon did not say within {seconds} s that it is gone; set HUMWARD_LOG=humward=info to see what it does"
    )]
    NotOffline {
        /// How long it was waited for.
        seconds: u64,
    },
    /// The simulator cannot publish.
    #[error("the simulator stopped: {0}; run it again")]
    Simulator(String),
    /// The listener's connection broke.
    #[error("the listener lost the broker: {0}; run it again")]
    Listener(String),
    /// A message of the daemon does not read back.
    #[error("{topic}: not a message of the contract: {cause}")]
    Message {
        /// Where it came.
        topic: String,
        /// What is wrong.
        cause: String,
    },
    /// The system refuses a thread or a signal.
    #[error("the system refuses {what}: {cause}; raise its limits")]
    System {
        /// What was asked for.
        what: &'static str,
        /// Its answer.
        cause: io::Error,
    },
    /// Nobody takes the output.
    #[error("the output cannot be written: {0}; give it a place to go")]
    Output(#[from] io::Error),
}
