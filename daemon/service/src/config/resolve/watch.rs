//! Which watches stand at a point, and their plans.
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
use super::super::verify::join;
use super::super::view::View;
use super::point::{PointMade, tell};
use super::written::{Written, expand, has};

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
impl Standing<'_, '_> {
    /// Where the `bearing.any` is written that this is one of.
    pub(crate) fn any_bearing(&self) -> Option<Place> {
        match self.origin {
            Origin::Written(written) if written.measure == MeasureName::AnyBearing => {
                Some(written.view.place())
            }
            Origin::Written(_) | Origin::Zones(_) | Origin::Bearing => None,
        }
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
