//! The resolved plan in words: what each point can see, and what is watched with which limits.
//!
//! Frequencies are at nominal speed, Hz. What depends on a sample rate that is not declared is told
//! as such, with the key that would let it be told.

use std::io::{self, Write};

use humward_monitor::plan::{
    AssetPlan, Edges, Measure, PointPlan, PointSpec, Quantity, Race, StartingRule, WatchPlan,
    ZoneLimits, band_hz, race_order, velocity_noise_mm_s,
};
use humward_signal::lowband;

use crate::config::{Feed, Loaded};

/// Upper edge of the velocity band, Hz.
const VELOCITY_TO_HZ: f64 = 1000.0;

/// Writes the whole plan.
pub(super) fn write(loaded: &Loaded, out: &mut dyn Write) -> io::Result<()> {
    let (gateway, broker) = (loaded.gateway(), loaded.broker());
    let assets: usize = loaded
        .groups()
        .iter()
        .map(|group| group.assets().len())
        .sum();
    writeln!(
        out,
        "site {}, gateway {}: assets {assets}, groups {}, configuration {}",
        loaded.site(),
        gateway.id(),
        loaded.groups().len(),
        loaded.hash()
    )?;
    writeln!(
        out,
        "broker {}:{}{}, topics under {}",
        broker.host(),
        broker.port(),
        if broker.tls() { " with TLS" } else { "" },
        loaded.topics().prefix()
    )?;
    let commands = if loaded.commands().is_empty() {
        "none".to_owned()
    } else {
        loaded.commands().join(", ")
    };
    writeln!(out, "commands obeyed: {commands}")?;
    for group in loaded.groups() {
        for asset in group.assets() {
            writeln!(out)?;
            let shared = if group.assets().len() > 1 {
                format!(", group {}", group.id())
            } else {
                String::new()
            };
            write_asset(loaded, asset, &shared, out)?;
        }
    }
    if !loaded.notes().is_empty() {
        writeln!(out, "\nnot watched:")?;
        for note in loaded.notes() {
            writeln!(out, "  {note}")?;
        }
    }
    Ok(())
}

/// Writes a zone class on a line.
pub(super) fn write_zone(zone: &ZoneLimits, out: &mut dyn Write) -> io::Result<()> {
    let [ab, bc, cd] = zone.borders();
    writeln!(
        out,
        "  zones {}: A to {ab}, B to {bc}, C to {cd} mm/s rms, D above ({})",
        zone.class(),
        zone.source()
    )
}

fn write_asset(
    loaded: &Loaded,
    asset: &AssetPlan,
    shared: &str,
    out: &mut dyn Write,
) -> io::Result<()> {
    let spec = asset.spec();
    let speed = spec.speed;
    let range = if speed.lowest < speed.highest {
        format!(
            "{} to {} r/min, nominal {}",
            speed.lowest, speed.highest, speed.nominal
        )
    } else {
        format!("{} r/min", speed.nominal)
    };
    writeln!(out, "asset {} ({}){shared}: {range}", spec.id, spec.name)?;
    writeln!(
        out,
        "  a reading every {} s, a status every {} s, a sensor alarm after {} s",
        spec.reading_every.secs(),
        spec.status_every.secs(),
        spec.sensor_after.secs()
    )?;
    writeln!(
        out,
        "  running from {} r/min (a speed counts for {} s), without a speed from {} mm/s rms",
        figure(spec.running.from_rpm),
        spec.running.speed_valid.secs(),
        spec.running.from_mm_s
    )?;
    if let Some(signal) = &spec.run_signal {
        writeln!(
            out,
            "  process value {signal} comes first: 0.5 or more means running, after {} s of starting while no speed is reported",
            spec.starting.signal_for.secs()
        )?;
    }
    if let Some(zones) = &spec.zones {
        write_zone(zones, out)?;
    }
    for route in loaded.routes() {
        let (of, what) = match route.feed() {
            Feed::Block { asset, source } => (asset, format!("blocks of {source}")),
            Feed::Speed { asset } => (asset, "speed".to_owned()),
            Feed::Process { asset } => (asset, "process values".to_owned()),
        };
        if of == asset.id() {
            writeln!(out, "  {what} on {}", route.topic())?;
        }
    }
    for (index, point) in spec.points.iter().enumerate() {
        write_point(asset, index, point, out)?;
    }
    Ok(())
}

