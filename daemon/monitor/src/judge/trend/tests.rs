//! Which reports are believed, and where they go.

use alloc::vec::Vec;

use super::{Direction, Report, Trend};
use crate::time::{Arrival, SECOND, SignalTime, Span};

const VALID: Span = Span::from_secs(120);

fn at(s: f64) -> SignalTime {
    SignalTime::from_ns((s * SECOND as f64) as i64)
}

/// A trend after reports at these seconds of these speeds, and what it believed one after the other.
fn after(reports: &[(f64, f64)]) -> (Trend, Vec<f64>) {
    let (mut trend, mut all) = (Trend::default(), Vec::new());
    for (s, rpm) in reports {
        let report = Report {
            at: at(*s),
            rpm: *rpm,
        };
        let arrival = Arrival::from_ns(report.at.ns());
        for report in trend
            .report(report, arrival, 300.0, VALID)
            .into_iter()
            .flatten()
        {
            trend.believe(report);
            all.push(report.rpm);
        }
    }
    (trend, all)
}

/// Reports of a speed that changes by a share of itself each second.
fn ramp(share_per_second: f64, every: f64) -> Vec<(f64, f64)> {
    let count = (30.0 / every) as usize;
    let times = (0..=count).map(|k| k as f64 * every);
    times
        .map(|s| (s, 1000.0 * (share_per_second * s).exp()))
        .collect()
}

#[test]
fn a_report_within_3_percent_is_believed_at_once_and_one_beyond_waits() {
    assert_eq!(after(&[(0.0, 1000.0), (1.0, 1030.0)]).1, [1000.0, 1030.0]);
    assert_eq!(after(&[(0.0, 1000.0), (1.0, 1031.0)]).1, [1000.0]);
    assert!(after(&[(0.0, 1000.0), (1.0, 960.0)]).0.unsure());
    assert_eq!(
        after(&[(0.0, 10.0), (1.0, 290.0)]).1,
        [10.0, 290.0],
        "below standstill all are alike"
    );
}

#[test]
fn what_is_believed_is_the_median_of_three() {
    let cases: [(&[f64], &[f64]); 5] = [
        (&[1000.0, 0.0, 1000.0], &[1000.0, 1000.0]),
        (&[1000.0, 9000.0, 0.0, 1000.0], &[1000.0, 1000.0]),
        (&[1000.0, 0.0, 0.0], &[1000.0, 0.0, 0.0]),
        (&[1000.0, 1200.0, 1400.0], &[1000.0, 1200.0]),
        (&[1000.0, 9000.0, 1200.0, 1400.0], &[1000.0, 1200.0]),
    ];
    for (reports, believed) in cases {
        let reports: Vec<(f64, f64)> = (0..).map(f64::from).zip(reports.iter().copied()).collect();
        assert_eq!(after(&reports).1, believed, "{reports:?}");
    }
}

#[test]
fn the_same_report_once_more_confirms_nothing() {
    let (trend, believed) = after(&[(0.0, 1000.0), (1.0, 0.0), (1.0, 0.0)]);
    assert_eq!((trend.unsure(), believed.len()), (true, 1));
}

#[test]
fn a_report_alone_is_believed_after_15_s_of_either_time() {
    let (trend, _) = after(&[(0.0, 1000.0), (1.0, 0.0)]);
    assert_eq!(trend.due(), Some(Arrival::from_ns(16 * SECOND)));
    assert_eq!(trend.clone().stood(at(15.9)), None);
    assert_eq!(trend.clone().stood(at(16.0)).map(|it| it.rpm), Some(0.0));
    let overdue = |s: f64| trend.clone().overdue(Arrival::from_ns(at(s).ns()));
    assert_eq!(overdue(15.9), None);
    assert_eq!(overdue(16.0).map(|it| it.at), Some(at(1.0)));
    let (_, believed) = after(&[(0.0, 1000.0), (1.0, 0.0), (16.0, 1000.0)]);
    assert_eq!(
        believed,
        [1000.0, 0.0],
        "the next report comes too late to deny it"
    );
}

