//! Noise and filters: power as the closed form has it.

use humward_sim::random::Draw;
use humward_sim::wave::{Biquad, Cascade, Law, Noise, Voice, Wave};

use super::measure::{mean_square, samples, state};

const RATE: f64 = 12_800.0;

fn band(low: f64, high: f64) -> Cascade {
    Cascade::new(
        vec![Biquad::high_pass(low, RATE), Biquad::low_pass(high, RATE)],
        RATE,
    )
}

/// Closed form: a Butterworth section is 3.0103 dB down at its corner and falls 12 dB an octave beyond.
#[test]
fn butterworth_sections_have_their_corner_and_slope() {
    let low = Biquad::low_pass(100.0, RATE);
    let high = Biquad::high_pass(100.0, RATE);
    let db = |section: &Biquad, hz: f64| 10.0 * section.response(hz, RATE).norm_sqr().log10();
    for section in [&low, &high] {
        assert!((db(section, 100.0) + 3.0103).abs() < 1e-3);
    }
    assert!((db(&low, 400.0) - db(&low, 800.0) - 12.0).abs() < 0.8);
    assert!((db(&high, 25.0) - db(&high, 12.5) - 12.0).abs() < 0.1);
}

/// Closed form: a mode's gain at resonance is 1 / (2 zeta), and 1 far below.
#[test]
fn a_sensors_resonance_lifts_by_one_over_twice_its_damping() {
    let mode = Biquad::mode(2000.0, 0.02, RATE);
    assert!((mode.response(2000.0, RATE).norm() - 25.0).abs() < 1e-6);
    assert!((mode.response(1.0, RATE).norm() - 1.0).abs() < 1e-4);
}

/// Closed form: integral of the density. Tolerance: four standard errors at the band's 2 B T degrees of freedom.
#[test]
fn a_voice_has_the_rms_it_was_given() {
    let voice = Voice::with_rms(
        band(500.0, 3000.0),
        RATE,
        2.0,
        Law::steady(0.0),
        Draw::new(5),
    );
    let got = mean_square(&samples(
        &mut Noise::new(vec![voice]),
        RATE,
        30.0,
        25.0,
        0.0,
    ))
    .sqrt();
    let error = 4.0 / (2.0 * 2.0 * 2500.0 * 30.0_f64).sqrt();
    assert!((got / 2.0 - 1.0).abs() < error, "{got}");
}

/// Closed form: 1 + m cos has the mean square 1 + m² / 2.
#[test]
fn a_modulated_voice_grows_by_its_modulations_power() {
    let voice = || {
        Voice::with_rms(
            band(500.0, 3000.0),
            RATE,
            1.0,
            Law::steady(0.0),
            Draw::new(6),
        )
    };
    let plain = mean_square(&samples(
        &mut Noise::new(vec![voice()]),
        RATE,
        60.0,
        25.0,
        0.0,
    ));
    let deep = mean_square(&samples(
        &mut Noise::new(vec![voice().modulated(5.0, 0.8)]),
        RATE,
        60.0,
        25.0,
        0.0,
    ));
    assert!((deep / plain / 1.32 - 1.0).abs() < 0.02, "{}", deep / plain);
}

/// Closed form: white acceleration of n has n / (2 pi) sqrt(1/f1 - 1/f2) of velocity; the filters pass the whole band.
/// Source: checks noise.vel.*, 100 ug/rtHz from 10 Hz to 1 kHz 0.049 mm/s.
#[test]
fn velocity_of_white_noise_is_that_of_the_handbook() {
    let whole = Cascade::new(vec![], RATE);
    let n = 100e-6 * 9.806_65;
    let rms = n * (RATE / 2.0).sqrt();
    let noise = Noise::new(vec![Voice::with_rms(
        whole,
        RATE,
        rms,
        Law::steady(0.0),
        Draw::new(7),
    )]);
    let got = noise
        .random_velocity_power(&state(0.0, 25.0, 0.0, 25.0))
        .sqrt()
        * 1e3;
    let want = n / std::f64::consts::TAU * (1.0 / 10.0_f64 - 1.0 / 1000.0).sqrt() * 1e3;
    assert!((got / want - 1.0).abs() < 1e-4, "{got} {want}");
    assert!((got - 0.049).abs() < 0.001);
}
