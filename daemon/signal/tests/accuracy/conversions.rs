//! Units and the single tone. Sources: 3rd CGPM 1901 (g), the inch of 1959, v = a/(2πf).

use humward_signal::units::{
    MILLIMETRES_PER_INCH, STANDARD_GRAVITY, acceleration_m_s2, displacement_um, g_to_m_s2,
    in_s_to_mm_s, m_s2_to_g, mil_to_um, mm_s_to_in_s, rpm_to_hz, um_to_mil, velocity_mm_s,
};

use crate::signals::{close, psd_of, sampled, sine};

#[test]
fn one_g_peak_at_159_155_hz_is_9_8066_mm_s() {
    // conv.1g_pk_159.155Hz.*
    let v = velocity_mm_s(g_to_m_s2(1.0), 159.155);
    close("v_pk", v, 9.8066, 0.0005);
    close("v_rms", v / 2f64.sqrt(), 6.9343, 0.0005);
    close("v_in_s_pk", mm_s_to_in_s(v), 0.38609, 2e-5);
    close("d_pk_um", displacement_um(v, 159.155), 9.8066, 0.0005);
    close("d_pp_um", 2.0 * displacement_um(v, 159.155), 19.6132, 0.001);
}

#[test]
fn definitions_hold_exactly_and_both_ways() {
    // conv.g0, conv.1_in_s, conv.1mil
    assert_eq!(STANDARD_GRAVITY, 9.80665);
    assert_eq!(MILLIMETRES_PER_INCH, 25.4);
    assert_eq!(in_s_to_mm_s(1.0), 25.4);
    assert_eq!(mil_to_um(1.0), 25.4);
    close("g", m_s2_to_g(g_to_m_s2(3.0)), 3.0, 1e-12);
    close("mil", um_to_mil(mil_to_um(3.0)), 3.0, 1e-12);
}

#[test]
fn four_and_a_half_mm_s_at_1480_rpm_is_0_697_m_s2_and_82_um() {
    // conv.4.5mm_s_rms_at_24.6667Hz.a, .d_pp
    let hz = rpm_to_hz(1480.0);
    close("a", acceleration_m_s2(4.5, hz), 0.6974335691, 1e-4);
    close(
        "d_pp",
        displacement_um(4.5, hz) * 2.0 * 2f64.sqrt(),
        82.12344776,
        0.01,
    );
}

#[test]
fn one_g_is_one_inch_per_second_at_61_448_hz() {
    // conv.f_where_1g_is_1in_s
    close(
        "in/s",
        mm_s_to_in_s(velocity_mm_s(g_to_m_s2(1.0), 61.448)),
        1.0,
        2e-5,
    );
}

#[test]
fn one_g_peak_at_160_hz_integrates_to_6_8977_mm_s_rms() {
    // conv.fd_integration_160Hz. Closed form to 1e-6; by bins within the stated 50 %/m² (m = 160).
    let closed = velocity_mm_s(g_to_m_s2(1.0), 160.0) / 2f64.sqrt();
    close("closed", closed, 6.89772422, 6.9e-6);
    let samples = sampled(8192 * 10, 8192.0, sine(STANDARD_GRAVITY, 160.0, 0.4));
    let psd = psd_of(8192, 8192.0, &samples);
    close(
        "by bins",
        psd.velocity_band_rms(150.0, 170.0),
        6.89772422,
        6.9 * (0.5 / 160f64.powi(2) + 1e-6),
    );
}

#[test]
fn a_constant_acceleration_has_no_vibration_velocity() {
    assert_eq!(velocity_mm_s(9.81, 0.0), 0.0);
    assert_eq!(displacement_um(1.0, 0.0), 0.0);
}
