//! What a topic is about, and who is to hear of it.
//!
//! Built once from the configuration: each inbound topic, default or mapped, leads to one group. Commands carry
//! their sender in the topic and are looked up by asset. A topic that leads nowhere is counted by the intake.

use std::collections::HashMap;
use std::sync::Arc;

use humward_monitor::input::Source;
use humward_wire::block::Encoding;
use humward_wire::id::Id;
use humward_wire::topic::{Inbound, Topics};

/// Which of the daemon's groups, by its place in the configuration.
pub type GroupIndex = usize;

/// Where a message goes and how it is read.
#[derive(Debug, Clone, PartialEq)]
pub struct Route {
    /// Its topic.
    pub topic: String,
    /// The group that hears of it.
    pub group: GroupIndex,
    /// What it is about.
    pub about: About,
}

/// What a message is about.
#[derive(Debug, Clone, PartialEq)]
pub enum About {
    /// Samples of a source, and how they are written; `None`: CBOR or JSON by the first byte.
    Block(Source, Option<Encoding>),
    /// The speed of an asset.
    Speed(Id),
    /// A process value of an asset.
    Process(Id),
    /// A command to an asset.
    Command {
        /// The asset.
        asset: Id,
        /// Who asks, as the topic says.
        sender: Id,
    },
}

/// Every inbound topic of the configuration.
#[derive(Debug)]
pub struct Routes {
    topics: Topics,
    exact: HashMap<String, Arc<Route>>,
    assets: HashMap<Id, GroupIndex>,
}

impl Routes {
    /// No topics yet; commands are looked up below `topics`.
    pub fn new(topics: Topics) -> Self {
        Self {
            topics,
            exact: HashMap::new(),
            assets: HashMap::new(),
        }
    }

    /// Adds an asset, which may be sent commands.
    pub fn add_asset(&mut self, asset: Id, group: GroupIndex) {
        self.assets.insert(asset, group);
    }

    /// The group an asset is in.
    pub fn group_of(&self, asset: &Id) -> Option<GroupIndex> {
        self.assets.get(asset).copied()
    }

    /// Adds a topic.
    pub fn add(&mut self, route: Route) {
        self.exact.insert(route.topic.clone(), Arc::new(route));
    }

    /// The topics routed, in no order.
    pub fn known(&self) -> impl Iterator<Item = &Route> {
        self.exact.values().map(|route| &**route)
    }

    /// Where a message on `topic` goes.
    pub fn find(&self, topic: &str) -> Option<Arc<Route>> {
        if let Some(route) = self.exact.get(topic) {
            return Some(Arc::clone(route));
        }
        match self.topics.parse_inbound(topic) {
            Ok(Inbound::Command { sender, asset }) => {
                let group = *self.assets.get(&asset)?;
                Some(Arc::new(Route {
                    topic: topic.to_owned(),
                    group,
                    about: About::Command { asset, sender },
                }))
            }
            Ok(Inbound::Block { .. } | Inbound::Speed { .. } | Inbound::Process { .. })
            | Err(_) => None,
        }
    }
}

#[cfg(test)]
mod tests {
    use humward_monitor::input::Source;
    use humward_wire::id::Id;
    use humward_wire::topic::Topics;

    use super::{About, Route, Routes};

    fn id(text: &str) -> Id {
        Id::new(text).expect("a test id")
    }

    fn routes() -> Routes {
        let topics = Topics::new("humward/v1", &id("harbour")).expect("a test root");
        let mut routes = Routes::new(topics);
        routes.add_asset(id("P-1"), 3);
        let source = Source {
            asset: id("P-1"),
            source: id("de"),
        };
        routes.add(Route {
            topic: "plant/sensors/17".into(),
            group: 3,
            about: About::Block(source, None),
        });
        routes
    }

    #[test]
    fn a_mapped_topic_leads_to_its_group_and_the_default_one_it_replaced_does_not() {
        assert_eq!(
            routes().find("plant/sensors/17").map(|route| route.group),
            Some(3)
        );
        assert_eq!(routes().find("humward/v1/harbour/block/P-1/de"), None);
    }

    #[test]
    fn a_command_is_routed_by_its_asset_and_keeps_its_sender() {
        let route = routes()
            .find("humward/v1/harbour/command/scada/P-1")
            .expect("P-1 is known");
        assert_eq!(
            (route.group, &route.about),
            (
                3,
                &About::Command {
                    asset: id("P-1"),
                    sender: id("scada")
                }
            )
        );
        assert_eq!(routes().find("humward/v1/harbour/command/scada/P-2"), None);
        assert_eq!(
            routes().find("humward/v1/elsewhere/command/scada/P-1"),
            None
        );
    }
}
