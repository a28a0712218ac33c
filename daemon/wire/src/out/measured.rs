//! A value with its unit and quality.
//!
//! Written with five significant digits: no sensor here is better than 0.01 %, and messages are small.

use alloc::string::String;

use schemars::JsonSchema;
use serde::{Deserialize, Serialize, Serializer};

use super::Quality;

/// One number of a message.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Measured {
    /// What was measured, such as `velocity` or `outer-race`.
    pub measure: String,
    /// The value; null when there is none.
    #[serde(serialize_with = "five_digits_or_null")]
    pub value: Option<f64>,
    /// Unit with detector, such as `mm/s rms`, `m/s2 rms`, `dB`, `r/min` or `-`.
    pub unit: String,
    /// How far the value can be believed.
    pub quality: Quality,
}

/// Rounds to five significant digits; zero and values that are not finite stay as they are.
#[must_use]
pub(crate) fn five_digits(value: f64) -> f64 {
    if value == 0.0 || !value.is_finite() {
        return value;
    }
    // Through decimal text, so that the result prints with at most five digits.
    alloc::format!("{value:.4e}").parse().unwrap_or(value)
}

pub(crate) fn five_digits_or_null<S: Serializer>(
    value: &Option<f64>,
    serializer: S,
) -> Result<S::Ok, S::Error> {
    match value {
        Some(v) if v.is_finite() => serializer.serialize_f64(five_digits(*v)),
        Some(_) | None => serializer.serialize_none(),
    }
}

pub(crate) fn rounded<S: Serializer>(value: &f64, serializer: S) -> Result<S::Ok, S::Error> {
    five_digits_or_null(&Some(*value), serializer)
}

pub(crate) fn rounded_pair<S: Serializer>(
    value: &[f64; 2],
    serializer: S,
) -> Result<S::Ok, S::Error> {
    value.map(five_digits).serialize(serializer)
}

#[cfg(test)]
mod tests {
    use alloc::string::ToString;

    use super::{Measured, five_digits};
    use crate::out::Quality;

    #[test]
    fn values_are_written_with_five_significant_digits() {
        for (value, written) in [
            (8.912_345_6, 8.9123),
            (1_482.345_6, 1482.3),
            (0.000_123_456_7, 0.000_123_46),
            (-99_999.6, -100_000.0),
            (0.0, 0.0),
            (1e300, 1e300),
        ] {
            assert_eq!(five_digits(value).to_string(), written.to_string());
        }
    }

    #[test]
    fn a_value_that_is_not_finite_is_written_as_null() {
        for value in [Some(f64::NAN), Some(f64::INFINITY), None] {
            let measured = Measured {
                measure: "velocity".to_string(),
                value,
                unit: "mm/s rms".to_string(),
                quality: Quality::Missing,
            };
            assert_eq!(
                serde_json::to_string(&measured).unwrap(),
                r#"{"measure":"velocity","value":null,"unit":"mm/s rms","quality":"missing"}"#
            );
        }
    }
}
