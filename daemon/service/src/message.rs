//! From an action of the core to a message for the broker: the same bytes live and in rehearsal.

use bytes::Bytes;
use humward_monitor::Action;
use humward_wire::out::{Event, MAX_EVENT, MAX_EVIDENCE, MAX_STATUS, Message as _, Status};
use humward_wire::topic::Topics;

use crate::outbox::{Message, Rank};

/// Most a status may grow to when its asset has many points, bytes.
const LARGEST_STATUS: usize = 16 * MAX_STATUS;

/// The JSON of an event, within its size.
pub fn event_json(event: &Event) -> Vec<u8> {
    event.clone().fit(MAX_EVENT).0.to_json()
}

/// The JSON of a status, within its size.
pub fn status_json(status: &Status) -> Vec<u8> {
    status.clone().fit(LARGEST_STATUS).0.to_json()
}

/// What is published for an action.
pub fn of(action: &Action, topics: &Topics) -> Option<Message> {
    match action {
        Action::Event(event) => {
            let topic = topics.event(event.header.asset.as_ref()?);
            Some(Message::Letter {
                lane: topic.as_str().into(),
                topic,
                payload: event_json(event).into(),
            })
        }
        Action::Status(status) => Some(Message::State {
            rank: Rank::Status,
            topic: topics.status(status.header.asset.as_ref()?),
            payload: status_json(status).into(),
        }),
        Action::Alarm { asset, watch, open } => Some(Message::State {
            rank: Rank::Alarm,
            topic: topics.alarm(asset, watch),
            payload: open.as_ref().map_or_else(Bytes::new, |alarm| {
                alarm.clone().fit(MAX_EVENT).0.to_json().into()
            }),
        }),
        Action::Evidence(evidence) => {
            let asset = evidence.header.asset.as_ref()?;
            Some(Message::Letter {
                lane: format!("evidence/{asset}").into(),
                topic: topics.evidence(asset, evidence.event.as_str()),
                payload: evidence.clone().fit(MAX_EVIDENCE).0.encode().into(),
            })
        }
        Action::Reply {
            asset,
            sender,
            reply,
        } => Some(Message::Letter {
            lane: format!("reply/{sender}").into(),
            topic: topics.reply(sender, asset),
            payload: reply.to_json().into(),
        }),
    }
}
