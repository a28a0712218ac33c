//! Recordings: everything stamped, as a CBOR sequence (RFC 8742).
//!
//! First a header map `{"format": "humward-recording", "version": 1, "site": …}`, then one item per input:
//! `[arrival_ns, topic, payload]` for a message, and in a capture maps keyed `started`, `plan`, `gap`, `link` and
//! `clock_step`, whose value is the arrival. Arrivals are ns since 1970 UTC and never decrease. A last record that
//! was cut is told with its byte; the ones before it are read. Checked by `tests/contract/recordings.rs`.

mod read;
mod write;

use alloc::string::String;
use core::fmt;

pub use read::{Reader, open};
pub use write::{header, record};

use crate::id::Id;
use crate::refusal::Refusal;

/// The `format` of every recording.
pub const FORMAT: &str = "humward-recording";
/// The version written and read.
pub const VERSION: u64 = 1;

/// What a recording says about itself.
#[derive(Clone, Debug, PartialEq)]
pub struct Header {
    /// The site recorded.
    pub site: Id,
    /// Topic root; `None`: the usual one.
    pub root: Option<String>,
    /// A capture: hash of the configuration in force at its start.
    pub config_hash: Option<String>,
    /// A capture: the epoch of the gateway's store, ms since 1970.
    pub epoch: Option<u64>,
    /// What a simulation injected, as JSON text.
    pub truth: Option<String>,
}

/// One record.
#[derive(Clone, Debug, PartialEq)]
pub enum Record<'a> {
    /// A message as it arrived.
    Message {
        /// When, ns since 1970 UTC.
        arrival: i64,
        /// Its topic.
        topic: &'a str,
        /// Its payload.
        payload: &'a [u8],
    },
    /// The daemon started.
    Started {
        /// When.
        arrival: i64,
    },
    /// A configuration came into force.
    Plan {
        /// When.
        arrival: i64,
        /// Its hash.
        config_hash: &'a str,
    },
    /// Samples are missing.
    Gap {
        /// When it was noticed.
        arrival: i64,
        /// The block topic they would have come on.
        topic: &'a str,
        /// Stable word for the cause, such as `shed`.
        reason: &'a str,
        /// Blocks missing, when known.
        blocks: Option<u64>,
    },
    /// The ingest connection came up or went down.
    Link {
        /// When.
        arrival: i64,
        /// Whether it is up.
        up: bool,
    },
    /// The wall clock was set.
    ClockStep {
        /// When, on the stamps' own axis.
        arrival: i64,
        /// By how much, ns; positive is forward.
        by: i64,
    },
}

impl Record<'_> {
    /// When it was stamped, ns since 1970 UTC.
    #[must_use]
    pub fn arrival(&self) -> i64 {
        match self {
            Record::Message { arrival, .. }
            | Record::Started { arrival }
            | Record::Plan { arrival, .. }
            | Record::Gap { arrival, .. }
            | Record::Link { arrival, .. }
            | Record::ClockStep { arrival, .. } => *arrival,
        }
    }
}

/// Why bytes are not a recording, or no longer one; `offset` is the byte in the file.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum RecordingFault {
    /// The file does not start with our header map.
    NotOurs {
        /// Where the header goes wrong.
        offset: usize,
    },
    /// Another version.
    Version {
        /// The version read.
        version: u64,
        /// Where it stands.
        offset: usize,
    },
    /// The last record was cut; those before it are whole.
    Truncated {
        /// Where the cut record starts.
        offset: usize,
    },
    /// A record that is well formed but none of ours.
    Record {
        /// Where it starts.
        offset: usize,
    },
    /// Bytes that are not well formed.
    Refused {
        /// Where the record starts.
        offset: usize,
        /// What is wrong inside it; its offset, too, counts from the start of the file.
        cause: Refusal,
    },
    /// A record stamped before the one in front of it.
    Order {
        /// Where it starts.
        offset: usize,
        /// By how much, ns.
        back: u64,
    },
}

impl fmt::Display for RecordingFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            RecordingFault::NotOurs { offset } => {
                write!(
                    f,
                    "byte {offset}: no recording header; give a file that starts with format {FORMAT:?}"
                )
            }
            RecordingFault::Version { version, offset } => {
                write!(
                    f,
                    "byte {offset}: recording version {version}; this program reads version {VERSION}"
                )
            }
            RecordingFault::Truncated { offset } => write!(
                f,
                "byte {offset}: the last record is cut; the records before it are whole, cut the file there to keep them"
            ),
            RecordingFault::Record { offset } => write!(
                f,
                "byte {offset}: a record that is neither [arrival, topic, payload] nor a known map; write it with this version"
            ),
            RecordingFault::Refused { offset, cause } => {
                write!(f, "record at byte {offset}: {cause}")
            }
            RecordingFault::Order { offset, back } => write!(
                f,
                "byte {offset}: stamped {back} ns before the record in front of it; sort the recording by arrival"
            ),
        }
    }
}

impl core::error::Error for RecordingFault {
    fn source(&self) -> Option<&(dyn core::error::Error + 'static)> {
        match self {
            RecordingFault::Refused { cause, .. } => Some(cause),
            RecordingFault::NotOurs { .. }
            | RecordingFault::Version { .. }
            | RecordingFault::Truncated { .. }
            | RecordingFault::Record { .. }
            | RecordingFault::Order { .. } => None,
        }
    }
}
