//! Speed of an asset, or of one of its shafts.
//!
//! In: a JSON object, a CBOR map, or a bare JSON number such as `1482.3`. Out: r/min, 0 to 1e6; the direction of
//! rotation is not told here, so a negative speed is refused. A retained value counts only with its own time, which
//! is the caller's to check: `at` is `None` when the message has none.

use crate::block::MAX_RPM;
use crate::field::{self, Value};
use crate::id::Id;
use crate::json;
use crate::refusal::{Form, Reason, Refusal};

/// One speed message.
#[derive(Clone, Debug, PartialEq)]
pub struct Speed {
    /// When it was measured, ns since 1970 UTC.
    pub at: Option<i64>,
    /// Shaft speed, r/min.
    pub rpm: f64,
    /// The shaft; `None`: the asset's first.
    pub shaft: Option<Id>,
}

/// Reads a speed message.
///
/// # Errors
/// The first thing that is wrong, with its byte; see [`Reason`].
pub fn decode(payload: &[u8]) -> Result<Speed, Refusal> {
    if payload
        .trim_ascii_start()
        .first()
        .is_some_and(|b| matches!(b, b'-' | b'0'..=b'9'))
    {
        return bare(payload);
    }
    let [at, rpm, shaft] = field::read(payload, field::detect(payload)?, &["at", "rpm", "shaft"])?;
    Ok(Speed {
        at: field::instant(&at, 1)?,
        rpm: field::required(field::float(&rpm, &(0.0..=MAX_RPM))?, "rpm")?,
        shaft: field::id(&shaft)?,
    })
}

fn bare(payload: &[u8]) -> Result<Speed, Refusal> {
    let text = json::text(payload)?;
    let start = payload.len() - payload.trim_ascii_start().len();
    let raw = json::single(text)?;
    let value = match json::number(raw) {
        Value::Int(integer) => integer as f64,
        Value::Float(float) => float,
        Value::Null
        | Value::Bool(_)
        | Value::Text { .. }
        | Value::CborArray { .. }
        | Value::CborMap { .. }
        | Value::JsonArray { .. }
        | Value::Typed { .. }
        | Value::Other => return Err(Refusal::at(Reason::WrongType, start)),
    };
    if (0.0..=MAX_RPM).contains(&value) {
        Ok(Speed {
            at: None,
            rpm: value,
            shaft: None,
        })
    } else {
        Err(Refusal::of(Reason::OutOfRange, start, "rpm"))
    }
}

/// The form a payload has, for counters.
///
/// # Errors
/// An empty payload, or a first byte that fits nothing.
pub fn form(payload: &[u8]) -> Result<Form, Refusal> {
    if payload
        .first()
        .is_some_and(|b| matches!(b, b'-' | b'0'..=b'9'))
    {
        return Ok(Form::Json);
    }
    field::detect(payload)
}

#[cfg(test)]
mod tests {
    use super::{Speed, decode};
    use crate::id::Id;
    use crate::refusal::{Reason, Refusal};

    #[test]
    fn a_bare_number_an_object_and_a_cbor_map_tell_the_same_speed() {
        let bare = decode(b" 1482.5\n").unwrap();
        assert_eq!(
            bare,
            Speed {
                at: None,
                rpm: 1482.5,
                shaft: None
            }
        );
        let object =
            decode(br#"{"rpm":1482.5,"at":"2026-12-01T03:08:00.250Z","shaft":"pump","more":{}}"#)
                .unwrap();
        assert_eq!(
            object,
            Speed {
                at: Some(1_796_094_480_250_000_000),
                rpm: 1482.5,
                shaft: Id::new("pump").ok()
            }
        );
        assert_eq!(decode(b"\xa1\x63rpm\xf9\x66\x00").unwrap().rpm, 1536.0);
    }

    #[test]
    fn standstill_is_a_speed_and_turning_backwards_is_not() {
        assert_eq!(decode(b"0").unwrap().rpm, 0.0);
        let refused = |offset| {
            Err(Refusal {
                reason: Reason::OutOfRange,
                offset,
                key: Some("rpm"),
            })
        };
        assert_eq!(decode(b"-1"), refused(0));
        assert_eq!(decode(b"1000000.1"), refused(0));
        assert_eq!(decode(br#"{"rpm": -0.5}"#), refused(8));
        assert_eq!(decode(b"1e999"), refused(0));
    }
}
