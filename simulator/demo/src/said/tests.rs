use humward_wire::out::{Event, Severity, Transition};

use super::{evidence, ink, number, time_of_day};
use crate::page::Ink;
use crate::testing::event;

fn raised() -> Event {
    let told = (Transition::Raised, Severity::Alert);
    event("P-102", 1, 310, told, "outer.drive-end", "bearing.outer")
}

#[test]
fn numbers_have_three_digits_and_no_exponent() {
    let said = [21.04, 3.6, 88.92, 0.012_345, 1482.3, 0.0].map(number);
    assert_eq!(said, ["21.0", "3.60", "88.9", "0.0123", "1482", "0"]);
}

#[test]
fn evidence_names_value_limit_and_where_the_line_stands() {
    assert_eq!(
        evidence(&raised()).as_deref(),
        Some("[23.1 dB, limit 20.0; outer race rate 88.5 Hz, order 3.58]")
    );
    let mut learned = raised();
    learned.finding.normal = Some(4.0);
    assert_eq!(
        evidence(&learned).as_deref(),
        Some("[23.1 dB, limit 20.0, normal 4.00; outer race rate 88.5 Hz]")
    );
}

#[test]
fn evidence_leaves_out_a_value_that_the_sentence_has_and_then_has_room_for_strength() {
    let mut said = raised();
    said.finding.text = "ALERT P-102: level 23 dB (alert 20).".to_owned();
    assert_eq!(
        evidence(&said).as_deref(),
        Some("[outer race rate 88.5 Hz, order 3.58, 0.704 m/s2 rms]")
    );
}

#[test]
fn evidence_keeps_to_its_line_however_much_there_is() {
    let mut many = raised();
    let line = many.finding.lines[0].clone();
    many.finding.lines = vec![line; 12];
    let text = evidence(&many).unwrap();
    assert!(text.chars().count() <= 70, "{text}");
}

#[test]
fn what_is_no_ring_has_no_line_of_evidence() {
    let mut cleared = raised();
    cleared.transition = Transition::Cleared;
    assert_eq!(evidence(&cleared), None);
}

#[test]
fn the_ink_follows_the_severity() {
    assert_eq!(ink(&raised()), Ink::Alert);
    let told = (Transition::Worsened, Severity::Danger);
    assert_eq!(ink(&event("P-102", 2, 0, told, "w", "m")), Ink::Danger);
    let told = (Transition::Cleared, Severity::None);
    assert_eq!(ink(&event("P-102", 3, 0, told, "w", "m")), Ink::Fine);
}

#[test]
fn the_time_of_day_is_that_of_the_plant() {
    assert_eq!(time_of_day(raised().header.at), "03:05:10");
}
