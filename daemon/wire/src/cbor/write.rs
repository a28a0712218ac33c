//! Writing CBOR (RFC 8949) into memory: shortest heads, definite lengths, nothing that can fail.

use alloc::vec::Vec;

/// Appends items to a byte vector.
#[derive(Debug, Default)]
pub(crate) struct Writer {
    bytes: Vec<u8>,
}

impl Writer {
    pub(crate) fn with_capacity(capacity: usize) -> Writer {
        Writer {
            bytes: Vec::with_capacity(capacity),
        }
    }

    pub(crate) fn into_bytes(self) -> Vec<u8> {
        self.bytes
    }

    fn head(&mut self, major: u8, argument: u64) {
        let bytes = argument.to_be_bytes();
        let (info, from) = match argument {
            0..=23 => (bytes[7], 8),
            24..=0xff => (24, 7),
            0x100..=0xffff => (25, 6),
            0x1_0000..=0xffff_ffff => (26, 4),
            _ => (27, 0),
        };
        self.bytes.push(major << 5 | info);
        self.bytes.extend(bytes.iter().skip(from));
    }

    pub(crate) fn map(&mut self, entries: usize) {
        self.head(5, entries as u64);
    }

    pub(crate) fn array(&mut self, items: usize) {
        self.head(4, items as u64);
    }

    pub(crate) fn unsigned(&mut self, number: u64) {
        self.head(0, number);
    }

    pub(crate) fn integer(&mut self, number: i64) {
        match u64::try_from(number) {
            Ok(number) => self.head(0, number),
            Err(_) => self.head(1, !number as u64),
        }
    }

    pub(crate) fn float(&mut self, number: f64) {
        self.bytes.push(0xfb);
        self.bytes.extend(number.to_be_bytes());
    }

    pub(crate) fn single(&mut self, number: f32) {
        self.bytes.push(0xfa);
        self.bytes.extend(number.to_be_bytes());
    }

    pub(crate) fn boolean(&mut self, value: bool) {
        self.bytes.push(if value { 0xf5 } else { 0xf4 });
    }

    pub(crate) fn null(&mut self) {
        self.bytes.push(0xf6);
    }

    pub(crate) fn text(&mut self, text: &str) {
        self.head(3, text.len() as u64);
        self.bytes.extend(text.as_bytes());
    }

    pub(crate) fn bytes(&mut self, bytes: &[u8]) {
        self.head(2, bytes.len() as u64);
        self.bytes.extend(bytes);
    }

    /// A tagged byte string of `length` bytes, which `parts` must yield.
    pub(crate) fn typed<const N: usize>(
        &mut self,
        tag: u64,
        length: usize,
        parts: impl Iterator<Item = [u8; N]>,
    ) {
        self.head(6, tag);
        self.head(2, length as u64);
        self.bytes.extend(parts.flatten());
    }
}
