//! The one sentence people read: which machine, what, how bad, since when, on what evidence, what next.
//!
//! At most 300 characters, tag and severity in the first 40 (ids permitting), two significant digits, r/min whole.

use alloc::{format, string::String};

use humward_wire::out::{Instant, MAX_TEXT};

use crate::{
    plan::{AssetPlan, PointSpec},
    time::{SECOND, Span},
};

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

/// The time of day in UTC to the minute; with its date when that is not the date of `now`.
pub(super) fn clock(instant: Instant, now: Instant) -> String {
    let (text, today) = (format!("{instant}"), format!("{now}"));
    let (Some(date), Some(time)) = (text.get(..10), text.get(11..16)) else {
        return text;
    };
    if today.starts_with(date) {
        format!("{time} UTC")
    } else {
        format!("{date} {time} UTC")
    }
}

/// A length of time in the unit in which it is at least two, rounded down.
pub(super) fn duration(span: Span) -> String {
    let seconds = span.ns() / SECOND;
    let units = [("d", 86_400), ("h", 3600), ("min", 60)];
    let unit = units.into_iter().find(|(_, unit)| seconds >= 2 * unit);
    unit.map_or_else(
        || format!("{seconds} s"),
        |(name, unit)| format!("{} {name}", seconds / unit),
    )
}

/// Longest name of an asset or point in a sentence, in characters.
const LONGEST_NAME: usize = 60;

/// What a sentence begins with: a word, the asset's tag and name, and the point's name.
pub(super) fn place(word: &str, asset: &AssetPlan, point: Option<&PointSpec>) -> String {
    let spec = asset.spec();
    let point = point.map_or_else(String::new, |point| format!(", {}", short(&point.name)));
    // Without a name of its own an asset is called by its tag, once.
    if spec.name == spec.id.as_str() {
        format!("{word} {}{point}", spec.id)
    } else {
        format!("{word} {} {}{point}", spec.id, short(&spec.name))
    }
}

fn short(name: &str) -> String {
    let mut characters = name.chars();
    let mut begin: String = characters.by_ref().take(LONGEST_NAME).collect();
    if characters.next().is_some() {
        begin.pop();
        begin.push('\u{2026}');
    }
    begin
}

/// Joins parts with spaces and ends with the standing words; parts that no longer fit are left out from the end.
///
/// The first part, which says what it is about, is cut rather than left out.
pub(super) fn join(parts: &[String]) -> String {
    let mut sentence = String::new();
    for part in parts.iter().filter(|part| !part.is_empty()) {
        if !fits(&sentence, part) {
            if sentence.is_empty() {
                sentence.extend(part.chars().take(MAX_TEXT - LAST_WORDS.len() - 2));
                sentence.push_str("\u{2026} ");
            }
            break;
        }
        sentence.push_str(part);
        sentence.push(' ');
    }
    sentence.push_str(LAST_WORDS);
    sentence
}

/// As [`join`], with as many checks after them as fit, the most telling first.
///
/// Where not even one fits the second part gives way: what to do next is never what is left out.
pub(super) fn with_checks(parts: &[String], lead: &str, checks: &[&str]) -> String {
    let all = |kept: &[String]| {
        let whole: usize = kept.iter().map(|part| part.chars().count() + 1).sum();
        (1..=checks.len()).rev().find_map(|count| {
            let next = format!("{lead}: {}.", checks[..count].join(", "));
            let room = whole + next.chars().count() + 1 + LAST_WORDS.len() <= MAX_TEXT;
            room.then(|| join(&[kept, &[next]].concat()))
        })
    };
    let mut fewer = parts.to_vec();
    if fewer.len() > 1 {
        fewer.remove(1);
    }
    all(parts)
        .or_else(|| all(&fewer))
        .unwrap_or_else(|| join(parts))
}

fn fits(sentence: &str, part: &str) -> bool {
    sentence.chars().count() + part.chars().count() + 1 + LAST_WORDS.len() <= MAX_TEXT
}

#[cfg(test)]
mod tests {
    use super::{clock, duration, join, short, two_digits, with_checks};
    use crate::time::Span;
    use alloc::string::ToString;
    use humward_wire::out::{Instant, MAX_TEXT};

    #[test]
    fn values_are_said_with_two_digits() {
        let said = [0.2134, 8.86, 9.96, 31.4, 1482.0, 0.0, 0.00519].map(two_digits);
        assert_eq!(said, ["0.21", "8.9", "10", "31", "1500", "0", "0.0052"]);
    }

    #[test]
    fn the_clock_is_utc_to_the_minute_and_tells_another_day() {
        let then = Instant(1_764_547_200_000_000_000);
        let later = Instant(then.0 + 86_400_000_000_000);
        assert_eq!(clock(then, then), "00:00 UTC");
        assert_eq!(clock(then, later), "2025-12-01 00:00 UTC");
    }

    #[test]
    fn a_duration_is_at_least_two_of_its_unit() {
        let said =
            [0, 119, 120, 7199, 7200, 172_799, 172_800].map(|s| duration(Span::from_secs(s)));
        assert_eq!(
            said,
            ["0 s", "119 s", "2 min", "119 min", "2 h", "47 h", "2 d"]
        );
    }

    #[test]
    fn a_long_part_is_left_out_and_the_last_words_stay() {
        let long = "x".repeat(290);
        assert_eq!(
            join(&["Short.".to_string(), long.clone()]),
            "Short. Advisory only."
        );
        let cut = join(&[long, "Short.".to_string()]);
        assert_eq!(cut.chars().count(), MAX_TEXT);
        assert!(cut.starts_with("xxx") && cut.ends_with("x\u{2026} Advisory only."));
    }

    #[test]
    fn checks_are_told_as_far_as_they_fit() {
        let part = ["x".repeat(250)];
        let said = with_checks(&part, "Next", &["look here", "and there", "and everywhere"]);
        assert!(
            said.ends_with("Next: look here, and there. Advisory only."),
            "{said}"
        );
        assert!(said.len() <= MAX_TEXT);
        let part = ["x".repeat(284)];
        assert_eq!(with_checks(&part, "Next", &["look"]).len(), 284 + 15);
        let parts = ["What.".to_string(), "x".repeat(270), "Running.".to_string()];
        assert_eq!(
            with_checks(&parts, "Next", &["look here"]),
            "What. Running. Next: look here. Advisory only."
        );
    }

    #[test]
    fn a_long_name_is_cut_where_a_character_ends() {
        let name = "\u{fc}".repeat(80);
        assert_eq!(short(&name).chars().count(), 60);
        assert_eq!(short("pump"), "pump");
    }
}
