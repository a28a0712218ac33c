//! From keys and values to a block: the rules every keyed encoding shares.
//!
//! `at`, `rate`, `unit` and `samples` must be there. `scale` is 1 when left out, but integer typed samples in a
//! physical unit must bring it: a forgotten scale is a wrong alarm, not a default.

use super::mapped::{Fixed, Key};
use super::packing::Packing;
use super::samples;
use super::{Block, Limits, MAX_RPM, Unit};
use crate::field::{self, Field, Value};
use crate::refusal::{Form, Reason, Refusal};

/// One slot per [`Key`], in its order.
pub(super) type Slots<'a> = [Option<Field<'a>>; Key::ALL.len()];

/// Names of the keys in the order of [`Key::ALL`].
pub(super) const NAMES: [&str; Key::ALL.len()] = {
    let mut names = [""; Key::ALL.len()];
    let mut place = 0;
    while place < names.len() {
        names[place] = Key::ALL[place].name();
        place += 1;
    }
    names
};

/// What the configuration adds to the keys.
pub(super) struct Rules<'f> {
    pub(super) fixed: &'f Fixed,
    /// Nanoseconds in the unit of a numeric `at`.
    pub(super) per_unit: i64,
    /// Whether a block without `at` is stamped on arrival.
    pub(super) clockless: bool,
    /// Whether samples may be base64 text.
    pub(super) base64: bool,
}

/// Decodes a CBOR map or JSON object with our own keys.
pub(super) fn keyed(
    block: &mut Block,
    payload: &[u8],
    form: Form,
    limits: &Limits,
) -> Result<(), Refusal> {
    let slots = field::read(payload, form, &NAMES)?;
    let rules = Rules {
        fixed: &Fixed::default(),
        per_unit: 1,
        clockless: false,
        base64: form != Form::Cbor,
    };
    build(block, &slots, limits, &rules)
}

/// Checks every field and fills the block.
pub(super) fn build(
    block: &mut Block,
    slots: &Slots<'_>,
    limits: &Limits,
    rules: &Rules<'_>,
) -> Result<(), Refusal> {
    let [
        at,
        seq,
        rate,
        unit,
        scale,
        samples,
        encoding,
        channels,
        rpm,
        bias,
    ] = slots;
    let fixed = rules.fixed;

    block.at = field::instant(at, rules.per_unit)?;
    if block.at.is_none() && !rules.clockless {
        return Err(Refusal::of(Reason::MissingKey, 0, Key::At.name()));
    }
    block.seq = field::counter(seq)?;
    block.rate_hz = field::required(
        field::float(rate, &limits.rate_hz)?.or(fixed.rate_hz),
        Key::Rate.name(),
    )?;
    block.unit = field::required(read_unit(unit)?.or(fixed.unit), Key::Unit.name())?;
    let given_scale = read_scale(scale)?.or(fixed.scale);
    let channel_range = 1..=i128::from(limits.max_channels);
    let given = field::integer(channels, channel_range)?.and_then(|n| u16::try_from(n).ok());
    block.channels = given.or(fixed.channels).unwrap_or(1);
    block.rpm = field::float(rpm, &(0.0..=MAX_RPM))?;
    block.bias = field::float(bias, &(-1e6..=1e6))?;

    let samples = field::required(field::present(samples), Key::Samples.name())?;
    if matches!(samples.value, Value::Text { .. }) && !rules.base64 {
        return Err(samples.refuse(Reason::WrongType));
    }
    let packing = if rules.base64 {
        read_packing(encoding)?.or(fixed.encoding)
    } else {
        None
    };
    let origin = samples::fill(&mut block.samples, samples, packing, limits)?;
    block.integer_rail = origin.rail();
    if given_scale.is_none() && block.integer_rail.is_some() && block.unit != Unit::Count {
        return Err(Refusal::of(Reason::MissingKey, 0, Key::Scale.name()));
    }
    block.scale = given_scale.unwrap_or(1.0);
    counts(block, samples.at)?;
    samples::check(&block.samples, block.scale, &origin)
}

/// At least one sample, and as many of every channel; told at the samples.
pub(super) fn counts(block: &Block, at: usize) -> Result<(), Refusal> {
    if block.samples.is_empty() {
        return Err(Refusal::of(Reason::NoSamples, at, Key::Samples.name()));
    }
    if !block
        .samples
        .len()
        .is_multiple_of(usize::from(block.channels.max(1)))
    {
        return Err(Refusal::of(Reason::UnevenChannels, at, Key::Samples.name()));
    }
    Ok(())
}

fn read_unit(slot: field::Slot<'_, '_>) -> Result<Option<Unit>, Refusal> {
    field::text(slot)?
        .map(|(text, field)| Unit::from_text(text).ok_or(field.refuse(Reason::UnknownUnit)))
        .transpose()
}

fn read_packing(slot: field::Slot<'_, '_>) -> Result<Option<Packing>, Refusal> {
    field::text(slot)?
        .map(|(text, field)| Packing::from_name(text).ok_or(field.refuse(Reason::UnknownSamples)))
        .transpose()
}

/// A scale of either sign; its size must keep a sample representable.
fn read_scale(slot: field::Slot<'_, '_>) -> Result<Option<f64>, Refusal> {
    let scale = field::float(slot, &(-1e9..=1e9))?;
    match (scale, slot) {
        (Some(value), Some(field)) if value.abs() < 1e-30 => Err(field.refuse(Reason::OutOfRange)),
        (scale, _) => Ok(scale),
    }
}
