//! Writing CBOR (RFC 8949) into memory with `minicbor`: shortest heads, definite lengths, nothing that can fail.

use alloc::vec::Vec;
use core::convert::Infallible;

use minicbor::data::Tag;
use minicbor::encode::{Encoder, Error};

/// Appends items to a byte vector.
pub(crate) type Writer = Encoder<Vec<u8>>;
/// The library's result; into a byte vector it is never a fault.
pub(crate) type Written = Result<(), Error<Infallible>>;

/// What `items` writes, with room for `capacity` bytes at first.
pub(crate) fn write(capacity: usize, items: impl FnOnce(&mut Writer) -> Written) -> Vec<u8> {
    let mut writer = Encoder::new(Vec::with_capacity(capacity));
    #[expect(
        clippy::expect_used,
        reason = "a byte vector takes every write, and no type of ours has an `Encode` that could fail"
    )]
    items(&mut writer).expect("a byte vector takes every write");
    writer.into_writer()
}

/// A tagged byte string of `length` bytes, which `parts` must yield.
pub(crate) fn typed<const N: usize>(
    writer: &mut Writer,
    tag: u64,
    length: usize,
    parts: impl Iterator<Item = [u8; N]>,
) -> Written {
    writer.tag(Tag::new(tag))?.bytes_len(length as u64)?;
    writer.writer_mut().extend(parts.flatten());
    Ok(())
}
