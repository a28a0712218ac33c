//! The compact whole of an asset as it is now.

use alloc::{string::String, vec::Vec};

use humward_wire::out::{
    Header, Instant, LastRunning, Loss, MAX_STATUS, Measured, Open, PointStatus, Quality, Severity,
    Standing, State, Status,
};

use super::{
    AssetJudge, Context, Operating,
    message::{running, sensor_watch, told_speed},
    words,
};
use crate::{
    plan::{Measure, Quantity, Race},
    reading::{Doubt, Reading, ShaftSpeed},
};

/// Readings a point may miss before its answers count as stale.
const STALE_READINGS: i64 = 3;

/// Makes the status of an asset.
pub(super) fn status(judge: &AssetJudge, context: Context<'_>) -> Status {
    let Context {
        identity,
        plan,
        arrival,
    } = context;
    let spec = plan.spec();
    let at = Instant(arrival.ns());
    let valid_for = spec
        .status_every
        .plus(spec.reading_every.times(STALE_READINGS));
    let open = open(judge, context);
    let runs = judge.running.state() == Operating::Running;
    let losses = judge.losses.iter().map(|(reason, count)| Loss {
        reason: reason.clone(),
        count: *count,
    });
    let status = Status {
        header: Header::new::<Status>(
            identity.gateway.clone(),
            identity.epoch,
            identity.site.clone(),
            Some(plan.id().clone()),
            at,
        ),
        asset_name: spec.name.clone(),
        valid_until: Instant(arrival.plus(valid_for).ns()),
        last_n: judge.n,
        open_count: u32::try_from(open.len()).unwrap_or(u32::MAX),
        open,
        running: running(judge, speed(judge, context)),
        last_running: if runs {
            None
        } else {
            last_running(judge, context)
        },
        judged_share_24h: judge
            .share
            .share(spec.points.len(), arrival.as_signal_time()),
        points: (0..spec.points.len())
            .map(|point| point_status(judge, context, point))
            .collect(),
        stale: stale(judge, context),
        losses: losses.collect(),
        truncated: false,
    };
    // Four points have MAX_STATUS; more points grow it in proportion.
    let most = MAX_STATUS.max(MAX_STATUS * spec.points.len() / 4);
    status.fit(most).0
}

fn open(judge: &AssetJudge, context: Context<'_>) -> Vec<Open> {
    let machine = judge
        .watches
        .iter()
        .zip(&context.plan.spec().watches)
        .filter_map(|(watch, plan)| {
            let open = watch.occurrence()?;
            let state = if open.held {
                State::Dsupr
            } else {
                State::Unack
            };
            Some(Open {
                occurrence: open.id.clone()?,
                watch: plan.full_name().into(),
                standing: Standing::new(state, watch.severity()),
                since: Instant(open.since.ns()),
            })
        });
    let sensors = judge
        .sensors
        .iter()
        .zip(&context.plan.spec().points)
        .filter_map(|(sensor, point)| {
            let open = sensor.open()?;
            Some(Open {
                occurrence: open.id.clone()?,
                watch: sensor_watch(point.id()),
                standing: Standing::new(State::Unack, Severity::Alert),
                since: Instant(open.since.ns()),
            })
        });
    let mut all: Vec<Open> = machine.chain(sensors).collect();
    all.sort_by(|a, b| {
        (b.standing.severity(), a.since, &a.watch).cmp(&(a.standing.severity(), b.since, &b.watch))
    });
    all
}

fn is_stale(judge: &AssetJudge, context: Context<'_>, reading: &Reading) -> bool {
    let length = reading.length().times(STALE_READINGS);
    !judge.link_up || context.arrival.since(reading.closed) >= length
}

fn quality(judge: &AssetJudge, context: Context<'_>, point: usize) -> Quality {
    match &judge.latest[point] {
        None => Quality::Missing,
        Some(reading) if is_stale(judge, context, reading) => Quality::Stale,
        Some(reading) if reading.doubts.is_a_bound() => Quality::LowerBound,
        Some(reading) if reading.doubts.iter().any(Doubt::is_instrument) => Quality::Doubtful,
        Some(_) if !judge.sensors[point].good() => Quality::Doubtful,
        Some(_) => Quality::Good,
    }
}

