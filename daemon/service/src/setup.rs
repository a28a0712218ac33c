//! From the checked configuration to what the parts of the daemon are made of.

use std::sync::Arc;
use std::time::Duration;

use bytes::Bytes;
use humward_monitor::input::{Identity, Source};
use humward_wire::command::Verb;

use crate::config::{Feed, Loaded};
use crate::mqtt::Settings;
use crate::mqtt::tls::{self, TlsFault};
use crate::outbox::{Message, Rank};
use crate::route::{About, Route, Routes};

/// The inbound topics and the groups they lead to.
pub fn routes(config: &Loaded) -> Routes {
    let mut routes = Routes::new(config.topics().clone());
    for (group, plan) in config.groups().iter().enumerate() {
        for asset in plan.assets() {
            routes.add_asset(asset.id().clone(), group);
        }
    }
    for route in config.routes() {
        let (asset, about) = match route.feed() {
            Feed::Block { asset, source } => {
                let source = Source {
                    asset: asset.clone(),
                    source: source.clone(),
                };
                (asset, About::Block(source, route.encoding().cloned()))
            }
            Feed::Speed { asset } => (asset, About::Speed(asset.clone())),
            Feed::Process { asset } => (asset, About::Process(asset.clone())),
        };
        if let Some(group) = routes.group_of(asset) {
            routes.add(Route {
                topic: route.topic().to_owned(),
                group,
                about,
            });
        }
    }
    routes
}

/// What to subscribe to: below our own topics everything of each asset, so that a misspelt point is noticed
/// and counted, and every mapped topic.
pub fn filters(config: &Loaded) -> Vec<String> {
    let assets = config.groups().iter().flat_map(|plan| plan.assets());
    let mut filters: Vec<String> = assets
        .flat_map(|asset| config.topics().asset_filters(asset.id()))
        .collect();
    let beside: Vec<String> = config
        .routes()
        .iter()
        .map(|route| route.topic())
        .filter(|topic| {
            !filters
                .iter()
                .any(|filter| humward_wire::topic::matches(filter, topic))
        })
        .map(str::to_owned)
        .collect();
    filters.extend(beside);
    filters
}

/// Who we are.
pub fn identity(config: &Loaded) -> Identity {
    Identity {
        gateway: config.gateway().id().clone(),
        site: config.site().clone(),
        epoch: 0,
    }
}

/// Commands that may be given.
pub fn allowed(config: &Loaded) -> Arc<[Verb]> {
    config
        .commands()
        .iter()
        .filter_map(|word| Verb::from_text(word))
        .collect()
}

/// How to reach the broker.
///
/// # Errors
/// TLS is wanted and cannot be set up.
pub fn settings(config: &Loaded) -> Result<Settings, TlsFault> {
    let broker = config.broker();
    let password = broker
        .password()
        .map(|secret| secret.reveal().to_owned())
        .unwrap_or_default();
    Ok(Settings {
        host: broker.host().to_owned(),
        port: broker.port(),
        keep_alive: Duration::from_secs_f64(broker.keep_alive().secs()),
        login: broker.username().map(|user| (user.to_owned(), password)),
        tls: if broker.tls() {
            Some(tls::client(broker.ca_file())?)
        } else {
            None
        },
    })
}

/// Empties every alarm topic of the configuration: what an earlier run left retained is not true now.
///
/// Occurrences that are open by then fill theirs again.
pub fn nothing_open(config: &Loaded) -> Vec<Message> {
    let mut messages = Vec::new();
    for asset in config.groups().iter().flat_map(|plan| plan.assets()) {
        let watches = asset
            .spec()
            .watches
            .iter()
            .map(|watch| watch.full_name().to_owned());
        let sensors = asset
            .spec()
            .points
            .iter()
            .map(|point| format!("sensor.{}", point.id()));
        messages.extend(watches.chain(sensors).map(|watch| Message::State {
            rank: Rank::Alarm,
            topic: config.topics().alarm(asset.id(), &watch),
            payload: Bytes::new(),
        }));
    }
    messages
}
