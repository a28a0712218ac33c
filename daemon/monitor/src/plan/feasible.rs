//! What a sensor, rate, frame and reading can answer at all, at every speed of the asset.
//!
//! In: an asset whose points and watches are sound by themselves. Out: one fault for each answer that
//! cannot be had, with what would do instead. What depends on the sample rate is judged only where the
//! rate is declared; elsewhere the first block tells it and the analysis says what it cannot resolve.
//! Checked by `tests/check.rs`: `what_cannot_work_is_refused_with_what_would_do`; the noise by the test here.

use alloc::{format, string::String, vec::Vec};

use super::fault::{Code, Part, PlanFault};
use super::{AssetSpec, BandPlan, Edges, Measure, PointPlan, PointSpec, Quantity, Race, WatchPlan};

/// Fewest spectral lines between 0 Hz and a bearing line: with fewer no floor is left beside it to stand over.
pub const LEAST_LINE_BINS: f64 = 13.0;
/// Fewest spectral lines a band spans: the main lobe of the Hann window.
const LEAST_BAND_BINS: f64 = 4.0;
/// Fewest spectral lines the envelope band spans.
const LEAST_ENVELOPE_BINS: f64 = 32.0;
/// Lines of a family that a bearing's defect must show.
const LEAST_HARMONICS: f64 = 2.0;
/// A limit is at least so many times what the sensor's noise reads.
pub const NOISE_MARGIN: f64 = 3.0;
/// Periods of the lowest velocity that a reading holds (common practice, no source).
const LEAST_PERIODS: f64 = 4.0;

/// Velocity that white acceleration noise of `ug_rthz` reads between two frequencies, mm/s rms.
///
/// n/(2 pi) sqrt(1/f1 - 1/f2), from the integral of (n / 2 pi f)^2; g = 9.80665 m/s2.
pub fn velocity_noise_mm_s(ug_rthz: f64, from_hz: f64, to_hz: f64) -> f64 {
    density_ms2(ug_rthz) * 1e3 / core::f64::consts::TAU
        * (1.0 / from_hz - 1.0 / to_hz).max(0.0).sqrt()
}

/// Acceleration that white noise of `ug_rthz` reads in a band `width_hz` wide, m/s2 rms.
pub fn acceleration_noise_ms2(ug_rthz: f64, width_hz: f64) -> f64 {
    density_ms2(ug_rthz) * width_hz.max(0.0).sqrt()
}

fn density_ms2(ug_rthz: f64) -> f64 {
    ug_rthz * 1e-6 * humward_signal::units::STANDARD_GRAVITY
}

/// The edges of a band at a shaft speed, Hz.
pub fn band_hz(edges: Edges, rpm: f64) -> (f64, f64) {
    match edges {
        Edges::Hz(low, high) => (low, high),
        Edges::Orders(low, high) => (low * rpm / 60.0, high * rpm / 60.0),
    }
}

/// A race's order of the shaft speed.
pub const fn race_order(orders: &humward_signal::bearing::BearingOrders, race: Race) -> f64 {
    match race {
        Race::Outer => orders.outer,
        Race::Inner => orders.inner,
        Race::Element => orders.element,
        Race::Cage => orders.cage,
    }
}

/// The smallest power of two of samples in which a line at `hz` has [`LEAST_LINE_BINS`] below it; `None` beyond 65536.
pub fn frame_for_line(hz: f64, rate_hz: f64) -> Option<usize> {
    (12..=16)
        .map(|power| 1_usize << power)
        .find(|&frame| hz * frame as f64 / rate_hz >= LEAST_LINE_BINS)
}

/// Every answer that cannot be had.
pub(super) fn faults(spec: &AssetSpec) -> Vec<PlanFault> {
    let mut faults = Vec::new();
    for (index, point) in spec.points.iter().enumerate() {
        point_faults(spec, index, point.spec(), &mut faults);
    }
    for (index, watch) in spec.watches.iter().enumerate() {
        match spec.points.get(watch.spec().point).map(PointPlan::spec) {
            Some(point) => watch_faults(spec, index, watch, point, &mut faults),
            None => faults.push(PlanFault {
                code: Code::NotThere,
                part: Part::Watch(index),
                key: "points",
                read: format!("point number {}", watch.spec().point),
                allowed: format!("one of the asset's {} points", spec.points.len()),
            }),
        }
    }
    faults
}

fn cannot(part: Part, key: &'static str, read: String, allowed: String) -> PlanFault {
    PlanFault {
        code: Code::CannotResolve,
        part,
        key,
        read,
        allowed,
    }
}

