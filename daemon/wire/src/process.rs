//! Process values: run bit, amps, flow, pressures and the like.
//!
//! In: a JSON object or a CBOR map. Out: a named number with its unit; a boolean is 1 or 0. The name is an id,
//! because configurations refer to it. What a value means is the configuration's to say.

use alloc::string::String;

use crate::field::{self, Value};
use crate::id::Id;
use crate::refusal::Refusal;

/// One process value.
#[derive(Clone, Debug, PartialEq)]
pub struct Process {
    /// When it was measured, ns since 1970 UTC.
    pub at: Option<i64>,
    /// What it is, such as `flow` or `run`.
    pub name: Id,
    /// The value, finite.
    pub value: f64,
    /// Its unit, as the sender writes it.
    pub unit: Option<String>,
}

/// Reads a process value.
///
/// # Errors
/// The first thing that is wrong, with its byte; see [`Reason`](crate::refusal::Reason).
pub fn decode(payload: &[u8]) -> Result<Process, Refusal> {
    let [at, name, value, unit] = field::read(
        payload,
        field::detect(payload)?,
        &["at", "name", "value", "unit"],
    )?;
    let number = match field::present(&value).map(|field| &field.value) {
        Some(Value::Bool(on)) => Some(f64::from(u8::from(*on))),
        _ => field::float(&value, &(f64::MIN..=f64::MAX))?,
    };
    Ok(Process {
        at: field::instant(&at, 1)?,
        name: field::required(field::id(&name)?, "name")?,
        value: field::required(number, "value")?,
        unit: field::words(&unit)?,
    })
}

#[cfg(test)]
mod tests {
    use super::decode;
    use crate::refusal::{Reason, Refusal};

    #[test]
    fn a_run_bit_reads_as_one_or_zero_in_either_encoding() {
        assert_eq!(
            decode(br#"{"name":"run","value":true}"#).unwrap().value,
            1.0
        );
        assert_eq!(
            decode(br#"{"name":"run","value":false}"#).unwrap().value,
            0.0
        );
        assert_eq!(
            decode(b"\xa2\x64name\x63run\x65value\xf5").unwrap().value,
            1.0
        );
    }

    #[test]
    fn a_value_keeps_its_sign_and_unit_and_must_be_finite() {
        let flow = decode(
            br#"{"at": 1796094480250000000, "name": "flow", "value": -62.1, "unit": "m3/h"}"#,
        )
        .unwrap();
        assert_eq!(
            (flow.at, flow.value),
            (Some(1_796_094_480_250_000_000), -62.1)
        );
        assert_eq!(flow.unit.as_deref(), Some("m3/h"));
        assert_eq!(
            decode(br#"{"name":"flow","value":1e999}"#),
            Err(Refusal {
                reason: Reason::OutOfRange,
                offset: 23,
                key: Some("value")
            })
        );
        assert_eq!(
            decode(br#"{"name":"flow","value":"1"}"#),
            Err(Refusal {
                reason: Reason::WrongType,
                offset: 23,
                key: Some("value")
            })
        );
    }
}
