//! What a sensor makes of acceleration, against closed form.
#![expect(
    clippy::unwrap_used,
    reason = "the helpers of a test stop at its first surprise"
)]

use core::f64::consts::TAU;

use humward_sim::random::Draw;
use humward_sim::scenario::{Point, parse};
use humward_sim::sensor::Sensor;
use humward_sim::wave::{G0, Stretch};

/// A point with these lines beside its id.
fn point(lines: &str) -> Point {
    let text = format!(
        "about = \"a test\"\nsite = \"harbour\"\nseed = 1\nduration = \"1h\"\n\
         [[asset]]\nid = \"P-1\"\nrpm = 1482\n[[asset.point]]\nid = \"de\"\n{lines}"
    );
    let mut scenario = parse("test", &text).unwrap();
    scenario.assets.remove(0).points.remove(0)
}

/// What the sensor gives for `input(t)`, m/s², from 0 to `seconds`, in stretches of 10 ms.
fn sense(point: &Point, seconds: f64, input: impl Fn(f64) -> f64) -> Vec<f64> {
    let mut sensor = Sensor::new(point, &Draw::new(1));
    let step_s = 1.0 / point.true_rate_hz();
    let (mut all, total) = (Vec::new(), (seconds / step_s).round() as usize);
    let chunk = (0.01 / step_s).round() as usize;
    while all.len() < total {
        let stretch = Stretch {
            first_s: all.len() as f64 * step_s,
            step_s,
            count: chunk.min(total - all.len()),
        };
        let mut samples: Vec<f64> = (0..stretch.count).map(|i| input(stretch.at(i))).collect();
        sensor.sense(stretch, &mut samples);
        all.extend(samples);
    }
    all
}

fn mean(samples: &[f64]) -> f64 {
    samples.iter().sum::<f64>() / samples.len() as f64
}

/// Standard deviation.
fn sigma(samples: &[f64]) -> f64 {
    let middle = mean(samples);
    mean(
        &samples
            .iter()
            .map(|x| (x - middle).powi(2))
            .collect::<Vec<_>>(),
    )
    .sqrt()
}

/// Peak amplitude of the line at `hz`, for a whole number of cycles.
fn amplitude(samples: &[f64], hz: f64, rate_hz: f64) -> f64 {
    let (mut re, mut im) = (0.0, 0.0);
    for (index, x) in samples.iter().enumerate() {
        let angle = TAU * hz * index as f64 / rate_hz;
        re += x * angle.cos();
        im += x * angle.sin();
    }
    2.0 * re.hypot(im) / samples.len() as f64
}

const CLEAN: &str = "encoding = \"cbor-f32\"\nnoise_ug_rthz = 0\n";

/// 100 ug/rtHz over 10 kHz: 10 mg rms (one-sided density x bandwidth).
#[test]
fn a_hundred_micro_g_per_root_hertz_over_ten_kilohertz_are_ten_milli_g() {
    let point = point("rate_hz = 20000\nencoding = \"cbor-f32\"\nnoise_ug_rthz = 100");
    let samples = sense(&point, 20.0, |_| 0.0);
    let n = samples.len() as f64;
    let mg = 1e3 * sigma(&samples) / G0;
    assert!((mg / 10.0 - 1.0).abs() < 4.0 / (2.0 * n).sqrt(), "{mg} mg");
    assert!(
        mean(&samples).abs() < 4.0 * sigma(&samples) / n.sqrt(),
        "{}",
        mean(&samples)
    );
    // White: neighbours know nothing of each other.
    let together: f64 = samples.windows(2).map(|two| two[0] * two[1]).sum();
    let correlation = together / samples.iter().map(|x| x * x).sum::<f64>();
    assert!(correlation.abs() < 4.0 / n.sqrt(), "{correlation}");
}

/// 2 x 16 g / 2^16 = 0.48828125 mg.
#[test]
fn sixteen_bits_over_plus_minus_sixteen_g_count_in_steps_of_0_488_milli_g() {
    let point = point("noise_ug_rthz = 0");
    let mut samples = sense(&point, 1.0, |t| G0 * 0.05 * t);
    samples.sort_by(f64::total_cmp);
    samples.dedup();
    assert_eq!(samples.len(), 103, "0 to 50 mg in whole steps");
    for pair in samples.windows(2) {
        let mg = 1e3 * (pair[1] - pair[0]) / G0;
        assert!((mg - 0.488_281_25).abs() < 1e-6, "{mg} mg");
    }
}

