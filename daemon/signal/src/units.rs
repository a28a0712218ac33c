//! Units of vibration and the steps between acceleration, velocity and displacement of one tone.
//!
//! In and out: plain `f64`, units in the names. The detector (rms, peak) passes through unchanged;
//! it is never converted here, because peak = √2 rms holds for a single tone only.
//! Sources: standard gravity, 3rd CGPM 1901; the inch, 25.4 mm exactly, 1959 agreement.
//! Checked by `tests/accuracy/conversions.rs`.

use core::f64::consts::TAU;

/// Standard gravity, m/s². Exact by definition.
pub const STANDARD_GRAVITY: f64 = 9.80665;
/// Millimetres in an inch; so also mm/s in one in/s and µm in one mil. Exact by definition.
pub const MILLIMETRES_PER_INCH: f64 = 25.4;

/// g to m/s².
pub fn g_to_m_s2(g: f64) -> f64 {
    g * STANDARD_GRAVITY
}

/// m/s² to g.
pub fn m_s2_to_g(m_s2: f64) -> f64 {
    m_s2 / STANDARD_GRAVITY
}

/// mm/s to in/s.
pub fn mm_s_to_in_s(mm_s: f64) -> f64 {
    mm_s / MILLIMETRES_PER_INCH
}

/// in/s to mm/s.
pub fn in_s_to_mm_s(in_s: f64) -> f64 {
    in_s * MILLIMETRES_PER_INCH
}

/// µm to mil, a thousandth of an inch.
pub fn um_to_mil(um: f64) -> f64 {
    um / MILLIMETRES_PER_INCH
}

/// Mil, a thousandth of an inch, to µm.
pub fn mil_to_um(mil: f64) -> f64 {
    mil * MILLIMETRES_PER_INCH
}

/// r/min to Hz.
pub fn rpm_to_hz(rpm: f64) -> f64 {
    rpm / 60.0
}

/// Velocity, mm/s, of a tone of acceleration `m_s2` at `frequency_hz`; zero at 0 Hz, where a
/// constant acceleration has no vibration velocity.
pub fn velocity_mm_s(m_s2: f64, frequency_hz: f64) -> f64 {
    if frequency_hz > 0.0 {
        m_s2 * 1e3 / (TAU * frequency_hz)
    } else {
        0.0
    }
}

/// Displacement, µm, of a tone of velocity `mm_s` at `frequency_hz`; zero at 0 Hz.
pub fn displacement_um(mm_s: f64, frequency_hz: f64) -> f64 {
    if frequency_hz > 0.0 {
        mm_s * 1e3 / (TAU * frequency_hz)
    } else {
        0.0
    }
}

/// Acceleration, m/s², of a tone of velocity `mm_s` at `frequency_hz`.
pub fn acceleration_m_s2(mm_s: f64, frequency_hz: f64) -> f64 {
    mm_s * 1e-3 * TAU * frequency_hz
}
