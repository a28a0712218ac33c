//! Which watches stand at a point: written for the site, the asset or the point, and the usual ones.
//!
//! A more specific watch replaces a wider one of the same name: point over asset over site, and within
//! the site or an asset one that selects over one that does not. Usual watches fill what is left:
//! one that bears the name or the measure of a written one is not added.

use humward_monitor::plan::{
    Limits, Measure, Persistence, Quantity, Race, WatchPlan, WatchSpec, ZoneLimits,
};
use humward_monitor::time::Span;

use super::super::Code;
use super::super::gather::Gather;
use super::super::measure::MeasureName;
use super::super::source::Place;
use super::super::tables::WATCH;
use super::super::verify::{item_path, join};
use super::super::view::View;
use super::asset::Made;
use super::point::{PointMade, tell};
use super::suggest;

/// Usual alert limit of a bearing line, dB over its floor (common practice, no source).
pub(crate) const BEARING_ALERT_DB: f64 = 20.0;
/// Usual least strength of a bearing line, m/s2 rms (common practice, no source).
pub(crate) const BEARING_LEAST_MS2: f64 = 0.02;
/// Usual persistence of a bearing line, s (common practice, no source).
pub(crate) const BEARING_AFTER_S: i64 = 600;
/// Deadband of a limit in dB when none is written.
const DEADBAND_DB: f64 = 2.0;
/// Deadband of any other limit when none is written: this share of the lowest limit.
const DEADBAND_SHARE: f64 = 0.05;

/// How wide a written watch is; a higher one replaces a lower one of the same name.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub(crate) enum Rank {
    Site,
    SiteSelected,
    Asset,
    AssetSelected,
    Point,
}

/// A watch as written, before it meets a point.
#[derive(Debug, Clone)]
pub(crate) struct Written<'t> {
    view: View<'t>,
    path: String,
    rank: Rank,
    /// The point it is written in, by its place; `None` for a wider one.
    owner: Option<Place>,
    measure: MeasureName,
    name: String,
    assets: Vec<(String, Place)>,
    points: Vec<(String, Place)>,
}

/// Where a watch of a point comes from.
#[derive(Debug, Clone, Copy)]
pub(crate) enum Origin<'w, 't> {
    /// Somebody wrote it.
    Written(&'w Written<'t>),
    /// The usual velocity watch of the asset's zones.
    Zones(&'w ZoneLimits),
    /// The usual watch of a bearing part.
    Bearing,
}

/// A watch that stands at a point.
#[derive(Debug, Clone)]
pub(crate) struct Standing<'w, 't> {
    pub(crate) name: String,
    pub(crate) measure: MeasureName,
    pub(crate) origin: Origin<'w, 't>,
}

/// The watches of the top level.
pub(crate) fn of_site<'t>(site: View<'t>, gather: &mut Gather<'_>) -> Vec<Written<'t>> {
    written(site, "", [Rank::Site, Rank::SiteSelected], gather)
}

/// The watches of an asset.
pub(crate) fn of_asset<'t>(
    asset: View<'t>,
    path: &str,
    gather: &mut Gather<'_>,
) -> Vec<Written<'t>> {
    written(asset, path, [Rank::Asset, Rank::AssetSelected], gather)
}

/// The watches of a point.
pub(crate) fn of_point<'t>(
    point: View<'t>,
    path: &str,
    gather: &mut Gather<'_>,
) -> Vec<Written<'t>> {
    written(point, path, [Rank::Point, Rank::Point], gather)
}

