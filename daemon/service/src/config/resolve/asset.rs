//! An asset: its speeds, points and watches made into one plan.

use humward_monitor::plan::{
    AssetPlan, AssetSpec, Code as PlanCode, Part, PlanFault, PointPlan, RunningRule, SpeedRange,
    StartingRule, WatchPlan, ZoneLimits,
};
use humward_wire::id::Id;

use super::super::Code;
use super::super::gather::Gather;
use super::super::tables::SPEED;
use super::super::verify::{item_path, join};
use super::super::view::View;
use super::point::{self, PointMade};
use super::suggest;
use super::watch::{self, Origin, Standing};
use super::written::{self, Written};

/// An asset as read, with what routes and site watches need even when its plan failed.
#[derive(Debug)]
pub(crate) struct Made<'t> {
    pub(crate) view: View<'t>,
    pub(crate) path: String,
    pub(crate) id: Id,
    pub(crate) group: Id,
    pub(crate) points: Vec<PointMade<'t>>,
    /// Its own watches and those of its points.
    pub(crate) written: Vec<Written<'t>>,
    pub(crate) plan: Option<AssetPlan>,
    pub(crate) notes: Vec<String>,
}

/// Reads an asset; `None` when its id is not known, once every other fault in it has been told.
pub(crate) fn read<'t>(
    view: View<'t>,
    path: &str,
    site: View<'t>,
    zones: &[ZoneLimits],
    wide: &[Written<'t>],
    gather: &mut Gather<'_>,
) -> Option<Made<'t>> {
    let known = view.id("id");
    let id = known.clone().or_else(|| Id::new("unnamed").ok())?;
    let speed = speed(view, path, gather);
    let mut points = Vec::new();
    let mut written = written::of_asset(view, path, gather);
    for (index, point) in view.tables_of("point", point::KEYS).into_iter().enumerate() {
        let Some(node) = point.node() else { continue };
        let path = item_path(&join(path, "point"), index, node);
        points.extend(point::read(point, &path, speed, gather));
        written.extend(written::of_point(point, &path, gather));
    }
    if view.given("point")
        && !view.is_faulty("point")
        && view.tables_of("point", point::KEYS).is_empty()
    {
        let place = view.place_of("point");
        gather.add(
            Code::MissingKey,
            place,
            &join(path, "point"),
            "no point".into(),
            "at least one point".into(),
        );
    }
    points_agree(&points, gather);
    let zones = zone_class(view, path, zones, gather);
    let group = view.id("group").unwrap_or_else(|| id.clone());
    let mut made = Made {
        view,
        path: path.into(),
        id,
        group,
        points,
        written,
        plan: None,
        notes: Vec::new(),
    };
    let inherited = |key: &str| {
        if view.given(key) {
            view.span(key)
        } else {
            site.span(key)
        }
    };
    let usual = view
        .bool("default_watches")
        .or_else(|| site.bool("default_watches"))
        .unwrap_or(true);
    let (watches, points) = watches(&made, wide, zones.as_ref(), usual, gather);
    let running = speed.and_then(|speed| running(view, speed));
    let starting = starting(view);
    let spans = (
        inherited("reading_every"),
        inherited("status_every"),
        inherited("sensor_after"),
    );
    let (
        Some(speed),
        Some(running),
        Some(starting),
        (Some(reading_every), Some(status_every), Some(sensor_after)),
    ) = (speed, running, starting, spans)
    else {
        return known.map(|_| made);
    };
    let spec = AssetSpec {
        id: made.id.clone(),
        name: view.text("name").unwrap_or_else(|| made.id.to_string()),
        speed,
        running,
        run_signal: view.id("run_signal"),
        starting,
        zones: zones.clone(),
        reading_every,
        status_every,
        sensor_after,
        points,
        watches: watches.iter().map(|(_, plan)| plan.clone()).collect(),
    };
    let (plan, mut notes) = plan(spec, watches, &made, site, gather);
    if plan
        .as_ref()
        .is_some_and(|plan| plan.spec().watches.is_empty())
    {
        notes.push(format!(
            "{}: only its sensors are watched, nothing about the machine; give it zones, a bearing or a [[watch]]",
            made.id
        ));
    }
    made.plan = plan;
    made.notes = notes;
    known.map(|_| made)
}

