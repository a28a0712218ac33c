//! The answer to a command, on `reply/<sender>/<asset>`.

use alloc::string::String;

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

use super::{Header, Outcome};
use crate::id::Id;

/// Answer to one command.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize, JsonSchema)]
pub struct Reply {
    /// Who speaks about what.
    #[serde(flatten)]
    pub header: Header,
    /// The command's id; null when the command could not be read that far.
    pub id: Option<Id>,
    /// How it ended.
    pub outcome: Outcome,
    /// Code of the outcome.
    pub outcome_code: u8,
    /// Why, in words; null when all is well.
    pub reason: Option<String>,
    /// Byte of the command's payload at fault; only when it could not be read.
    pub offset: Option<u64>,
    /// The occurrence the command was about.
    pub occurrence: Option<Id>,
    /// The event it led to.
    pub event: Option<Id>,
}
