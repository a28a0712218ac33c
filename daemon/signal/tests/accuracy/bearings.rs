//! Bearing orders against published data-set figures. Sources beside each row.

use humward_signal::bearing::{BearingOrders, GeometryFault};

use crate::signals::close;

fn orders(z: u32, d: f64, pitch: f64, angle: f64) -> BearingOrders {
    BearingOrders::from_geometry(z, d, pitch, angle).unwrap()
}

#[track_caller]
fn row(id: &str, o: BearingOrders, hz: f64, expected: [Option<f64>; 4], tolerance: f64) {
    // expected: BPFO, BPFI, FTF, 2xBSF
    for (got, expected) in [o.outer, o.inner, o.cage, o.element]
        .into_iter()
        .zip(expected)
    {
        if let Some(expected) = expected {
            close(id, got * hz, expected, tolerance);
        }
    }
}

#[test]
fn published_multiples_are_reproduced() {
    // brg.cwru_de, brg.cwru_fe: bearing data centre of a university, bearing information page; their
    // "rolling element" is twice the spin.
    row(
        "brg.cwru_de",
        orders(9, 0.3126, 1.537, 0.0),
        1.0,
        [Some(3.5848), Some(5.4152), Some(0.39828), Some(4.7135)],
        5e-4,
    );
    row(
        "brg.cwru_fe",
        orders(8, 0.2656, 1.122, 0.0),
        1.0,
        [Some(3.053), Some(4.9469), Some(0.3817), Some(3.9874)],
        5e-4,
    );
    // brg.nptel_8ball: teaching example 15.2, true spin.
    let o = orders(8, 0.3125, 1.319, 0.0);
    row(
        "brg.nptel_8ball",
        o,
        1.0,
        [Some(3.0523), Some(4.9477), Some(0.38154), None],
        5e-4,
    );
    close("brg.nptel_8ball", o.spin(), 1.9919, 5e-4);
    // brg.6205_alt_geometry: the other geometry in circulation for the size.
    row(
        "brg.6205_alt",
        orders(9, 7.938, 38.5, 0.0),
        1.0,
        [Some(3.5722), Some(5.4278), None, None],
        5e-4,
    );
}

#[test]
fn published_frequencies_are_reproduced() {
    // brg.check_15deg: own geometry with a contact angle. FTF 10.4876, BSF 73.0559.
    row(
        "brg.check_15deg",
        orders(8, 2.0, 12.0, 15.0),
        25.0,
        [
            Some(83.9012),
            Some(116.0988),
            Some(10.4876),
            Some(2.0 * 73.0559),
        ],
        0.002,
    );
    // brg.envspectrum_doc: documentation example of a general library.
    row(
        "brg.envspectrum_doc",
        orders(8, 0.02, 0.12, 0.0),
        25.0,
        [Some(83.3333), Some(116.6667), None, None],
        0.001,
    );
    // brg.mfpt: fault data set documentation (from memory).
    row(
        "brg.mfpt",
        orders(8, 0.235, 1.245, 0.0),
        25.0,
        [Some(81.125), Some(118.875), None, None],
        0.02,
    );
    // brg.ims: Qiu et al., JSV 289 (2006) (from memory).
    row(
        "brg.ims",
        orders(16, 0.331, 2.815, 15.17),
        2000.0 / 60.0,
        [Some(236.4), Some(296.9), Some(14.78), Some(279.8)],
        0.12,
    );
    // brg.unsw: Sawalhi and Randall, MSSP 22 (2008) (from memory).
    row(
        "brg.unsw",
        orders(12, 7.12, 38.5, 0.0),
        10.0,
        [Some(48.9), Some(71.1), Some(4.1), Some(52.2)],
        0.12,
    );
    // brg.femto: PHM 2012 data set (from memory).
    row(
        "brg.femto",
        orders(13, 3.5, 25.6, 0.0),
        30.0,
        [Some(168.3), Some(221.7), None, Some(215.4)],
        0.12,
    );
    // brg.xjtu
    row(
        "brg.xjtu",
        orders(8, 7.92, 34.55, 0.0),
        35.0,
        [Some(107.91), Some(172.09), Some(13.49), Some(144.66)],
        0.02,
    );
    // brg.delia: parameters of a simulator paper.
    row(
        "brg.delia",
        orders(23, 21.4, 203.0, 9.0),
        10.0,
        [None, Some(126.974), None, None],
        0.01,
    );
    // brg.cwru_de_1797: a data-set card, true spin 70.6.
    row(
        "brg.cwru_de_1797",
        orders(9, 0.3126, 1.537, 0.0),
        1797.0 / 60.0,
        [Some(107.4), Some(162.2), Some(11.9), Some(141.2)],
        0.12,
    );
}

#[test]
fn outer_and_inner_add_up_to_the_elements() {
    // brg.sum_rule, brg.0.4n_rule_error
    let o = orders(9, 0.3126, 1.537, 0.0);
    close("sum", o.outer + o.inner, 9.0, 1e-9);
    close("0.4", o.outer / 9.0, 0.4, 0.003);
    close("0.6", o.inner / 9.0, 0.6, 0.003);
    assert!(o.sum_rule_error() < 1e-9);
    let misprint = BearingOrders { outer: 3.5484, ..o };
    assert!(misprint.sum_rule_error() > 0.02);
}

#[test]
fn impossible_geometry_is_refused() {
    type Case = (u32, f64, f64, f64, fn(&GeometryFault) -> bool);
    let cases: [Case; 7] = [
        (2, 1.0, 5.0, 0.0, |f| {
            matches!(f, GeometryFault::Elements { .. })
        }),
        (8, 0.0, 5.0, 0.0, |f| {
            matches!(f, GeometryFault::Diameters { .. })
        }),
        (8, 3.0, 5.0, 0.0, |f| {
            matches!(f, GeometryFault::Diameters { .. })
        }),
        (8, f64::NAN, 5.0, 0.0, |f| {
            matches!(f, GeometryFault::Diameters { .. })
        }),
        (24, 7.12, 38.5, 0.0, |f| {
            matches!(f, GeometryFault::Crowded { fit: 16, .. })
        }),
        (8, 1.0, 5.0, 90.0, |f| {
            matches!(f, GeometryFault::Angle { .. })
        }),
        (8, 1.0, 5.0, -1.0, |f| {
            matches!(f, GeometryFault::Angle { .. })
        }),
    ];
    for (z, d, pitch, angle, expected) in cases {
        let fault = BearingOrders::from_geometry(z, d, pitch, angle).unwrap_err();
        assert!(expected(&fault), "{fault}");
    }
}
