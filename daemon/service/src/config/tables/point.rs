//! Keys of what stands below a point: its bearing, bands and encoding.

use super::super::keys::{Key, KeyTable, Kind, Need, Range};

/// A bearing, by multiples or by geometry.
pub(crate) static BEARING: KeyTable = KeyTable {
    keys: &[
        Key {
            name: "outer",
            kind: Kind::Number(Range::above_zero(200.0, "times shaft speed")),
            need: Need::Optional("computed from the geometry"),
            about: "Outer race, BPFO.",
        },
        Key {
            name: "inner",
            kind: Kind::Number(Range::above_zero(200.0, "times shaft speed")),
            need: Need::Optional("computed from the geometry"),
            about: "Inner race, BPFI.",
        },
        Key {
            name: "element",
            kind: Kind::Number(Range::above_zero(200.0, "times shaft speed")),
            need: Need::Optional("computed from the geometry"),
            about: "Rolling element: twice its spin, because a defect strikes both races.",
        },
        Key {
            name: "cage",
            kind: Kind::Number(Range::above_zero(1.0, "times shaft speed")),
            need: Need::Optional("computed from the geometry"),
            about: "Cage, FTF.",
        },
        Key {
            name: "balls",
            kind: Kind::Whole(Range::new(3.0, 200.0, "rolling elements")),
            need: Need::Optional("the four multiples are given"),
            about: "Rolling elements of one row.",
        },
        Key {
            name: "ball_diameter_mm",
            kind: Kind::Number(Range::above_zero(1000.0, "mm")),
            need: Need::Optional("the four multiples are given"),
            about: "Diameter of a rolling element.",
        },
        Key {
            name: "pitch_diameter_mm",
            kind: Kind::Number(Range::above_zero(10_000.0, "mm")),
            need: Need::Optional("the four multiples are given"),
            about: "Diameter of the circle through the elements' centres.",
        },
        Key {
            name: "angle_deg",
            kind: Kind::Number(Range::new(0.0, 89.0, "degrees")),
            need: Need::Optional("0"),
            about: "Contact angle.",
        },
    ],
};

/// A named band.
pub(crate) static BAND: KeyTable = KeyTable {
    keys: &[
        Key {
            name: "name",
            kind: Kind::Id,
            need: Need::Required,
            about: "Its name; watches say band.<name>.",
        },
        Key {
            name: "hz",
            kind: Kind::Pair(Range::above_zero(500_000.0, "Hz")),
            need: Need::Optional("orders is given"),
            about: "Its edges, fixed.",
        },
        Key {
            name: "orders",
            kind: Kind::Pair(Range::above_zero(10_000.0, "times shaft speed")),
            need: Need::Optional("hz is given"),
            about: "Its edges as multiples of the shaft speed, followed as it moves.",
        },
        Key {
            name: "quantity",
            kind: Kind::Word(&["velocity", "acceleration"]),
            need: Need::Required,
            about: "Whether it reads mm/s rms or m/s2 rms.",
        },
    ],
};

/// A foreign encoding.
pub(crate) static ENCODING: KeyTable = KeyTable {
    keys: &[
        Key {
            name: "raw",
            kind: Kind::Table(&RAW),
            need: Need::Optional("json is given"),
            about: "Samples without anything around them.",
        },
        Key {
            name: "json",
            kind: Kind::Table(&JSON),
            need: Need::Optional("raw is given"),
            about: "JSON of another maker: where each value stands.",
        },
        Key {
            name: "fixed",
            kind: Kind::Table(&FIXED),
            need: Need::Optional("every value comes from the payload"),
            about: "Values that the foreign JSON does not carry.",
        },
    ],
};

/// Every packing of samples; a test holds it equal to what is decoded.
const PACKINGS: &[&str] = &[
    "s16le", "s32le", "f32le", "f64le", "s16be", "s32be", "f32be", "f64be",
];
const TIME_UNITS: &[&str] = &["ns", "us", "ms", "s"];
const RATE: Range = Range::new(1.0, 1_000_000.0, "samples/s");
const UNITS: &[&str] = &["m/s2", "g", "mV", "count"];
const CHANNELS: Range = Range::new(1.0, 16.0, "channels");

