//! From a message to an input: one function for the live daemon and for rehearsal.
//!
//! In: where it goes, its stamp, its bytes. Out: the input, or why the payload is refused. Times that the message
//! states are held against its stamp here: a block further away than the tolerance on either side is
//! refused, a speed or process value only when it lies in the future, for an old one is merely stale. The stamp's
//! lead over a wall clock that was set back is taken off first.
//! Sample memory goes round: [`Decoder::take_back`] the input once it has been used.

use humward_monitor::input::Input;
use humward_monitor::time::{Arrival, Span};
use humward_wire::block::{Block, Encoding, Limits, at_offset, decode_into};
use humward_wire::refusal::{Reason, Refusal};
use humward_wire::{command, process, speed};

use crate::clock::Stamp;
use crate::route::About;

/// Decodes messages, keeping its memory.
#[derive(Debug)]
pub struct Decoder {
    limits: Limits,
    tolerance: Span,
    spare: Block,
}

impl Decoder {
    /// A decoder that takes times within `tolerance` of arrival.
    pub fn new(tolerance: Span) -> Self {
        Self {
            limits: Limits::default(),
            tolerance,
            spare: Block::empty(),
        }
    }

    /// Reads one message.
    ///
    /// # Errors
    /// The reason and the byte at fault; the payload is refused whole.
    pub fn decode(
        &mut self,
        about: &About,
        stamp: Stamp,
        payload: &[u8],
    ) -> Result<Input, Refusal> {
        let now = stamp.arrival.minus(stamp.ahead);
        match about {
            About::Block(source, encoding) => {
                let detected;
                let encoding = match encoding {
                    Some(encoding) => encoding,
                    None => {
                        detected = Encoding::detect(payload)?;
                        &detected
                    }
                };
                decode_into(&mut self.spare, payload, encoding, &self.limits)?;
                self.within(self.spare.at, now, self.tolerance)
                    .map_err(|refusal| at_its_byte(refusal, payload, encoding))?;
                Ok(Input::Block(
                    source.clone(),
                    std::mem::replace(&mut self.spare, Block::empty()),
                ))
            }
            About::Speed(asset) => {
                let speed = speed::decode(payload)?;
                self.within(speed.at, now, Span::from_ns(i64::MAX))
                    .map_err(|refusal| at_our_byte(refusal, payload))?;
                Ok(Input::Speed(asset.clone(), speed))
            }
            About::Process(asset) => {
                let process = process::decode(payload)?;
                self.within(process.at, now, Span::from_ns(i64::MAX))
                    .map_err(|refusal| at_our_byte(refusal, payload))?;
                Ok(Input::Process(asset.clone(), process))
            }
            About::Command { asset, sender } => Ok(Input::Command(
                asset.clone(),
                sender.clone(),
                command::decode(payload)?,
            )),
        }
    }

    /// Takes an input back for the memory in it.
    pub fn take_back(&mut self, input: Input) {
        if let Input::Block(_, block) = input {
            self.spare = block;
        }
    }

    fn within(&self, at: Option<i64>, now: Arrival, past: Span) -> Result<(), Refusal> {
        let Some(at) = at else { return Ok(()) };
        let at = Arrival::from_ns(at);
        if now.since(at) > past || at.since(now) > self.tolerance {
            return Err(Refusal {
                reason: Reason::FarFromArrival,
                offset: 0,
                key: Some("at"),
            });
        }
        Ok(())
    }
}

/// The refusal of a time, at the byte where the payload has it.
fn at_its_byte(refusal: Refusal, payload: &[u8], encoding: &Encoding) -> Refusal {
    Refusal {
        offset: at_offset(payload, encoding),
        ..refusal
    }
}

/// The same for a message in our own keys.
fn at_our_byte(refusal: Refusal, payload: &[u8]) -> Refusal {
    match Encoding::detect(payload) {
        Ok(encoding) => at_its_byte(refusal, payload, &encoding),
        // A bare number has no time.
        Err(_) => refusal,
    }
}

/// What is told to the core when the payload of a source was refused; other refusals are only counted.
pub fn refused(about: &About, refusal: Refusal) -> Option<Input> {
    match about {
        About::Block(source, _) => Some(Input::Refused(source.clone(), refusal)),
        About::Speed(_) | About::Process(_) | About::Command { .. } => None,
    }
}

#[cfg(test)]
mod tests;
