//! The promises of an outbox, on the one in memory, with no broker at all.

use bytes::Bytes;

use super::{LARGEST, Memory, Message, Outbox, Rank, Sending};

fn letter(lane: &str, text: &str) -> Message {
    Message::Letter {
        lane: lane.into(),
        topic: format!("event/{lane}"),
        payload: Bytes::from(text.to_owned()),
    }
}

fn state(rank: Rank, topic: &str, text: &str) -> Message {
    Message::State {
        rank,
        topic: topic.to_owned(),
        payload: Bytes::from(text.to_owned()),
    }
}

fn text(sending: &Sending) -> String {
    String::from_utf8(sending.payload.to_vec()).expect("the tests write text")
}

fn all(outbox: &mut Memory) -> Vec<Sending> {
    std::iter::from_fn(|| outbox.next()).collect()
}

fn texts(sendings: &[Sending]) -> Vec<String> {
    sendings.iter().map(text).collect()
}

#[test]
fn one_letter_of_a_lane_is_on_its_way_at_a_time_and_lanes_do_not_wait_for_each_other() {
    let mut outbox = Memory::new(10_000);
    outbox.keep(vec![
        letter("a", "a1"),
        letter("a", "a2"),
        letter("b", "b1"),
        letter("a", "a3"),
    ]);
    let first = all(&mut outbox);
    assert_eq!(texts(&first), ["a1", "b1"]);
    outbox.acknowledged(first[1].id);
    assert!(all(&mut outbox).is_empty());
    outbox.acknowledged(first[0].id);
    assert_eq!(texts(&all(&mut outbox)), ["a2"]);
}

#[test]
fn letters_not_acknowledged_go_again_after_a_connect_and_acknowledged_ones_never() {
    let mut outbox = Memory::new(10_000);
    outbox.keep(vec![
        letter("a", "a1"),
        letter("a", "a2"),
        letter("b", "b1"),
    ]);
    let first = all(&mut outbox);
    outbox.acknowledged(first[0].id);
    assert_eq!(texts(&all(&mut outbox)), ["a2"]);
    outbox.connected();
    let again = all(&mut outbox);
    assert_eq!(texts(&again), ["a2", "b1"]);
    for sending in &again {
        outbox.acknowledged(sending.id);
    }
    outbox.connected();
    assert!(all(&mut outbox).is_empty());
    assert_eq!(outbox.waiting().bytes, 0);
}

#[test]
fn only_the_newest_state_of_a_topic_is_sent_and_all_states_again_after_a_connect() {
    let mut outbox = Memory::new(10_000);
    outbox.keep(vec![
        state(Rank::Status, "status/a", "old"),
        state(Rank::Gateway, "gateway/g", "online"),
    ]);
    outbox.keep(vec![
        state(Rank::Status, "status/a", "new"),
        state(Rank::Alarm, "alarm/a/x", "open"),
    ]);
    let first = all(&mut outbox);
    assert_eq!(texts(&first), ["online", "open", "new"]);
    assert!(first.iter().all(|sending| sending.retain));
    for sending in &first {
        outbox.acknowledged(sending.id);
    }
    assert!(all(&mut outbox).is_empty());
    outbox.connected();
    assert_eq!(texts(&all(&mut outbox)), ["online", "open", "new"]);
}

#[test]
fn a_state_that_changed_on_its_way_is_sent_again_and_its_old_acknowledgement_settles_nothing() {
    let mut outbox = Memory::new(10_000);
    outbox.keep(vec![state(Rank::Alarm, "alarm/a/x", "open")]);
    let open = all(&mut outbox).remove(0);
    outbox.keep(vec![state(Rank::Alarm, "alarm/a/x", "")]);
    outbox.acknowledged(open.id);
    assert_eq!(outbox.waiting().states, 1);
    let emptied = all(&mut outbox).remove(0);
    assert_eq!(text(&emptied), "");
    outbox.acknowledged(emptied.id);
    outbox.connected();
    assert!(
        all(&mut outbox).is_empty(),
        "an emptied topic is done with once the broker knows"
    );
}

#[test]
fn an_emptied_topic_the_broker_did_not_acknowledge_is_emptied_again() {
    let mut outbox = Memory::new(10_000);
    outbox.keep(vec![state(Rank::Alarm, "alarm/a/x", "")]);
    assert_eq!(all(&mut outbox).len(), 1);
    outbox.connected();
    assert_eq!(texts(&all(&mut outbox)), [""]);
}

#[test]
fn letters_and_states_leave_in_turn() {
    let mut outbox = Memory::new(10_000);
    outbox.keep(vec![
        letter("a", "a1"),
        letter("b", "b1"),
        letter("c", "c1"),
    ]);
    outbox.keep(vec![
        state(Rank::Status, "s/1", "s1"),
        state(Rank::Status, "s/2", "s2"),
    ]);
    assert_eq!(texts(&all(&mut outbox)), ["s1", "a1", "s2", "b1", "c1"]);
}

#[test]
fn past_the_capacity_the_oldest_letters_not_on_their_way_are_dropped_and_counted_by_topic() {
    let mut outbox = Memory::new(3 * ("event/a".len() + 10));
    let ten = "0123456789";
    outbox.keep(vec![letter("a", ten), letter("b", ten)]);
    let first = all(&mut outbox);
    assert_eq!(
        first.len(),
        2,
        "both are on their way and cannot be dropped"
    );
    let kept = outbox.keep(vec![
        letter("a", "1---------"),
        letter("a", "2---------"),
        letter("b", "3---------"),
    ]);
    assert_eq!(kept.dropped, [("event/a".to_owned(), 2)]);
    outbox.acknowledged(first[1].id);
    assert_eq!(texts(&all(&mut outbox)), ["3---------"]);
}

#[test]
fn a_lane_whose_first_letter_was_dropped_goes_on_with_the_next() {
    let mut outbox = Memory::new(2 * ("event/a".len() + 2));
    let kept = outbox.keep(vec![
        letter("a", "a1"),
        letter("a", "a2"),
        letter("a", "a3"),
    ]);
    assert_eq!(kept.dropped, [("event/a".to_owned(), 1)]);
    assert_eq!(texts(&all(&mut outbox)), ["a2"]);
}

#[test]
fn a_message_beyond_the_packet_limit_is_refused_at_the_door_and_one_within_is_not() {
    let mut outbox = Memory::new(10 * LARGEST);
    let sized = |size: usize| Message::Letter {
        lane: "a".into(),
        topic: format!("evidence/a/{size}"),
        payload: Bytes::from(vec![0; size]),
    };
    let kept = outbox.keep(vec![sized(LARGEST + 1), sized(LARGEST)]);
    assert_eq!(kept.too_large, [format!("evidence/a/{}", LARGEST + 1)]);
    assert_eq!(all(&mut outbox).len(), 1);
}

#[test]
fn a_message_that_could_not_be_handed_over_is_next_again() {
    let mut outbox = Memory::new(10_000);
    outbox.keep(vec![
        letter("a", "a1"),
        letter("a", "a2"),
        state(Rank::Status, "s/1", "s1"),
    ]);
    let first = all(&mut outbox);
    for sending in &first {
        outbox.returned(sending.id);
    }
    assert_eq!(texts(&all(&mut outbox)), ["s1", "a1"]);
}
