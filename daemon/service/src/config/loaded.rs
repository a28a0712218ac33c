//! The checked configuration, as the daemon runs on it.

use std::path::{Path, PathBuf};
use std::sync::Arc;

use humward_monitor::plan::GroupPlan;
use humward_monitor::time::Span;
use humward_wire::block::Encoding;
use humward_wire::id::Id;
use humward_wire::topic::Topics;

/// A configuration without a fault.
#[derive(Debug, Clone)]
pub struct Loaded {
    pub(crate) site: Id,
    pub(crate) gateway: Gateway,
    pub(crate) broker: Broker,
    pub(crate) topics: Topics,
    pub(crate) groups: Vec<Arc<GroupPlan>>,
    pub(crate) routes: Vec<Route>,
    pub(crate) commands: Vec<String>,
    pub(crate) notes: Vec<String>,
    pub(crate) hash: String,
}

/// The box the daemon runs on.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Gateway {
    pub(crate) id: Id,
    pub(crate) workers: usize,
    pub(crate) mailbox_bytes: usize,
    pub(crate) outbox_bytes: usize,
    pub(crate) at_tolerance: Span,
}

/// The broker and the account there.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Broker {
    pub(crate) host: String,
    pub(crate) port: u16,
    pub(crate) tls: bool,
    pub(crate) ca_file: Option<PathBuf>,
    pub(crate) username: Option<String>,
    pub(crate) password: Option<Secret>,
    pub(crate) client_id: String,
    pub(crate) keep_alive: Span,
}

/// A text that is never shown.
#[derive(Clone, PartialEq, Eq)]
pub struct Secret(pub(crate) String);

impl Secret {
    /// The text itself, for the one place that sends it.
    pub fn reveal(&self) -> &str {
        &self.0
    }
}

impl std::fmt::Debug for Secret {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str("Secret(hidden)")
    }
}

/// What arrives on a topic.
#[derive(Debug, Clone, PartialEq, Eq, PartialOrd, Ord)]
pub enum Feed {
    /// Blocks of a source.
    Block {
        /// The asset.
        asset: Id,
        /// The source, as points name it.
        source: Id,
    },
    /// Speed of an asset.
    Speed {
        /// The asset.
        asset: Id,
    },
    /// Process values of an asset.
    Process {
        /// The asset.
        asset: Id,
    },
}

/// One inbound topic, mapped or usual, without wildcards; no two routes share a topic.
#[derive(Debug, Clone, PartialEq)]
pub struct Route {
    pub(crate) topic: String,
    pub(crate) feed: Feed,
    pub(crate) encoding: Option<Encoding>,
}

impl Route {
    /// The topic.
    pub fn topic(&self) -> &str {
        &self.topic
    }

    /// What arrives there.
    pub const fn feed(&self) -> &Feed {
        &self.feed
    }

    /// How blocks there are written; `None`: our CBOR or JSON, told apart by the first byte.
    pub const fn encoding(&self) -> Option<&Encoding> {
        self.encoding.as_ref()
    }
}

impl Loaded {
    /// Id of the site.
    pub const fn site(&self) -> &Id {
        &self.site
    }

    /// The gateway.
    pub const fn gateway(&self) -> &Gateway {
        &self.gateway
    }

    /// The broker.
    pub const fn broker(&self) -> &Broker {
        &self.broker
    }

    /// The topics under the root and site.
    pub const fn topics(&self) -> &Topics {
        &self.topics
    }

    /// The plans, one per group, in the order their first asset is written.
    pub fn groups(&self) -> &[Arc<GroupPlan>] {
        &self.groups
    }

    /// Every inbound topic but commands.
    pub fn routes(&self) -> &[Route] {
        &self.routes
    }

    /// The route of this topic.
    pub fn route(&self, topic: &str) -> Option<&Route> {
        self.routes.iter().find(|route| route.topic == topic)
    }

    /// Words of the commands that are obeyed.
    pub fn commands(&self) -> &[String] {
        &self.commands
    }

    /// What was left out and why: usual watches that this sensor cannot feed. For the log and `check`.
    pub fn notes(&self) -> &[String] {
        &self.notes
    }

    /// 16 hexadecimal digits that change when the meaning of the configuration does: FNV-1a of its
    /// canonical text, so comments, the order of keys and the split into files do not count.
    pub fn hash(&self) -> &str {
        &self.hash
    }
}

impl Gateway {
    /// Its id.
    pub const fn id(&self) -> &Id {
        &self.id
    }

    /// Analysis threads asked for; 0 is one per core.
    pub const fn workers(&self) -> usize {
        self.workers
    }

    /// Bytes of blocks that may wait for one worker.
    pub const fn mailbox_bytes(&self) -> usize {
        self.mailbox_bytes
    }

    /// Bytes of messages that may wait for the broker.
    pub const fn outbox_bytes(&self) -> usize {
        self.outbox_bytes
    }

    /// How far a block's own time may be from its arrival.
    pub const fn at_tolerance(&self) -> Span {
        self.at_tolerance
    }
}

impl Broker {
    /// Name or address.
    pub fn host(&self) -> &str {
        &self.host
    }

    /// TCP port.
    pub const fn port(&self) -> u16 {
        self.port
    }

    /// Whether the connection is encrypted.
    pub const fn tls(&self) -> bool {
        self.tls
    }

    /// The authority to trust; `None`: those of this machine.
    pub fn ca_file(&self) -> Option<&Path> {
        self.ca_file.as_deref()
    }

    /// Account name.
    pub fn username(&self) -> Option<&str> {
        self.username.as_deref()
    }

    /// Its password.
    pub const fn password(&self) -> Option<&Secret> {
        self.password.as_ref()
    }

    /// Client id; the ingest connection adds `-in`, the publish connection `-out`.
    pub fn client_id(&self) -> &str {
        &self.client_id
    }

    /// Keep-alive of both connections.
    pub const fn keep_alive(&self) -> Span {
        self.keep_alive
    }
}
