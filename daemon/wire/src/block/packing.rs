//! Sample types as bytes: their names, their RFC 8746 tags, and the loops that unpack them.
//!
//! RFC 8746 section 2.1: tag = 0b010, then float, signed, little endian and size. Bytes may be unaligned.
//! Checked by `tests/contract/cbor_standard.rs`.

use alloc::vec::Vec;

/// Type of one sample in bytes.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum SampleType {
    /// 16-bit signed integer.
    S16,
    /// 32-bit signed integer.
    S32,
    /// 32-bit float.
    F32,
    /// 64-bit float.
    F64,
}

/// Order of the bytes of one sample.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum ByteOrder {
    /// Lowest byte first.
    Little,
    /// Highest byte first.
    Big,
}

/// Sample type and byte order.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct Packing {
    /// Type of one sample.
    pub sample: SampleType,
    /// Order of its bytes.
    pub order: ByteOrder,
}

/// Every packing with its RFC 8746 tag and its name in a JSON block's `encoding`.
const PACKINGS: [(u64, &str, SampleType, ByteOrder); 8] = [
    (73, "s16be", SampleType::S16, ByteOrder::Big),
    (74, "s32be", SampleType::S32, ByteOrder::Big),
    (77, "s16le", SampleType::S16, ByteOrder::Little),
    (78, "s32le", SampleType::S32, ByteOrder::Little),
    (81, "f32be", SampleType::F32, ByteOrder::Big),
    (82, "f64be", SampleType::F64, ByteOrder::Big),
    (85, "f32le", SampleType::F32, ByteOrder::Little),
    (86, "f64le", SampleType::F64, ByteOrder::Little),
];

impl SampleType {
    /// Bytes of one sample.
    #[must_use]
    pub const fn bytes(self) -> usize {
        match self {
            SampleType::S16 => 2,
            SampleType::S32 | SampleType::F32 => 4,
            SampleType::F64 => 8,
        }
    }

    /// Lowest and highest code of an integer type.
    #[must_use]
    pub const fn rail(self) -> Option<(f32, f32)> {
        match self {
            SampleType::S16 => Some((i16::MIN as f32, i16::MAX as f32)),
            SampleType::S32 => Some((i32::MIN as f32, i32::MAX as f32)),
            SampleType::F32 | SampleType::F64 => None,
        }
    }
}

impl Packing {
    /// Every packing there is.
    pub fn all() -> impl Iterator<Item = Packing> {
        PACKINGS.iter().map(|(_, _, sample, order)| Packing {
            sample: *sample,
            order: *order,
        })
    }

    /// The packing of an RFC 8746 tag.
    #[must_use]
    pub fn from_tag(tag: u64) -> Option<Packing> {
        let row = PACKINGS.iter().find(|row| row.0 == tag)?;
        Some(Packing {
            sample: row.2,
            order: row.3,
        })
    }

    /// The packing a text such as `s16le` names.
    #[must_use]
    pub fn from_name(name: &str) -> Option<Packing> {
        let row = PACKINGS.iter().find(|row| row.1 == name)?;
        Some(Packing {
            sample: row.2,
            order: row.3,
        })
    }

    /// Its RFC 8746 tag.
    #[must_use]
    pub fn tag(self) -> u64 {
        self.row().map_or(0, |row| row.0)
    }

    /// Its name, such as `s16le`.
    #[must_use]
    pub fn name(self) -> &'static str {
        self.row().map_or("", |row| row.1)
    }

    fn row(self) -> Option<&'static (u64, &'static str, SampleType, ByteOrder)> {
        PACKINGS
            .iter()
            .find(|row| row.2 == self.sample && row.3 == self.order)
    }
}

/// Appends the samples in `bytes`; a cut last sample is left out.
pub(super) fn unpack(out: &mut Vec<f32>, bytes: &[u8], packing: Packing) {
    use {
        ByteOrder::{Big, Little},
        SampleType::{F32, F64, S16, S32},
    };
    match (packing.sample, packing.order) {
        (S16, Little) => out.extend(
            bytes
                .as_chunks()
                .0
                .iter()
                .map(|b| f32::from(i16::from_le_bytes(*b))),
        ),
        (S16, Big) => out.extend(
            bytes
                .as_chunks()
                .0
                .iter()
                .map(|b| f32::from(i16::from_be_bytes(*b))),
        ),
        (S32, Little) => out.extend(
            bytes
                .as_chunks()
                .0
                .iter()
                .map(|b| i32::from_le_bytes(*b) as f32),
        ),
        (S32, Big) => out.extend(
            bytes
                .as_chunks()
                .0
                .iter()
                .map(|b| i32::from_be_bytes(*b) as f32),
        ),
        (F32, Little) => out.extend(bytes.as_chunks().0.iter().map(|b| f32::from_le_bytes(*b))),
        (F32, Big) => out.extend(bytes.as_chunks().0.iter().map(|b| f32::from_be_bytes(*b))),
        (F64, Little) => out.extend(
            bytes
                .as_chunks()
                .0
                .iter()
                .map(|b| f64::from_le_bytes(*b) as f32),
        ),
        (F64, Big) => out.extend(
            bytes
                .as_chunks()
                .0
                .iter()
                .map(|b| f64::from_be_bytes(*b) as f32),
        ),
    }
}
