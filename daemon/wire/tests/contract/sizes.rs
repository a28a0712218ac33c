//! Messages keep to their sizes, and are shortened in the stated order.

use humward_wire::out::{
    Event, MAX_EVENT, MAX_STATUS, MAX_TEXT, Measured, Message, Open, Quality, Severity, Standing,
    State, Status, Zoned,
};

use crate::samples::{alarm, event, finding, header, id, last_running, line, measured, status};

fn longest_id() -> String {
    "x".repeat(64)
}

fn crowded() -> Event {
    let mut event = event();
    event.finding.text = "w".repeat(MAX_TEXT);
    event.finding.lines = (0..8).map(|i| line(&format!("line {i}"))).collect();
    event.finding.also = (0..6)
        .map(|i| Zoned {
            value: measured(&format!("measure {i}"), 1.0, "mm/s rms"),
            zone: None,
        })
        .collect();
    event.finding.checks = (0..4)
        .map(|i| format!("check {i}: look at the suction strainer"))
        .collect();
    event.finding.against = (0..4)
        .map(|i| format!("against {i}: the speed was not steady"))
        .collect();
    event
}

/// The status of four points with nothing open.
fn quiet() -> Status {
    Status {
        open: Vec::new(),
        open_count: 0,
        ..status()
    }
}

#[test]
fn an_ordinary_event_alarm_and_four_point_status_fit_uncut() {
    for (size, max) in [
        (event().to_json().len(), MAX_EVENT),
        (alarm().to_json().len(), MAX_EVENT),
        (quiet().to_json().len(), MAX_STATUS),
    ] {
        assert!(size <= max, "{size} bytes for {max}");
    }
    assert!(!event().fit(MAX_EVENT).1 && !quiet().fit(MAX_STATUS).1);
    assert_eq!((MAX_EVENT, MAX_STATUS), (2048, 1536));
}

#[test]
fn an_open_occurrence_costs_a_four_point_status_one_value_at_most() {
    let (cut, _) = status().fit(MAX_STATUS);
    let values: Vec<usize> = cut.points.iter().map(|point| point.values.len()).collect();
    assert!(values.iter().sum::<usize>() >= 7, "{values:?}");
    assert_eq!((cut.open, cut.running), (status().open, status().running));
}

#[test]
fn an_event_is_shortened_in_the_stated_order_and_no_further_than_needed() {
    let full = crowded();
    let mut seen = Vec::new();
    for max in (600..full.to_json().len()).rev() {
        let (cut, told) = full.clone().fit(max);
        assert!(told && cut.finding.truncated);
        let left = [
            cut.finding.also.len(),
            cut.finding.checks.len(),
            cut.finding.against.len(),
            cut.finding.lines.len(),
        ];
        if seen.last() != Some(&left) {
            seen.push(left);
        }
        assert_eq!(
            (cut.id, cut.finding.value, cut.finding.limit),
            (
                full.id.clone(),
                full.finding.value.clone(),
                full.finding.limit.clone()
            )
        );
    }
    assert_eq!(
        seen,
        [
            [5, 4, 4, 8],
            [4, 4, 4, 8],
            [3, 4, 4, 8],
            [2, 4, 4, 8],
            [1, 4, 4, 8],
            [1, 3, 4, 8],
            [1, 2, 4, 8],
            [1, 1, 4, 8],
            [1, 1, 3, 8],
            [1, 1, 2, 8],
            [1, 1, 1, 8],
            [1, 1, 1, 7],
            [1, 1, 1, 6],
            [1, 1, 1, 5],
            [1, 1, 1, 4],
            [1, 1, 1, 3],
            [1, 1, 1, 2],
            [0, 1, 1, 2],
            [0, 0, 1, 2],
            [0, 0, 0, 2],
            [0, 0, 0, 1],
            [0, 0, 0, 0],
        ]
    );
}

#[test]
fn the_longest_names_and_texts_still_leave_an_event_below_its_limit() {
    let long = longest_id();
    let endless = "é\"\\".repeat(2000);
    let mut event = crowded();
    event.header.schema = Event::SCHEMA.into();
    (event.header.gateway, event.header.site, event.header.asset) =
        (id(&long), id(&long), Some(id(&long)));
    (event.header.epoch, event.n, event.id) = (u64::MAX, u64::MAX, id(&long));
    (event.from_n, event.to_n) = (Some(u64::MAX), Some(u64::MAX));
    event.finding.occurrence = Some(id(&long));
    event.finding.lead = Some(id(&long));
    event.finding.point = Some(id(&long));
    event.finding.watch = Some(long.clone());
    event.finding.text = endless.clone();
    event.finding.running.operating = Some(endless.clone());
    event.finding.value = Some(Measured {
        measure: endless.clone(),
        value: Some(-1.234_5e-300),
        unit: endless.clone(),
        quality: Quality::LowerBound,
    });
    if let Some(limit) = &mut event.finding.limit {
        (limit.value, limit.unit) = (-1.234_5e-300, endless);
    }
    event.finding.normal = Some(-1.234_5e-300);
    event.finding.readings = u32::MAX;
    let (cut, told) = event.fit(MAX_EVENT);
    assert!(told);
    assert!(
        cut.to_json().len() <= MAX_EVENT,
        "{} bytes",
        cut.to_json().len()
    );
    assert_eq!(cut.finding.watch, Some(long));
}

#[test]
fn a_crowded_status_of_four_points_keeps_its_points_and_its_worst_occurrence() {
    let mut status = status();
    status.header = header::<humward_wire::out::Status>(Some("P-103A"));
    let open = |n: usize, severity| Open {
        occurrence: id(&format!("0-{n}")),
        watch: format!("watch-{n}.drive-end"),
        standing: Standing::new(State::Unack, severity),
        since: finding().since.unwrap(),
    };
    status.open = vec![open(1, Severity::Danger)];
    status
        .open
        .extend((2..20).map(|n| open(n, Severity::Alert)));
    status.open_count = 19;
    status.last_running = Some(last_running());
    status.stale = (0..20).map(|n| format!("watch-{n}.drive-end")).collect();
    let (cut, told) = status.clone().fit(MAX_STATUS);
    assert!(told && cut.truncated);
    assert!(
        cut.to_json().len() <= MAX_STATUS,
        "{} bytes",
        cut.to_json().len()
    );
    assert_eq!(cut.points.len(), 4);
    assert_eq!((cut.open_count, &cut.open[0]), (19, &status.open[0]));
    assert_eq!(
        (cut.valid_until, cut.running),
        (status.valid_until, status.running)
    );
}
