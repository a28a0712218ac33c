//! From the verified tree to plans, routes and settings.
//!
//! `zones`, `broker`, `point`, `watch` and `asset` each read their tables; `routes` settles topics.

mod asset;
mod broker;
mod encoding;
mod point;
mod routes;
mod watch;
mod written;
mod zones;

use std::sync::Arc;

use humward_monitor::plan::{AssetPlan, GroupPlan, ZoneLimits};
use humward_wire::id::Id;

use super::Code;
use super::canonical;
use super::gather::Gather;
use super::loaded::{Gateway, Loaded};
use super::near::nearest;
use super::node::Node;
use super::tables::{ASSET, GATEWAY, SITE};
use super::verify::item_path;
use super::view::View;

/// The zone classes of a configuration that holds nothing else.
pub(crate) fn zone_tables(tree: &Node, gather: &mut Gather<'_>) -> Vec<ZoneLimits> {
    zones::of_site(View::new(Some(tree), &SITE), gather)
}

/// The whole configuration; `None` after faults that leave nothing to run.
pub(crate) fn site(tree: &Node, gather: &mut Gather<'_>) -> Option<Loaded> {
    let site = View::new(Some(tree), &SITE);
    let id = site.id("site");
    let gateway = gateway(site.table_of("gateway", &GATEWAY));
    let broker = broker::read(site, id.as_ref(), gateway.as_ref().map(Gateway::id), gather);
    let zones = zones::all(site, gather);
    let topics = id.as_ref().and_then(|id| broker::topics(site, id, gather));
    let wide = written::of_site(site, gather);
    let mut made = Vec::new();
    for (index, view) in site.tables_of("asset", &ASSET).into_iter().enumerate() {
        let Some(node) = view.node() else { continue };
        let path = item_path("asset", index, node);
        made.extend(asset::read(view, &path, site, &zones, &wide, gather));
    }
    once_in_the_site(&made, gather);
    written::all_used(&wide, &made, gather);
    let routes = topics
        .as_ref()
        .map(|topics| routes::settle(topics, &made, gather))
        .unwrap_or_default();
    let notes = made.iter().flat_map(|made| made.notes.clone()).collect();
    let groups = groups(made, gather)?;
    let commands = site
        .texts("commands")
        .into_iter()
        .map(|(word, _)| word)
        .collect();
    Some(Loaded {
        site: id?,
        gateway: gateway?,
        broker: broker?,
        topics: topics?,
        groups,
        routes,
        commands,
        notes,
        hash: canonical::hash(tree, &SITE),
    })
}

fn gateway(view: View<'_>) -> Option<Gateway> {
    let size =
        |key: &str, unit: usize| Some(usize::try_from(view.whole(key)?).ok()?.saturating_mul(unit));
    Some(Gateway {
        id: view.id("id")?,
        workers: size("workers", 1)?,
        mailbox_bytes: size("mailbox_kib", 1024)?,
        outbox_bytes: size("outbox_mib", 1024 * 1024)?,
        at_tolerance: view.span("at_tolerance")?,
    })
}

fn once_in_the_site(made: &[asset::Made<'_>], gather: &mut Gather<'_>) {
    for (index, asset) in made.iter().enumerate() {
        if let Some(earlier) = made[..index].iter().find(|earlier| earlier.id == asset.id) {
            let place = asset.view.place_of("id");
            let allowed = format!(
                "each asset id once in the site; it stands already at {}",
                gather.tell(earlier.view.place_of("id"))
            );
            gather.add(
                Code::Twice,
                place,
                &format!("{}.id", asset.path),
                gather.written(place),
                allowed,
            );
        }
    }
}

/// The groups in the order of their first asset; `None` when an asset could not be made.
fn groups(made: Vec<asset::Made<'_>>, gather: &mut Gather<'_>) -> Option<Vec<Arc<GroupPlan>>> {
    let mut order: Vec<Id> = Vec::new();
    let mut members: Vec<Vec<AssetPlan>> = Vec::new();
    let mut whole = true;
    for asset in made {
        let index = order
            .iter()
            .position(|id| *id == asset.group)
            .unwrap_or_else(|| {
                order.push(asset.group.clone());
                members.push(Vec::new());
                order.len() - 1
            });
        match asset.plan {
            Some(plan) => members[index].push(plan),
            None => whole = false,
        }
    }
    let mut groups = Vec::new();
    for (id, assets) in order.into_iter().zip(members) {
        match GroupPlan::new(id, assets) {
            Ok(group) => groups.push(Arc::new(group)),
            // Assets of one id: told already, with both places.
            Err(_) if !gather.faults.is_empty() => whole = false,
            Err(_) => return None,
        }
    }
    whole.then_some(groups)
}

/// `did you mean …?`, or the list of what there is.
pub(crate) fn suggest<'a>(
    name: &str,
    known: impl Iterator<Item = &'a str> + Clone,
    what: &str,
) -> String {
    nearest(name, known.clone()).map_or_else(
        || {
            let names: Vec<&str> = known.collect();
            if names.is_empty() {
                format!("{what}: there is none")
            } else {
                format!("{what}: {}", names.join(", "))
            }
        },
        |near| format!("did you mean {near}?"),
    )
}
