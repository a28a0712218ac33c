//! Zone tables: those shipped with the program, and the site's beside or instead of them.

use humward_monitor::plan::ZoneLimits;
use toml::de::DeTable;

use super::super::Code;
use super::super::gather::Gather;
use super::super::node::Node;
use super::super::source::Place;
use super::super::tables::{SITE, ZONE_CLASS, ZONE_TABLE};
use super::super::verify::{self, item_path, join};
use super::super::view::View;

/// The zone table shipped with the program; the same file lies in `config/` for copying.
pub(crate) const SHIPPED: &str = include_str!("../../../../../config/zones.toml");

/// Every class: the site's, then those shipped that no class of the site replaces.
pub(crate) fn all(site: View<'_>, gather: &mut Gather<'_>) -> Vec<ZoneLimits> {
    let mut classes = of_site(site, gather);
    match DeTable::parse(SHIPPED) {
        Ok(document) => {
            let mut tree = Node::of_document(&document, 0);
            tree.built_in();
            if let Some(tables) = tree.table_mut("zone_table") {
                verify::list(tables, &ZONE_TABLE, "zone_table", gather);
            }
            let shipped = of_site(View::new(Some(&tree), &SITE), gather);
            let new: Vec<ZoneLimits> = shipped
                .into_iter()
                .filter(|zone| classes.iter().all(|own| own.class() != zone.class()))
                .collect();
            classes.extend(new);
        }
        Err(error) => {
            gather.add(
                Code::Syntax,
                Place::BuiltIn,
                "zone_table",
                "the shipped zone table".into(),
                error.to_string(),
            );
        }
    }
    classes
}

/// The classes written in a configuration.
pub(crate) fn of_site(site: View<'_>, gather: &mut Gather<'_>) -> Vec<ZoneLimits> {
    let mut classes: Vec<(ZoneLimits, Place)> = Vec::new();
    for (index, table) in site
        .tables_of("zone_table", &ZONE_TABLE)
        .into_iter()
        .enumerate()
    {
        let path = join("zone_table", &format!("#{}", index + 1));
        let Some(source) = table.text("source") else {
            continue;
        };
        for (number, class) in table
            .tables_of("class", &ZONE_CLASS)
            .into_iter()
            .enumerate()
        {
            let Some(node) = class.node() else { continue };
            let path = item_path(&join(&path, "class"), number, node);
            let (Some(id), Some(borders)) = (class.text("id"), class.numbers("borders")) else {
                continue;
            };
            let place = class.place_of("id");
            if let Some((_, earlier)) = classes.iter().find(|(other, _)| other.class() == id) {
                let allowed = format!(
                    "each class once; it stands already at {}",
                    gather.tell(*earlier)
                );
                gather.add(
                    Code::Twice,
                    place,
                    &join(&path, "id"),
                    gather.written(place),
                    allowed,
                );
                continue;
            }
            match ZoneLimits::new(&id, &source, borders) {
                Ok(zone) => classes.push((zone, place)),
                Err(faults) => {
                    for fault in faults {
                        let view = if fault.key == "source" { table } else { class };
                        let key = join(&path, fault.key);
                        gather.add(
                            fault.code.into(),
                            view.place_of(fault.key),
                            &key,
                            fault.read,
                            fault.allowed,
                        );
                    }
                }
            }
        }
    }
    classes.into_iter().map(|(zone, _)| zone).collect()
}
