//! Reading and checking a scenario.

use std::path::Path;

use humward_wire::id::Id;
use humward_wire::topic::Topics;

use super::{Asset, Scenario, ScenarioFault, catalogue, find};

/// The scenario of the catalogue, or the file, called `name`.
///
/// # Errors
/// [`ScenarioFault`]: not found, unreadable, not TOML of this shape, or values that do not fit; all of those at once.
pub fn load(name: &str) -> Result<Scenario, ScenarioFault> {
    if let Some(entry) = find(name) {
        return parse(entry.name, entry.text);
    }
    let path = Path::new(name);
    if !path.exists() {
        let near = catalogue()
            .into_iter()
            .map(|entry| entry.name)
            .min_by_key(|known| distance(known, name))
            .filter(|known| distance(known, name) <= 3)
            .map(str::to_owned);
        return Err(ScenarioFault::Unknown {
            name: name.to_owned(),
            near,
        });
    }
    let text = std::fs::read_to_string(path).map_err(|cause| ScenarioFault::Unreadable {
        name: name.to_owned(),
        cause,
    })?;
    parse(name, &text)
}

/// Letters to change, add or leave out to get from `a` to `b` (Levenshtein).
fn distance(a: &str, b: &str) -> usize {
    let b: Vec<char> = b.chars().collect();
    let mut row: Vec<usize> = (0..=b.len()).collect();
    for (i, from) in a.chars().enumerate() {
        let mut diagonal = row[0];
        row[0] = i + 1;
        for (j, to) in b.iter().enumerate() {
            let changed = diagonal + usize::from(from != *to);
            diagonal = row[j + 1];
            row[j + 1] = changed.min(row[j] + 1).min(diagonal + 1);
        }
    }
    row[b.len()]
}

/// Reads the text of a scenario called `name`.
///
/// # Errors
/// As [`load`].
pub fn parse(name: &str, text: &str) -> Result<Scenario, ScenarioFault> {
    let mut scenario: Scenario = toml::from_str(text).map_err(|cause| ScenarioFault::Syntax {
        name: name.to_owned(),
        cause: Box::new(cause),
    })?;
    scenario.name = Path::new(name).file_stem().map_or_else(
        || name.to_owned(),
        |stem| stem.to_string_lossy().into_owned(),
    );
    let mut faults = Vec::new();
    check(&scenario, &mut faults);
    if faults.is_empty() {
        return Ok(scenario);
    }
    Err(ScenarioFault::Values {
        name: name.to_owned(),
        faults,
    })
}

/// Adds a fault unless `value` lies in `low..=high`.
pub(crate) fn within(
    faults: &mut Vec<String>,
    what: &str,
    value: f64,
    low: f64,
    high: f64,
    unit: &str,
) {
    if !(low..=high).contains(&value) {
        let allowed = format!("{low} to {high} {unit}");
        faults.push(format!(
            "{what} is {value}; allowed: {}",
            allowed.trim_end()
        ));
    }
}

/// Adds a fault unless `text` is an id.
pub(super) fn is_id(faults: &mut Vec<String>, what: &str, text: &str) {
    if let Err(cause) = Id::new(text) {
        faults.push(format!("{what} {text:?}: {cause}"));
    }
}

/// Longest scenario, s: 7 days. Its truth is walked tick by tick, about 8 s for each asset where that was measured.
pub(crate) const LONGEST_S: f64 = 604_800.0;