fn written<'t>(
    above: View<'t>,
    path: &str,
    ranks: [Rank; 2],
    gather: &mut Gather<'_>,
) -> Vec<Written<'t>> {
    let mut found = Vec::new();
    for (index, view) in above.tables_of("watch", &WATCH).into_iter().enumerate() {
        let Some(node) = view.node() else { continue };
        let path = item_path(&join(path, "watch"), index, node);
        let [plain, selected] = ranks;
        let misplaced = [
            (
                "assets",
                plain >= Rank::Asset,
                "only on a watch of the top level; this one is the asset's own",
            ),
            (
                "points",
                plain == Rank::Point,
                "not inside a point; this watch is the point's own",
            ),
        ];
        for (key, wrong, allowed) in misplaced {
            if wrong && view.given(key) {
                let place = view.place_of(key);
                gather.add(
                    Code::Contradiction,
                    place,
                    &join(&path, key),
                    gather.written(place),
                    allowed.into(),
                );
            }
        }
        let measure = view
            .text("measure")
            .and_then(|text| MeasureName::parse(&text));
        if let (Some(name), Some(measure)) = (view.text("name"), measure) {
            let selects = view.given("assets") || view.given("points");
            let rank = if selects { selected } else { plain };
            let (assets, points) = (view.texts("assets"), view.texts("points"));
            let owner = (plain == Rank::Point).then(|| above.place());
            found.push(Written {
                view,
                path,
                rank,
                owner,
                measure,
                name,
                assets,
                points,
            });
        }
    }
    found
}

impl Written<'_> {
    /// Whether it may stand at this point at all: a point's own watch stands at no other.
    pub(crate) fn may_stand_at(&self, point: &PointMade<'_>) -> bool {
        self.owner.is_none_or(|owner| owner == point.view.place())
    }

    /// Whether it is meant for this point of this asset, whatever the point can measure.
    fn selects(&self, asset: &str, point: &str) -> bool {
        let listed = |list: &[(String, Place)], id: &str| {
            list.is_empty() || list.iter().any(|(name, _)| name == id)
        };
        listed(&self.assets, asset) && listed(&self.points, point)
    }
}

/// Whether a point has a measure.
fn has(point: &PointMade<'_>, measure: &MeasureName) -> bool {
    match measure {
        MeasureName::Plain(..) => true,
        MeasureName::Band(name) => point.bands.iter().any(|(band, _)| band == name),
        MeasureName::Bearing(_) | MeasureName::AnyBearing => point.has_bearing,
    }
}

/// Names with measures a written watch stands for: one, or four for any bearing part.
fn expand(written: &Written<'_>) -> Vec<(String, MeasureName)> {
    match &written.measure {
        MeasureName::AnyBearing => Race::ALL
            .into_iter()
            .map(|race| {
                (
                    format!("{}-{}", written.name, race.text()),
                    MeasureName::Bearing(race),
                )
            })
            .collect(),
        one => vec![(written.name.clone(), one.clone())],
    }
}

/// The watches that stand at a point; `usual` says whether the usual ones are wanted.
pub(crate) fn standing<'w, 't>(
    asset: &str,
    point: &PointMade<'t>,
    written: &[&'w Written<'t>],
    zones: Option<&'w ZoneLimits>,
    usual: bool,
    gather: &mut Gather<'_>,
) -> Vec<Standing<'w, 't>> {
    let mut standing: Vec<Standing<'w, 't>> = Vec::new();
    for &watch in written {
        if !watch.selects(asset, point.id.as_str()) || !has(point, &watch.measure) {
            continue;
        }
        for (name, measure) in expand(watch) {
            let new = Standing {
                name,
                measure,
                origin: Origin::Written(watch),
            };
            match standing.iter_mut().find(|there| there.name == new.name) {
                None => standing.push(new),
                Some(there) => replace(there, new, watch, point, gather),
            }
        }
    }
    let mut usual_ones: Vec<(&str, MeasureName, Origin<'w, 't>)> = Vec::new();
    if usual {
        if let Some(zones) = zones {
            let velocity = MeasureName::Plain(Measure::VelocityRms, Quantity::VelocityRms);
            usual_ones.push(("velocity", velocity, Origin::Zones(zones)));
        }
        if point.has_bearing {
            let races =
                Race::ALL
                    .into_iter()
                    .zip(["outer-race", "inner-race", "rolling-element", "cage"]);
            usual_ones.extend(
                races.map(|(race, name)| (name, MeasureName::Bearing(race), Origin::Bearing)),
            );
        }
    }
    for (name, measure, origin) in usual_ones {
        if standing
            .iter()
            .all(|there| there.name != name && there.measure != measure)
        {
            standing.push(Standing {
                name: name.into(),
                measure,
                origin,
            });
        }
    }
    standing
}

