//! Keys of an asset and its points.

use super::super::keys::{Key, KeyTable, Kind, Need, Range};
use super::{BAND, BEARING, ENCODING, WATCH};

/// An asset.
pub(crate) static ASSET: KeyTable = KeyTable {
    keys: &[
        Key {
            name: "id",
            kind: Kind::Id,
            need: Need::Required,
            about: "The tag on its plate, once in the site.",
        },
        Key {
            name: "name",
            kind: Kind::Text(80),
            need: Need::Optional("its id"),
            about: "What people call it and where it stands; alarm sentences use it.",
        },
        Key {
            name: "group",
            kind: Kind::Id,
            need: Need::Optional("its own id"),
            about: "Assets that share a foundation name the same group.",
        },
        Key {
            name: "speed",
            kind: Kind::Or(&Kind::Number(Range::above_zero(100_000.0, "r/min")), &SPEED),
            need: Need::Required,
            about: "Its speed, r/min, or a table of lowest, nominal and highest.",
        },
        Key {
            name: "zones",
            kind: Kind::Id,
            need: Need::Optional("velocity has no zones and no usual watch"),
            about: "Class of a zone table that velocity is told in.",
        },
        Key {
            name: "reading_every",
            kind: Kind::Span(1, 3600),
            need: Need::Optional("the site's"),
            about: "Length of a reading; readings end on its absolute multiples.",
        },
        Key {
            name: "status_every",
            kind: Kind::Span(1, 86_400),
            need: Need::Optional("the site's"),
            about: "How often the status is told when nothing changes.",
        },
        Key {
            name: "sensor_after",
            kind: Kind::Span(1, 2_592_000),
            need: Need::Optional("the site's"),
            about: "How long a point may send nothing usable before its sensor alarm.",
        },
        Key {
            name: "running_from_rpm",
            kind: Kind::Number(Range::new(0.0, 100_000.0, "r/min")),
            need: Need::Optional("a fifth of the lowest speed"),
            about: "At this reported speed and above it runs.",
        },
        Key {
            name: "running_from_mm_s",
            kind: Kind::Number(Range::above_zero(1000.0, "mm/s rms")),
            need: Need::Default("0.2"),
            about: "At this velocity and above it runs while no fresh speed is known.",
        },
        Key {
            name: "run_signal",
            kind: Kind::Id,
            need: Need::Optional("none"),
            about: "Name of the process value that tells whether it runs (0.5 or more, or true); it comes before speed and level.",
        },
        Key {
            name: "speed_valid",
            kind: Kind::Span(1, 2_592_000),
            need: Need::Default("\"2min\""),
            about: "How long a reported speed or run signal stays fresh.",
        },
        Key {
            name: "starting_factor",
            kind: Kind::Number(Range::new(2.0, 3.0, "times danger")),
            need: Need::Default("3.0"),
            about: "While it starts, velocity, acceleration and high band in rms ring at so many times their danger limit.",
        },
        Key {
            name: "starting_after",
            kind: Kind::Span(5, 30),
            need: Need::Default("\"10s\""),
            about: "How long that must be passed.",
        },
        Key {
            name: "starting_for",
            kind: Kind::Span(1, 600),
            need: Need::Default("\"30s\""),
            about: "How long a start lasts after the run signal rises while no speed is reported.",
        },
        Key {
            name: "speed_topic",
            kind: Kind::Topic,
            need: Need::Optional("speed/<asset> under the root and site"),
            about: "Topic its speed arrives on.",
        },
        Key {
            name: "process_topic",
            kind: Kind::Topic,
            need: Need::Optional("process/<asset> under the root and site"),
            about: "Topic its process values arrive on.",
        },
        Key {
            name: "default_watches",
            kind: Kind::Bool,
            need: Need::Optional("the site's"),
            about: "Whether its zones and bearings bring their usual watches.",
        },
        Key {
            name: "watch",
            kind: Kind::Tables(&WATCH),
            need: Need::Optional("none"),
            about: "A watch on those of its points that have its measure.",
        },
        Key {
            name: "point",
            kind: Kind::Tables(&POINT),
            need: Need::Required,
            about: "One accelerometer axis at one place.",
        },
    ],
};

