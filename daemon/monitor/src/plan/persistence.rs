//! How long a condition must hold before it counts: readings, time, or M of N readings.

use core::fmt;

use crate::time::Span;

/// How much holding is enough. Each form is met by readings that were judged; a doubtful one credits nothing.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Persistence {
    /// So many judged readings in a row.
    Readings(u16),
    /// Readings in a row that together last so long, each credited with at most its own length.
    Time(Span),
    /// At least `needed` of the last `window` judged readings.
    OutOf {
        /// Readings that must hold.
        needed: u16,
        /// Readings looked back upon, at most 64.
        window: u16,
    },
}

/// Why a persistence text was refused.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum PersistenceFault {
    /// It is none of the three forms.
    Form,
    /// A count is outside 1 to 1000 (a window: 1 to 64, not below the needed count).
    Count,
    /// A time is outside 1 s to 30 d.
    Time,
}

impl fmt::Display for PersistenceFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::Form => "a time such as \"30s\", a count such as \"3 readings\", or \"3 of 5\"",
            Self::Count => "1 to 1000 readings, or M of N with 1 <= M <= N <= 64",
            Self::Time => "1s to 30d",
        })
    }
}

impl Persistence {
    /// Reads `"3 readings"`, `"3 of 5"`, or a whole number with unit `s`, `min`, `h` or `d`.
    ///
    /// # Errors
    /// The form, count or time is not one of the above.
    pub fn parse(text: &str) -> Result<Self, PersistenceFault> {
        let text = text.trim();
        let whole = |t: &str| t.trim().parse::<u16>().map_err(|_| PersistenceFault::Form);
        if let Some((needed, window)) = text.split_once(" of ") {
            let (needed, window) = (whole(needed)?, whole(window)?);
            return match (needed, window) {
                (1.., ..=64) if needed <= window => Ok(Self::OutOf { needed, window }),
                _ => Err(PersistenceFault::Count),
            };
        }
        if let Some(count) = text
            .strip_suffix("readings")
            .or_else(|| text.strip_suffix("reading"))
        {
            return match whole(count)? {
                count @ 1..=1000 => Ok(Self::Readings(count)),
                _ => Err(PersistenceFault::Count),
            };
        }
        let span = parse_span(text).ok_or(PersistenceFault::Form)?;
        if (Span::from_secs(1)..=Span::from_secs(30 * 86_400)).contains(&span) {
            Ok(Self::Time(span))
        } else {
            Err(PersistenceFault::Time)
        }
    }
}

impl fmt::Display for Persistence {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Readings(1) => f.write_str("1 reading"),
            Self::Readings(count) => write!(f, "{count} readings"),
            Self::Time(span) => write!(f, "{} s", span.secs()),
            Self::OutOf { needed, window } => write!(f, "{needed} of {window} readings"),
        }
    }
}

/// A whole number with unit `ms`, `s`, `min`, `h` or `d`; `None` for anything else.
pub fn parse_span(text: &str) -> Option<Span> {
    let text = text.trim();
    let unit_at = text.find(|c: char| !c.is_ascii_digit())?;
    let (number, unit) = text.split_at(unit_at);
    let ns = match unit.trim() {
        "ms" => 1_000_000,
        "s" => 1_000_000_000,
        "min" => 60_000_000_000,
        "h" => 3_600_000_000_000,
        "d" => 86_400_000_000_000,
        _ => return None,
    };
    number
        .parse::<i64>()
        .ok()?
        .checked_mul(ns)
        .map(Span::from_ns)
}

#[cfg(test)]
mod tests {
    use super::{Persistence, PersistenceFault};
    use crate::time::Span;

    #[test]
    fn the_three_forms_are_read() {
        assert_eq!(
            Persistence::parse("3 readings"),
            Ok(Persistence::Readings(3))
        );
        assert_eq!(
            Persistence::parse("2min"),
            Ok(Persistence::Time(Span::from_secs(120)))
        );
        assert_eq!(
            Persistence::parse("3 of 5"),
            Ok(Persistence::OutOf {
                needed: 3,
                window: 5
            })
        );
    }

    #[test]
    fn what_could_never_be_met_is_refused() {
        assert_eq!(Persistence::parse("5 of 3"), Err(PersistenceFault::Count));
        assert_eq!(
            Persistence::parse("0 readings"),
            Err(PersistenceFault::Count)
        );
        assert_eq!(Persistence::parse("3 of 65"), Err(PersistenceFault::Count));
        assert_eq!(Persistence::parse("0s"), Err(PersistenceFault::Time));
        assert_eq!(Persistence::parse("soon"), Err(PersistenceFault::Form));
        assert_eq!(Persistence::parse("30"), Err(PersistenceFault::Form));
    }
}
