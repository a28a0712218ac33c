//! The velocity weighting. Source: ISO 2954:1975 tolerance table and third-order Butterworth (2012);
//! from memory, not compared with a bought copy; corners agree with scipy in `reference.rs`.

use humward_signal::weighting::{Weighting, WeightingFault};

use crate::signals::close;

#[test]
fn weighting_lies_within_the_tolerance_table() {
    // frequency, least, most; the reference frequency 80 Hz reads 1.
    let table = [
        (10.0, 0.8, 1.1),
        (20.0, 0.9, 1.1),
        (40.0, 0.9, 1.1),
        (80.0, 0.99999, 1.00001),
        (160.0, 0.9, 1.1),
        (500.0, 0.9, 1.1),
        (1000.0, 0.8, 1.1),
        (1.0, 0.0, 0.01),
        (10_000.0, 0.0, 0.01),
    ];
    let weighting = Weighting::velocity(10.0).unwrap();
    for (hz, least, most) in table {
        let gain = weighting.magnitude(hz);
        assert!((least..=most).contains(&gain), "{hz} Hz: {gain}");
    }
}

#[test]
fn corners_and_edges_match_the_closed_form() {
    let weighting = Weighting::velocity(10.0).unwrap();
    close("corner", weighting.high_pass_hz(), 7.943282347242815, 1e-9);
    close("corner", weighting.low_pass_hz(), 1258.925411794167, 1e-6);
    close("iso2954.resp_10Hz", weighting.magnitude(10.0), 0.894, 0.001);
    close("iso2954.resp_1Hz", weighting.magnitude(1.0), 0.001995, 1e-5);
    close("resp_1000Hz", weighting.magnitude(1000.0), 0.894, 0.001);
}

#[test]
fn corners_leave_the_room_the_table_gives() {
    // iso2954.corner_max_hp 9.0856 Hz, iso2954.corner_min_lp 1100.64 Hz: beyond them 0.8 is missed.
    let weighting = Weighting::velocity(10.0).unwrap();
    let edge = 10f64.powf(0.1);
    let reads = |ratio: f64| weighting.high_pass_magnitude(10.0 / edge * ratio);
    close(
        "iso2954.corner_max_hp",
        reads(10.0 / 9.085602964),
        0.8,
        1e-6,
    );
    close(
        "iso2954.corner_min_lp",
        weighting.low_pass_magnitude(1000.0 * edge * 1000.0 / 1100.642416),
        0.8,
        1e-6,
    );
    assert!(weighting.high_pass_hz() < 9.0856 && weighting.low_pass_hz() > 1100.65);
}

#[test]
fn slopes_are_18_db_an_octave_and_60_a_decade() {
    // filt.slope3
    let weighting = Weighting::velocity(10.0).unwrap();
    let db = |a: f64, b: f64| 20.0 * (a / b).log10();
    close(
        "octave",
        db(
            weighting.high_pass_magnitude(0.2),
            weighting.high_pass_magnitude(0.1),
        ),
        18.06,
        0.01,
    );
    close(
        "decade",
        db(
            weighting.high_pass_magnitude(0.1),
            weighting.high_pass_magnitude(0.01),
        ),
        60.0,
        0.01,
    );
    close(
        "decade",
        db(
            weighting.low_pass_magnitude(1e5),
            weighting.low_pass_magnitude(1e6),
        ),
        60.0,
        0.01,
    );
}

#[test]
fn edges_no_machine_has_are_refused() {
    for edge in [0.0, 0.19, 201.0, -10.0, f64::NAN, f64::INFINITY] {
        assert!(
            matches!(
                Weighting::velocity(edge),
                Err(WeightingFault::LowerEdge { .. })
            ),
            "{edge}"
        );
    }
}
