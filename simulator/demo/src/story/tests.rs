use humward_wire::out::{RunState, Severity, Transition};

use super::{News, Story};
use crate::listener::Heard;
use crate::testing::{event, heard, status};

fn story() -> Story {
    Story::new("humward/v1/harbour/")
}

#[test]
fn an_event_delivered_twice_is_told_once() {
    let mut story = story();
    let told = (Transition::Raised, Severity::Alert);
    let event = event("P-102", 1, 310, told, "outer.drive-end", "bearing.outer");
    assert_eq!(
        story.hear(&heard(&event)).unwrap(),
        News::Event(Box::new(event.clone()))
    );
    assert_eq!(story.hear(&heard(&event)).unwrap(), News::Nothing);
    assert_eq!(story.events(), [event]);
}

#[test]
fn a_start_is_counted_when_the_machine_runs_after_it_stood_however_often_it_is_said() {
    let mut story = story();
    let states = [
        RunState::Unknown,
        RunState::Stopped,
        RunState::Starting,
        RunState::Running,
        RunState::Running,
        RunState::Coasting,
        RunState::Running,
        RunState::Coasting,
        RunState::Stopped,
        RunState::Stopped,
        RunState::Starting,
        RunState::Running,
    ];
    let mut said = 0;
    for (at_s, state) in (0..).zip(states) {
        let news = story.hear(&status("P-103", at_s, state)).unwrap();
        said += usize::from(news != News::Nothing);
    }
    assert_eq!(story.stops_and_starts("P-103"), (1, 2));
    assert_eq!(story.stops_and_starts("P-101"), (0, 0));
    assert_eq!(said, 9, "every change is news, and nothing else is");
}

#[test]
fn a_message_that_is_none_is_told_with_its_topic() {
    let broken = Heard {
        topic: "humward/v1/harbour/event/P-102".to_owned(),
        payload: b"{\"schema\": 3}".to_vec(),
    };
    let told = story().hear(&broken).unwrap_err().to_string();
    assert!(
        told.starts_with("humward/v1/harbour/event/P-102: not a message of the contract: "),
        "{told}"
    );
}

#[test]
fn filters_leave_the_blocks_out() {
    let filters = story().filters();
    assert!(
        filters
            .iter()
            .all(|filter| filter.starts_with("humward/v1/harbour/") && filter.ends_with("/#"))
    );
    assert!(filters.iter().all(|filter| !filter.contains("block")));
}