fn point_faults(spec: &AssetSpec, index: usize, point: &PointSpec, faults: &mut Vec<PlanFault>) {
    let seconds = spec.reading_every.secs();
    let least = LEAST_PERIODS / point.velocity_from_hz;
    if seconds < least {
        let allowed = format!(
            "at least {least} s, {LEAST_PERIODS} periods of velocity_from_hz = {}",
            point.velocity_from_hz
        );
        faults.push(cannot(
            Part::Own,
            "reading_every",
            format!("{seconds} s"),
            allowed,
        ));
    }
    let Some(rate) = point.rate_hz else { return };
    if seconds * rate < point.frame as f64 {
        let least = point.frame as f64 / rate;
        let allowed = format!(
            "at least {least:.3} s, one frame of {} samples at {rate} samples/s",
            point.frame
        );
        faults.push(cannot(
            Part::Own,
            "reading_every",
            format!("{seconds} s"),
            allowed,
        ));
    }
    let resolution = rate / point.frame as f64;
    if let Some((low, high)) = point.envelope_hz
        && high - low < LEAST_ENVELOPE_BINS * resolution
    {
        faults.push(cannot(
            Part::Point(index),
            "envelope_hz",
            format!("[{low}, {high}]"),
            format!(
                "at least {:.1} Hz wide, {LEAST_ENVELOPE_BINS} spectral lines",
                LEAST_ENVELOPE_BINS * resolution
            ),
        ));
    }
    for (number, band) in point.bands.iter().enumerate() {
        let part = Part::Band(index, number);
        let key = match band.spec().edges {
            Edges::Hz(..) => "hz",
            Edges::Orders(..) => "orders",
        };
        let (low, high) = band_hz(band.spec().edges, spec.speed.lowest);
        if high - low < LEAST_BAND_BINS * resolution {
            faults.push(cannot(
                part,
                key,
                format!("{:.2} Hz wide at {} r/min", high - low, spec.speed.lowest),
                format!(
                    "at least {:.2} Hz, 4 spectral lines; a longer frame would do",
                    LEAST_BAND_BINS * resolution
                ),
            ));
        }
        let (_, high) = band_hz(band.spec().edges, spec.speed.highest);
        if high > rate / 2.0 {
            faults.push(cannot(
                part,
                key,
                format!("up to {high:.1} Hz at {} r/min", spec.speed.highest),
                format!(
                    "up to half the rate, {} Hz; a higher rate would do",
                    rate / 2.0
                ),
            ));
        }
    }
}

fn watch_faults(
    spec: &AssetSpec,
    index: usize,
    watch: &WatchPlan,
    point: &PointSpec,
    faults: &mut Vec<PlanFault>,
) {
    let part = Part::Watch(index);
    match watch.spec().measure {
        Measure::Bearing(race) => bearing_faults(spec, part, race, point, faults),
        Measure::Band(number) if point.bands.get(usize::from(number)).is_none() => {
            faults.push(PlanFault {
                code: Code::NotThere,
                part,
                key: "measure",
                read: format!("band number {number}"),
                allowed: format!("one of the point's {} bands", point.bands.len()),
            })
        }
        Measure::HighBandRms => {
            if let Some(rate) = point.rate_hz.filter(|rate| rate / 2.56 < 2000.0) {
                let allowed = "a rate of at least 5120 samples/s, so that the band reaches from 1000 to 2000 Hz".into();
                faults.push(cannot(
                    part,
                    "measure",
                    format!("high_band_rms at {rate} samples/s"),
                    allowed,
                ));
            }
        }
        Measure::VelocityRms
        | Measure::VelocityPeak
        | Measure::AccelerationRms
        | Measure::AccelerationPeak
        | Measure::Crest
        | Measure::Kurtosis
        | Measure::Band(_) => {}
    }
    let limits = watch.spec().limits;
    let (key, limit) = match (limits.alert(), limits.danger()) {
        (Some(alert), _) => ("alert", alert.value()),
        (None, Some(danger)) => ("danger", danger.value()),
        (None, None) => return,
    };
    if let Some(noise) = noise(spec, watch.spec().measure, point)
        && limit < NOISE_MARGIN * noise
    {
        faults.push(PlanFault {
            code: Code::BelowNoise,
            part,
            key,
            read: format!("{limit}"),
            allowed: format!(
                "at least {:.3} {}, {NOISE_MARGIN} x the {noise:.3} that the sensor's own noise reads (noise_ug_rthz = {})",
                NOISE_MARGIN * noise,
                watch.spec().quantity.unit(),
                point.noise_ug_rthz.unwrap_or_default(),
            ),
        });
    }
}

