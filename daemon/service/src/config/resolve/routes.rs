//! Which topic brings what: usual or mapped, no topic twice, none of our own words read back.

use humward_wire::block::Encoding;
use humward_wire::id::Id;
use humward_wire::topic::{Inbound, Topics, check_filter};

use super::super::Code;
use super::super::gather::Gather;
use super::super::loaded::{Feed, Route};
use super::super::source::Place;
use super::super::verify::join;
use super::asset::Made;
use super::point::PointMade;

/// Settles every inbound topic.
pub(crate) fn settle(topics: &Topics, made: &[Made<'_>], gather: &mut Gather<'_>) -> Vec<Route> {
    let mut routes: Vec<(Route, Place)> = Vec::new();
    for asset in made {
        for source in sources(asset) {
            let Some((topic, place, key)) = block_topic(topics, asset, &source, gather) else {
                continue;
            };
            let encoding = encoding(asset, &source, gather);
            let feed = Feed::Block {
                asset: asset.id.clone(),
                source,
            };
            add(
                &mut routes,
                Route {
                    topic,
                    feed,
                    encoding,
                },
                place,
                &key,
                gather,
            );
        }
        let id = &asset.id;
        let scalars = [
            (
                "speed_topic",
                topics.speed(id),
                Feed::Speed { asset: id.clone() },
            ),
            (
                "process_topic",
                topics.process(id),
                Feed::Process { asset: id.clone() },
            ),
        ];
        for (key, usual, feed) in scalars {
            let mapped = asset.view.text(key);
            let key_path = join(&asset.path, key);
            let place = asset.view.place_of(key);
            let topic = match mapped {
                Some(topic) if usable(topics, &topic, place, &key_path, gather) => topic,
                Some(_) => continue,
                None => usual,
            };
            add(
                &mut routes,
                Route {
                    topic,
                    feed,
                    encoding: None,
                },
                place,
                &key_path,
                gather,
            );
        }
    }
    routes.into_iter().map(|(route, _)| route).collect()
}

/// The sources of an asset, in the order of its points.
fn sources(asset: &Made<'_>) -> Vec<Id> {
    let mut sources: Vec<Id> = Vec::new();
    for point in &asset.points {
        if !sources.contains(&point.source) {
            sources.push(point.source.clone());
        }
    }
    sources
}

fn of_source<'a, 't>(asset: &'a Made<'t>, source: &Id) -> impl Iterator<Item = &'a PointMade<'t>> {
    asset
        .points
        .iter()
        .filter(move |point| point.source == *source)
}

/// The topic of a source, its place and key; the points of one source must agree.
fn block_topic(
    topics: &Topics,
    asset: &Made<'_>,
    source: &Id,
    gather: &mut Gather<'_>,
) -> Option<(String, Place, String)> {
    let mut mapped: Option<(String, Place, String)> = None;
    for point in of_source(asset, source) {
        let Some(topic) = point.view.text("topic") else {
            continue;
        };
        let (place, key) = (point.view.place_of("topic"), join(&point.path, "topic"));
        match &mapped {
            None if !usable(topics, &topic, place, &key, gather) => return None,
            None => mapped = Some((topic, place, key)),
            Some((first, ..)) if *first == topic => {}
            Some((first, ..)) => {
                let allowed = format!(
                    "{first:?}, as the other point of source {source} has it; one source, one topic"
                );
                gather.add(
                    Code::Contradiction,
                    place,
                    &key,
                    gather.written(place),
                    allowed,
                );
            }
        }
    }
    mapped.or_else(|| {
        let point = of_source(asset, source).next()?;
        Some((
            topics.block(&asset.id, source),
            point.view.place(),
            join(&point.path, "topic"),
        ))
    })
}

fn encoding(asset: &Made<'_>, source: &Id, gather: &mut Gather<'_>) -> Option<Encoding> {
    let mut first: Option<&Encoding> = None;
    for point in of_source(asset, source) {
        match (first, &point.encoding) {
            (None, Some(encoding)) => first = Some(encoding),
            (Some(one), Some(other)) if one != other => {
                let place = point.view.place_of("encoding");
                let allowed = format!(
                    "the same encoding at every point of source {source}, or at one of them only"
                );
                gather.add(
                    Code::Contradiction,
                    place,
                    &join(&point.path, "encoding"),
                    gather.written(place),
                    allowed,
                );
            }
            (None | Some(_), _) => {}
        }
    }
    first.cloned()
}

/// Whether a topic can be subscribed to for values coming in.
fn usable(topics: &Topics, topic: &str, place: Place, key: &str, gather: &mut Gather<'_>) -> bool {
    let allowed = if let Err(fault) = check_filter(topic) {
        Some(fault.to_string())
    } else if topic.contains(['+', '#']) {
        Some("one topic, without + and #".to_owned())
    } else if topic.starts_with('$') {
        Some("a topic that does not begin with $; brokers keep those for themselves".to_owned())
    } else if topics.is_outbound(topic) {
        Some("a topic on which humward itself does not publish".to_owned())
    } else if matches!(topics.parse_inbound(topic), Ok(Inbound::Command { .. })) {
        Some("a topic other than the command topics".to_owned())
    } else {
        None
    };
    match allowed {
        Some(allowed) => {
            gather.add(Code::Topic, place, key, gather.written(place), allowed);
            false
        }
        None => true,
    }
}

fn add(
    routes: &mut Vec<(Route, Place)>,
    route: Route,
    place: Place,
    key: &str,
    gather: &mut Gather<'_>,
) {
    if let Some((earlier, there)) = routes
        .iter()
        .find(|(earlier, _)| earlier.topic == route.topic)
    {
        // Two assets of one id share every topic; that fault is told at their ids.
        if earlier.feed != route.feed {
            let allowed = format!(
                "a topic of its own; points of one several-axis sensor give the same source instead (the topic is taken at {})",
                gather.tell(*there)
            );
            gather.add(
                Code::Twice,
                place,
                key,
                format!("{:?}", route.topic),
                allowed,
            );
        }
    } else {
        routes.push((route, place));
    }
}
