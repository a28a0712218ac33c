//! The encoding of a foreign source: raw samples, or JSON of another maker by pointers.

use humward_wire::block::{
    Encoding, Fixed, JsonMap, Key, MapFault, Packing, RawLayout, RawTime, TimeUnit, Unit,
};

use super::super::Code;
use super::super::gather::Gather;
use super::super::tables::{ENCODING, FIXED, JSON, RAW};
use super::super::verify::join;
use super::super::view::View;

/// Reads a point's encoding; `None` for our own forms, and after faults.
pub(crate) fn read(point: View<'_>, path: &str, gather: &mut Gather<'_>) -> Option<Encoding> {
    let node = point
        .raw("encoding")
        .filter(|node| node.table().is_some())?;
    let path = join(path, "encoding");
    let view = View::new(Some(node), &ENCODING);
    match (view.given("raw"), view.given("json")) {
        (true, false) => {
            if view.given("fixed") {
                let place = view.place_of("fixed");
                gather.add(
                    Code::Contradiction,
                    place,
                    &join(&path, "fixed"),
                    gather.written(place),
                    "only beside json; a raw layout states its values itself".into(),
                );
            }
            raw(view.table_of("raw", &RAW), &join(&path, "raw"), gather).map(Encoding::Raw)
        }
        (false, true) => json(view, &path, gather).map(Encoding::JsonMapped),
        (both, _) => {
            let code = if both {
                Code::Contradiction
            } else {
                Code::MissingKey
            };
            let read = if both {
                "raw and json"
            } else {
                "neither raw nor json"
            };
            gather.add(
                code,
                view.place(),
                &path,
                read.into(),
                "one of raw and json".into(),
            );
            None
        }
    }
}

fn raw(view: View<'_>, path: &str, gather: &mut Gather<'_>) -> Option<RawLayout> {
    let header_bytes = usize::try_from(view.whole("header_bytes")?).ok()?;
    let at = match view.whole("at_offset") {
        Some(offset) => {
            let offset = usize::try_from(offset).ok()?;
            if offset.saturating_add(8) > header_bytes {
                let place = view.place_of("at_offset");
                gather.add(
                    Code::Contradiction,
                    place,
                    &join(path, "at_offset"),
                    gather.written(place),
                    format!("8 bytes inside the header of header_bytes = {header_bytes}"),
                );
            }
            Some(RawTime {
                offset,
                unit: time_unit(view)?,
            })
        }
        None => None,
    };
    Some(RawLayout {
        packing: Packing::from_name(&view.text("sample")?)?,
        header_bytes,
        at,
        rate_hz: view.number("rate_hz")?,
        unit: Unit::from_text(&view.text("unit")?)?,
        scale: view.number("scale")?,
        channels: u16::try_from(view.whole("channels")?).ok()?,
    })
}

fn json(view: View<'_>, path: &str, gather: &mut Gather<'_>) -> Option<JsonMap> {
    let (map, fixed) = (view.table_of("json", &JSON), view.table_of("fixed", &FIXED));
    let pointers: Vec<(Key, String)> = Key::ALL
        .into_iter()
        .filter_map(|key| Some((key, map.text(key.name())?)))
        .collect();
    let pointers: Vec<(Key, &str)> = pointers
        .iter()
        .map(|(key, pointer)| (*key, pointer.as_str()))
        .collect();
    let values = Fixed {
        rate_hz: fixed.number("rate_hz"),
        unit: fixed.text("unit").and_then(|unit| Unit::from_text(&unit)),
        scale: fixed.number("scale"),
        encoding: fixed
            .text("encoding")
            .and_then(|name| Packing::from_name(&name)),
        channels: fixed
            .whole("channels")
            .and_then(|channels| u16::try_from(channels).ok()),
    };
    if view.faulty() || map.faulty() || fixed.faulty() || !map.given("samples") {
        return None;
    }
    match JsonMap::new(&pointers, values, time_unit(map)?) {
        Ok(map) => Some(map),
        Err(fault) => {
            let (code, key) = match &fault {
                MapFault::Pointer { key, .. } | MapFault::Deep { key, .. } => {
                    (Code::WrongForm, key)
                }
                MapFault::Twice { key } => (Code::Twice, key),
                MapFault::Missing { key } => (Code::MissingKey, key),
            };
            let read = if map.given(key.name()) {
                gather.written(map.place_of(key.name()))
            } else {
                "nothing".into()
            };
            let key_path = format!("{path}.json.{}", key.name());
            gather.add(
                code,
                map.place_of(key.name()),
                &key_path,
                read,
                fault.to_string(),
            );
            None
        }
    }
}

fn time_unit(view: View<'_>) -> Option<TimeUnit> {
    match view.text("at_unit")?.as_str() {
        "ns" => Some(TimeUnit::Nanoseconds),
        "us" => Some(TimeUnit::Microseconds),
        "ms" => Some(TimeUnit::Milliseconds),
        "s" => Some(TimeUnit::Seconds),
        _ => None,
    }
}
