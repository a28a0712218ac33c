//! Scaling of density, lines and bands. Sources: Heinzel, Rüdiger and Schilling (2002), sections 8-9;
//! Parseval; Welch (1967); Harris (1978).

use humward_signal::frame::{FramePlan, Scratch};
use humward_signal::psd::HANN_ENBW_BINS;
use humward_signal::window::HANN;

use crate::signals::{Noise, close, psd_of, sampled, sine};

const RATE: f64 = 25_600.0;

#[test]
fn sine_on_a_bin_reads_its_amplitude_within_1e_6() {
    // spec.onbin_peak, spec.onbin_neighbour_ratio; 1e-6 relative for f32 frames.
    let samples = sampled(16_384, RATE, sine(3.0, 1000.0, 0.7));
    let psd = psd_of(16_384, RATE, &samples);
    close("peak", psd.line_amplitude(640), 3.0, 3e-6);
    for k in [639, 641] {
        close(
            "neighbour",
            psd.line_amplitude(k) / psd.line_amplitude(640),
            0.5,
            1e-6,
        );
    }
}

#[test]
fn density_integrates_to_the_mean_square() {
    // spec.psd_integral, spec.band_rms_from_lines
    let samples = sampled(16_384, RATE, sine(3.0, 1000.0, 0.7));
    let psd = psd_of(16_384, RATE, &samples);
    let df = psd.resolution_hz();
    close(
        "integral",
        psd.densities().iter().sum::<f64>() * df,
        4.5,
        1e-5,
    );
    close(
        "whole band",
        psd.band_rms(0.0, 0.5 * RATE).powi(2),
        4.5,
        1e-5,
    );
    close(
        "k0-5..k0+5",
        psd.band_rms(634.5 * df, 645.5 * df),
        2.121320344,
        3e-6,
    );
    close("beside", psd.band_rms(650.5 * df, 12_800.0), 0.0, 1e-5);
}

#[test]
fn sine_half_a_bin_off_reads_0_8488_on_a_raw_line_and_whole_when_interpolated() {
    // spec.halfbin_peak: 8/(3 pi)
    let samples = sampled(16_384, RATE, sine(3.0, 640.5 * RATE / 16_384.0, 0.7));
    let psd = psd_of(16_384, RATE, &samples);
    close(
        "raw",
        psd.line_amplitude(640).max(psd.line_amplitude(641)),
        2.546479089,
        2.5465 * 2e-4,
    );
    close(
        "interpolated",
        psd.lines(900.0, 1100.0, 1)[0].amplitude,
        3.0,
        6e-6,
    );
}

#[test]
fn white_noise_has_the_density_of_its_variance() {
    // spec.white_noise_psd: sigma 0.5 at 25600 -> 1.953125e-5, 1 %.
    let mut noise = Noise(11);
    let samples: Vec<f32> = (0..25_600 * 4)
        .map(|_| (0.5 * noise.gaussian()) as f32)
        .collect();
    let psd = psd_of(4096, RATE, &samples);
    let mean = psd.densities()[2..2047].iter().sum::<f64>() / 2045.0;
    close("density", mean, 1.953125e-5, 1.953125e-7);
    let median = psd.median_density(1000.0, 10_000.0).unwrap();
    // The median of an average over about 46 independent frames lies 0.7 % below the mean (chi-square).
    close("median", median / mean, 0.993, 0.01);
}

#[test]
fn fractional_edges_share_a_bin_by_width() {
    // A pulse in the frame's middle has a flat density, so a band's power is its width.
    let psd = flat(8192, 0.01);
    let one_bin = psd.band_rms(1000.0, 1003.125).powi(2);
    close(
        "quarter",
        psd.band_rms(1000.0, 1000.78125).powi(2) / one_bin,
        0.25,
        1e-5,
    );
    close(
        "split",
        psd.band_rms(1000.0, 1001.3).powi(2) + psd.band_rms(1001.3, 1003.125).powi(2),
        one_bin,
        one_bin * 1e-5,
    );
    assert_eq!(psd.band_rms(1000.0, 1000.0), 0.0);
    assert_eq!(psd.band_rms(20_000.0, 30_000.0), 0.0);
}