fn speed(view: View<'_>, path: &str, gather: &mut Gather<'_>) -> Option<SpeedRange> {
    let Some(node) = view.raw("speed").filter(|node| node.table().is_some()) else {
        let speed = view.number("speed")?;
        return Some(SpeedRange {
            lowest: speed,
            nominal: speed,
            highest: speed,
        });
    };
    let table = View::new(Some(node), &SPEED);
    let (lowest, nominal, highest) = (
        table.number("lowest")?,
        table.number("nominal")?,
        table.number("highest")?,
    );
    if lowest <= nominal && nominal <= highest {
        return Some(SpeedRange {
            lowest,
            nominal,
            highest,
        });
    }
    let read = format!("lowest {lowest}, nominal {nominal}, highest {highest}");
    gather.add(
        Code::Contradiction,
        table.place(),
        &join(path, "speed"),
        read,
        "lowest <= nominal <= highest, r/min".into(),
    );
    None
}

fn running(view: View<'_>, speed: SpeedRange) -> Option<RunningRule> {
    let from_rpm = if view.given("running_from_rpm") {
        view.number("running_from_rpm")?
    } else {
        0.2 * speed.lowest
    };
    Some(RunningRule {
        from_rpm,
        from_mm_s: view.number("running_from_mm_s")?,
        speed_valid: view.span("speed_valid")?,
    })
}

fn starting(view: View<'_>) -> Option<StartingRule> {
    Some(StartingRule {
        factor: view.number("starting_factor")?,
        after: view.span("starting_after")?,
        signal_for: view.span("starting_for")?,
    })
}

fn zone_class(
    view: View<'_>,
    path: &str,
    zones: &[ZoneLimits],
    gather: &mut Gather<'_>,
) -> Option<ZoneLimits> {
    let name = view.text("zones")?;
    let found = zones.iter().find(|zone| zone.class() == name).cloned();
    if found.is_none() {
        let place = view.place_of("zones");
        let allowed = suggest(
            &name,
            zones.iter().map(ZoneLimits::class),
            "a class of a zone table",
        );
        gather.add(
            Code::NotThere,
            place,
            &join(path, "zones"),
            gather.written(place),
            allowed,
        );
    }
    found
}

/// Point ids once, channels of one source once, rates of one source alike.
fn points_agree(points: &[PointMade<'_>], gather: &mut Gather<'_>) {
    for (index, point) in points.iter().enumerate() {
        for earlier in &points[..index] {
            let there = |key: &str, gather: &Gather<'_>| gather.tell(earlier.view.place_of(key));
            if earlier.id == point.id {
                let place = point.view.place_of("id");
                let allowed = format!(
                    "each point id once in its asset; it stands already at {}",
                    there("id", gather)
                );
                gather.add(
                    Code::Twice,
                    place,
                    &join(&point.path, "id"),
                    gather.written(place),
                    allowed,
                );
            } else if earlier.source == point.source && earlier.channel == point.channel {
                let place = point.view.place_of("channel");
                let read = format!("channel {} of source {}", point.channel, point.source);
                let allowed = format!("a channel of its own; point {} reads that one", earlier.id);
                gather.add(
                    Code::Twice,
                    place,
                    &join(&point.path, "channel"),
                    read,
                    allowed,
                );
            }
            if let (Some(one), Some(other)) = (earlier.rate_hz, point.rate_hz)
                && earlier.source == point.source
                && one != other
            {
                let place = point.view.place_of("rate_hz");
                let allowed = format!("{one}, as point {} of the same source has it", earlier.id);
                gather.add(
                    Code::Contradiction,
                    place,
                    &join(&point.path, "rate_hz"),
                    gather.written(place),
                    allowed,
                );
            }
        }
    }
}

type Kept<'w, 't> = Vec<((Standing<'w, 't>, usize), WatchPlan)>;

/// The sound watches with their point among all points, and the sound points that plan indexes count among.
fn watches<'w, 't>(
    made: &'w Made<'t>,
    wide: &'w [Written<'t>],
    zones: Option<&'w ZoneLimits>,
    usual: bool,
    gather: &mut Gather<'_>,
) -> (Kept<'w, 't>, Vec<PointPlan>) {
    let mut kept = Vec::new();
    let mut sound: Vec<PointPlan> = Vec::new();
    for (index, point) in made.points.iter().enumerate() {
        let candidates: Vec<&'w Written<'t>> = wide
            .iter()
            .chain(&made.written)
            .filter(|watch| watch.may_stand_at(point))
            .collect();
        let standing = watch::standing(made.id.as_str(), point, &candidates, zones, usual, gather);
        let twice = made.points[..index]
            .iter()
            .any(|earlier| earlier.id == point.id);
        for watch in standing {
            let plan = watch::plan(&watch, point, sound.len(), gather);
            if let Some(plan) = plan.filter(|_| point.plan.is_some() && !twice) {
                kept.push(((watch, index), plan));
            }
        }
        if let Some(plan) = point.plan.as_ref().filter(|_| !twice) {
            sound.push(plan.clone());
        }
    }
    (kept, sound)
}

