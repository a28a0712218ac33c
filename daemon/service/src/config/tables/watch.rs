//! Keys of a watch and of zone tables.

use super::super::keys::{Key, KeyTable, Kind, Need, Range};

/// A watch.
pub(crate) static WATCH: KeyTable = KeyTable {
    keys: &[
        Key {
            name: "name",
            kind: Kind::Id,
            need: Need::Required,
            about: "Its name; the alarm is called <name>.<point>.",
        },
        Key {
            name: "measure",
            kind: Kind::Measure,
            need: Need::Required,
            about: "What it watches.",
        },
        Key {
            name: "assets",
            kind: Kind::Ids,
            need: Need::Optional("every asset"),
            about: "Assets it is for; only on the top level.",
        },
        Key {
            name: "points",
            kind: Kind::Ids,
            need: Need::Optional("every point that has the measure"),
            about: "Points it is for; not inside a point.",
        },
        Key {
            name: "alert",
            kind: Kind::Number(Range::above_zero(1e9, "in the measure's unit")),
            need: Need::Optional("danger alone"),
            about: "Alert limit.",
        },
        Key {
            name: "danger",
            kind: Kind::Number(Range::above_zero(1e9, "in the measure's unit")),
            need: Need::Optional("alert alone"),
            about: "Danger limit.",
        },
        Key {
            name: "deadband",
            kind: Kind::Number(Range::new(0.0, 1e9, "in the measure's unit")),
            need: Need::Optional("5 % of the lowest limit, or 2 dB"),
            about: "How far below a limit the value must fall to be back.",
        },
        Key {
            name: "alert_after",
            kind: Kind::Persistence,
            need: Need::Default("\"60s\""),
            about: "How long the alert limit must be passed.",
        },
        Key {
            name: "danger_after",
            kind: Kind::Persistence,
            need: Need::Default("\"30s\""),
            about: "How long the danger limit must be passed.",
        },
        Key {
            name: "clear_after",
            kind: Kind::Persistence,
            need: Need::Default("\"5min\""),
            about: "How long the value must be back.",
        },
        Key {
            name: "at_least_ms2",
            kind: Kind::Number(Range::new(0.0, 1e6, "m/s2 rms")),
            need: Need::Optional("0 on a bearing line"),
            about: "A bearing line counts only at this strength or more.",
        },
    ],
};

/// A zone table.
pub(crate) static ZONE_TABLE: KeyTable = KeyTable {
    keys: &[
        Key {
            name: "source",
            kind: Kind::Text(200),
            need: Need::Required,
            about: "Where the borders come from: standard, edition, table.",
        },
        Key {
            name: "class",
            kind: Kind::Tables(&ZONE_CLASS),
            need: Need::Required,
            about: "A class of machines.",
        },
    ],
};

/// A class of a zone table.
pub(crate) static ZONE_CLASS: KeyTable = KeyTable {
    keys: &[
        Key {
            name: "id",
            kind: Kind::Id,
            need: Need::Required,
            about: "What assets call it in zones.",
        },
        Key {
            name: "about",
            kind: Kind::Text(200),
            need: Need::Optional("nothing"),
            about: "Which machines it is for.",
        },
        Key {
            name: "borders",
            kind: Kind::Three(Range::above_zero(1000.0, "mm/s rms")),
            need: Need::Required,
            about: "Borders A/B, B/C and C/D.",
        },
    ],
};
