//! Evidence as CBOR: writing, and reading back with the byte of whatever is wrong.

use alloc::string::{String, ToString};
use alloc::vec::Vec;

use super::{Evidence, Trace};
use crate::cbor::{self, Cursor, Writer, Written};
use crate::field::{self, Field, Slot, Value};
use crate::id::Id;
use crate::out::{Header, Instant};
use crate::refusal::{Form, Reason, Refusal};

/// RFC 8746: 32-bit little-endian floats.
const F32LE: u64 = 85;

impl Evidence {
    /// The evidence as CBOR.
    #[must_use]
    pub fn encode(&self) -> Vec<u8> {
        let values = |trace: &Option<Trace>| trace.as_ref().map_or(0, |t| t.values.len());
        let samples = values(&self.spectrum) + values(&self.envelope) + values(&self.waveform);
        let header = &self.header;
        cbor::write(1024 + 4 * samples, |w| {
            w.map(KEYS.len() as u64)?;
            w.str("schema")?.str(&header.schema)?;
            w.str("gateway")?.str(header.gateway.as_str())?;
            w.str("epoch")?.u64(header.epoch)?;
            w.str("site")?.str(header.site.as_str())?;
            w.str("asset")?
                .encode(header.asset.as_ref().map(Id::as_str))?;
            w.str("at")?.str(&header.at.to_string())?;
            w.str("event")?.str(self.event.as_str())?;
            w.str("point")?.str(self.point.as_str())?;
            w.str("watch")?.encode(self.watch.as_deref())?;
            w.str("rpm")?.encode(self.rpm)?;
            trace(w.str("spectrum")?, self.spectrum.as_ref())?;
            trace(w.str("envelope")?, self.envelope.as_ref())?;
            trace(w.str("waveform")?, self.waveform.as_ref())?;
            w.str("truncated")?.bool(self.truncated)?.ok()
        })
    }

    /// Reads evidence back; keys that are not known are passed over, and the time comes back in whole milliseconds.
    ///
    /// # Errors
    /// The first thing that is wrong, with its byte; see [`Reason`].
    pub fn decode(bytes: &[u8]) -> Result<Evidence, Refusal> {
        let slots = field::read(bytes, Form::Cbor, &KEYS)?;
        let [
            schema,
            gateway,
            epoch,
            site,
            asset,
            at,
            event,
            point,
            watch,
            rpm,
            spectrum,
            envelope,
            waveform,
            cut,
        ] = &slots;
        Ok(Evidence {
            header: Header {
                schema: field::required(string(schema)?, "schema")?,
                gateway: field::required(field::id(gateway)?, "gateway")?,
                epoch: field::required(field::counter(epoch)?, "epoch")?,
                site: field::required(field::id(site)?, "site")?,
                asset: field::id(asset)?,
                at: Instant(field::required(field::instant(at, 1)?, "at")?),
            },
            event: field::required(field::id(event)?, "event")?,
            point: field::required(field::id(point)?, "point")?,
            watch: string(watch)?,
            rpm: field::float(rpm, &(f64::MIN..=f64::MAX))?,
            spectrum: read_trace(spectrum)?,
            envelope: read_trace(envelope)?,
            waveform: read_trace(waveform)?,
            truncated: field::required(boolean(cut)?, "truncated")?,
        })
    }
}

const KEYS: [&str; 14] = [
    "schema",
    "gateway",
    "epoch",
    "site",
    "asset",
    "at",
    "event",
    "point",
    "watch",
    "rpm",
    "spectrum",
    "envelope",
    "waveform",
    "truncated",
];

const TRACE_KEYS: [&str; 8] = [
    "start",
    "step",
    "step_unit",
    "unit",
    "band_hz",
    "resolution_hz",
    "thinned",
    "values",
];

