//! The core from outside: scripts with the complete list of their actions, and properties over generated input.
//!
//! A script's first line says why it exists. Its header holds plan settings (`settings.rs`), its commands carry
//! signal time in seconds after 2026-12-01 03:00 UTC (`language.rs`, `inputs.rs`); after `---` stands everything
//! the core asked for, command by command (`told.rs`). `HUMWARD_BLESS=1` rewrites that part.
#![expect(
    clippy::unwrap_used,
    clippy::panic,
    reason = "the functions around the tests stop at the first surprise, too"
)]

mod drive;
mod episodes;
mod extremes;
mod golden;
mod inputs;
mod language;
mod properties;
mod settings;
mod signals;
mod starts;
mod told;