fn replace<'w, 't>(
    there: &mut Standing<'w, 't>,
    new: Standing<'w, 't>,
    watch: &Written<'t>,
    point: &PointMade<'t>,
    gather: &mut Gather<'_>,
) {
    let Origin::Written(earlier) = there.origin else {
        return;
    };
    if watch.rank > earlier.rank {
        *there = new;
    } else if watch.rank == earlier.rank {
        let place = watch.view.place_of("name");
        let allowed = format!(
            "each watch name once at a point of equal width; {} stands at point {} already from {}",
            new.name,
            point.id,
            gather.tell(earlier.view.place_of("name"))
        );
        gather.add(
            Code::Twice,
            place,
            &join(&watch.path, "name"),
            gather.written(place),
            allowed,
        );
    }
}

/// Makes the plan of a standing watch for the point of this index; `None` after faults.
pub(crate) fn plan(
    watch: &Standing<'_, '_>,
    point: &PointMade<'_>,
    index: usize,
    gather: &mut Gather<'_>,
) -> Option<WatchPlan> {
    let (measure, quantity) = match &watch.measure {
        MeasureName::Plain(measure, quantity) => (*measure, *quantity),
        MeasureName::Bearing(race) => (Measure::Bearing(*race), Quantity::Decibel),
        MeasureName::AnyBearing => return None,
        MeasureName::Band(name) => {
            let number = point.bands.iter().position(|(band, _)| band == name)?;
            (
                Measure::Band(u8::try_from(number).ok()?),
                point.bands.get(number)?.1,
            )
        }
    };
    let view = match watch.origin {
        Origin::Written(written) if written.view.faulty() => return None,
        Origin::Written(written) => Some((written.view, written.path.as_str())),
        Origin::Zones(_) | Origin::Bearing => None,
    };
    let (alert, danger, deadband, source) = match watch.origin {
        Origin::Written(written) => {
            let read = |key| written.view.number(key);
            (
                read("alert"),
                read("danger"),
                read("deadband"),
                String::new(),
            )
        }
        Origin::Zones(zones) => {
            let [_, bc, cd] = zones.borders();
            (
                Some(bc),
                Some(cd),
                None,
                format!("{}, class {}", zones.source(), zones.class()),
            )
        }
        Origin::Bearing => (
            Some(BEARING_ALERT_DB),
            None,
            None,
            "common practice, no source".into(),
        ),
    };
    let lowest = alert
        .unwrap_or(f64::INFINITY)
        .min(danger.unwrap_or(f64::INFINITY));
    let usual_deadband = match quantity {
        Quantity::Decibel => DEADBAND_DB,
        Quantity::VelocityRms
        | Quantity::VelocityPeak
        | Quantity::AccelerationRms
        | Quantity::AccelerationPeak
        | Quantity::Ratio => {
            if lowest.is_finite() {
                DEADBAND_SHARE * lowest
            } else {
                0.0
            }
        }
    };
    let mut told = |faults| match view {
        Some((view, path)) => tell(view, path, faults, gather),
        None => tell(point.view, &point.path, faults, gather),
    };
    let limits = Limits::new(alert, danger, deadband.unwrap_or(usual_deadband))
        .map_err(&mut told)
        .ok()?;
    let usual_after = match watch.origin {
        Origin::Bearing => Span::from_secs(BEARING_AFTER_S),
        Origin::Written(_) | Origin::Zones(_) => Span::from_secs(60),
    };
    let after = |key: &str, usual: Persistence| match view {
        Some((view, _)) => view.persistence(key),
        None => Some(usual),
    };
    let bearing = matches!(measure, Measure::Bearing(_));
    let at_least_ms2 = match watch.origin {
        Origin::Written(written) => written
            .view
            .number("at_least_ms2")
            .or(bearing.then_some(0.0)),
        Origin::Bearing => Some(BEARING_LEAST_MS2),
        Origin::Zones(_) => None,
    };
    let spec = WatchSpec {
        name: watch.name.clone(),
        point: index,
        measure,
        quantity,
        limits,
        at_least_ms2,
        alert_after: after("alert_after", Persistence::Time(usual_after))?,
        danger_after: after("danger_after", Persistence::Time(Span::from_secs(30)))?,
        clear_after: after(
            "clear_after",
            Persistence::Time(usual_after.max(Span::from_secs(300))),
        )?,
        source,
    };
    WatchPlan::new(spec, point.id.as_str()).map_err(told).ok()
}

