//! The account of a machine alarm: value, lines, what else was read, what speaks against it, and the sentence.

use alloc::{format, string::String, vec::Vec};

use humward_wire::out::{Instant, Line, Measured, Quality, Severity, Zoned};

use super::{
    Context,
    message::severity_word,
    sentence::{clock, join, two_digits},
    watch::Change,
    words,
};
use crate::{
    plan::{Measure, PointSpec, Quantity, Race, WatchPlan, Zone},
    reading::{Doubt, RaceLine, Reading, ShaftSpeed},
};

/// A spectral line this near a whole multiple of shaft speed is told as that multiple.
const WHOLE_ORDER: f64 = 0.02;
/// Velocity lines told with an alarm.
const LINES_TOLD: usize = 3;

/// Everything an account is made from.
#[derive(Debug, Clone, Copy)]
pub(super) struct Account<'a> {
    pub(super) context: Context<'a>,
    pub(super) plan: &'a WatchPlan,
    pub(super) reading: &'a Reading,
    /// The limit it is told against, in the measure's unit.
    pub(super) limit: Option<f64>,
    pub(super) change: Change,
    pub(super) severity: Severity,
}

impl Account<'_> {
    fn point(&self) -> &PointSpec {
        self.context.plan.spec().points[self.plan.spec().point].spec()
    }

    fn race(&self) -> Option<(Race, RaceLine)> {
        let Measure::Bearing(race) = self.plan.spec().measure else {
            return None;
        };
        self.reading.line(race).map(|line| (race, line))
    }

    fn zone(&self) -> Option<Zone> {
        let velocity = self.reading.value(Measure::VelocityRms)?;
        Some(self.context.plan.spec().zones.as_ref()?.zone(velocity))
    }

    fn measured(&self, measure: Measure, unit: &str) -> Option<Measured> {
        let value = self.reading.value(measure)?;
        Some(Measured {
            measure: words::key(measure).into(),
            value: Some(value),
            unit: unit.into(),
            quality: Quality::Good,
        })
    }
}

/// The value judged, with its quality.
pub(super) fn value(account: &Account<'_>) -> Measured {
    let spec = account.plan.spec();
    let quality = if account.reading.doubts.has(Doubt::Clipped) {
        Quality::LowerBound
    } else if matches!(
        (spec.measure, account.reading.speed),
        (Measure::Bearing(_), ShaftSpeed::Nominal(_))
    ) {
        Quality::NotVerified
    } else {
        Quality::Good
    };
    let band = match spec.measure {
        Measure::Band(index) => account.point().bands.get(usize::from(index)),
        Measure::VelocityRms
        | Measure::VelocityPeak
        | Measure::AccelerationRms
        | Measure::AccelerationPeak
        | Measure::Crest
        | Measure::Kurtosis
        | Measure::HighBandRms
        | Measure::Bearing(_) => None,
    };
    let measure = band.map_or_else(
        || words::key(spec.measure).into(),
        |band| format!("band.{}", band.spec().name),
    );
    Measured {
        measure,
        value: account.reading.value(spec.measure),
        unit: spec.quantity.unit().into(),
        quality,
    }
}

/// The lines it rests on: the bearing line, or the strongest of the velocity spectrum.
pub(super) fn lines(account: &Account<'_>) -> Vec<Line> {
    let reading = account.reading;
    let shaft_hz = reading.speed.rpm() / 60.0;
    let point = account.point();
    if let Some((race, line)) = account.race() {
        let (from, to) = point.envelope_hz.unwrap_or_default();
        return alloc::vec![Line {
            label: format!("{} race rate, envelope", race.text())
                .replace("element race", "rolling element"),
            frequency_hz: line.frequency_hz,
            order: Some(line.order),
            strength_db: Some(line.db),
            strength: Some(line.ms2),
            unit: "m/s2 rms".into(),
            band_hz: [from, to],
            resolution_hz: reading.resolution_hz,
        }];
    }
    let told = reading.strongest.iter().take(LINES_TOLD);
    told.map(|line| {
        let order = (shaft_hz > 0.0).then(|| line.frequency_hz / shaft_hz);
        let whole =
            order.filter(|order| (order - order.round()).abs() <= WHOLE_ORDER && *order > 0.5);
        Line {
            label: whole.map_or_else(
                || "line".into(),
                |order| format!("{:.0}x shaft", order.round()),
            ),
            frequency_hz: line.frequency_hz,
            order,
            strength_db: None,
            strength: Some(line.velocity_rms),
            unit: "mm/s rms".into(),
            band_hz: [point.velocity_from_hz, 1000.0],
            resolution_hz: reading.resolution_hz,
        }
    })
    .collect()
}

/// What else the reading says, the most telling first.
pub(super) fn also(account: &Account<'_>) -> Vec<Zoned> {
    let measures = [
        (Measure::VelocityRms, Quantity::VelocityRms),
        (Measure::HighBandRms, Quantity::AccelerationRms),
        (Measure::Kurtosis, Quantity::Ratio),
        (Measure::AccelerationPeak, Quantity::AccelerationPeak),
    ];
    let others = measures
        .into_iter()
        .filter(|(measure, _)| *measure != account.plan.spec().measure);
    others
        .filter_map(|(measure, quantity)| {
            let zoned = measure == Measure::VelocityRms;
            let zone = account
                .zone()
                .filter(|_| zoned)
                .map(|zone| zone.letter().into());
            Some(Zoned {
                value: account.measured(measure, quantity.unit())?,
                zone,
            })
        })
        .collect()
}

