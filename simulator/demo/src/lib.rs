//! `humward-demo`: the first minute, in one process.
//!
//! A broker, the daemon and the simulator of a plant that does not exist, all faster than true time by one factor. What
//! is printed between the banner and the summary are the daemon's own messages as the broker carried them, and nothing
//! else; the summary holds them against what the simulator injected. Everything is simulated and says so.
//! Checked by `tests/first_minute.rs`, which listens at the same broker.

pub mod banner;
pub mod broker;
pub mod cli;
pub mod exit;
pub mod fault;
pub mod interrupts;
pub mod listener;
pub mod pace;
pub mod page;
pub mod player;
pub mod said;
pub mod stage;
pub mod story;
pub mod summary;
#[cfg(test)]
mod testing;
pub mod verdict;
pub mod watch;
