//! A point: its figures, bearing, bands and encoding.

use humward_monitor::plan::{
    BandPlan, BandSpec, Calibration, Edges, PlanFault, PointPlan, PointSpec, Quantity, SpeedRange,
};
use humward_signal::bearing::BearingOrders;
use humward_signal::units::g_to_m_s2;
use humward_wire::block::{Encoding, Unit};
use humward_wire::id::Id;

use super::super::Code;
use super::super::gather::Gather;
use super::super::tables::{BAND, BEARING, POINT};
use super::super::verify::{item_path, join};
use super::super::view::View;
use super::encoding;

/// Outer + inner may miss the whole number of rolling elements by so much (rounding of catalogues).
const SUM_RULE_TOLERANCE: f64 = 0.02;

/// A point as read, with what its watches and routes need even when its plan failed.
#[derive(Debug)]
pub(crate) struct PointMade<'t> {
    pub(crate) view: View<'t>,
    pub(crate) path: String,
    pub(crate) id: Id,
    pub(crate) source: Id,
    pub(crate) channel: u16,
    pub(crate) rate_hz: Option<f64>,
    pub(crate) encoding: Option<Encoding>,
    /// Names and quantities of its bands, sound or not.
    pub(crate) bands: Vec<(String, Quantity)>,
    /// Places of its bands, index by index of the plan's.
    pub(crate) band_views: Vec<(View<'t>, String)>,
    pub(crate) has_bearing: bool,
    pub(crate) plan: Option<PointPlan>,
}

/// Reads a point; `None` when its id is not known, once every other fault in it has been told.
pub(crate) fn read<'t>(
    view: View<'t>,
    path: &str,
    speed: Option<SpeedRange>,
    gather: &mut Gather<'_>,
) -> Option<PointMade<'t>> {
    let before = gather.faults.len();
    let known = view.id("id");
    let id = known.clone().or_else(|| Id::new("unnamed").ok())?;
    let source = view.id("source").unwrap_or_else(|| id.clone());
    let channel = u16::try_from(view.whole("channel").unwrap_or_default()).unwrap_or(u16::MAX);
    let rate_hz = view.number("rate_hz");
    let encoding = encoding::read(view, path, gather);
    let bearing = bearing(view, path, gather);
    let has_bearing = view.given("bearing");
    let mut made = PointMade {
        view,
        path: path.into(),
        id: id.clone(),
        source: source.clone(),
        channel,
        rate_hz,
        encoding,
        bands: Vec::new(),
        band_views: Vec::new(),
        has_bearing,
        plan: None,
    };
    let bands = bands(&mut made, gather);
    let calibration = calibration(view, path, gather);
    fits_encoding(&made, &calibration, gather);
    let usual_envelope = has_bearing.then(|| usual_envelope(rate_hz));
    let spec = PointSpec {
        name: view.text("name").unwrap_or_else(|| id.to_string()),
        id,
        source,
        channel,
        rate_hz,
        frame: usize::try_from(view.whole("frame").unwrap_or(8192)).unwrap_or(usize::MAX),
        calibration,
        range_ms2: view.number("range_g").map(g_to_m_s2),
        noise_ug_rthz: view.number("noise_ug_rthz"),
        velocity_from_hz: view
            .number("velocity_from_hz")
            .unwrap_or_else(|| usual_velocity_from(speed)),
        bearing,
        envelope_hz: view
            .numbers("envelope_hz")
            .map(|[low, high]| (low, high))
            .or(usual_envelope),
        bands,
    };
    let below = ["bearing", "encoding", "band"];
    let sound = !view.faulty() && !below.iter().any(|key| view.faulty_within(key));
    match PointPlan::new(spec) {
        Ok(plan) if gather.faults.len() == before && sound => made.plan = Some(plan),
        Ok(_) => {}
        Err(faults) => tell(view, path, faults, gather),
    }
    known.map(|_| made)
}

/// Adds the faults of a plan made from a table, each at its key, but for keys whose value is told already.
pub(crate) fn tell(view: View<'_>, path: &str, faults: Vec<PlanFault>, gather: &mut Gather<'_>) {
    for fault in faults {
        if !view.is_faulty(fault.key) {
            gather.add(
                fault.code.into(),
                view.place_of(fault.key),
                &join(path, fault.key),
                fault.read,
                fault.allowed,
            );
        }
    }
}

