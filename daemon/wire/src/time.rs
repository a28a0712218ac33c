//! Instants in messages: nanoseconds since 1970 UTC inside, RFC 3339 text with milliseconds outside.
//!
//! Text is cut to the millisecond below, never rounded up, so a message never claims a later time than it knows.
//! Times before 2000 or from 2200 on are a sensor without a clock, not a measurement; they are refused on arrival.

use alloc::borrow::Cow;
use alloc::format;
use alloc::string::String;
use core::fmt;

use schemars::{JsonSchema, Schema, SchemaGenerator, json_schema};
use serde::{Deserialize, Deserializer, Serialize, Serializer};

/// 2000-01-01T00:00:00Z in ns since 1970: the earliest accepted time.
pub const EARLIEST_NS: i64 = 946_684_800_000_000_000;
/// 2200-01-01T00:00:00Z in ns since 1970: the first time no longer accepted.
pub const LATEST_NS: i64 = 7_258_118_400_000_000_000;

/// A time in ns since 1970 UTC that reads and writes as RFC 3339 with three decimals and `Z`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Instant(pub i64);

/// Reads RFC 3339 text; `None` when it is not, or has no offset from UTC, or lies outside 64-bit nanoseconds.
#[must_use]
pub fn parse(text: &str) -> Option<i64> {
    let bytes = text.as_bytes();
    // The library also reads wider ISO 8601 and zone annotations; the contract is RFC 3339 only.
    let shaped = bytes.len() >= 20
        && bytes.get(4) == Some(&b'-')
        && bytes.get(7) == Some(&b'-')
        && bytes
            .get(10)
            .is_some_and(|b| matches!(b, b'T' | b't' | b' '))
        && bytes.get(13) == Some(&b':')
        && bytes.get(16) == Some(&b':')
        && bytes.iter().all(|b| {
            b.is_ascii_digit()
                || matches!(
                    b,
                    b'-' | b'+' | b':' | b'.' | b'T' | b't' | b'Z' | b'z' | b' '
                )
        });
    if !shaped {
        return None;
    }
    let instant: jiff::Timestamp = text.parse().ok()?;
    i64::try_from(instant.as_nanosecond()).ok()
}

/// Whether a time lies in the accepted years, 2000 to 2199.
#[must_use]
pub fn plausible(ns: i64) -> bool {
    (EARLIEST_NS..LATEST_NS).contains(&ns)
}

impl fmt::Display for Instant {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match jiff::Timestamp::from_millisecond(self.0.div_euclid(1_000_000)) {
            Ok(instant) => write!(f, "{instant:.3}"),
            // Every i64 of nanoseconds (years 1677 to 2262) is inside the library's range.
            Err(_) => Err(fmt::Error),
        }
    }
}

impl Serialize for Instant {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.collect_str(self)
    }
}

impl<'de> Deserialize<'de> for Instant {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Instant, D::Error> {
        let text = String::deserialize(deserializer)?;
        parse(&text).map(Instant).ok_or_else(|| {
            serde::de::Error::custom(format!("{text:?} is not an RFC 3339 time with an offset"))
        })
    }
}

impl JsonSchema for Instant {
    fn inline_schema() -> bool {
        true
    }

    fn schema_name() -> Cow<'static, str> {
        "Instant".into()
    }

    fn json_schema(_: &mut SchemaGenerator) -> Schema {
        json_schema!({
            "type": "string",
            "format": "date-time",
            "pattern": r"^\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d\.\d{3}Z$"
        })
    }
}

#[cfg(test)]
mod tests {
    use alloc::string::ToString;

    use super::{EARLIEST_NS, Instant, LATEST_NS, parse, plausible};

    #[test]
    fn the_examples_of_rfc_3339_read_as_their_instants() {
        // RFC 3339 section 5.8; the seconds since 1970 are from `date -u -d <text> +%s`.
        assert_eq!(
            parse("1985-04-12T23:20:50.52Z"),
            Some(482_196_050_520_000_000)
        );
        assert_eq!(
            parse("1996-12-19T16:39:57-08:00"),
            Some(851_042_397_000_000_000)
        );
        assert_eq!(
            parse("1937-01-01T12:00:27.87+00:20"),
            Some(-1_041_337_172_130_000_000)
        );
    }

    #[test]
    fn text_without_an_offset_or_with_an_annotation_is_no_time() {
        for text in [
            "2026-12-01T03:08:00",
            "2026-12-01",
            "2026-12-01T03:08:00Z[UTC]",
            "03:08:00Z",
            "yesterday",
            "",
            "2026-13-01T03:08:00Z",
        ] {
            assert_eq!(parse(text), None, "{text:?}");
        }
    }

    #[test]
    fn the_accepted_years_are_2000_to_2199() {
        assert_eq!(parse("2000-01-01T00:00:00Z"), Some(EARLIEST_NS));
        assert_eq!(parse("2200-01-01T00:00:00Z"), Some(LATEST_NS));
        assert!(plausible(EARLIEST_NS) && !plausible(EARLIEST_NS - 1));
        assert!(plausible(LATEST_NS - 1) && !plausible(LATEST_NS));
    }

    #[test]
    fn text_is_cut_to_the_millisecond_below() {
        assert_eq!(
            Instant(482_196_050_520_999_999).to_string(),
            "1985-04-12T23:20:50.520Z"
        );
        assert_eq!(Instant(-1).to_string(), "1969-12-31T23:59:59.999Z");
        assert_eq!(Instant(i64::MAX).to_string(), "2262-04-11T23:47:16.854Z");
        assert_eq!(Instant(i64::MIN).to_string(), "1677-09-21T00:12:43.145Z");
    }
}
