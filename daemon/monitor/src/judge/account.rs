//! The account of a machine alarm: value, lines, what else was read, what speaks against it, and the sentence.

use alloc::{format, string::String, vec::Vec};

use humward_wire::out::{Instant, Line, Measured, Quality, Severity, Zoned};

use super::{
    Context,
    armed::Armed,
    beside::Beside,
    message::severity_word,
    sentence::{self, clock, duration, two_digits},
    watch::Change,
    words,
};
use crate::{
    plan::{Measure, PointSpec, Quantity, Race, WatchPlan, WatchSpec, Zone},
    reading::{Doubt, RaceLine, Reading, ShaftSpeed},
    time::SignalTime,
};

/// A spectral line this near a whole multiple of shaft speed is told as that multiple.
const WHOLE_ORDER: f64 = 0.02;
/// Velocity lines told with an alarm.
const LINES_TOLD: usize = 3;
/// A line below this share of the strongest tells nothing about an alarm. Common practice, no source.
const LEAST_SHARE: f64 = 0.05;
/// A line with this share of the velocity carries it: half of its power. Common practice, no source.
const CARRIES: f64 = 0.7;

/// Everything an account is made from.
#[derive(Debug, Clone, Copy)]
pub(super) struct Account<'a> {
    pub(super) context: Context<'a>,
    pub(super) plan: &'a WatchPlan,
    pub(super) reading: &'a Reading,
    /// The limit it is told against, in the measure's unit.
    pub(super) limit: Option<f64>,
    /// The limit it rang by while the machine did not run steadily.
    pub(super) armed: Option<Armed>,
    /// The bearing alarm that stands at the same point.
    pub(super) beside: Option<Beside>,
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

    fn further(&self, measure: Measure, unit: &str) -> Option<Measured> {
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
    measured(account.point(), spec, account.reading, quality)
}

/// What a watch measures, as a reading has it.
pub(super) fn measured(
    point: &PointSpec,
    spec: &WatchSpec,
    reading: &Reading,
    quality: Quality,
) -> Measured {
    let band = spec.band(point);
    let measure = band.map_or_else(
        || words::key(spec.measure).into(),
        |band| format!("band.{}", band.spec().name),
    );
    Measured {
        measure,
        value: reading.value(spec.measure),
        unit: spec.quantity.unit().into(),
        quality,
    }
}

/// The lines it rests on: the bearing line, of this watch or of an alarm beside it, and the strongest of the velocity
/// spectrum.
pub(super) fn lines(account: &Account<'_>) -> Vec<Line> {
    let reading = account.reading;
    let shaft_hz = reading.speed.rpm() / 60.0;
    let point = account.point();
    if let Some((race, line)) = account.race() {
        return alloc::vec![race_line(account, race, line)];
    }
    if matches!(account.plan.spec().measure, Measure::Bearing(_)) {
        return Vec::new();
    }
    let reported = matches!(reading.speed, ShaftSpeed::Reported(_)) && shaft_hz > 0.0;
    let strongest = reading
        .strongest
        .first()
        .map_or(0.0, |line| line.velocity_rms);
    let told = reading.strongest.iter().take(LINES_TOLD);
    let telling = told.filter(|line| line.velocity_rms >= LEAST_SHARE * strongest);
    let race = account
        .beside
        .and_then(|beside| Some(race_line(account, beside.race, beside.line?)));
    race.into_iter()
        .chain(telling.map(|line| {
            // By the nominal speed a line would be given a name it may not have.
            let order = reported.then(|| line.frequency_hz / shaft_hz);
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
        }))
        .collect()
}

fn race_line(account: &Account<'_>, race: Race, line: RaceLine) -> Line {
    let (from, to) = account.point().envelope_hz.unwrap_or_default();
    Line {
        label: format!("{} race rate, envelope", race.text())
            .replace("element race", "rolling element"),
        frequency_hz: line.frequency_hz,
        order: Some(line.order),
        strength_db: Some(line.db),
        strength: Some(line.ms2),
        unit: "m/s2 rms".into(),
        band_hz: [from, to],
        resolution_hz: account.reading.resolution_hz,
    }
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
                value: account.further(measure, quantity.unit())?,
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
    if let Some(armed) = account.armed {
        against.push(format!(
            "measured while {}: a resonance passed on the way reads high",
            armed.during()
        ));
    }
    if account.reading.gaps > 0 {
        let s = if account.reading.gaps == 1 { "" } else { "s" };
        against.push(format!(
            "{} gap{s} in this reading: samples are missing",
            account.reading.gaps
        ));
    }
    against
}

