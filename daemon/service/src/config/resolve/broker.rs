//! The broker table, and the topics under its root.

use std::fs;
use std::path::Path;

use humward_wire::id::Id;
use humward_wire::topic::Topics;

use super::super::Code;
use super::super::gather::Gather;
use super::super::loaded::{Broker, Secret};
use super::super::tables::BROKER;
use super::super::view::View;

/// Reads the broker table; client ids take the site's and the gateway's id.
pub(crate) fn read(
    site: View<'_>,
    id: Option<&Id>,
    gateway: Option<&Id>,
    gather: &mut Gather<'_>,
) -> Option<Broker> {
    let view = site.table_of("broker", &BROKER);
    let tls = view.bool("tls")?;
    let needs = [
        ("ca_file", "tls", tls),
        ("password_file", "username", view.given("username")),
    ];
    for (key, needed, there) in needs {
        if view.given(key) && !there {
            let place = view.place_of(key);
            let allowed = format!("only beside {needed}; give {needed} or remove {key}");
            gather.add(
                Code::Contradiction,
                place,
                &format!("broker.{key}"),
                gather.written(place),
                allowed,
            );
        }
    }
    let usual = if tls { 8883 } else { 1883 };
    let port = if view.given("port") {
        u16::try_from(view.whole("port")?).ok()?
    } else {
        usual
    };
    let ca_file = view.file("ca_file", gather.sources.folder(view.place_of("ca_file")));
    if let Some(path) = &ca_file {
        let _text = contents(view, "ca_file", path, gather)?;
    }
    let password_file = view.file(
        "password_file",
        gather.sources.folder(view.place_of("password_file")),
    );
    let password = match &password_file {
        Some(path) => Some(password(view, path, gather)?),
        None => None,
    };
    let usual = || Some(format!("humward-{}-{}", id?, gateway?));
    Some(Broker {
        host: view.text("host")?,
        port,
        tls,
        ca_file,
        username: view.text("username"),
        password,
        client_id: view.text("client_id").or_else(usual)?,
        keep_alive: view.span("keep_alive")?,
    })
}

fn password(view: View<'_>, path: &Path, gather: &mut Gather<'_>) -> Option<Secret> {
    let text = contents(view, "password_file", path, gather)?;
    let line = text.lines().next().unwrap_or_default();
    if line.is_empty() {
        let read = format!("{}, whose first line is empty", path.display());
        let place = view.place_of("password_file");
        gather.add(
            Code::Unreadable,
            place,
            "broker.password_file",
            read,
            "a file whose first line is the password".into(),
        );
        return None;
    }
    Some(Secret(line.into()))
}

fn contents(view: View<'_>, key: &str, path: &Path, gather: &mut Gather<'_>) -> Option<String> {
    match fs::read_to_string(path) {
        Ok(text) => Some(text),
        Err(error) => {
            let read = format!("{}: {error}", path.display());
            let allowed = "a file this user may read; a relative path starts at the configuration file's folder".into();
            gather.add(
                Code::Unreadable,
                view.place_of(key),
                &format!("broker.{key}"),
                read,
                allowed,
            );
            None
        }
    }
}

/// The topics under the root and site.
pub(crate) fn topics(site: View<'_>, id: &Id, gather: &mut Gather<'_>) -> Option<Topics> {
    let view = site.table_of("broker", &BROKER);
    match Topics::new(&view.text("root")?, id) {
        Ok(topics) => Some(topics),
        Err(fault) => {
            let place = view.place_of("root");
            gather.add(
                Code::Topic,
                place,
                "broker.root",
                gather.written(place),
                fault.to_string(),
            );
            None
        }
    }
}