/// Where velocity begins: 10 Hz above 600 r/min of lowest speed, 2 Hz from 300, below that 0.4 of the
/// lowest shaft frequency but not under the 0.5 Hz of the lowest edge there is.
fn usual_velocity_from(speed: Option<SpeedRange>) -> f64 {
    match speed.map(|speed| speed.lowest) {
        Some(lowest) if lowest < 300.0 => (0.4 * lowest / 60.0).max(0.5),
        Some(lowest) if lowest <= 600.0 => 2.0,
        Some(_) | None => 10.0,
    }
}

/// Where the envelope is taken when nobody says: 2 kHz to 8 kHz or 0.4 of the rate (common practice,
/// no source); to 5 kHz while the rate is not stated.
fn usual_envelope(rate_hz: Option<f64>) -> (f64, f64) {
    (
        2000.0,
        rate_hz.map_or(5000.0, |rate| (0.4 * rate).min(8000.0)),
    )
}

fn calibration(view: View<'_>, path: &str, gather: &mut Gather<'_>) -> Calibration {
    match (view.number("millivolt_per_g"), view.number("count_per_g")) {
        (Some(_), Some(_)) => {
            let place = view.place_of("count_per_g");
            let allowed = "one of millivolt_per_g and count_per_g".into();
            gather.add(
                Code::Contradiction,
                place,
                &join(path, "count_per_g"),
                gather.written(place),
                allowed,
            );
            Calibration::FromUnit
        }
        (Some(millivolt), None) => Calibration::MillivoltPerG(millivolt),
        (None, Some(count)) => Calibration::CountPerG(count),
        (None, None) => Calibration::FromUnit,
    }
}

/// What a raw layout states must fit the point's channel, rate and sensitivity.
fn fits_encoding(made: &PointMade<'_>, calibration: &Calibration, gather: &mut Gather<'_>) {
    let Some(Encoding::Raw(layout)) = &made.encoding else {
        return;
    };
    let mut fault = |key: &str, allowed: String| {
        let place = made.view.place_of(key);
        let read = if made.view.given(key) {
            gather.written(place)
        } else {
            "nothing".into()
        };
        gather.add(
            Code::Contradiction,
            place,
            &join(&made.path, key),
            read,
            allowed,
        );
    };
    if made.channel >= layout.channels {
        fault(
            "channel",
            format!("below channels = {} of its raw layout", layout.channels),
        );
    }
    if made.rate_hz.is_some_and(|rate| rate != layout.rate_hz) {
        fault(
            "rate_hz",
            format!("the same as rate_hz = {} of its raw layout", layout.rate_hz),
        );
    }
    let needed = match (layout.unit, calibration) {
        (Unit::Millivolt, Calibration::FromUnit | Calibration::CountPerG(_)) => {
            Some("millivolt_per_g")
        }
        (Unit::Count, Calibration::FromUnit | Calibration::MillivoltPerG(_)) => Some("count_per_g"),
        (Unit::Millivolt | Unit::Count | Unit::G | Unit::MetrePerSecondSquared, _) => None,
    };
    if let Some(key) = needed {
        fault(
            key,
            format!("given, because its raw layout is in {}", layout.unit.text()),
        );
    }
}