/// Makes the asset's plan. A usual watch that its sensor cannot feed, and some of those of `bearing.any`,
/// are left out and noted; everything else is told.
fn plan(
    mut spec: AssetSpec,
    mut watches: Kept<'_, '_>,
    made: &Made<'_>,
    site: View<'_>,
    gather: &mut Gather<'_>,
) -> (Option<AssetPlan>, Vec<String>) {
    let complete = spec.points.len() == made.points.len() && !made.view.faulty();
    let mut notes = Vec::new();
    let faults = match AssetPlan::new(spec.clone()) {
        Ok(plan) => return (complete.then_some(plan), notes),
        Err(faults) => faults,
    };
    let left_out = left_out(&faults, &watches);
    for fault in faults {
        match fault.part {
            Part::Watch(index) if left_out.contains(&index) => {
                let ((watch, point), _) = &watches[index];
                let point = &made.points[*point].id;
                notes.push(format!(
                    "{}/{point}: {} is not watched: {}; {}",
                    made.id, watch.name, fault.read, fault.allowed
                ));
            }
            Part::Watch(_) | Part::Own | Part::Point(_) | Part::Band(..) => {
                tell(&fault, &spec, &watches, made, site, gather);
            }
        }
    }
    let mut index = 0;
    watches.retain(|_| {
        index += 1;
        !left_out.contains(&(index - 1))
    });
    spec.watches = watches.into_iter().map(|(_, plan)| plan).collect();
    (AssetPlan::new(spec).ok().filter(|_| complete), notes)
}

/// Watches whose answer cannot be had and whose absence is a note, not a fault: the usual ones, and those
/// of `bearing.any` as long as one of its four is left at the point.
fn left_out(faults: &[PlanFault], watches: &Kept<'_, '_>) -> Vec<usize> {
    let failing: Vec<usize> = faults
        .iter()
        .filter_map(|fault| match fault.part {
            Part::Watch(index) if fault.code == PlanCode::CannotResolve => Some(index),
            Part::Watch(_) | Part::Own | Part::Point(_) | Part::Band(..) => None,
        })
        .collect();
    let of_any = |index: usize| {
        let ((watch, point), _) = watches.get(index)?;
        Some((watch.any_bearing()?, *point))
    };
    let lives = |index: usize| {
        let family = of_any(index);
        family.is_some() && (0..watches.len()).any(|i| of_any(i) == family && !failing.contains(&i))
    };
    let usual = |index: usize| {
        watches
            .get(index)
            .is_some_and(|((watch, _), _)| matches!(watch.origin, Origin::Bearing))
    };
    failing
        .iter()
        .copied()
        .filter(|&index| usual(index) || lives(index))
        .collect()
}

fn tell(
    fault: &PlanFault,
    spec: &AssetSpec,
    watches: &Kept<'_, '_>,
    made: &Made<'_>,
    site: View<'_>,
    gather: &mut Gather<'_>,
) {
    let point_of = |index: usize| {
        let id = spec.points.get(index)?.id();
        made.points.iter().find(|point| point.id == *id)
    };
    let read = fault.read.clone();
    let (view, path, read) = match fault.part {
        Part::Own if !made.view.given(fault.key) && site.given(fault.key) => {
            (site, String::new(), read)
        }
        Part::Own => (made.view, made.path.clone(), read),
        Part::Point(index) => match point_of(index) {
            Some(point) => (point.view, point.path.clone(), read),
            None => (made.view, made.path.clone(), read),
        },
        Part::Band(index, band) => {
            match point_of(index).and_then(|point| point.band_views.get(band)) {
                Some((view, path)) => (*view, path.clone(), read),
                None => (made.view, made.path.clone(), read),
            }
        }
        Part::Watch(index) => match watches.get(index) {
            Some(((watch, point), _)) => {
                let point = &made.points[*point];
                match watch.origin.table() {
                    Some((view, path)) => (
                        view,
                        path.to_owned(),
                        format!("{read} (at {}/{})", made.id, point.id),
                    ),
                    None => (
                        point.view,
                        point.path.clone(),
                        format!("{read} (usual watch {})", watch.name),
                    ),
                }
            }
            None => (made.view, made.path.clone(), read),
        },
    };
    if view.is_faulty(fault.key) {
        return;
    }
    gather.add(
        fault.code.into(),
        view.place_of(fault.key),
        &join(&path, fault.key),
        read,
        fault.allowed.clone(),
    );
}