fn point_status(judge: &AssetJudge, context: Context<'_>, point: usize) -> PointStatus {
    let plan = context.plan.spec().points[point].spec();
    let quality = quality(judge, context, point);
    let latest = judge.latest[point].as_ref();
    let mut not_verified: Vec<String> = alloc::vec!["rate".into()];
    if latest.is_some_and(|reading| matches!(reading.speed, ShaftSpeed::Nominal(_))) {
        not_verified.push("speed".into());
    }
    PointStatus {
        point: plan.id.clone(),
        quality,
        age_s: latest.map(|reading| age_s(context, reading)),
        values: latest.map_or_else(Vec::new, |reading| values(reading, quality, None)),
        not_verified,
    }
}

/// Whole seconds since a reading closed.
fn age_s(context: Context<'_>, reading: &Reading) -> u32 {
    let age = context
        .arrival
        .ns()
        .saturating_sub(reading.closed.ns())
        .max(0)
        / 1_000_000_000;
    u32::try_from(age).unwrap_or(u32::MAX)
}

/// Velocity, high band and the strongest bearing line of a reading; named with the point when several are told together.
fn values(reading: &Reading, quality: Quality, point: Option<&str>) -> Vec<Measured> {
    let strongest = Race::ALL
        .into_iter()
        .filter(|race| reading.line(*race).is_some())
        .max_by(|a, b| {
            let db = |race: &Race| reading.line(*race).map_or(0.0, |line| line.db);
            db(a).total_cmp(&db(b))
        })
        .map(|race| (Measure::Bearing(race), Quantity::Decibel));
    let told = [
        (Measure::VelocityRms, Quantity::VelocityRms),
        (Measure::HighBandRms, Quantity::AccelerationRms),
    ];
    told.into_iter()
        .chain(strongest)
        .map(|(measure, quantity)| {
            let value = reading.value(measure);
            let key = words::key(measure);
            Measured {
                measure: point.map_or_else(|| key.into(), |point| alloc::format!("{key}.{point}")),
                value,
                unit: quantity.unit().into(),
                quality: if value.is_none() {
                    Quality::Missing
                } else {
                    quality
                },
            }
        })
        .collect()
}

fn last_running(judge: &AssetJudge, context: Context<'_>) -> Option<LastRunning> {
    let newest = judge
        .last_running
        .iter()
        .flatten()
        .max_by_key(|reading| reading.end)?;
    let points = judge.last_running.iter().zip(&context.plan.spec().points);
    let values = points.filter_map(|(reading, point)| {
        values(reading.as_ref()?, Quality::Stale, Some(point.id().as_str()))
            .into_iter()
            .next()
    });
    Some(LastRunning {
        at: Instant(newest.end.ns()),
        rpm: told_speed(newest.speed).0,
        values: values.collect(),
    })
}

/// Watches whose answer is old: their point has had no reading they could be judged on.
///
/// A machine that does not run steadily gives no answers; then any reading will do, the status says what it does.
fn stale(judge: &AssetJudge, context: Context<'_>) -> Vec<String> {
    let answers = match judge.running.state() {
        Operating::Stopped | Operating::Starting | Operating::Coasting => &judge.latest,
        Operating::Unknown | Operating::Running => &judge.last_running,
    };
    let watches = context.plan.spec().watches.iter();
    watches
        .filter(|watch| {
            let answer = answers[watch.spec().point].as_ref();
            answer.is_none_or(|reading| is_stale(judge, context, reading))
        })
        .map(|watch| watch.full_name().into())
        .collect()
}

/// The speed now: the one believed last while it is fresh, else the nominal one of a machine that runs.
fn speed(judge: &AssetJudge, context: Context<'_>) -> Option<ShaftSpeed> {
    let spec = context.plan.spec();
    let now = context.arrival.as_signal_time();
    let runs = judge.running.state() == Operating::Running;
    let nominal = runs.then_some(ShaftSpeed::Nominal(spec.speed.nominal));
    let believed = judge.running.rpm(now, spec.running.speed_valid);
    believed.map(ShaftSpeed::Reported).or(nominal)
}