/// What a sentence tells of an occurrence besides the reading.
#[derive(Debug, Clone, Copy)]
pub(super) struct Story {
    /// When the condition began.
    pub(super) since: Option<Instant>,
    /// The last value before it, in the measure's unit.
    pub(super) before: Option<f64>,
    /// When the value came back.
    pub(super) until: Option<Instant>,
}

/// The sentence: what changed, how bad, since when, on what evidence, what next.
pub(super) fn text(account: &Account<'_>, story: &Story) -> String {
    let reading = account.reading;
    let place = sentence::place(
        severity_word(account.severity),
        account.context.plan,
        Some(account.point()),
    );
    let what = format!(
        "{place}: {}{}.",
        subject(account, story),
        history(account, story)
    );
    let speed = match (reading.speed, account.armed) {
        (ShaftSpeed::Reported(rpm), Some(_)) => format!("At {rpm:.0} r/min on average"),
        (ShaftSpeed::Nominal(_), Some(_)) => "Speed not reported".into(),
        (ShaftSpeed::Reported(rpm), None) => format!("Running {rpm:.0} r/min"),
        (ShaftSpeed::Nominal(rpm), None) => {
            format!("Running, speed not reported ({rpm:.0} r/min assumed)")
        }
    };
    let sensor = if reading.doubts.has(Doubt::Clipped) {
        "sensor clipped"
    } else {
        "sensor good"
    };
    let evidence = match account
        .beside
        .filter(|_| account.severity != Severity::None)
    {
        Some(beside) => beside.said(),
        None => velocity(account),
    };
    let parts = [what, evidence, format!("{speed}, {sensor}.")];
    match account.severity {
        Severity::None => sentence::join(&parts),
        Severity::Alert => sentence::with_checks(&parts, "Next", checks(account)),
        Severity::Danger => sentence::with_checks(&parts, "Act now", checks(account)),
    }
}

