//! Why a payload was refused, and at which byte.
//!
//! One closed list for every inbound message and encoding. `offset` is a byte position in the payload, at most
//! its length: the first byte of the value at fault, the first byte that cannot be read, or the length when the
//! payload ends too early. A missing key is told at the start of the map that lacks it.
//! Checked by `tests/contract/corpus.rs`: `every_reason_is_met_twice_in_each_encoding_it_can_occur_in`.

use core::fmt;

/// A payload refused whole.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct Refusal {
    /// What is wrong.
    pub reason: Reason,
    /// Byte position in the payload.
    pub offset: usize,
    /// The key of ours it concerns, where one is known.
    pub key: Option<&'static str>,
}

/// How a payload is written.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Form {
    /// A CBOR map (RFC 8949).
    Cbor,
    /// A JSON object with our keys, or a bare number where that is allowed.
    Json,
    /// Foreign JSON read through pointers.
    Mapped,
    /// Samples as bytes after a header.
    Raw,
    /// Not known yet: the first byte fits no encoding.
    Undetected,
}

macro_rules! reasons {
    ($($(#[doc = $doc:literal])+ $name:ident $code:literal [$($form:ident)*] $what:literal, $remedy:literal;)+) => {
        /// What can be wrong with a payload. The list is closed; codes are stable.
        #[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
        pub enum Reason { $($(#[doc = $doc])+ $name,)+ }

        impl Reason {
            /// Every reason, in the order of the list.
            pub const ALL: &'static [Reason] = &[$(Reason::$name,)+];

            /// Stable word for counters and logs.
            #[must_use]
            pub const fn code(self) -> &'static str {
                match self { $(Reason::$name => $code,)+ }
            }

            /// What is wrong, as the middle of a sentence.
            #[must_use]
            pub const fn what(self) -> &'static str {
                match self { $(Reason::$name => $what,)+ }
            }

            /// What to do about it.
            #[must_use]
            pub const fn remedy(self) -> &'static str {
                match self { $(Reason::$name => $remedy,)+ }
            }

            /// The encodings in which this reason can occur; none when it is not decoding that finds it.
            #[must_use]
            pub const fn occurs_in(self) -> &'static [Form] {
                match self { $(Reason::$name => &[$(Form::$form,)*],)+ }
            }
        }
    };
}

reasons! {
    /// No bytes at all.
    Empty "empty" [Cbor Json Mapped Raw Undetected]
        "the payload is empty", "send one message per publish; only our own alarm topics are emptied";
    /// The first byte starts neither a CBOR map nor JSON.
    UnknownEncoding "unknown_encoding" [Undetected]
        "the first byte starts neither a CBOR map nor JSON", "send either, or describe raw samples in the configuration";
    /// The payload ends inside an item.
    Truncated "truncated" [Cbor Json Mapped Raw]
        "the payload ends too early", "check the sender's buffer size and the broker's packet limit";
    /// Bytes that the encoding does not allow.
    BadSyntax "bad_syntax" [Cbor Json Mapped]
        "the bytes are not well formed", "write the payload with a JSON or CBOR library";
    /// Something follows the message.
    TrailingBytes "trailing_bytes" [Cbor Json Mapped]
        "bytes follow the end of the message", "send one message per publish";
    /// A CBOR item without a stated length.
    IndefiniteLength "indefinite_length" [Cbor]
        "an item has no stated length", "write maps, arrays and strings with definite lengths";
    /// Arrays or maps nested more than 16 deep.
    TooDeep "too_deep" [Cbor Json Mapped]
        "arrays or maps are nested more than 16 deep", "flatten the payload or leave the extra key out";
    /// Text that is not UTF-8, or an escape that is no character.
    InvalidText "invalid_text" [Cbor Json Mapped]
        "text is not valid UTF-8", "write text as UTF-8; send binary samples as a typed array or base64";
    /// A value of another type than the key wants.
    WrongType "wrong_type" [Cbor Json Mapped]
        "the value has the wrong type", "send the type the contract names for this key";
    /// A key that must be there is not, or is null.
    MissingKey "missing_key" [Cbor Json Mapped]
        "a key is missing", "add it, or give a fixed value in the configuration";
    /// A key that is read occurs twice.
    DuplicateKey "duplicate_key" [Cbor Json Mapped]
        "a key occurs twice", "send each key once";
    /// Text that is no RFC 3339 time with an offset.
    BadTime "bad_time" [Cbor Json Mapped]
        "the text is not an RFC 3339 time with an offset", "write 2026-12-01T03:08:00.250Z or integer nanoseconds since 1970";
    /// A time before 2000 or after 2199.
    TimeOutOfRange "time_out_of_range" [Cbor Json Mapped Raw]
        "the time is before 2000 or after 2199", "set the sensor's clock and send nanoseconds since 1970 UTC";
    /// A time too far from when the payload arrived; found by who stamps it, in no encoding.
    FarFromArrival "far_from_arrival" []
        "the time is too far from its arrival", "set the sensor's clock, or widen at_tolerance in the configuration";
    /// A number outside what the key allows, or not finite.
    OutOfRange "out_of_range" [Cbor Json Mapped]
        "the number is outside the allowed range", "check its unit and sign against the contract";
    /// A unit word we do not know.
    UnknownUnit "unknown_unit" [Cbor Json Mapped]
        "the unit is not known", "use m/s2, g, mV or count";
    /// A typed array or `encoding` we do not read.
    UnknownSamples "unknown_samples" [Cbor Json Mapped]
        "the sample type is not known", "use s16, s32, f32 or f64 in either byte order";
    /// Text that is not base64.
    BadBase64 "bad_base64" [Json Mapped]
        "the samples are not base64", "use the standard alphabet of RFC 4648 without line breaks";
    /// Bytes that do not divide into whole samples.
    PartialSample "partial_sample" [Cbor Json Mapped Raw]
        "the last sample is cut", "send a whole number of samples; check the sample type";
    /// No samples.
    NoSamples "no_samples" [Cbor Json Mapped Raw]
        "there are no samples", "send at least one sample per channel";
    /// More samples than the limit.
    TooManySamples "too_many_samples" [Cbor Json Mapped Raw]
        "there are more samples than the limit", "send shorter blocks or raise the limit in the configuration";
    /// Samples that do not divide among the channels.
    UnevenChannels "uneven_channels" [Cbor Json Mapped Raw]
        "the samples do not divide evenly among the channels", "send every channel of every instant, interleaved";
    /// A sample that is not a number, or infinite.
    SampleNotFinite "sample_not_finite" [Cbor Json Mapped Raw]
        "a sample is infinite or not a number", "send only finite samples; drop the block when the sensor has none";
    /// A sample beyond 32-bit floats, or beyond 1e12 after scaling.
    SampleOutOfRange "sample_out_of_range" [Cbor Json Mapped Raw]
        "a sample is too large to be a measurement", "check scale, sample type and byte order";
    /// Text that is not an id.
    BadId "bad_id" [Cbor Json]
        "the text is not an id", "use 1 to 64 of A-Z a-z 0-9 . _ -";
    /// Free text that is empty, too long or has control characters.
    BadText "bad_text" [Cbor Json]
        "the text is empty, too long or has control characters", "write 1 to 200 printable characters";
    /// A command we do not know.
    UnknownVerb "unknown_verb" [Cbor Json]
        "the command is not known", "see the list of commands in the contract";
}

impl Refusal {
    pub(crate) const fn at(reason: Reason, offset: usize) -> Refusal {
        Refusal {
            reason,
            offset,
            key: None,
        }
    }

    pub(crate) const fn of(reason: Reason, offset: usize, key: &'static str) -> Refusal {
        Refusal {
            reason,
            offset,
            key: Some(key),
        }
    }
}

impl fmt::Display for Refusal {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.reason.what())?;
        if let Some(key) = self.key {
            write!(f, ", key `{key}`")?;
        }
        write!(f, ", at byte {}; {}", self.offset, self.reason.remedy())
    }
}

impl core::error::Error for Refusal {}

impl fmt::Display for Reason {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.code())
    }
}

#[cfg(test)]
mod tests {
    use alloc::collections::BTreeSet;
    use alloc::string::ToString;

    use super::{Reason, Refusal};

    #[test]
    fn codes_are_unique_snake_case_words_that_speak_of_one_reason_each() {
        let codes: BTreeSet<&str> = Reason::ALL.iter().map(|r| r.code()).collect();
        assert_eq!(codes.len(), Reason::ALL.len());
        for reason in Reason::ALL {
            assert!(
                reason
                    .code()
                    .bytes()
                    .all(|b| b.is_ascii_lowercase() || b.is_ascii_digit() || b == b'_')
            );
            assert!(!reason.remedy().is_empty());
            assert_eq!(
                reason.occurs_in().is_empty(),
                *reason == Reason::FarFromArrival,
                "{reason}"
            );
        }
    }

    #[test]
    fn a_refusal_says_what_where_and_the_remedy() {
        assert_eq!(
            Refusal::of(Reason::UnknownUnit, 17, "unit").to_string(),
            "the unit is not known, key `unit`, at byte 17; use m/s2, g, mV or count"
        );
    }
}
