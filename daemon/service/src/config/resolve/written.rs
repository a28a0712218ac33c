//! Watches as they are written, for the site, an asset or a point, before they meet a point.

use humward_monitor::plan::Race;

use super::super::Code;
use super::super::gather::Gather;
use super::super::measure::MeasureName;
use super::super::source::Place;
use super::super::tables::WATCH;
use super::super::verify::{item_path, join};
use super::super::view::View;
use super::asset::Made;
use super::point::PointMade;
use super::suggest;

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
    pub(super) view: View<'t>,
    pub(super) path: String,
    pub(super) rank: Rank,
    /// The point it is written in, by its place; `None` for a wider one.
    pub(super) owner: Option<Place>,
    pub(super) measure: MeasureName,
    pub(super) name: String,
    pub(super) assets: Vec<(String, Place)>,
    pub(super) points: Vec<(String, Place)>,
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
    pub(super) fn selects(&self, asset: &str, point: &str) -> bool {
        let listed = |list: &[(String, Place)], id: &str| {
            list.is_empty() || list.iter().any(|(name, _)| name == id)
        };
        listed(&self.assets, asset) && listed(&self.points, point)
    }
}

/// Whether a point has a measure.
pub(super) fn has(point: &PointMade<'_>, measure: &MeasureName) -> bool {
    match measure {
        MeasureName::Plain(..) => true,
        MeasureName::Band(name) => point.bands.iter().any(|(band, _)| band == name),
        MeasureName::Bearing(_) | MeasureName::AnyBearing => point.has_bearing,
    }
}

/// Names with measures a written watch stands for: one, or four for any bearing part.
pub(super) fn expand(written: &Written<'_>) -> Vec<(String, MeasureName)> {
    match &written.measure {
        one @ (MeasureName::Plain(..) | MeasureName::Band(_) | MeasureName::Bearing(_)) => {
            vec![(written.name.clone(), one.clone())]
        }
        MeasureName::AnyBearing => Race::ALL
            .into_iter()
            .map(|race| {
                (
                    format!("{}-{}", written.name, race.text()),
                    MeasureName::Bearing(race),
                )
            })
            .collect(),
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
