//! Keys of the top level and of the gateway and broker tables.

use super::super::keys::{Key, KeyTable, Kind, Need, Range};
use super::{ASSET, WATCH, ZONE_TABLE};

/// The top level.
pub(crate) static SITE: KeyTable = KeyTable {
    keys: &[
        Key {
            name: "site",
            kind: Kind::Id,
            need: Need::Required,
            about: "Id of the plant or the part of it that this gateway watches; it stands in every topic.",
        },
        Key {
            name: "gateway",
            kind: Kind::Table(&GATEWAY),
            need: Need::Optional("the defaults of its keys"),
            about: "The box the daemon runs on.",
        },
        Key {
            name: "broker",
            kind: Kind::Table(&BROKER),
            need: Need::Optional("the defaults of its keys"),
            about: "The MQTT broker.",
        },
        Key {
            name: "commands",
            kind: Kind::Words(&["status"]),
            need: Need::Default("[]"),
            about: "Commands that are obeyed; any other is answered as not allowed.",
        },
        Key {
            name: "reading_every",
            kind: Kind::Span(1, 3600),
            need: Need::Default("\"10s\""),
            about: "Length of a reading for assets that state none; readings end on its absolute multiples.",
        },
        Key {
            name: "status_every",
            kind: Kind::Span(1, 86_400),
            need: Need::Default("\"5min\""),
            about: "How often the status is told when nothing changes, for assets that state none.",
        },
        Key {
            name: "sensor_after",
            kind: Kind::Span(1, 2_592_000),
            need: Need::Default("\"60s\""),
            about: "How long a point may send nothing usable before its sensor alarm, for assets that state none.",
        },
        Key {
            name: "default_watches",
            kind: Kind::Bool,
            need: Need::Default("true"),
            about: "Whether zones and bearings bring their usual watches, for assets that do not say.",
        },
        Key {
            name: "watch",
            kind: Kind::Tables(&WATCH),
            need: Need::Optional("none"),
            about: "A watch on every point that has its measure.",
        },
        Key {
            name: "zone_table",
            kind: Kind::Tables(&ZONE_TABLE),
            need: Need::Optional("the table shipped with the program"),
            about: "Zone classes beside those shipped with the program; one of the same id replaces it.",
        },
        Key {
            name: "asset",
            kind: Kind::Tables(&ASSET),
            need: Need::Required,
            about: "A pump set.",
        },
    ],
};

/// The gateway.
pub(crate) static GATEWAY: KeyTable = KeyTable {
    keys: &[
        Key {
            name: "id",
            kind: Kind::Id,
            need: Need::Default("\"gw-1\""),
            about: "Id of this gateway, once in the site.",
        },
        Key {
            name: "workers",
            kind: Kind::Whole(Range::new(0.0, 256.0, "threads")),
            need: Need::Default("0"),
            about: "Analysis threads; 0 is one per core.",
        },
        Key {
            name: "mailbox_kib",
            kind: Kind::Whole(Range::new(256.0, 1_048_576.0, "KiB")),
            need: Need::Default("8192"),
            about: "Blocks that may wait for one worker; beyond it blocks are shed and counted.",
        },
        Key {
            name: "outbox_mib",
            kind: Kind::Whole(Range::new(1.0, 65_536.0, "MiB")),
            need: Need::Default("16"),
            about: "Messages that may wait for the broker.",
        },
        Key {
            name: "at_tolerance",
            kind: Kind::Span(1, 2_592_000),
            need: Need::Default("\"10min\""),
            about: "How far the time in a block may be from its arrival before the block is refused.",
        },
    ],
};

/// The broker.
pub(crate) static BROKER: KeyTable = KeyTable {
    keys: &[
        Key {
            name: "host",
            kind: Kind::Text(253),
            need: Need::Default("\"127.0.0.1\""),
            about: "Name or address of the broker.",
        },
        Key {
            name: "port",
            kind: Kind::Whole(Range::new(1.0, 65_535.0, "")),
            need: Need::Optional("1883, or 8883 with tls"),
            about: "TCP port of the broker.",
        },
        Key {
            name: "tls",
            kind: Kind::Bool,
            need: Need::Default("false"),
            about: "Whether the connection is encrypted and the broker's certificate checked.",
        },
        Key {
            name: "ca_file",
            kind: Kind::File,
            need: Need::Optional("the authorities this machine trusts"),
            about: "PEM file of the authority that signed the broker's certificate; needs tls.",
        },
        Key {
            name: "username",
            kind: Kind::Text(256),
            need: Need::Optional("none is sent"),
            about: "Account at the broker.",
        },
        Key {
            name: "password_file",
            kind: Kind::File,
            need: Need::Optional("none is sent"),
            about: "File whose first line is the account's password; needs username.",
        },
        Key {
            name: "client_id",
            kind: Kind::Id,
            need: Need::Optional("humward-<site>-<gateway>"),
            about: "Client id at the broker; the ingest and publish connections add -in and -out.",
        },
        Key {
            name: "keep_alive",
            kind: Kind::Span(5, 3600),
            need: Need::Default("\"20s\""),
            about: "How often a silent connection shows that it lives.",
        },
        Key {
            name: "root",
            kind: Kind::Topic,
            need: Need::Default("\"humward/v1\""),
            about: "Beginning of every topic of ours, before the site.",
        },
    ],
};