/// What speaks against it.
pub(super) fn against(account: &Account<'_>) -> Vec<String> {
    let mut against = Vec::new();
    if account.severity == Severity::None {
        return against;
    }
    if let Some((_, line)) = account.race() {
        if let Some(zone @ (Zone::A | Zone::B)) = account.zone() {
            against.push(format!(
                "velocity is in zone {}: an early stage at most",
                zone.letter()
            ));
        }
        if line.harmonics < 3 {
            against.push(format!("only {} harmonics stand out", line.harmonics));
        }
    }
    if let (Measure::Bearing(_), ShaftSpeed::Nominal(_)) =
        (account.plan.spec().measure, account.reading.speed)
    {
        against.push("speed is nominal, not reported".into());
    }
    if account.reading.doubts.has(Doubt::Clipped) {
        against.push("the sensor clipped: the value is a lower bound".into());
    }
    if account.reading.gaps > 0 {
        against.push(format!("{} gap(s) in this reading", account.reading.gaps));
    }
    against
}

/// The sentence.
pub(super) fn text(account: &Account<'_>, since: Option<Instant>) -> String {
    let spec = account.plan.spec();
    let reading = account.reading;
    let asset = account.context.plan.spec();
    let began = since.map_or_else(String::new, |since| format!(" since {}", clock(since)));
    let place = format!(
        "{} {} {}, {}",
        severity_word(account.severity),
        asset.id,
        asset.name,
        account.point().name
    );
    let at_least = if reading.doubts.has(Doubt::Clipped) {
        "at least "
    } else {
        ""
    };
    let unit = spec.quantity.unit();
    let unit = if spec.quantity == Quantity::Ratio {
        String::new()
    } else {
        format!(" {unit}")
    };
    let said = reading
        .value(spec.measure)
        .map_or_else(|| "no value".into(), two_digits);
    let limit = account.limit.map_or_else(String::new, |limit| {
        let kind = if account.severity == Severity::Danger || account.change == Change::Eased {
            "danger"
        } else {
            "alert"
        };
        let kind = if spec.limits.alert().is_none() {
            "danger"
        } else {
            kind
        };
        format!(" ({kind} {})", two_digits(limit))
    });
    let what = match account.race() {
        Some((race, line)) => format!(
            "{place}: {} line at {} Hz, {said} dB over the floor{limit}, {} m/s2 rms,{began}.",
            words::race_phrase(race),
            two_or_more_digits(line.frequency_hz),
            two_digits(line.ms2),
        ),
        None => format!(
            "{place}: {} {at_least}{said}{unit}{limit}{began}.",
            words::phrase(spec.measure)
        ),
    };
    let what = match account.change {
        Change::Cleared => what
            .replace(" (alert", " back below (alert")
            .replace(" (danger", " back below (danger"),
        Change::Eased => what.replace(" (danger", ", eased from danger (danger"),
        Change::Raised(_) | Change::Worsened => what,
    };
    let velocity = match (spec.quantity, reading.value(Measure::VelocityRms)) {
        (Quantity::VelocityRms | Quantity::VelocityPeak, _) | (_, None) => account
            .zone()
            .map_or_else(String::new, |zone| format!("Zone {}.", zone.letter())),
        (_, Some(velocity)) => {
            let zone = account
                .zone()
                .map_or_else(String::new, |zone| format!(", zone {}", zone.letter()));
            format!("Velocity {} mm/s rms{zone}.", two_digits(velocity))
        }
    };
    let speed = match reading.speed {
        ShaftSpeed::Reported(rpm) => format!("Running {rpm:.0} r/min, sensor good."),
        ShaftSpeed::Nominal(rpm) => format!("Running, {rpm:.0} r/min nominal, sensor good."),
    };
    let speed = if reading.doubts.is_empty() {
        speed
    } else {
        speed.replace("sensor good", "sensor clipped")
    };
    let checks = words::checks(spec.measure, account.severity);
    let next = match account.severity {
        Severity::None => String::new(),
        Severity::Alert => format!("Next: {}.", checks.join(", ")),
        Severity::Danger => format!("Act now: {}.", checks.join(", ")),
    };
    let shorter = match checks.first() {
        Some(first) if account.severity != Severity::None => format!("Next: {first}."),
        _ => String::new(),
    };
    let whole = join(&[what.clone(), velocity.clone(), speed.clone(), next.clone()]);
    if whole.contains(next.as_str()) {
        whole
    } else {
        join(&[what, velocity, speed, shorter])
    }
}

/// A frequency: whole hertz from 100 Hz on, two digits below.
fn two_or_more_digits(hz: f64) -> String {
    if hz >= 100.0 {
        format!("{hz:.0}")
    } else {
        two_digits(hz)
    }
}