/// Raw samples.
pub(crate) static RAW: KeyTable = KeyTable {
    keys: &[
        Key {
            name: "sample",
            kind: Kind::Word(PACKINGS),
            need: Need::Required,
            about: "Type and byte order of a sample.",
        },
        Key {
            name: "header_bytes",
            kind: Kind::Whole(Range::new(0.0, 65_536.0, "bytes")),
            need: Need::Default("0"),
            about: "Bytes to skip before the first sample.",
        },
        Key {
            name: "at_offset",
            kind: Kind::Whole(Range::new(0.0, 65_536.0, "bytes")),
            need: Need::Optional("blocks are stamped on arrival"),
            about: "Where in the header the 64-bit time of the first sample begins.",
        },
        Key {
            name: "at_unit",
            kind: Kind::Word(TIME_UNITS),
            need: Need::Default("\"ns\""),
            about: "What that time counts since 1970 UTC.",
        },
        Key {
            name: "rate_hz",
            kind: Kind::Number(RATE),
            need: Need::Required,
            about: "Sample rate.",
        },
        Key {
            name: "unit",
            kind: Kind::Word(UNITS),
            need: Need::Required,
            about: "Unit of a sample times the scale.",
        },
        Key {
            name: "scale",
            kind: Kind::Number(Range::above_zero(1e12, "")),
            need: Need::Default("1.0"),
            about: "A sample times this is in the unit.",
        },
        Key {
            name: "channels",
            kind: Kind::Whole(CHANNELS),
            need: Need::Default("1"),
            about: "Interleaved axes.",
        },
    ],
};

const fn pointer(name: &'static str, about: &'static str) -> Key {
    Key {
        name,
        kind: Kind::Pointer,
        need: Need::Optional("a fixed value, or the usual default"),
        about,
    }
}

/// Pointers into foreign JSON.
pub(crate) static JSON: KeyTable = KeyTable {
    keys: &[
        Key {
            name: "samples",
            kind: Kind::Pointer,
            need: Need::Required,
            about: "Where the samples stand.",
        },
        pointer(
            "at",
            "Where the time of the first sample stands; without it blocks are stamped on arrival.",
        ),
        Key {
            name: "at_unit",
            kind: Kind::Word(TIME_UNITS),
            need: Need::Default("\"ns\""),
            about: "What a time that is a number counts since 1970 UTC.",
        },
        pointer("seq", "Where the counter stands."),
        pointer("rate", "Where the sample rate stands."),
        pointer("unit", "Where the unit stands."),
        pointer("scale", "Where the scale stands."),
        pointer("channels", "Where the number of axes stands."),
        pointer("encoding", "Where the encoding of base64 samples stands."),
        pointer("rpm", "Where a shaft speed stands."),
        pointer("bias", "Where the sensor's bias stands."),
    ],
};

/// Values foreign JSON does not carry.
pub(crate) static FIXED: KeyTable = KeyTable {
    keys: &[
        Key {
            name: "rate_hz",
            kind: Kind::Number(RATE),
            need: Need::Optional("the payload tells"),
            about: "Sample rate.",
        },
        Key {
            name: "unit",
            kind: Kind::Word(UNITS),
            need: Need::Optional("the payload tells"),
            about: "Unit.",
        },
        Key {
            name: "scale",
            kind: Kind::Number(Range::above_zero(1e12, "")),
            need: Need::Optional("1"),
            about: "A sample times this is in the unit.",
        },
        Key {
            name: "channels",
            kind: Kind::Whole(CHANNELS),
            need: Need::Optional("1"),
            about: "Interleaved axes.",
        },
        Key {
            name: "encoding",
            kind: Kind::Word(PACKINGS),
            need: Need::Optional("samples are numbers, or the payload tells"),
            about: "Type and byte order of base64 samples.",
        },
    ],
};

#[cfg(test)]
mod tests {
    use humward_wire::block::Packing;

    use super::PACKINGS;

    #[test]
    fn the_packings_offered_are_those_that_are_decoded() {
        let mut decoded: Vec<&str> = Packing::all().map(Packing::name).collect();
        let mut offered = PACKINGS.to_vec();
        decoded.sort_unstable();
        offered.sort_unstable();
        assert_eq!(offered, decoded);
    }
}