fn write_point(
    asset: &AssetPlan,
    index: usize,
    point: &PointPlan,
    out: &mut dyn Write,
) -> io::Result<()> {
    let (spec, nominal) = (point.spec(), asset.spec().speed.nominal);
    writeln!(
        out,
        "  point {} ({}): source {}, channel {}",
        spec.id, spec.name, spec.source, spec.channel
    )?;
    match spec.rate_hz {
        Some(rate) => {
            let resolution = rate / spec.frame as f64;
            writeln!(
                out,
                "    {rate} samples/s, frame {}: {} s, spectral lines {} Hz apart",
                spec.frame,
                figure(spec.frame as f64 / rate),
                figure(resolution)
            )?;
            if let Some(factor) = lowband::factor(spec.frame, rate) {
                writeln!(
                    out,
                    "    low band: every {factor}th sample, {} samples/s",
                    figure(rate / factor as f64)
                )?;
            }
        }
        None => writeln!(
            out,
            "    rate not stated: the first block tells; resolution, low band and what can be resolved are not checked (rate_hz)"
        )?,
    }
    write!(
        out,
        "    velocity {} to {VELOCITY_TO_HZ} Hz",
        figure(spec.velocity_from_hz)
    )?;
    match spec.noise_ug_rthz {
        Some(noise) => writeln!(
            out,
            ", the sensor's noise reads {} mm/s rms",
            figure(velocity_noise_mm_s(
                noise,
                spec.velocity_from_hz,
                VELOCITY_TO_HZ
            ))
        )?,
        None => writeln!(out)?,
    }
    for band in &spec.bands {
        let band = band.spec();
        let (low, high) = band_hz(band.edges, nominal);
        let orders = match band.edges {
            Edges::Hz(..) => String::new(),
            Edges::Orders(low, high) => format!(" ({low} to {high} x shaft, at {nominal} r/min)"),
        };
        writeln!(
            out,
            "    band {}: {} to {} Hz{orders}, {}",
            band.name,
            figure(low),
            figure(high),
            band.quantity.unit()
        )?;
    }
    write_bearing(spec, nominal, out)?;
    for watch in asset
        .spec()
        .watches
        .iter()
        .filter(|watch| watch.spec().point == index)
    {
        write_watch(watch, spec, &asset.spec().starting, out)?;
    }
    Ok(())
}

fn write_bearing(spec: &PointSpec, nominal: f64, out: &mut dyn Write) -> io::Result<()> {
    if let Some(orders) = &spec.bearing {
        let lines: Vec<String> = Race::ALL
            .into_iter()
            .map(|race| {
                format!(
                    "{} {}",
                    race.text(),
                    figure(race_order(orders, race) * nominal / 60.0)
                )
            })
            .collect();
        writeln!(
            out,
            "    bearing lines at {nominal} r/min, Hz: {}; searched within 2 %",
            lines.join(", ")
        )?;
    }
    if let Some((low, high)) = spec.envelope_hz {
        let resolution = spec.rate_hz.map_or_else(String::new, |rate| {
            format!(", lines {} Hz apart", figure(rate / spec.frame as f64))
        });
        writeln!(
            out,
            "    envelope of {} to {} Hz, lines up to {} Hz{resolution}",
            figure(low),
            figure(high),
            figure((high - low) / 2.0)
        )?;
    }
    Ok(())
}

fn write_watch(
    watch: &WatchPlan,
    point: &PointSpec,
    starting: &StartingRule,
    out: &mut dyn Write,
) -> io::Result<()> {
    let spec = watch.spec();
    let measure = match spec.measure {
        Measure::VelocityRms => "velocity_rms".to_owned(),
        Measure::VelocityPeak => "velocity_peak".to_owned(),
        Measure::AccelerationRms => "acceleration_rms".to_owned(),
        Measure::AccelerationPeak => "acceleration_peak".to_owned(),
        Measure::Crest => "crest".to_owned(),
        Measure::Kurtosis => "kurtosis".to_owned(),
        Measure::HighBandRms => "high_band_rms".to_owned(),
        Measure::Band(number) => {
            let name = point
                .bands
                .get(usize::from(number))
                .map_or("?", |band| band.spec().name.as_str());
            format!("band.{name}")
        }
        Measure::Bearing(race) => format!("bearing.{}", race.text()),
    };
    let unit = match spec.quantity {
        Quantity::Ratio => String::new(),
        Quantity::VelocityRms
        | Quantity::VelocityPeak
        | Quantity::AccelerationRms
        | Quantity::AccelerationPeak
        | Quantity::Decibel => format!(" {}", spec.quantity.unit()),
    };
    write!(out, "    watch {} ({measure}):", watch.full_name())?;
    let limits = [
        ("alert", spec.limits.alert(), spec.alert_after),
        ("danger", spec.limits.danger(), spec.danger_after),
    ];
    for (name, limit, after) in limits {
        if let Some(limit) = limit {
            write!(out, " {name} {}{unit} after {after},", limit.value())?;
        }
    }
    if let Some(armed) = starting.armed(spec) {
        let after = starting.after.secs();
        write!(
            out,
            " while starting {}{unit} after {after} s,",
            figure(armed)
        )?;
    }
    write!(
        out,
        " back {}{unit} below for {}",
        figure(spec.limits.deadband()),
        spec.clear_after
    )?;
    if let Some(least) = spec.at_least_ms2 {
        write!(out, ", from {least} m/s2 rms")?;
    }
    if !spec.source.is_empty() {
        write!(out, " [{}]", spec.source)?;
    }
    writeln!(out)
}

/// A number with four significant digits, without trailing zeros.
fn figure(value: f64) -> String {
    if value == 0.0 || !value.is_finite() {
        return format!("{value}");
    }
    let magnitude = value.abs().log10().floor() as i32;
    let decimals = usize::try_from(3 - magnitude).unwrap_or(0);
    let text = format!("{value:.decimals$}");
    if text.contains('.') {
        text.trim_end_matches('0').trim_end_matches('.').to_owned()
    } else {
        text
    }
}

#[cfg(test)]
mod tests {
    use super::figure;

    #[test]
    fn figures_have_four_significant_digits_and_no_idle_zeros() {
        let told: Vec<String> = [
            0.0,
            1.464_843_75,
            12_000.0,
            0.049_108,
            105.904,
            10.0,
            88_541.3,
        ]
        .into_iter()
        .map(figure)
        .collect();
        assert_eq!(
            told,
            ["0", "1.465", "12000", "0.04911", "105.9", "10", "88541"]
        );
    }
}