/// One frame whose density is flat: a single pulse where the window is 1. `density` in (m/s²)²/Hz.
fn flat(n: usize, density: f64) -> humward_signal::psd::Psd {
    let pulse = (density * RATE * 0.375 * n as f64 / 2.0).sqrt();
    let mut samples = vec![0f32; n];
    samples[n / 2] = pulse as f32;
    psd_of(n, RATE, &samples)
}

#[test]
fn velocity_of_flat_noise_follows_the_closed_form() {
    // noise.vel.*: n/(2 pi) sqrt(1/f1 - 1/f2), 0.2 %.
    let table = [
        (100.0, 10.0, 0.04911),
        (100.0, 2.0, 0.11025),
        (25.0, 10.0, 0.012277),
        (25.0, 2.0, 0.027563),
        (10.0, 10.0, 0.004911),
        (1000.0, 10.0, 0.4911),
    ];
    for (ug, f1, expected) in table {
        let n = ug * 1e-6 * 9.80665;
        let psd = flat(262_144, n * n);
        close(
            "noise.vel",
            psd.velocity_band_rms(f1, 1000.0),
            expected,
            0.002 * expected,
        );
    }
}

#[test]
fn acceleration_of_flat_noise_follows_the_bandwidth() {
    // noise.acc.100ug_10k: 0.01 g
    let n: f64 = 100e-6 * 9.80665;
    close(
        "noise.acc",
        flat(8192, n * n).band_rms(100.0, 10_100.0) / 9.80665,
        0.01,
        1e-7,
    );
}

#[test]
fn velocity_of_a_sine_reads_half_over_m_squared_high() {
    for (m, high) in [(8.0, 0.008), (16.0, 0.002), (32.0, 0.0005)] {
        let hz = m * 3.125;
        let psd = psd_of(8192, RATE, &sampled(8192 * 4, RATE, sine(1.0, hz, 0.3)));
        let truth = 1e3 / (std::f64::consts::TAU * hz) / 2f64.sqrt();
        let error = psd.velocity_band_rms(hz - 3.5 * 3.125, hz + 3.5 * 3.125) / truth - 1.0;
        close("velocity", error, high, 0.05 * high);
    }
}

#[test]
fn effective_averages_match_welch() {
    // welch.hann.50.K9.keff, K10, K100 and the asymptote 18/19.
    let plan = FramePlan::new(64, RATE).unwrap();
    let (mut psd, mut scratch) = (plan.psd(), Scratch::new());
    plan.transform(&sampled(64, RATE, sine(1.0, 2000.0, 0.0)), &mut scratch)
        .unwrap();
    assert_eq!(psd.effective_averages(), 0.0);
    for k in 1..=20_000u32 {
        plan.accumulate_psd(&scratch, &mut psd).unwrap();
        match k {
            1 => close("K1", psd.effective_averages(), 1.0, 1e-12),
            9 => close("K9", psd.effective_averages(), 8.576470588, 1e-8),
            10 => close("K10", psd.effective_averages(), 9.523809524, 1e-8),
            100 => close("K100", psd.effective_averages(), 94.78672986, 1e-6),
            _ => {}
        }
    }
    close(
        "asymptote",
        psd.effective_averages() / 20_000.0,
        0.9473684211,
        1e-4,
    );
}

#[test]
fn resolution_is_rate_over_n() {
    // res.df, res.lines_to_samples (3200 lines at 2.56), res.pole_pass_record (4 Hann bins, 4 s).
    close(
        "df",
        FramePlan::new(32_768, RATE).unwrap().resolution_hz(),
        0.78125,
        1e-12,
    );
    let plan = FramePlan::new(8192, RATE).unwrap();
    assert_eq!((RATE / 2.56 / plan.resolution_hz()).round(), 3200.0);
    let psd = plan.psd();
    close("enbw", psd.noise_bandwidth_hz(), 1.5 * 3.125, 1e-12);
    close("enbw", HANN_ENBW_BINS, HANN.enbw_bins(), 1e-12);
}

#[test]
fn clearing_forgets_the_frames() {
    let mut psd = psd_of(4096, RATE, &sampled(8192, RATE, sine(1.0, 1000.0, 0.0)));
    assert_eq!(psd.frames(), 3);
    psd.clear();
    assert_eq!(psd.frames(), 0);
    assert_eq!(psd.band_rms(0.0, 12_800.0), 0.0);
    assert!(psd.lines(0.0, 12_800.0, 3).is_empty());
}