#[test]
fn it_rises_or_falls_beyond_8_percent_in_10_s_whatever_the_reports_are_apart() {
    for every in [0.02, 0.3, 1.0, 5.0, 10.0] {
        // 8 % of the higher in 10 s is 0.834 % of itself in a second.
        for (share, direction) in [
            (0.0086, Direction::Rising),
            (0.0081, Direction::Steady),
            (-0.0081, Direction::Steady),
            (-0.0086, Direction::Falling),
        ] {
            let (trend, _) = after(&ramp(share, every));
            assert_eq!(trend.direction(), direction, "{share} each {every} s");
        }
    }
    let step = |rpm| {
        after(&[(0.0, 1000.0), (1.0, rpm), (2.0, rpm)])
            .0
            .direction()
    };
    // 8 % of the higher speed.
    assert_eq!(step(1086.0), Direction::Steady);
    assert_eq!(step(1088.0), Direction::Rising);
    assert_eq!(step(921.0), Direction::Steady);
    assert_eq!(step(919.0), Direction::Falling);
}

#[test]
fn a_wander_of_2_percent_in_a_minute_neither_rises_nor_falls_and_holds_still() {
    for every in [0.2, 1.0, 10.0] {
        let mut reports: Vec<(f64, f64)> = Vec::new();
        for k in 0..(300.0 / every) as u32 {
            let s = f64::from(k) * every;
            let wander = 0.02 * (core::f64::consts::TAU * s / 60.0).sin();
            reports.push((s, 1480.0 * (1.0 + wander)));
            let (trend, _) = after(&reports[reports.len().saturating_sub(700)..]);
            assert_eq!(
                trend.direction(),
                Direction::Steady,
                "at {s} s, each {every} s"
            );
        }
        let (trend, _) = after(&reports);
        let long = Span::from_secs(120);
        assert!(
            trend.held(at(0.0), at(290.0), long).is_some(),
            "each {every} s"
        );
    }
}

#[test]
fn it_holds_still_within_6_percent_until_the_newest_report_or_what_stands() {
    let (within, _) = after(&[(0.0, 1000.0), (5.0, 1025.0), (10.0, 1050.0), (15.0, 1063.0)]);
    let ten = Span::from_secs(10);
    assert_eq!(within.held(at(0.0), at(15.0), ten), Some(at(10.0)));
    assert_eq!(
        within.held(at(7.0), at(15.0), ten),
        None,
        "known until 15 s"
    );
    assert_eq!(within.held(at(7.0), at(29.0), ten), None);
    assert_eq!(within.held(at(7.0), at(30.0), ten), Some(at(17.0)));
    let (beyond, _) = after(&[(0.0, 1000.0), (5.0, 1025.0), (10.0, 1050.0), (15.0, 1065.0)]);
    assert_eq!(beyond.held(at(0.0), at(15.0), ten), None, "6.1 %");
}

#[test]
fn a_clock_that_is_set_keeps_the_speed_and_forgets_the_past() {
    let (mut trend, _) = after(&[(0.0, 1000.0), (20.0, 1000.0), (21.0, 0.0)]);
    let hour = Span::from_secs(3600);
    trend.wall_clock_set(hour, Span::ZERO);
    assert_eq!(trend.believed().map(|it| it.at), Some(at(3620.0)));
    assert!(trend.adrift() && !trend.unsure());
    assert_eq!(trend.held(at(0.0), at(3700.0), Span::from_secs(10)), None);
    let new = Report {
        at: at(22.0),
        rpm: 1200.0,
    };
    let [_, believed] = trend.report(new, Arrival::from_ns(0), 300.0, VALID);
    assert_eq!(believed, Some(new), "whatever clock the next comes by");
}

#[test]
fn what_is_kept_stays_bounded_at_a_thousand_reports_a_second() {
    let reports: Vec<(f64, f64)> = (0..60_000)
        .map(|k| (f64::from(k) / 1000.0, 1000.0))
        .collect();
    let (trend, _) = after(&reports);
    assert!(trend.recent.len() <= 42, "{}", trend.recent.len());
}