fn bearing(point: View<'_>, path: &str, gather: &mut Gather<'_>) -> Option<BearingOrders> {
    let node = point.raw("bearing").filter(|node| node.table().is_some())?;
    let view = View::new(Some(node), &BEARING);
    let path = join(path, "bearing");
    if view.faulty() {
        return None;
    }
    let orders = ["outer", "inner", "element", "cage"];
    let geometry = ["balls", "ball_diameter_mm", "pitch_diameter_mm"];
    let some_orders = orders.iter().any(|key| view.given(key));
    let some_geometry = geometry.iter().any(|key| view.given(key)) || view.given("angle_deg");
    let allowed = || {
        "either outer, inner, element and cage, or balls, ball_diameter_mm and pitch_diameter_mm"
            .to_owned()
    };
    let needed: &[&str] = match (some_orders, some_geometry) {
        (true, false) => &orders,
        (false, true) => &geometry,
        (both, _) => {
            let code = if both {
                Code::Contradiction
            } else {
                Code::MissingKey
            };
            let read = if both {
                "multiples and geometry"
            } else {
                "neither multiples nor geometry"
            };
            gather.add(code, view.place(), &path, read.into(), allowed());
            return None;
        }
    };
    let missing: Vec<&str> = needed
        .iter()
        .copied()
        .filter(|key| !view.given(key))
        .collect();
    if !missing.is_empty() {
        gather.add(
            Code::MissingKey,
            view.place(),
            &path,
            format!("no {}", missing.join(", no ")),
            allowed(),
        );
        return None;
    }
    if some_geometry {
        let balls = u32::try_from(view.whole("balls")?).ok()?;
        let (ball, pitch) = (
            view.number("ball_diameter_mm")?,
            view.number("pitch_diameter_mm")?,
        );
        let angle = view.number("angle_deg").unwrap_or(0.0);
        return match BearingOrders::from_geometry(balls, ball, pitch, angle) {
            Ok(orders) => Some(orders),
            Err(fault) => {
                let read = format!(
                    "balls = {balls}, ball_diameter_mm = {ball}, pitch_diameter_mm = {pitch}, angle_deg = {angle}"
                );
                gather.add(
                    Code::OutOfRange,
                    view.place(),
                    &path,
                    read,
                    fault.to_string(),
                );
                None
            }
        };
    }
    let orders = BearingOrders {
        outer: view.number("outer")?,
        inner: view.number("inner")?,
        element: view.number("element")?,
        cage: view.number("cage")?,
    };
    if orders.sum_rule_error() > SUM_RULE_TOLERANCE {
        gather.add(
            Code::OutOfRange,
            view.place_of("outer"),
            &join(&path, "outer"),
            format!("outer + inner = {:.4}", orders.outer + orders.inner),
            format!("a whole number of rolling elements within {SUM_RULE_TOLERANCE}; one of the two is misprinted"),
        );
        return None;
    }
    Some(orders)
}

/// Reads the bands into `made`; returns the sound ones. A band that failed leaves its name, so that watches find it.
fn bands<'t>(made: &mut PointMade<'t>, gather: &mut Gather<'_>) -> Vec<BandPlan> {
    let mut plans = Vec::new();
    for (index, view) in made.view.tables_of("band", &BAND).into_iter().enumerate() {
        let Some(node) = view.node() else { continue };
        let path = item_path(&join(&made.path, "band"), index, node);
        let Some(name) = view.text("name") else {
            continue;
        };
        let quantity = match view.text("quantity").as_deref() {
            Some("velocity") => Quantity::VelocityRms,
            Some(_) => Quantity::AccelerationRms,
            None => continue,
        };
        if made.bands.iter().any(|(earlier, _)| *earlier == name) {
            let place = view.place_of("name");
            let allowed = "each band name once at its point".into();
            gather.add(
                Code::Twice,
                place,
                &join(&path, "name"),
                gather.written(place),
                allowed,
            );
        }
        made.bands.push((name.clone(), quantity));
        let edges = match (view.given("hz"), view.given("orders")) {
            (true, false) => view.numbers("hz").map(|[low, high]| Edges::Hz(low, high)),
            (false, true) => view
                .numbers("orders")
                .map(|[low, high]| Edges::Orders(low, high)),
            (both, _) => {
                let code = if both {
                    Code::Contradiction
                } else {
                    Code::MissingKey
                };
                let read = if both {
                    "hz and orders"
                } else {
                    "neither hz nor orders"
                };
                gather.add(
                    code,
                    view.place(),
                    &path,
                    read.into(),
                    "one of hz and orders".into(),
                );
                None
            }
        };
        let Some(edges) = edges else { continue };
        match BandPlan::new(BandSpec {
            name,
            edges,
            quantity,
        }) {
            Ok(plan) => {
                plans.push(plan);
                made.band_views.push((view, path));
            }
            Err(faults) => tell(view, &path, faults, gather),
        }
    }
    if made.bands.len() > 64 {
        let read = format!("{} bands", made.bands.len());
        gather.add(
            Code::OutOfRange,
            made.view.place_of("band"),
            &join(&made.path, "band"),
            read,
            "at most 64".into(),
        );
    }
    plans
}

/// The keys of a point; named here so that `asset` need not know the tables below it.
pub(crate) static KEYS: &super::super::keys::KeyTable = &POINT;
