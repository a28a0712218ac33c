//! The gateway about itself: its retained state, and its own events with their own numbering.

use alloc::string::String;
use alloc::vec::Vec;

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

use super::measured::{five_digits_or_null, rounded};
use super::{GatewayEventKind, GatewayState, Header, Instant, Link};
use crate::id::Id;

/// How often something was lost, by reason.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize, JsonSchema)]
pub struct Loss {
    /// A refusal's code, or another stable word such as `shed` or `late`.
    pub reason: String,
    /// How often, since the start.
    pub count: u64,
}

/// How busy the gateway is.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Load {
    /// Share of the workers' time spent working, 0 to 1; null before the first measurement.
    #[serde(serialize_with = "five_digits_or_null")]
    pub busy_share: Option<f64>,
    /// Blocks accepted per second.
    #[serde(serialize_with = "five_digits_or_null")]
    pub blocks_per_s: Option<f64>,
    /// Bytes waiting for the workers.
    pub waiting_bytes: u64,
}

/// A certificate in use.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize, JsonSchema)]
pub struct Certificate {
    /// What it is for, as named in the configuration.
    pub name: String,
    /// Days until it ends; negative when it has ended.
    pub days_left: i64,
}

/// The gateway's state, retained on `gateway/<id>`; the will says `offline` there.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Gateway {
    /// Who speaks; `asset` is null.
    #[serde(flatten)]
    pub header: Header,
    /// Online, blind or offline.
    pub state: GatewayState,
    /// Code of the state.
    pub state_code: u8,
    /// Version of the daemon.
    pub version: String,
    /// Hash of the configuration in force.
    pub config_hash: String,
    /// When the daemon started.
    pub started: Instant,
    /// Number of the gateway's last own event.
    pub last_n: u64,
    /// How busy it is.
    pub load: Load,
    /// What was lost since the start, by reason.
    pub losses: Vec<Loss>,
    /// How much faster than true time the daemon's clock runs; 1 outside demonstrations.
    #[serde(serialize_with = "rounded")]
    pub time_factor: f64,
    /// The next message comes within this many seconds.
    #[serde(serialize_with = "rounded")]
    pub heartbeat_s: f64,
    /// The connection messages come in by.
    pub ingest: Link,
    /// The connection messages go out by.
    pub publish: Link,
    /// Days left of each certificate in use.
    pub certificates: Vec<Certificate>,
}

/// One event of the gateway, on `event/gateway.<id>`.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct GatewayEvent {
    /// Who speaks; `asset` is null.
    #[serde(flatten)]
    pub header: Header,
    /// Contiguous number of the gateway's own events within the epoch, from 1.
    pub n: u64,
    /// Unique name of the event: `<epoch>-<n>`, apart from those of assets by its topic.
    pub id: Id,
    /// What happened.
    pub kind: GatewayEventKind,
    /// Code of the kind.
    pub kind_code: u8,
    /// One sentence for people.
    pub text: String,
    /// When it began.
    pub from: Option<Instant>,
    /// When it ended.
    pub until: Option<Instant>,
    /// How long it lasted.
    #[serde(serialize_with = "five_digits_or_null")]
    pub seconds: Option<f64>,
    /// Stable word for the cause, such as a refusal's code.
    pub reason: Option<String>,
    /// The topic it came in on.
    pub topic: Option<String>,
    /// Byte of the payload at fault.
    pub offset: Option<u64>,
    /// How often.
    pub count: Option<u64>,
    /// First event left out; only with `omitted`.
    pub from_n: Option<u64>,
    /// Last event left out; only with `omitted`.
    pub to_n: Option<u64>,
}