impl<'t> Origin<'_, 't> {
    /// The table and key path a fault of the watch is told at.
    pub(crate) fn table(&self) -> Option<(View<'t>, &str)> {
        match self {
            Self::Written(written) => Some((written.view, written.path.as_str())),
            Self::Zones(_) | Self::Bearing => None,
        }
    }
}

/// Tells site watches that name what is not there, or that watch nothing.
pub(crate) fn all_used(wide: &[Written<'_>], made: &[Made<'_>], gather: &mut Gather<'_>) {
    for watch in wide {
        used(watch, made, gather);
    }
    for asset in made {
        for watch in asset
            .written
            .iter()
            .filter(|watch| watch.rank >= Rank::Asset)
        {
            used(watch, std::slice::from_ref(asset), gather);
        }
    }
}

fn used(watch: &Written<'_>, made: &[Made<'_>], gather: &mut Gather<'_>) {
    let ids = made.iter().map(|asset| asset.id.as_str());
    let mut named = true;
    if watch.rank < Rank::Asset {
        for (name, place) in &watch.assets {
            if ids.clone().all(|id| id != name) {
                let allowed = suggest(name, ids.clone(), "the id of an asset");
                gather.add(
                    Code::NotThere,
                    *place,
                    &join(&watch.path, "assets"),
                    format!("{name:?}"),
                    allowed,
                );
                named = false;
            }
        }
    }
    let meant = || {
        made.iter().filter(|asset| {
            watch.assets.is_empty() || watch.assets.iter().any(|(n, _)| n == asset.id.as_str())
        })
    };
    let points = || meant().flat_map(|asset| asset.points.iter().map(move |point| (asset, point)));
    if watch.rank != Rank::Point {
        for (name, place) in &watch.points {
            let ids = points().map(|(_, point)| point.id.as_str());
            if ids.clone().all(|id| id != name) {
                let allowed = suggest(name, ids, "the id of a point");
                gather.add(
                    Code::NotThere,
                    *place,
                    &join(&watch.path, "points"),
                    format!("{name:?}"),
                    allowed,
                );
                named = false;
            }
        }
    }
    let watched = points().any(|(asset, point)| {
        watch.may_stand_at(point)
            && watch.selects(asset.id.as_str(), point.id.as_str())
            && has(point, &watch.measure)
    });
    if named && !watched {
        let allowed = match &watch.measure {
            MeasureName::Band(name) => {
                let bands = points()
                    .flat_map(|(_, point)| point.bands.iter().map(|(band, _)| band.as_str()));
                suggest(name, bands, "the name of a band that a point it is for has")
            }
            MeasureName::Bearing(_) | MeasureName::AnyBearing => {
                "a point it is for that has a bearing table".into()
            }
            MeasureName::Plain(..) => "at least one point it is for".into(),
        };
        let place = watch.view.place_of("measure");
        gather.add(
            Code::NotThere,
            place,
            &join(&watch.path, "measure"),
            gather.written(place),
            allowed,
        );
    }
}
