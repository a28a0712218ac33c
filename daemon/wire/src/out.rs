//! Outbound messages as types: status, alarm, event, evidence, gateway and reply.
//!
//! Each type is what one topic carries. JSON in snake_case; times RFC 3339 UTC with milliseconds; a unit beside
//! every value; `null` where there is no value; words with small integer codes beside them. A consumer ignores keys
//! it does not know, and the word lists only grow. Evidence travels as CBOR with the same keys.
//! Messages have a size budget and a stated order in which they are shortened: see [`Event::fit`], [`Status::fit`]
//! and [`Evidence::fit`]. Checked by `tests/contract/schemas.rs` and `tests/contract/sizes.rs`.

mod event;
mod evidence;
mod gateway;
mod measured;
mod reply;
mod status;
mod words;

pub use crate::time::Instant;
pub use event::{
    ADVISORY, Alarm, Event, Finding, Limit, Line, MAX_EVENT, MAX_TEXT, Running, Zoned,
};
pub use evidence::{Evidence, MAX_EVIDENCE, TURNS_KEPT, Trace};
pub use gateway::{Certificate, Gateway, GatewayEvent, Load, Loss};
pub use measured::Measured;
pub use reply::Reply;
pub use status::{LastRunning, MAX_STATUS, Open, PointStatus, Status};
pub use words::{
    GatewayEventKind, GatewayState, Link, Outcome, Quality, RunState, Severity, Standing, State,
    Transition,
};

use alloc::string::{String, ToString};
use alloc::vec::Vec;

use schemars::JsonSchema;
use serde::de::DeserializeOwned;
use serde::{Deserialize, Serialize};

use crate::id::Id;

/// What every message starts with.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize, JsonSchema)]
pub struct Header {
    /// Name and version of the message's schema.
    pub schema: String,
    /// The gateway that speaks.
    pub gateway: Id,
    /// Creation time of the gateway's store in ms since 1970; 0 while there is none.
    pub epoch: u64,
    /// The site.
    pub site: Id,
    /// The asset; null when the message is about the gateway itself.
    pub asset: Option<Id>,
    /// When the message was true: signal time of the reading for events, arrival time otherwise.
    pub at: Instant,
}

impl Header {
    /// Header of a message of type `M`.
    #[must_use]
    pub fn new<M: Message>(
        gateway: Id,
        epoch: u64,
        site: Id,
        asset: Option<Id>,
        at: Instant,
    ) -> Header {
        Header {
            schema: M::SCHEMA.to_string(),
            gateway,
            epoch,
            site,
            asset,
            at,
        }
    }
}

/// An outbound message: its schema name and its JSON.
pub trait Message: Serialize + DeserializeOwned + JsonSchema {
    /// Name and version, the `schema` key of the message.
    const SCHEMA: &'static str;

    /// The message as JSON bytes.
    #[must_use]
    fn to_json(&self) -> Vec<u8> {
        #[expect(
            clippy::expect_used,
            reason = "keys are strings and numbers finite by construction, and a Vec takes every write"
        )]
        serde_json::to_vec(self).expect("message types always serialise")
    }

    /// Reads a message back; keys that are not known are ignored.
    ///
    /// # Errors
    /// The library's error with line and column.
    fn from_json(bytes: &[u8]) -> Result<Self, serde_json::Error> {
        serde_json::from_slice(bytes)
    }
}

impl Message for Event {
    const SCHEMA: &'static str = "humward/event/1";
}
impl Message for Alarm {
    const SCHEMA: &'static str = "humward/alarm/1";
}
impl Message for Status {
    const SCHEMA: &'static str = "humward/status/1";
}
impl Message for Gateway {
    const SCHEMA: &'static str = "humward/gateway/1";
}
impl Message for GatewayEvent {
    const SCHEMA: &'static str = "humward/gateway-event/1";
}
impl Message for Reply {
    const SCHEMA: &'static str = "humward/reply/1";
}
impl Message for Evidence {
    const SCHEMA: &'static str = "humward/evidence/1";
}

/// The longest prefix of `text` with at most `max` bytes that ends on a character.
fn cut(text: &mut String, max: usize) {
    if text.len() > max {
        let end = (0..=max)
            .rev()
            .find(|i| text.is_char_boundary(*i))
            .unwrap_or(0);
        text.truncate(end);
    }
}
