//! RFC 8746 typed arrays and RFC 8949 encodings, against values from outside.

use humward_wire::block::{self, ByteOrder, Encoding, Limits, Packing, SampleType};
use humward_wire::refusal::Reason;

fn block_with(samples: &[u8]) -> Vec<u8> {
    let mut payload = b"\xa5\x62at\x1b\x18\xed\x12\x30\x9a\xb8\xc2\x80\x64rate\x19\x64\x00\x64unit\x61g\x65scale\x01\x67samples".to_vec();
    payload.extend(samples);
    payload
}

fn samples(bytes: &[u8]) -> Vec<f32> {
    block::decode(&block_with(bytes), &Encoding::Cbor, &Limits::default())
        .unwrap()
        .samples
}

#[test]
fn tags_follow_the_bit_formula_of_rfc_8746_section_2_1() {
    // Check cbor.tag_formula: tag = 64 + (float << 4) + (signed << 3) + (little endian << 2) + size; for
    // [u8, s16 little, u16 little, f32 little, f64 little, f32 big] = [64, 77, 69, 85, 86, 81].
    // For floats `signed` is 0 and size counts from 16 bits.
    let formula = |packing: Packing| {
        let (float, signed, size) = match packing.sample {
            SampleType::S16 => (0, 1, 1),
            SampleType::S32 => (0, 1, 2),
            SampleType::F32 => (1, 0, 1),
            SampleType::F64 => (1, 0, 2),
        };
        64 + (float << 4)
            + (signed << 3)
            + (u64::from(packing.order == ByteOrder::Little) << 2)
            + size
    };
    assert_eq!(Packing::all().count(), 8);
    for packing in Packing::all() {
        assert_eq!(packing.tag(), formula(packing), "{}", packing.name());
        assert_eq!(Packing::from_tag(packing.tag()), Some(packing));
        assert_eq!(Packing::from_name(packing.name()), Some(packing));
    }
    let named = |name| Packing::from_name(name).map(Packing::tag);
    assert_eq!(
        [
            named("s16le"),
            named("f32le"),
            named("f64le"),
            named("f32be")
        ],
        [Some(77), Some(85), Some(86), Some(81)]
    );
    for unsigned in [64, 69] {
        assert_eq!(Packing::from_tag(unsigned), None);
    }
}

#[test]
fn the_published_typed_array_examples_read_as_their_floats() {
    // Check cbor.f32le_example, from an article on CBOR float arrays: 15 bytes, d8 55 4c and twelve more.
    let published = [
        0xd8, 0x55, 0x4c, 0x4b, 0x06, 0x9e, 0x3f, 0x97, 0x1f, 0x16, 0x40, 0x08, 0x3c, 0x5d, 0x40,
    ];
    assert_eq!(published.len(), 15);
    for (read, value) in samples(&published)
        .iter()
        .zip([1.234_567, 2.345_678, 3.456_789])
    {
        assert!((read - value).abs() < 1e-6, "{read} for {value}");
    }
    // Check cbor.f32le_1_-2.5, RFC 8746 and RFC 8949: tag 85 of [1.0, -2.5].
    assert_eq!(
        samples(&[0xd8, 0x55, 0x48, 0, 0, 0x80, 0x3f, 0, 0, 0x20, 0xc0]),
        [1.0, -2.5]
    );
}

#[test]
fn one_value_reads_the_same_from_all_eight_typed_arrays() {
    // -1234.0 in each packing: big-endian bytes from Python's struct module, little-endian reversed.
    for (packing, big) in [
        ("s16", &[0xfb, 0x2e][..]),
        ("s32", &[0xff, 0xff, 0xfb, 0x2e]),
        ("f32", &[0xc4, 0x9a, 0x40, 0x00]),
        ("f64", &[0xc0, 0x93, 0x48, 0, 0, 0, 0, 0]),
    ] {
        for order in ["be", "le"] {
            let tag = Packing::from_name(&format!("{packing}{order}"))
                .unwrap()
                .tag();
            let one: Vec<u8> = if order == "be" {
                big.to_vec()
            } else {
                big.iter().rev().copied().collect()
            };
            let mut item = vec![0xd8, tag as u8, 0x40 + 2 * one.len() as u8];
            item.extend([&one[..], &one[..]].concat());
            assert_eq!(samples(&item), [-1234.0, -1234.0], "{packing}{order}");
        }
    }
}

#[test]
fn plain_arrays_read_integers_and_floats_of_every_width() {
    // RFC 8949 appendix A: 1, -100, 1000, 1.5 (half), 100000.0 (single), -4.1 (double).
    let plain = b"\x86\x01\x38\x63\x19\x03\xe8\xf9\x3e\x00\xfa\x47\xc3\x50\x00\xfb\xc0\x10\x66\x66\x66\x66\x66\x66";
    assert_eq!(samples(plain), [1.0, -100.0, 1000.0, 1.5, 100_000.0, -4.1]);
}

#[test]
fn half_floats_read_as_the_examples_of_rfc_8949_appendix_a() {
    // Appendix A: 0.0, -0.0, 1.0, 1.5, 65504.0, 5.960464477539063e-8, 0.00006103515625, -4.0.
    let halves = b"\x88\xf9\x00\x00\xf9\x80\x00\xf9\x3c\x00\xf9\x3e\x00\xf9\x7b\xff\xf9\x00\x01\xf9\x04\x00\xf9\xc4\x00";
    let expected = [
        0.0,
        -0.0,
        1.0,
        1.5,
        65_504.0,
        5.960_464_5e-8,
        0.000_061_035_156,
        -4.0_f32,
    ];
    assert_eq!(
        samples(halves)
            .iter()
            .map(|s| s.to_bits())
            .collect::<Vec<_>>(),
        expected.map(f32::to_bits)
    );
    // Appendix A: Infinity, NaN, -Infinity.
    for endless in [
        b"\x81\xf9\x7c\x00",
        b"\x81\xf9\x7e\x00",
        b"\x81\xf9\xfc\x00",
    ] {
        let refused = block::decode(&block_with(endless), &Encoding::Cbor, &Limits::default());
        assert_eq!(
            refused.unwrap_err().reason,
            Reason::SampleNotFinite,
            "{endless:02x?}"
        );
    }
}

#[test]
fn a_simple_value_below_32_in_two_bytes_is_not_well_formed() {
    // RFC 8949 section 3.3: simple values below 32 are never written as f8 and a byte.
    for (value, reason) in [
        (24, Some(Reason::BadSyntax)),
        (31, Some(Reason::BadSyntax)),
        (32, None),
    ] {
        let mut payload = block_with(b"\x81\x01");
        payload[0] += 1;
        payload.extend([0x61, b'x', 0xf8, value]);
        let read = block::decode(&payload, &Encoding::Cbor, &Limits::default());
        assert_eq!(
            read.err().map(|refusal| (refusal.reason, refusal.offset)),
            reason.map(|r| (r, payload.len() - 2))
        );
    }
}

#[test]
fn a_length_beyond_the_limit_is_refused_before_any_memory_is_taken() {
    let mut block = block::Block::empty();
    let limits = Limits {
        max_samples: 8,
        ..Limits::default()
    };
    let payload = block_with(&[&[0xd8, 77, 0x59, 0x10, 0x00][..], &[0; 4096][..]].concat());
    let refusal = block::decode_into(&mut block, &payload, &Encoding::Cbor, &limits).unwrap_err();
    assert_eq!(refusal.reason, Reason::TooManySamples);
    assert_eq!(block.samples.capacity(), 0);
}
