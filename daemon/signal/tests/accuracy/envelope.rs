//! The squared envelope and its lines on known burst trains.
//! Source: Fourier series of A² e^(−2t/τ) at f bursts a second; Randall and Antoni (2011) for the steps.

use std::f64::consts::{PI, TAU};

use humward_signal::envelope::{EnvelopeFault, EnvelopePlan, LineSearch};

use crate::signals::{Noise, close, envelope_of, psd_of, sampled, sine};

const RATE: f64 = 25_600.0;
const BAND: (f64, f64) = (2_000.0, 8_000.0);

/// Bursts A e^(−t/τ) at `per_second`, ringing at 5 kHz with a phase that differs from burst to burst.
fn bursts(amplitude: f64, tau: f64, per_second: f64) -> impl Fn(f64) -> f64 {
    move |t| {
        let turn = (t * per_second).floor();
        // Sum over earlier bursts too, for tails that outlast the gap.
        (0..40)
            .map(|back| turn - f64::from(back))
            .filter(|k| *k >= 0.0)
            .map(|k| {
                let since = t - k / per_second;
                amplitude * (-since / tau).exp() * (TAU * 5000.0 * since + 2.4 * k * k).sin()
            })
            .sum()
    }
}

fn search(frequency_hz: f64, harmonics: usize) -> LineSearch {
    LineSearch {
        frequency_hz,
        tolerance: 0.02,
        harmonics,
        shaft_hz: None,
    }
}

#[test]
fn train_of_short_bursts_reads_its_own_rms() {
    for (per_second, tau) in [(87.3, 0.0004), (41.9, 0.0008), (112.7, 0.0003)] {
        let samples = sampled(25_600 * 8, RATE, bursts(10.0, tau, per_second));
        let band_rms = psd_of(8192, RATE, &samples).band_rms(BAND.0, BAND.1);
        let line = envelope_of(8192, RATE, BAND, &samples)
            .search(&search(per_second, 1))
            .fundamental()
            .unwrap();
        // The train's whole rms is 10 sqrt(f tau)/2; the band keeps (2/pi) atan(2 pi 3000 tau) of its power.
        let whole = 5.0 * (per_second * tau * 2.0 / PI * (TAU * 3000.0 * tau).atan()).sqrt();
        close("m/s2", line.m_s2, band_rms, 0.02 * band_rms);
        close("formula", line.m_s2, whole, 0.02 * whole);
        close("frequency", line.frequency_hz, per_second, 0.02 * 3.125);
    }
}

#[test]
fn long_bursts_and_high_harmonics_read_low_by_the_stated_factor() {
    let per_second = 100.0;
    for (f_tau, short_by) in [(0.1, 0.023), (0.2, 0.080), (0.5, 0.267)] {
        let samples = sampled(
            25_600 * 8,
            RATE,
            bursts(10.0, f_tau / per_second, per_second),
        );
        let family = envelope_of(8192, RATE, BAND, &samples).search(&search(per_second, 3));
        let whole = 5.0 * f_tau.sqrt();
        for (h, line) in family.lines.iter().enumerate() {
            let factor = (1.0 + (PI * (h as f64 + 1.0) * f_tau).powi(2)).powf(-0.25);
            let got = line.unwrap().m_s2 / whole;
            // Overlapping tails beat at random: 4 % here.
            close("harmonic", got, factor, 0.04);
            if h == 0 {
                close("stated", 1.0 - factor, short_by, 0.001);
            }
        }
    }
}

#[test]
fn bearing_line_stands_out_beside_a_strong_shaft_line() {
    // Without the window on the squared envelope the leakage of the 1x line fills the floor.
    let mut noise = Noise(41);
    let burst = bursts(3.0, 0.0005, 87.3);
    let base: Vec<f32> = (0..25_600 * 10)
        .map(|i| (burst(i as f64 / RATE) + 0.3 * noise.gaussian()) as f32)
        .collect();
    let quiet = envelope_of(8192, RATE, BAND, &base)
        .search(&search(87.3, 2))
        .fundamental()
        .unwrap();
    let strong: Vec<f32> = base
        .iter()
        .enumerate()
        .map(|(i, x)| x + sine(50.0, 24.7, 0.3)(i as f64 / RATE) as f32)
        .collect();
    let beside = envelope_of(8192, RATE, BAND, &strong)
        .search(&search(87.3, 2))
        .fundamental()
        .unwrap();
    assert!(quiet.db > 15.0, "{quiet:?}");
    close("beside 1x", beside.db, quiet.db, 3.0);
}

#[test]
fn decibels_are_peak_power_over_the_median_around_it() {
    let mut noise = Noise(42);
    let burst = bursts(2.0, 0.0005, 93.75);
    let samples: Vec<f32> = (0..25_600 * 10)
        .map(|i| (burst(i as f64 / RATE) + noise.gaussian()) as f32)
        .collect();
    let spectrum = envelope_of(8192, RATE, BAND, &samples);
    let line = spectrum.search(&search(93.75, 1)).fundamental().unwrap();
    // Near bin 30 two bins are wider than 2 %: the floor is 0.5-1.5 x without 2 bins either side.
    let bin = line.frequency_hz / spectrum.resolution_hz();
    let mut floor: Vec<f64> = (0..spectrum.bins())
        .filter(|k| (0.5 * bin..=1.5 * bin).contains(&(*k as f64)) && (*k as f64 - bin).abs() > 2.0)
        .map(|k| spectrum.power(k))
        .collect();
    floor.sort_by(f64::total_cmp);
    assert!((25..=27).contains(&floor.len()), "{}", floor.len());
    let median = 0.5 * (floor[(floor.len() - 1) / 2] + floor[floor.len() / 2]);
    let over = 10.0 * (line.squared_amplitude.powi(2) / median).log10();
    close("dB", line.db, over, 1e-9);
    close(
        "amplitude",
        line.squared_amplitude,
        spectrum.amplitude(30),
        0.01 * spectrum.amplitude(30),
    );
}