/// What to check next; nothing once it is over.
pub(super) const fn checks(account: &Account<'_>) -> &'static [&'static str] {
    match account.severity {
        Severity::None => &[],
        Severity::Alert | Severity::Danger => {
            let measure = match account.beside {
                Some(beside) => Measure::Bearing(beside.race),
                None => account.plan.spec().measure,
            };
            words::checks(measure, account.severity)
        }
    }
}

/// What is seen, with its value where people know one: decibels and pure numbers stay fields.
fn subject(account: &Account<'_>, story: &Story) -> String {
    let spec = account.plan.spec();
    let phrase = words::phrase(spec.measure, account.point());
    let over = account.severity != Severity::None;
    match (spec.quantity, account.race()) {
        (Quantity::Decibel, Some((_, line))) => format!(
            "{phrase} at {} Hz, {} m/s2 rms in the envelope",
            two_or_more_digits(line.frequency_hz),
            two_digits(line.ms2)
        ),
        (Quantity::Decibel, None) => phrase,
        (Quantity::Ratio, _) => match account.reading.value(Measure::AccelerationPeak) {
            Some(peak) if over => format!("{phrase}, peak {} m/s2", two_digits(peak)),
            Some(_) | None => phrase,
        },
        (
            Quantity::VelocityRms
            | Quantity::VelocityPeak
            | Quantity::AccelerationRms
            | Quantity::AccelerationPeak,
            _,
        ) => {
            let bound = account.reading.doubts.has(Doubt::Clipped);
            let at_least = if bound { "at least " } else { "" };
            let value = account.reading.value(spec.measure);
            let said = value.map_or_else(|| "no value".into(), two_digits);
            let limits = match (account.change, account.armed) {
                (_, Some(armed)) => format!(
                    " while {} (armed at {}, {} x danger)",
                    armed.during(),
                    two_digits(armed.limit),
                    armed.factor
                ),
                (Change::Raised(_) | Change::Worsened | Change::Reraised, None) => {
                    limit(account, " (", ")")
                }
                (Change::Eased | Change::Cleared, None) => String::new(),
            };
            let risen = match (account.change, story.before.map(two_digits)) {
                (Change::Raised(_), Some(before)) if before != said && account.armed.is_none() => {
                    format!(", up from {before},")
                }
                _ => String::new(),
            };
            format!(
                "{phrase} {at_least}{said} {}{limits}{risen}",
                spec.quantity.unit()
            )
        }
    }
}

/// The limit it is told against, with its name.
fn limit(account: &Account<'_>, before: &str, after: &str) -> String {
    let danger = account.severity == Severity::Danger || account.change == Change::Eased;
    let kind = if danger || account.plan.spec().limits.alert().is_none() {
        "danger"
    } else {
        "alert"
    };
    let said = |value| format!("{before}{kind} {}{after}", two_digits(value));
    account.limit.map_or_else(String::new, said)
}

/// How it came to be: since when, from what, until when.
fn history(account: &Account<'_>, story: &Story) -> String {
    let now = Instant(account.reading.end.ns());
    let said = |instant: Option<Instant>| {
        instant.map_or_else(|| "an unknown time".into(), |instant| clock(instant, now))
    };
    let since = said(story.since);
    let valued = match account.plan.spec().quantity {
        Quantity::VelocityRms
        | Quantity::VelocityPeak
        | Quantity::AccelerationRms
        | Quantity::AccelerationPeak => true,
        Quantity::Ratio | Quantity::Decibel => false,
    };
    let below = match account.change {
        Change::Eased if account.limit.is_none() => ", no danger limit any more".into(),
        Change::Eased | Change::Cleared if valued => limit(account, ", below ", " again"),
        Change::Eased => ", below danger again".into(),
        Change::Cleared => " no longer over the limit".into(),
        Change::Raised(_) | Change::Worsened | Change::Reraised => String::new(),
    };
    match account.change {
        Change::Raised(_) => format!(" since {since}"),
        Change::Worsened => format!(", worsened, over its limits since {since}"),
        Change::Reraised => format!(", again in the alarm that stands since {since}"),
        Change::Eased => format!("{below}; the alert stands since {since}"),
        Change::Cleared => {
            let held = story.since.zip(story.until);
            let held = held.map_or_else(String::new, |(since, until)| {
                let span = SignalTime::from_ns(until.0).since(SignalTime::from_ns(since.0));
                format!(", for {}", duration(span))
            });
            format!("{below}; it had been over since {since}{held}")
        }
    }
}

/// Velocity beside other measures, its zone, and the line that carries it.
fn velocity(account: &Account<'_>) -> String {
    let zone = account.zone().map(Zone::letter);
    let Some(velocity) = account.reading.value(Measure::VelocityRms) else {
        return String::new();
    };
    match account.plan.spec().measure {
        Measure::VelocityRms | Measure::VelocityPeak => {
            let carried = account.severity != Severity::None;
            let line = account
                .reading
                .strongest
                .first()
                .filter(|line| carried && line.velocity_rms >= CARRIES * velocity);
            let line = line.map(|line| {
                let hz = two_or_more_digits(line.frequency_hz);
                let label = lines(account).first().map(|line| line.label.clone());
                match label.filter(|label| label != "line") {
                    Some(label) => format!("mostly {label} ({hz} Hz)"),
                    None => format!("mostly at {hz} Hz"),
                }
            });
            match (zone, line) {
                (Some(zone), Some(line)) => format!("Zone {zone}, {line}."),
                (Some(zone), None) => format!("Zone {zone}."),
                (None, Some(line)) => format!("It is {line}."),
                (None, None) => String::new(),
            }
        }
        Measure::AccelerationRms
        | Measure::AccelerationPeak
        | Measure::Crest
        | Measure::Kurtosis
        | Measure::HighBandRms
        | Measure::Band(_)
        | Measure::Bearing(_) => {
            let zone = zone.map_or_else(String::new, |zone| format!(", zone {zone}"));
            format!("Velocity {} mm/s rms{zone}.", two_digits(velocity))
        }
    }
}

/// A frequency: whole hertz from 100 Hz on, two digits below.
pub(super) fn two_or_more_digits(hz: f64) -> String {
    if hz >= 100.0 {
        format!("{hz:.0}")
    } else {
        two_digits(hz)
    }
}
