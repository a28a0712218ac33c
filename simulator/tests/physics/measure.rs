//! What the tests measure with: steady machines, samples of a wave, one line by its own definition.

use std::f64::consts::TAU;
use std::sync::Arc;

use humward_sim::fault::{Fault, Seat};
use humward_sim::machine::Path;
use humward_sim::random::Draw;
use humward_sim::scenario::{Asset, Scenario, parse};
use humward_sim::wave::{State, Stretch, TICK_S, Tick, Wave};
use num_complex::Complex64;

/// A shaft whose speed goes from `from_hz` by `rise` Hz/s, at 1x nominal `nominal_hz`, rated load, with power from a 50 Hz supply.
pub(crate) fn state(at_s: f64, from_hz: f64, rise: f64, nominal_hz: f64) -> State {
    State {
        at_s,
        turns: from_hz * at_s + rise * at_s * at_s / 2.0,
        shaft_hz: from_hz + rise * at_s,
        nominal_hz,
        load: 1.0,
        powered: true,
        line_turns: 50.0 * at_s,
        line_hz: 50.0,
    }
}

/// `seconds` of a wave at `rate_hz` while the shaft goes from `from_hz` by `rise` Hz/s.
pub(crate) fn samples(
    wave: &mut dyn Wave,
    rate_hz: f64,
    seconds: f64,
    from_hz: f64,
    rise: f64,
) -> Vec<f64> {
    let mut all = Vec::new();
    let ticks = (seconds / TICK_S).round() as u64;
    let mut taken = 0_u64;
    for k in 0..ticks {
        let (start, end) = (k as f64 * TICK_S, (k + 1) as f64 * TICK_S);
        let nominal = from_hz.max(1e-9);
        let tick = Tick {
            from: state(start, from_hz, rise, nominal),
            to: state(end, from_hz, rise, nominal),
        };
        let until = (end * rate_hz).ceil() as u64;
        let count = (until - taken) as usize;
        let mut out = vec![0.0; count];
        let stretch = Stretch {
            first_s: taken as f64 / rate_hz,
            step_s: 1.0 / rate_hz,
            count,
        };
        wave.add(&tick, stretch, &mut out);
        all.extend(out);
        taken = until;
    }
    all
}

/// Peak amplitude and phase of the line at `hz`: sum of Hann-weighted samples against the line itself.
pub(crate) fn line(samples: &[f64], rate_hz: f64, hz: f64) -> Complex64 {
    let n = samples.len() as f64;
    let mut sum = Complex64::ZERO;
    for (k, x) in samples.iter().enumerate() {
        let hann = 1.0 - (TAU * k as f64 / n).cos();
        sum += Complex64::from_polar(x * hann, -TAU * hz * k as f64 / rate_hz);
    }
    sum * (2.0 / n)
}

/// Velocity of an acceleration line, mm/s rms.
pub(crate) fn velocity_mm_s(peak_ms2: f64, hz: f64) -> f64 {
    peak_ms2 / (TAU * hz) / 2_f64.sqrt() * 1e3
}

pub(crate) fn mean_square(samples: &[f64]) -> f64 {
    samples.iter().map(|x| x * x).sum::<f64>() / samples.len() as f64
}

/// A scenario of one asset: `asset` are its own lines, `fault` those of one fault.
pub(crate) fn scenario(asset: &str, point: &str, fault: &str) -> Scenario {
    let fault = if fault.is_empty() {
        String::new()
    } else {
        format!("[[asset.fault]]\n{fault}\n")
    };
    let text = format!(
        "about = \"a test\"\nsite = \"harbour\"\nseed = 3\nduration = \"1min\"\n[[asset]]\nid = \"P-1\"\n{asset}\n\
         [[asset.point]]\nid = \"drive-end\"\nrate_hz = 12800\n{point}\n{fault}"
    );
    parse("test", &text).unwrap_or_else(|fault| panic!("{fault}\n{text}"))
}

/// The waves of the first fault of the first asset at its first point, through a path that changes nothing.
pub(crate) fn waves(asset: &Asset, fault: &Fault, path: Path) -> Vec<Box<dyn Wave>> {
    fault.kind().waves(&Seat {
        asset,
        point: &asset.points[0],
        path: Arc::new(path),
        impact_gain: 1.0,
        line_hz: 50.0,
        draw: Draw::new(3).part("P-1").part("fault 0"),
        local: Draw::new(3).part("P-1").part("drive-end").part("fault 0"),
    })
}