#[test]
fn skirt_of_a_stronger_line_outside_the_tolerance_is_no_line() {
    // A train at 100 Hz; asked for 103.5 Hz ± 2 % (101.4-105.6), where only its skirt lies.
    let samples = sampled(25_600 * 8, RATE, bursts(10.0, 0.0005, 100.0));
    let spectrum = envelope_of(8192, RATE, BAND, &samples);
    assert!(spectrum.search(&search(100.0, 1)).fundamental().is_some());
    for asked in [103.5, 96.5, 107.0] {
        let family = spectrum.search(&search(asked, 2));
        assert_eq!(family.fundamental(), None, "asked for {asked}");
        assert_eq!(family.lines, [None, None]);
    }
}

#[test]
fn harmonics_are_sought_at_multiples_of_the_frequency_found() {
    // The train slips 1.5 % below the expected frequency; its fourth harmonic lies 6 bins off the nominal.
    let samples = sampled(25_600 * 8, RATE, bursts(10.0, 0.0004, 98.5 * 3.0));
    let family = envelope_of(8192, RATE, BAND, &samples).search(&search(300.0, 4));
    for (h, line) in family.lines.iter().enumerate() {
        close(
            "harmonic",
            line.unwrap().frequency_hz,
            295.5 * (h as f64 + 1.0),
            0.3,
        );
    }
    assert_eq!(family.count_above(10.0), 4);
}

#[test]
fn noise_alone_rarely_rises_over_8_decibels() {
    let mut noise = Noise(43);
    let mut above = 0;
    for _ in 0..40 {
        let samples: Vec<f32> = (0..25_600 * 4).map(|_| noise.gaussian() as f32).collect();
        let family = envelope_of(8192, RATE, BAND, &samples).search(&search(110.0, 1));
        above += family.count_above(8.0);
    }
    assert!(above <= 1, "{above} of 40");
}

#[test]
fn amplitude_modulated_tone_reads_its_squared_envelope() {
    // (1 + m cos)² A² has a line of 2 m A² at the modulation and m²/2 A² at twice it.
    let (a, m, hz) = (3.0, 0.4, 46.875);
    let samples = sampled(25_600 * 4, RATE, |t| {
        a * (1.0 + m * (TAU * hz * t).cos()) * (TAU * 5000.0 * t).sin()
    });
    let spectrum = envelope_of(8192, RATE, BAND, &samples);
    close("1", spectrum.amplitude(15), 2.0 * m * a * a, 1e-3 * 7.2);
    close("2", spectrum.amplitude(30), 0.5 * m * m * a * a, 1e-3 * 7.2);
    assert_eq!(spectrum.band_hz(), BAND);
    assert_eq!(spectrum.frames(), 24);
}

#[test]
fn bands_that_cannot_work_are_refused() {
    let refused = |f1, f2| EnvelopePlan::new(8192, RATE, f1, f2).unwrap_err();
    assert!(matches!(
        refused(8_000.0, 2_000.0),
        EnvelopeFault::Band { .. }
    ));
    assert!(matches!(
        refused(2_000.0, 13_000.0),
        EnvelopeFault::Band { .. }
    ));
    assert!(matches!(
        refused(f64::NAN, 8_000.0),
        EnvelopeFault::Band { .. }
    ));
    assert!(matches!(
        refused(2_000.0, 2_050.0),
        EnvelopeFault::TooNarrow { .. }
    ));
    let plan = EnvelopePlan::new(8192, RATE, 2_000.0, 8_000.0).unwrap();
    assert!(
        plan.reach_hz() >= 0.5 * 6_000.0 - 2.0 * 3.125,
        "{}",
        plan.reach_hz()
    );
}

/// Orders of eight elements of 0.2656 on a pitch of 1.122: inner 4.9469, 1.1 % from the fifth multiple of the shaft.
#[test]
fn vanes_at_five_times_the_shaft_are_not_the_inner_race_and_the_race_beside_them_is_found() {
    let (shaft_hz, order) = (29.95, 4.9469);
    let search = LineSearch {
        shaft_hz: Some(shaft_hz),
        ..search(order * shaft_hz, 2)
    };
    // The label of the speed may be off by 0.25 %.
    for vanes_hz in [5.0 * shaft_hz, 0.9975 * 5.0 * shaft_hz] {
        let samples = sampled(25_600 * 8, RATE, bursts(10.0, 0.0004, vanes_hz));
        let found = envelope_of(8192, RATE, BAND, &samples).search(&search);
        assert!(found.count_above(20.0) == 0, "{vanes_hz} Hz: {found:?}");
    }
    for slip in [0.99, 1.0, 1.004] {
        let race = bursts(10.0, 0.0004, slip * order * shaft_hz);
        let samples = sampled(25_600 * 8, RATE, race);
        let line = envelope_of(8192, RATE, BAND, &samples)
            .search(&search)
            .fundamental()
            .unwrap();
        close(
            "race",
            line.frequency_hz,
            slip * order * shaft_hz,
            0.02 * 3.125,
        );
    }
}
