//! Everything the core can be told: a closed list, each stamped by the intake.

use alloc::sync::Arc;

use humward_wire::{
    block::Block, command::Command, id::Id, process::Process, refusal::Refusal, speed::Speed,
};

use crate::plan::GroupPlan;

/// Who we are, as every message says.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Identity {
    /// The gateway's id.
    pub gateway: Id,
    /// The site's id.
    pub site: Id,
    /// Creation time of the store in ms; 0 while nothing is stored.
    pub epoch: u64,
}

/// Why samples are known to be missing.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum GapCause {
    /// The mailbox was full and the daemon let blocks go.
    Shed,
    /// The connection that brings the blocks was lost.
    LinkLost,
    /// The daemon was not running.
    Restart,
}

/// Which part of a group an input is about.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Source {
    /// The asset.
    pub asset: Id,
    /// The block source, a point's `source`.
    pub source: Id,
}

/// Why the driver woke the core when nothing else arrived.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum DeadlineReason {
    /// A reading's time is over and its last blocks did not come.
    ReadingOverdue,
    /// A reported speed that departs from those before has stood alone for long enough to be believed.
    SpeedStands,
    /// A point has been silent or unusable for as long as its sensor alarm allows.
    SensorOverdue,
    /// A status is due.
    StatusDue,
    /// The recording is at its end.
    RecordingEnd,
}

/// One stamped input.
#[derive(Debug, Clone, PartialEq)]
pub enum Input {
    /// The daemon began; judged state starts from here.
    Started(Identity),
    /// The plan to run from now on. Watches that are the same in both plans keep their state.
    Plan(Arc<GroupPlan>),
    /// Samples of one source.
    Block(Source, Block),
    /// The speed of an asset's shaft.
    Speed(Id, Speed),
    /// A process value of an asset.
    Process(Id, Process),
    /// Somebody asks something of an asset: its id, the sender the topic vouches for, the command.
    Command(Id, Id, Command),
    /// Samples that were lost on our side: how many blocks, if that is known.
    Gap(Option<Source>, GapCause, u64),
    /// A payload that did not fit was refused whole.
    Refused(Source, Refusal),
    /// The connection that brings the blocks is up (`true`) or lost.
    Link(bool),
    /// The wall clock was set: by so many ns, forward if positive.
    ClockStep(i64),
    /// Time has come this far, and this is why somebody looked.
    Deadline(DeadlineReason),
}