#[test]
fn a_signal_beyond_the_range_stops_at_exactly_the_rail() {
    let loud = |t: f64| 100.0 * (TAU * 50.0 * t).sin();
    let range = 2.0 * G0;
    let floats = sense(&point(&format!("{CLEAN}range_g = 2")), 1.0, loud);
    let highest = floats.iter().copied().fold(f64::MIN, f64::max);
    let lowest = floats.iter().copied().fold(f64::MAX, f64::min);
    assert_eq!((highest, lowest), (range, -range));
    let codes = sense(&point("noise_ug_rthz = 0\nrange_g = 2"), 1.0, loud);
    let step = range / 32768.0;
    let highest = codes.iter().copied().fold(f64::MIN, f64::max) / step;
    let lowest = codes.iter().copied().fold(f64::MAX, f64::min) / step;
    assert!(
        (highest - 32767.0).abs() < 1e-6 && (lowest + 32768.0).abs() < 1e-6,
        "{lowest} to {highest}"
    );
    // |sin| is above 19.6133 / 100 in 1 - 2/pi asin(0.196133) of the time.
    let expected = 1.0 - (range / 100.0).asin() * 2.0 / core::f64::consts::PI;
    let clipped = floats.iter().filter(|x| x.abs() == range).count() as f64 / floats.len() as f64;
    assert!((clipped - expected).abs() < 0.01, "{clipped} of {expected}");
}

/// A damped mode has the gain 1 / (2 zeta) at its frequency and 1 far below it (Den Hartog, from memory).
#[test]
fn a_resonance_of_two_percent_damping_rings_twenty_five_times_and_is_silent_far_below() {
    let point = point(&format!(
        "{CLEAN}resonance_hz = 3000\nresonance_damping = 0.02\nrange_g = 1000"
    ));
    let settled = |hz: f64| {
        let samples = sense(&point, 2.0, |t| (TAU * hz * t).sin());
        amplitude(&samples[12_800..], hz, 12_800.0)
    };
    assert!(
        (settled(3000.0) / 25.0 - 1.0).abs() < 1e-6,
        "{}",
        settled(3000.0)
    );
    assert!((settled(20.0) - 1.0).abs() < 1e-3, "{}", settled(20.0));
}

#[test]
fn a_flat_sensor_repeats_its_last_code_from_the_sample_it_sticks_to_the_one_it_recovers() {
    let point = point(
        "offset_g = 0.5\n[[asset.point.sensor]]\nkind = \"flat\"\nat = \"1s\"\nuntil = \"2.5s\"",
    );
    let samples = sense(&point, 4.0, |t| (TAU * 40.0 * t).sin());
    let stuck = &samples[12_800..32_000];
    assert!(stuck.iter().all(|x| *x == samples[12_799]));
    assert_ne!(samples[32_000], stuck[0]);
    assert!(sigma(&samples[..12_800]) > 0.7 && sigma(&samples[32_000..]) > 0.7);
}

#[test]
fn a_dead_sensor_gives_its_noise_without_gravity_or_vibration() {
    let point = point(
        "encoding = \"cbor-f32\"\nnoise_ug_rthz = 60\noffset_g = 0.5\nbias_volts = 11.5\n[[asset.point.sensor]]\nkind = \"dead\"\nat = \"1s\"",
    );
    let samples = sense(&point, 5.0, |t| (TAU * 40.0 * t).sin());
    let dead = &samples[12_800..];
    let expected = 60e-6 * G0 * 6400_f64.sqrt();
    assert!((sigma(dead) / expected - 1.0).abs() < 4.0 / (2.0 * dead.len() as f64).sqrt());
    assert!(mean(dead).abs() < 4.0 * expected / (dead.len() as f64).sqrt());
    assert!((mean(&samples[..12_800]) - 0.5 * G0).abs() < 0.01);
    let sensor = Sensor::new(&point, &Draw::new(1));
    assert_eq!(
        (sensor.bias_volts(0.5), sensor.bias_volts(1.0)),
        (Some(11.5), Some(0.0))
    );
}

#[test]
fn a_fallen_sensor_is_bumped_turns_away_from_gravity_and_hears_low_frequencies_only() {
    let point = point(&format!(
        "{CLEAN}offset_g = 0.8\n[[asset.point.sensor]]\nkind = \"fallen-off\"\nat = \"10s\""
    ));
    let machine = |t: f64| 3.0 * (TAU * 25.0 * t).sin() + 3.0 * (TAU * 1000.0 * t).sin();
    let samples = sense(&point, 200.0, machine);
    let rate = 12_800;
    let (before, after) = (&samples[..10 * rate], &samples[190 * rate..]);
    let low = amplitude(after, 25.0, 12_800.0) / amplitude(before, 25.0, 12_800.0);
    let high = amplitude(after, 1000.0, 12_800.0) / amplitude(before, 1000.0, 12_800.0);
    assert!((0.015..0.05).contains(&low), "25 Hz at {low}");
    assert!(high < 1e-4, "1 kHz at {high}");
    let turned = (mean(after) - mean(before)).abs() / G0;
    assert!(turned > 0.05, "gravity turned by {turned} g");
    let handled = &samples[10 * rate..12 * rate + 100];
    let bump = handled.iter().fold(0.0_f64, |most, x| most.max(x.abs())) / G0;
    assert!((1.9..14.0).contains(&bump), "bumped with {bump} g");
}

