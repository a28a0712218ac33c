//! The watch itself: stamped inputs in, actions out, nothing else seen.
//!
//! [`Group::step`] is the one entry. It never reads a clock, a file, a socket or a random source,
//! so a rehearsal of recorded inputs gives the same events as the live run, byte for byte.
//! `analysis` turns blocks into [`reading::Reading`]s (state that may be thrown away);
//! `judge` turns readings into actions (small state that must last).
#![no_std]

extern crate alloc;

pub mod action;
pub mod analysis;
pub mod group;
pub mod input;
pub mod judge;
pub mod plan;
pub mod reading;
pub mod time;

pub use action::Action;
pub use group::Group;
pub use input::Input;