fn bearing_faults(
    spec: &AssetSpec,
    part: Part,
    race: Race,
    point: &PointSpec,
    faults: &mut Vec<PlanFault>,
) {
    let (Some(orders), Some((low, high))) = (&point.bearing, point.envelope_hz) else {
        faults.push(PlanFault {
            code: Code::NotThere,
            part,
            key: "measure",
            read: format!("bearing.{}", race.text()),
            allowed: "a point with a bearing and an envelope band".into(),
        });
        return;
    };
    let order = race_order(orders, race);
    let lowest = order * spec.speed.lowest / 60.0;
    if let Some(rate) = point.rate_hz {
        let resolution = rate / point.frame as f64;
        if lowest < LEAST_LINE_BINS * resolution {
            let remedy = frame_for_line(lowest, rate).map_or_else(
                || "no frame does at this rate; leave the line out".into(),
                |f| format!("frame = {f} would do"),
            );
            faults.push(cannot(
                part,
                "measure",
                format!(
                    "{} line at {lowest:.2} Hz, {:.1} spectral lines of {resolution:.3} Hz from 0",
                    race.text(),
                    lowest / resolution
                ),
                format!("at least {LEAST_LINE_BINS} spectral lines from 0 Hz; {remedy}"),
            ));
        }
    }
    let highest = LEAST_HARMONICS * order * spec.speed.highest / 60.0;
    let reach = (high - low) / 2.0;
    if highest > reach {
        faults.push(cannot(
            part,
            "measure",
            format!("{} line and its second harmonic, {highest:.1} Hz at {} r/min", race.text(), spec.speed.highest),
            format!("up to {reach} Hz, half the width of envelope_hz; a band at least {:.0} Hz wide would do", 2.0 * highest),
        ));
    }
}

/// What the sensor's noise reads in a measure, in its unit; `None` where that is not known.
fn noise(spec: &AssetSpec, measure: Measure, point: &PointSpec) -> Option<f64> {
    let ug = point.noise_ug_rthz?;
    match measure {
        Measure::VelocityRms | Measure::VelocityPeak => {
            Some(velocity_noise_mm_s(ug, point.velocity_from_hz, 1000.0))
        }
        Measure::AccelerationRms | Measure::AccelerationPeak => point
            .rate_hz
            .map(|rate| acceleration_noise_ms2(ug, rate / 2.0)),
        Measure::HighBandRms => point
            .rate_hz
            .map(|rate| acceleration_noise_ms2(ug, (rate / 2.56).min(1e4) - 1000.0)),
        Measure::Band(number) => {
            let band = point.bands.get(usize::from(number)).map(BandPlan::spec)?;
            let (low, high) = band_hz(band.edges, spec.speed.lowest);
            match band.quantity {
                Quantity::VelocityRms | Quantity::VelocityPeak => {
                    Some(velocity_noise_mm_s(ug, low, high))
                }
                Quantity::AccelerationRms | Quantity::AccelerationPeak => {
                    Some(acceleration_noise_ms2(ug, high - low))
                }
                Quantity::Ratio | Quantity::Decibel => None,
            }
        }
        Measure::Crest | Measure::Kurtosis | Measure::Bearing(_) => None,
    }
}

#[cfg(test)]
mod tests {
    use super::{acceleration_noise_ms2, frame_for_line, velocity_noise_mm_s};

    /// Figures `noise.vel.100ug.10Hz` and its kin: n/(2 pi) sqrt(1/f1 - 1/f2), re-evaluated by an
    /// independent script; `noise.acc.100ug_10k`: 100 ug/sqrt(Hz) over 10 kHz is 10 mg.
    #[test]
    fn noise_of_a_sensor_reads_what_the_formula_says_within_0_2_percent() {
        for (ug, from, expected) in [
            (100.0, 10.0, 0.04911),
            (100.0, 2.0, 0.11025),
            (25.0, 10.0, 0.012277),
            (1000.0, 10.0, 0.4911),
        ] {
            let read = velocity_noise_mm_s(ug, from, 1000.0);
            assert!(
                (read / expected - 1.0).abs() < 0.002,
                "{ug} ug from {from} Hz: {read}, not {expected}"
            );
        }
        assert!((acceleration_noise_ms2(100.0, 1e4) / 9.80665 - 0.010).abs() < 1e-9);
    }

    #[test]
    fn the_frame_proposed_leaves_thirteen_lines_below() {
        assert_eq!(frame_for_line(11.9, 12_000.0), Some(16_384));
        assert_eq!(frame_for_line(105.0, 12_000.0), Some(4096));
        assert_eq!(frame_for_line(0.5, 12_000.0), None);
    }
}