fn trace(w: &mut Writer, value: Option<&Trace>) -> Written {
    let Some(trace) = value else {
        return w.null()?.ok();
    };
    w.map(TRACE_KEYS.len() as u64)?;
    w.str("start")?.f64(trace.start)?;
    w.str("step")?.f64(trace.step)?;
    w.str("step_unit")?.str(&trace.step_unit)?;
    w.str("unit")?.str(&trace.unit)?;
    w.str("band_hz")?.encode(trace.band_hz)?;
    w.str("resolution_hz")?.encode(trace.resolution_hz)?;
    w.str("thinned")?.u32(trace.thinned)?;
    w.str("values")?;
    let values = trace.values.iter().map(|value| value.to_le_bytes());
    cbor::typed(w, F32LE, 4 * trace.values.len(), values)
}

fn string(slot: Slot<'_, '_>) -> Result<Option<String>, Refusal> {
    Ok(field::text(slot)?.map(|(text, _)| text.to_string()))
}

fn boolean(slot: Slot<'_, '_>) -> Result<Option<bool>, Refusal> {
    match slot {
        Some(Field {
            value: Value::Bool(value),
            ..
        }) => Ok(Some(*value)),
        Some(field) => Err(field.refuse(Reason::WrongType)),
        None => Ok(None),
    }
}

fn read_trace(slot: Slot<'_, '_>) -> Result<Option<Trace>, Refusal> {
    let Some(field) = field::present(slot) else {
        return Ok(None);
    };
    let Value::CborMap {
        items,
        start,
        count,
    } = field.value
    else {
        return Err(field.refuse(Reason::WrongType));
    };
    let mut cursor = Cursor::new(items, start);
    let slots = field::read_entries(&mut cursor, count, &TRACE_KEYS)?;
    let [
        from,
        step,
        step_unit,
        unit,
        band,
        resolution,
        thinned,
        values,
    ] = &slots;
    let any = f64::MIN..=f64::MAX;
    let missing = |key| Refusal::of(Reason::MissingKey, field.at, key);
    let thinned =
        field::integer(thinned, 1..=i128::from(u32::MAX))?.and_then(|n| u32::try_from(n).ok());
    Ok(Some(Trace {
        start: field::float(from, &any)?.ok_or(missing("start"))?,
        step: field::float(step, &any)?.ok_or(missing("step"))?,
        step_unit: string(step_unit)?.ok_or(missing("step_unit"))?,
        unit: string(unit)?.ok_or(missing("unit"))?,
        band_hz: read_band(band)?,
        resolution_hz: field::float(resolution, &any)?,
        thinned: thinned.ok_or(missing("thinned"))?,
        values: read_values(field::present(values).ok_or(missing("values"))?)?,
    }))
}

fn read_band(slot: Slot<'_, '_>) -> Result<Option<[f64; 2]>, Refusal> {
    let Some(field) = field::present(slot) else {
        return Ok(None);
    };
    let Value::CborArray {
        items,
        start,
        count: 2,
    } = field.value
    else {
        return Err(field.refuse(Reason::WrongType));
    };
    let mut cursor = Cursor::new(items, start);
    let mut edge = || {
        let (at, value) = cursor.value()?;
        let edge = Some(Field {
            key: "band_hz",
            at,
            value,
        });
        field::float(&edge, &(f64::MIN..=f64::MAX))?.ok_or(Refusal::of(
            Reason::MissingKey,
            at,
            "band_hz",
        ))
    };
    Ok(Some([edge()?, edge()?]))
}

fn read_values(field: &Field<'_>) -> Result<Vec<f32>, Refusal> {
    if let Value::Typed {
        tag: F32LE, bytes, ..
    } = field.value
    {
        let (values, left) = bytes.as_chunks();
        return if left.is_empty() {
            Ok(values.iter().map(|b| f32::from_le_bytes(*b)).collect())
        } else {
            Err(field.refuse(Reason::PartialSample))
        };
    }
    Err(field.refuse(Reason::WrongType))
}
