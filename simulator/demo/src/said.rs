//! What the daemon says, as lines of a page: its own sentences and numbers, nothing added.
//!
//! An event is its `text`, word for word. Where the event carries evidence that the sentence leaves out - decibels,
//! orders, the limit of a value - a line in brackets names it. A status is one line, when the running state of a machine has changed.

use humward_wire::out::{Event, Finding, Instant, RunState, Severity, Status, Transition};

use crate::page::{Ink, WIDTH};

/// Width of the time of day and the gap after it.
pub const MARGIN: usize = 10;

/// The time of day in UTC, to the second.
#[must_use]
pub fn time_of_day(at: Instant) -> String {
    let text = at.to_string();
    text.get(11..19).map_or_else(|| text.clone(), str::to_owned)
}

/// How the first word of an event's sentence is shown.
#[must_use]
pub fn ink(event: &Event) -> Ink {
    match event.finding.standing.severity() {
        Severity::Alert => Ink::Alert,
        Severity::Danger => Ink::Danger,
        Severity::None if event.transition == Transition::Cleared => Ink::Fine,
        Severity::None => Ink::Plain,
    }
}

/// A number of a message: three significant digits, no exponent.
#[must_use]
pub fn number(value: f64) -> String {
    if value == 0.0 || !value.is_finite() {
        return value.to_string();
    }
    let decimals = (2.0 - value.abs().log10().floor()).clamp(0.0, 6.0);
    format!("{value:.*}", decimals as usize)
}

/// The evidence of a raise or worsening in one line, as far as it fits; `None` where the sentence says it all.
#[must_use]
pub fn evidence(event: &Event) -> Option<String> {
    let rings = matches!(
        event.transition,
        Transition::Raised | Transition::Worsened | Transition::Reraised
    );
    if !rings {
        return None;
    }
    let finding = &event.finding;
    let mut text = value(finding).unwrap_or_default();
    for line in &finding.lines {
        let strength = line
            .strength
            .map(|strength| format!(", {} {}", number(strength), line.unit));
        let bare = format!("{} {} Hz", line.label, number(line.frequency_hz));
        let order = line.order.map(|order| format!(", order {order:.2}"));
        let brief = format!("{bare}{}", order.unwrap_or_default());
        let whole = format!("{brief}{}", strength.unwrap_or_default());
        let fitting = [whole, brief, bare].into_iter().find_map(|part| {
            let gap = if text.is_empty() { "" } else { "; " };
            let longer = format!("{text}{gap}{part}");
            (longer.chars().count() <= WIDTH - MARGIN - 2).then_some(longer)
        });
        match fitting {
            Some(longer) => text = longer,
            None => break,
        }
    }
    (!text.is_empty()).then(|| format!("[{text}]"))
}

/// Value, limit and normal; `None` where the sentence carries the value in its unit with its limit.
fn value(finding: &Finding) -> Option<String> {
    let measured = finding.value.as_ref()?;
    let read = measured.value?;
    if finding.text.contains(&format!(" {} (", measured.unit)) {
        return None;
    }
    let mut text = format!("{} {}", number(read), measured.unit);
    if let Some(limit) = &finding.limit {
        text.push_str(&format!(", limit {}", number(limit.value)));
    }
    if let Some(normal) = finding.normal {
        text.push_str(&format!(", normal {}", number(normal)));
    }
    Some(text)
}

/// Whether a machine turns, as far as a line about it is worth printing.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Turns {
    /// It runs.
    Runs,
    /// It stands.
    Stands,
}

/// Whether the status tells a machine that runs or stands; `None` while it is between the two or not known.
#[must_use]
pub fn turns(status: &Status) -> Option<Turns> {
    match status.running.state {
        RunState::Running => Some(Turns::Runs),
        RunState::Stopped => Some(Turns::Stands),
        RunState::Unknown | RunState::Starting | RunState::Stopping | RunState::Coasting => None,
    }
}

/// A status in brief: state, speed, and the first value of each point.
#[must_use]
pub fn brief(status: &Status) -> String {
    let asset = status
        .header
        .asset
        .as_ref()
        .map_or("", |asset| asset.as_str());
    let mut text = format!("status: {asset} {}", status.running.state);
    if let Some(rpm) = status.running.rpm {
        text.push_str(&format!(" {rpm:.0} r/min"));
    }
    for point in &status.points {
        text.push_str(&format!("; {} {}", point.point, point.quality));
        if let Some(measured) = point.values.first()
            && let Some(value) = measured.value
        {
            text.push_str(&format!(", {} {}", number(value), measured.unit));
        }
    }
    if status.open_count > 0 {
        text.push_str(&format!("; open alarms {}", status.open_count));
    }
    text
}

#[cfg(test)]
mod tests;