/// Bouts are a Poisson process: 1200 in 6000 s, of which 2.4 % run into each other: a bout lasts 62 ms in the mean (a
/// log-uniform length of 1 to 50 ms has the mean 49 / ln 50 ms), and 60 ms are allowed between its breaks. The rest,
/// 1171, within four standard deviations of 34.
#[test]
fn a_bad_contact_breaks_as_often_as_stated_for_one_to_fifty_milliseconds_in_three_ways() {
    let point = point(&format!(
        "{CLEAN}rate_hz = 1000\n[[asset.point.sensor]]\nkind = \"cable\"\nat = \"0s\"\nuntil = \"6000s\"\nper_minute = 12"
    ));
    let samples = sense(&point, 6100.0, |_| 5.0);
    assert!(samples[6_000_000..].iter().all(|x| *x == 5.0), "it ends");
    let broken: Vec<usize> = (0..samples.len()).filter(|i| samples[*i] != 5.0).collect();
    let bouts = 1 + broken.windows(2).filter(|two| two[1] - two[0] > 60).count();
    assert!((1035..=1307).contains(&bouts), "{bouts} of 1200");
    let mut lengths = Vec::new();
    for index in &broken {
        match lengths.last_mut() {
            Some((end, length)) if *end + 1 == *index => {
                *end = *index;
                *length += 1;
            }
            _ => lengths.push((*index, 1)),
        }
    }
    let long = lengths.iter().filter(|(_, length)| *length > 51).count();
    assert!(long * 50 < lengths.len(), "{long} of {}", lengths.len());
    let range = 16.0 * G0;
    let of = |wanted: &dyn Fn(f64) -> bool| broken.iter().any(|i| wanted(samples[*i]));
    assert!(of(&|x| x == 0.0), "open");
    assert!(of(&|x| x == range) && of(&|x| x == -range), "either rail");
    assert!(of(&|x| x != 0.0 && x.abs() < range), "spikes");
}

#[test]
fn an_offset_ramps_evenly_and_the_bias_voltage_follows() {
    let fault = "[[asset.point.sensor]]\nkind = \"bias\"\nat = \"10s\"\nuntil = \"30s\"\nover = \"10s\"\nby_g = 2";
    let point_of = |more: &str| {
        point(&format!(
            "{CLEAN}offset_g = 0.5\nbias_volts = 12\n{fault}{more}"
        ))
    };
    let samples = sense(&point_of(""), 31.0, |_| 0.0);
    let at = |s: f64| samples[(s * 12_800.0) as usize] / G0;
    for (s, g) in [(5.0, 0.5), (15.0, 1.5), (25.0, 2.5), (30.5, 0.5)] {
        assert!((at(s) - g).abs() < 1e-6, "{} g at {s} s", at(s));
    }
    let volts = |point: &Point, s: f64| Sensor::new(point, &Draw::new(1)).bias_volts(s).unwrap();
    let followed = point_of("");
    assert!(
        (volts(&followed, 15.0) - 12.1).abs() < 1e-9,
        "0.1 V/g x 1 g"
    );
    let open = point_of("\nvolts = 24");
    assert!((volts(&open, 15.0) - 18.0).abs() < 1e-9);
    assert!((volts(&open, 25.0) - 24.0).abs() < 1e-9);
}

#[test]
fn noise_rises_to_what_is_stated_and_falls_back() {
    let point = point(
        "encoding = \"cbor-f32\"\nnoise_ug_rthz = 50\n[[asset.point.sensor]]\nkind = \"noise\"\nat = \"5s\"\nuntil = \"15s\"\nover = \"5s\"\nto_ug_rthz = 500",
    );
    let samples = sense(&point, 20.0, |_| 0.0);
    let unit = 1e-6 * G0 * 6400_f64.sqrt();
    for (from, until, density) in [(0, 5, 50.0), (10, 15, 500.0), (15, 20, 50.0)] {
        let part = &samples[from * 12_800..until * 12_800];
        let off = sigma(part) / (density * unit) - 1.0;
        assert!(off.abs() < 4.0 / (2.0 * part.len() as f64).sqrt(), "{off}");
    }
}