/// The speeds of an asset.
pub(crate) static SPEED: KeyTable = KeyTable {
    keys: &[
        Key {
            name: "lowest",
            kind: Kind::Number(Range::above_zero(100_000.0, "r/min")),
            need: Need::Required,
            about: "The lowest speed it runs at; it decides where the velocity band begins.",
        },
        Key {
            name: "nominal",
            kind: Kind::Number(Range::above_zero(100_000.0, "r/min")),
            need: Need::Required,
            about: "The speed that stands for it while none is reported.",
        },
        Key {
            name: "highest",
            kind: Kind::Number(Range::above_zero(100_000.0, "r/min")),
            need: Need::Required,
            about: "The highest speed it runs at.",
        },
    ],
};

/// A point.
pub(crate) static POINT: KeyTable = KeyTable {
    keys: &[
        Key {
            name: "id",
            kind: Kind::Id,
            need: Need::Required,
            about: "Its id, once in the asset.",
        },
        Key {
            name: "name",
            kind: Kind::Text(80),
            need: Need::Optional("its id"),
            about: "What people call the place, such as pump drive end.",
        },
        Key {
            name: "source",
            kind: Kind::Id,
            need: Need::Optional("its id"),
            about: "Which block stream feeds it; points of one several-axis sensor name the same source.",
        },
        Key {
            name: "channel",
            kind: Kind::Whole(Range::new(0.0, 15.0, "")),
            need: Need::Default("0"),
            about: "Which channel of the block, from 0.",
        },
        Key {
            name: "topic",
            kind: Kind::Topic,
            need: Need::Optional("block/<asset>/<source> under the root and site"),
            about: "Topic its blocks arrive on.",
        },
        Key {
            name: "encoding",
            kind: Kind::Or(&Kind::Word(&["cbor-or-json"]), &ENCODING),
            need: Need::Default("\"cbor-or-json\""),
            about: "What its blocks look like: ours, told apart by the first byte, or a table for a foreign form.",
        },
        Key {
            name: "rate_hz",
            kind: Kind::Number(Range::new(2560.0, 1_000_000.0, "samples/s")),
            need: Need::Optional("the first block tells"),
            about: "Its sample rate; stating it lets check say what can be resolved.",
        },
        Key {
            name: "frame",
            kind: Kind::Whole(Range::new(4096.0, 65_536.0, "samples")),
            need: Need::Default("8192"),
            about: "Samples under one FFT: a multiple of 4 without prime factors above 5.",
        },
        Key {
            name: "range_g",
            kind: Kind::Number(Range::above_zero(100_000.0, "g")),
            need: Need::Optional("only the rails of an integer encoding tell clipping"),
            about: "Full range of the sensor; samples at or beyond it are clipped.",
        },
        Key {
            name: "noise_ug_rthz",
            kind: Kind::Number(Range::above_zero(1_000_000.0, "ug/sqrt(Hz)")),
            need: Need::Optional("limits are not compared with the sensor's noise"),
            about: "Noise density of the sensor.",
        },
        Key {
            name: "millivolt_per_g",
            kind: Kind::Number(Range::above_zero(1_000_000.0, "mV/g")),
            need: Need::Optional("blocks in mV are refused"),
            about: "Sensitivity that makes acceleration of blocks in mV.",
        },
        Key {
            name: "count_per_g",
            kind: Kind::Number(Range::above_zero(1e12, "counts/g")),
            need: Need::Optional("blocks in counts are refused"),
            about: "Sensitivity that makes acceleration of blocks in counts.",
        },
        Key {
            name: "velocity_from_hz",
            kind: Kind::Number(Range::new(0.5, 100.0, "Hz")),
            need: Need::Optional(
                "10 above 600 r/min lowest speed, 2 from 300, below that 0.4 of the lowest shaft frequency, not under 0.5",
            ),
            about: "Lower edge of the velocity band.",
        },
        Key {
            name: "bearing",
            kind: Kind::Table(&BEARING),
            need: Need::Optional("no bearing lines are searched"),
            about: "The rolling bearing there: multiples of the shaft speed, or its geometry.",
        },
        Key {
            name: "envelope_hz",
            kind: Kind::Pair(Range::above_zero(500_000.0, "Hz")),
            need: Need::Optional(
                "with a bearing 2000 to 8000 or 0.4 of the rate, 2000 to 5000 while the rate is not stated",
            ),
            about: "Band whose envelope is taken for bearing lines.",
        },
        Key {
            name: "band",
            kind: Kind::Tables(&BAND),
            need: Need::Optional("none"),
            about: "A band of the spectrum with a name, at most 64 of them.",
        },
        Key {
            name: "watch",
            kind: Kind::Tables(&WATCH),
            need: Need::Optional("none"),
            about: "A watch on this point alone.",
        },
    ],
};
