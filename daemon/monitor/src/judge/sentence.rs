//! The one sentence people read: which machine, what, how bad, since when, on what evidence, what next.
//!
//! At most 300 characters, tag and severity in the first 40 (ids permitting), two significant digits, r/min whole.

use alloc::{format, string::String};

use humward_wire::out::{Instant, MAX_TEXT};

/// The standing last words; they are never cut.
const LAST_WORDS: &str = "Advisory only.";

/// A value with two significant digits, without an exponent: `0.21`, `8.9`, `31`, `1480`.
pub(super) fn two_digits(value: f64) -> String {
    if value == 0.0 || !value.is_finite() {
        return format!("{value}");
    }
    let mut magnitude = value.abs().log10().floor() as i32;
    if (value.abs() / 10f64.powi(magnitude - 1)).round() >= 100.0 {
        magnitude += 1;
    }
    if magnitude > 1 {
        let step = 10f64.powi(magnitude - 1);
        format!("{:.0}", (value / step).round() * step)
    } else {
        format!("{value:.decimals$}", decimals = (1 - magnitude) as usize)
    }
}

/// The time of day in UTC to the minute.
pub(super) fn clock(instant: Instant) -> String {
    let text = format!("{instant}");
    text.get(11..16)
        .map_or(text.clone(), |clock| format!("{clock} UTC"))
}

/// Joins parts with spaces and ends with the standing words; parts that no longer fit are left out from the end.
pub(super) fn join(parts: &[String]) -> String {
    let mut sentence = String::new();
    for part in parts {
        if part.is_empty() {
            continue;
        }
        if sentence.chars().count() + part.chars().count() + LAST_WORDS.len() + 2 > MAX_TEXT {
            break;
        }
        sentence.push_str(part);
        sentence.push(' ');
    }
    sentence.push_str(LAST_WORDS);
    sentence
}

#[cfg(test)]
mod tests {
    use super::{clock, join, two_digits};
    use alloc::string::ToString;
    use humward_wire::out::Instant;

    #[test]
    fn values_are_said_with_two_digits() {
        let said = [0.2134, 8.86, 9.96, 31.4, 1482.0, 0.0, 0.00519].map(two_digits);
        assert_eq!(said, ["0.21", "8.9", "10", "31", "1500", "0", "0.0052"]);
    }

    #[test]
    fn the_clock_is_utc_to_the_minute() {
        assert_eq!(clock(Instant(1_764_547_200_000_000_000)), "00:00 UTC");
    }

    #[test]
    fn a_long_part_is_left_out_and_the_last_words_stay() {
        let long = "x".repeat(290);
        assert_eq!(join(&["Short.".to_string(), long]), "Short. Advisory only.");
    }
}
