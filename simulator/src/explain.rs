//! The truth as a technician reads it, at most 80 columns.

use core::fmt::Write;

use crate::fault::{Expected, Seen};
use crate::truth::{AssetTruth, Direction, FaultTruth, PointTruth, Truth};

/// A length of time in words: `45 s`, `2 min 30 s`, `3 h`.
#[must_use]
pub fn words(seconds: f64) -> String {
    let whole = seconds.round() as i64;
    let (hours, minutes, rest) = (whole / 3600, whole / 60 % 60, whole % 60);
    let parts: Vec<String> = [(hours, "h"), (minutes, "min"), (rest, "s")]
        .into_iter()
        .filter(|(count, _)| *count > 0)
        .map(|(count, unit)| format!("{count} {unit}"))
        .collect();
    if parts.is_empty() {
        "0 s".to_owned()
    } else {
        parts.join(" ")
    }
}

fn place(line: &Expected) -> String {
    let place = match line.seen {
        Seen::Velocity => "velocity",
        Seen::Envelope => "envelope",
        Seen::Acceleration => "acceleration",
    };
    match (line.level, line.seen) {
        (None, _) => place.to_owned(),
        (Some(level), Seen::Velocity) => format!("{place} {level:5.2} mm/s rms"),
        (Some(level), Seen::Envelope | Seen::Acceleration) => {
            format!("{place:<12} {level:5.2} m/s2")
        }
    }
}

/// The whole truth in words.
#[must_use]
pub fn explain(truth: &Truth) -> String {
    let mut text = String::new();
    for line in folded(&format!("{}: {}", truth.scenario, truth.about), 78) {
        text.push_str(&line);
        text.push('\n');
    }
    let _ = writeln!(
        text,
        "Simulated. Seed {}, {} from {}, supply {} Hz.",
        truth.seed,
        words(truth.duration_s),
        truth.start,
        truth.line_hz
    );
    for asset in &truth.assets {
        text.push('\n');
        tell_asset(&mut text, asset);
    }
    text
}

/// Words of `text` in lines of at most `width` characters; a longer word has a line of its own.
pub(crate) fn folded(text: &str, width: usize) -> Vec<String> {
    let mut lines: Vec<String> = vec![String::new()];
    for word in text.split_whitespace() {
        let full = lines.last().is_some_and(|line| {
            !line.is_empty() && line.chars().count() + 1 + word.chars().count() > width
        });
        if full {
            lines.push(String::new());
        }
        if let Some(line) = lines.last_mut() {
            if !line.is_empty() {
                line.push(' ');
            }
            line.push_str(word);
        }
    }
    lines
}

fn tell_asset(text: &mut String, asset: &AssetTruth) {
    let name = if asset.name.is_empty() {
        String::new()
    } else {
        format!(" {}", asset.name)
    };
    let _ = writeln!(text, "{}{name}, {:.0} r/min", asset.asset, asset.rpm);
    if asset.speed.len() > 1 {
        let steps: Vec<String> = asset
            .speed
            .iter()
            .map(|(at, rpm)| format!("{rpm:.0} at {}", words(*at)))
            .collect();
        for line in folded(&format!("speed, r/min: {}", steps.join(", ")), 76) {
            let _ = writeln!(text, "  {line}");
        }
    }
    if asset.faults.is_empty() {
        let _ = writeln!(text, "  the machine: healthy");
    }
    for fault in &asset.faults {
        tell_fault(text, fault);
    }
    for point in &asset.points {
        tell_point(text, point);
    }
}

fn tell_fault(text: &mut String, fault: &FaultTruth) {
    let seat = fault
        .point
        .as_ref()
        .map_or(String::new(), |point| format!(" at {point}"));
    let _ = writeln!(
        text,
        "  {}{seat}, from {} on",
        fault.kind,
        words(fault.onset_s)
    );
    let growth = if fault.law == "step" {
        format!("{} at once", fault.to)
    } else {
        let full = words(fault.full_s);
        format!(
            "{} to {}, {}, until {full}",
            fault.from, fault.to, fault.law
        )
    };
    for line in folded(&format!("severity: {growth} ({})", fault.severity), 76) {
        let _ = writeln!(text, "    {line}");
    }
    if fault.lines.is_empty() {
        let _ = writeln!(text, "    lines to expect: none");
        return;
    }
    let _ = writeln!(
        text,
        "    lines to expect at nominal speed and full growth, before the path:"
    );
    for line in &fault.lines {
        let _ = writeln!(
            text,
            "      {:<26} {:>8.2} Hz {:>7.3}x  {}",
            line.line,
            line.hz,
            line.order,
            place(line)
        );
    }
}

fn tell_point(text: &mut String, point: &PointTruth) {
    let rate = if (point.true_rate_hz - point.rate_hz).abs() < 1e-9 {
        format!("{} samples/s", point.rate_hz)
    } else {
        format!(
            "{} samples/s, truly {:.1}",
            point.rate_hz, point.true_rate_hz
        )
    };
    let _ = writeln!(
        text,
        "  point {}: {rate}, clean velocity {:.2} to {:.2} mm/s rms",
        point.point, point.velocity_mm_s.0, point.velocity_mm_s.1
    );
    for crossing in &point.crossings {
        let how = match crossing.direction {
            Direction::Rises => "rises above",
            Direction::Falls => "falls below",
        };
        let _ = writeln!(
            text,
            "    clean velocity {how} {} mm/s rms after {}",
            crossing.mm_s,
            words(crossing.after_s)
        );
    }
    for fault in &point.sensor {
        let _ = writeln!(text, "    sensor: {}", fault.text);
    }
    for fault in &point.transport {
        let _ = writeln!(text, "    transport: {}", fault.text);
    }
}

#[cfg(test)]
mod tests {
    use super::words;

    #[test]
    fn lengths_of_time_read_as_people_say_them() {
        assert_eq!(words(45.0), "45 s");
        assert_eq!(words(150.0), "2 min 30 s");
        assert_eq!(words(7200.0), "2 h");
        assert_eq!(words(0.0), "0 s");
    }
}