fn check(scenario: &Scenario, faults: &mut Vec<String>) {
    is_id(faults, "site", &scenario.site);
    if let Ok(site) = Id::new(&scenario.site)
        && let Err(cause) = Topics::new(&scenario.root, &site)
    {
        faults.push(format!("root {:?}: {cause}", scenario.root));
    }
    if humward_wire::time::parse(&scenario.start).is_none() {
        faults.push(format!(
            "start {:?} is no time; write it like \"2026-03-02T03:00:00Z\"",
            scenario.start
        ));
    }
    within(faults, "duration", scenario.duration.0, 1.0, LONGEST_S, "s");
    within(faults, "line_hz", scenario.line_hz, 10.0, 400.0, "Hz");
    for level in &scenario.levels_mm_s {
        within(faults, "levels_mm_s", *level, 1e-3, 1e3, "mm/s rms");
    }
    within(faults, "foundation", scenario.foundation, 0.0, 1.0, "");
    if scenario.assets.is_empty() {
        faults.push("no asset; add at least one [[asset]] with a [[asset.point]]".to_owned());
    }
    for (index, asset) in scenario.assets.iter().enumerate() {
        if scenario.assets[..index]
            .iter()
            .any(|other| other.id == asset.id)
        {
            faults.push(format!("asset {} stands twice; ids are unique", asset.id));
        }
        check_asset(scenario, asset, faults);
    }
}

fn check_asset(scenario: &Scenario, asset: &Asset, faults: &mut Vec<String>) {
    let id = &asset.id;
    is_id(faults, "asset id", id);
    let mut numbers = vec![
        ("rpm", asset.rpm, 30.0, 60_000.0, "r/min"),
        ("wander_percent", asset.wander_percent, 0.0, 5.0, "%"),
        ("velocity_mm_s", asset.velocity_mm_s, 0.01, 50.0, "mm/s rms"),
        ("vanes", f64::from(asset.vanes), 2.0, 20.0, ""),
        ("load.mean", asset.load.mean, 0.05, 1.4, ""),
        ("load.walk", asset.load.walk, 0.0, 0.5, ""),
        ("load.over", asset.load.over.0, 1.0, 1e6, "s"),
    ];
    let rpms = asset.schedule.iter();
    numbers.extend(rpms.map(|(_, rpm)| ("schedule", *rpm, 0.0, 60_000.0, "r/min")));
    if let Some(sway) = asset.sway {
        numbers.push(("sway.percent", sway.percent, 0.0, 20.0, "%"));
        numbers.push(("sway.period", sway.period.0, 1.0, 1e6, "s"));
    }
    if let Some(motor) = asset.motor {
        numbers.push(("motor.poles", f64::from(motor.poles), 2.0, 48.0, ""));
        numbers.push((
            "motor.electrical_mm_s",
            motor.electrical_mm_s,
            0.0,
            50.0,
            "mm/s rms",
        ));
        numbers.push(("motor.firing_deg", motor.firing_deg, 0.0, 150.0, "degrees"));
    }
    if let Some(slip) = asset.slip_at(scenario.line_hz) {
        numbers.push((
            "slip of its motor at rpm, line_hz and poles",
            slip,
            0.0,
            0.1,
            "",
        ));
    }
    if let Some(every) = asset.speed_every {
        numbers.push(("speed_every", every.0, 0.1, 3600.0, "s"));
    }
    if let Some(process) = &asset.process {
        numbers.push(("process.every", process.every.0, 0.1, 3600.0, "s"));
        let flow = process.flow_m3_h.unwrap_or_default();
        numbers.push(("process.flow_m3_h", flow, 0.0, 1e6, "m3/h"));
    }
    for (key, value, low, high, unit) in numbers {
        within(
            faults,
            &format!("asset {id}: {key}"),
            value,
            low,
            high,
            unit,
        );
    }
    if let Some(run) = asset
        .process
        .as_ref()
        .and_then(|process| process.run.as_ref())
    {
        is_id(faults, &format!("asset {id}: process.run"), run);
    }
    for pair in asset.schedule.windows(2) {
        if pair[0].0 >= pair[1].0 {
            faults.push(format!(
                "asset {id}: schedule goes back at {} s; times must grow",
                pair[1].0.0
            ));
        }
    }
    if asset.points.is_empty() {
        faults.push(format!("asset {id}: no point; add a [[asset.point]]"));
    }
    for (index, point) in asset.points.iter().enumerate() {
        if asset.points[..index]
            .iter()
            .any(|other| other.id == point.id)
        {
            faults.push(format!(
                "asset {id}: point {} stands twice; ids are unique",
                point.id
            ));
        }
        point.check(id, faults);
    }
    for fault in &asset.faults {
        fault.check(asset, faults);
    }
}
