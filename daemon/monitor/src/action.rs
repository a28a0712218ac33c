//! Everything the core can ask for: a closed list.

use alloc::string::String;

use humward_wire::{id::Id, out};

/// One action, in the order they are to be done.
#[derive(Debug, Clone, PartialEq)]
pub enum Action {
    /// A transition: kept and delivered at least once.
    Event(out::Event),
    /// The compact whole of an asset, as it is now.
    Status(out::Status),
    /// The current state of a watch: the open occurrence, or `None` when it closed.
    Alarm {
        /// The asset.
        asset: Id,
        /// The watch's full name.
        watch: String,
        /// What stands open.
        open: Option<out::Alarm>,
    },
    /// Spectrum and waveform kept beside an event.
    Evidence(out::Evidence),
    /// The answer to a command, for its sender.
    Reply {
        /// The asset asked about.
        asset: Id,
        /// Who asked.
        sender: Id,
        /// What is answered.
        reply: out::Reply,
    },
}
