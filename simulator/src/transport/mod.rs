//! The way of blocks, speeds and process values to the broker.

use serde::Deserialize;

use crate::scenario::Seconds;

/// Something wrong on the way.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(tag = "kind", rename_all = "kebab-case", deny_unknown_fields)]
pub enum TransportFault {
    /// Blocks that never arrive.
    Lost {
        /// When it begins.
        #[serde(default)]
        at: Seconds,
        /// When it ends; never if not given.
        #[serde(default)]
        until: Option<Seconds>,
        /// Share of blocks.
        share: f64,
    },
}

impl TransportFault {
    /// Adds what does not fit.
    pub fn check(&self, _here: &str, _faults: &mut Vec<String>) {}
}

/// One message, as it arrives at the broker.
#[derive(Clone, Debug, PartialEq)]
pub struct Delivery {
    /// When, ns since 1970 UTC.
    pub arrival_ns: i64,
    /// Its topic.
    pub topic: String,
    /// Its bytes.
    pub payload: Vec<u8>,
}
