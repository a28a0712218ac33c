//! `humward`: watches pumps between rounds.
//!
//! Accelerometer blocks in over MQTT, alarms with their evidence out. `config` reads and checks the
//! configuration, `check` tells what it means, `cli` dispatches the commands, `exit` numbers their ends.

pub mod check;
pub mod cli;
pub mod clock;
pub mod commit;
pub mod config;
pub mod decode;
pub mod exit;
pub mod gateway;
pub mod intake;
pub mod mailbox;
pub mod message;
pub mod mqtt;
pub mod outbox;
pub mod rehearse;
pub mod route;
pub mod run;
pub mod setup;
pub mod worker;
