//! What is written reads back the same, in every encoding that can carry it.

use humward_wire::block::{self, Block, Encoding, Limits, SampleEncoding, Unit};
use proptest::prelude::*;

/// Blocks whose samples are whole numbers of 16 bits, which every encoding carries exactly.
pub(crate) fn blocks() -> impl Strategy<Value = Block> {
    let optional = (
        proptest::option::of(any::<u64>()),
        proptest::option::of(0.0..1e6),
        proptest::option::of(-30.0..30.0),
    );
    let fixed = (
        946_684_800_000_000_000_i64..7_258_118_400_000_000_000,
        1.0..1e6,
        0..Unit::ALL.len(),
        1_u16..=4,
    );
    let samples = proptest::collection::vec(any::<i16>(), 1..40);
    (
        fixed,
        optional,
        prop_oneof![1e-6..1e3, -1e3..-1e-6],
        samples,
    )
        .prop_map(
            |((at, rate_hz, unit, channels), (seq, rpm, bias), scale, samples)| Block {
                at: Some(at),
                seq,
                rate_hz,
                unit: Unit::ALL[unit],
                scale,
                channels,
                rpm,
                bias,
                samples: samples
                    .iter()
                    .flat_map(|s| vec![f32::from(*s); usize::from(channels)])
                    .collect(),
                integer_rail: None,
            },
        )
}

fn without_rail(mut block: Block) -> Block {
    block.integer_rail = None;
    block
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 300, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn a_block_survives_every_encoding(block in blocks()) {
        for encoding in SampleEncoding::ALL {
            let payload = block::encode_cbor(&block, encoding);
            prop_assert_eq!(Encoding::detect(&payload), Ok(Encoding::Cbor));
            let read = block::decode(&payload, &Encoding::Cbor, &Limits::default()).unwrap();
            let rail = match encoding {
                SampleEncoding::S16 => Some((-32768.0, 32767.0)),
                SampleEncoding::S32 => Some((-2147483648.0, 2147483648.0)),
                SampleEncoding::F32 | SampleEncoding::F64 | SampleEncoding::Plain => None,
            };
            prop_assert_eq!(read.integer_rail, rail);
            prop_assert_eq!(without_rail(read), block.clone());
        }
        let payload = block::encode_json(&block);
        prop_assert_eq!(Encoding::detect(&payload), Ok(Encoding::Json));
        prop_assert_eq!(block::decode(&payload, &Encoding::Json, &Limits::default()), Ok(block));
    }

    #[test]
    fn floats_survive_json_and_typed_arrays_bit_by_bit(bits in proptest::collection::vec(any::<u32>(), 1..40)) {
        let finite = |bits: u32| Some(f32::from_bits(bits)).filter(|f| f.is_finite() && f.abs() < 1e12);
        let samples: Vec<f32> = bits.into_iter().filter_map(finite).chain([-0.0]).collect();
        let block = Block { at: Some(1_796_094_480_250_000_000), samples, ..Block::empty() };
        for (payload, encoding) in [
            (block::encode_json(&block), Encoding::Json),
            (block::encode_cbor(&block, SampleEncoding::F32), Encoding::Cbor),
            (block::encode_cbor(&block, SampleEncoding::F64), Encoding::Cbor),
            (block::encode_cbor(&block, SampleEncoding::Plain), Encoding::Cbor),
        ] {
            let read = block::decode(&payload, &encoding, &Limits::default()).unwrap();
            let bits = |samples: &[f32]| samples.iter().map(|s| s.to_bits()).collect::<Vec<_>>();
            prop_assert_eq!(bits(&read.samples), bits(&block.samples));
        }
    }
}

#[test]
fn integers_are_rounded_and_held_within_their_type() {
    let samples = vec![
        0.5, -0.5, 1.49, -1.51, 40_000.0, -40_000.0, 32_767.0, -32_768.0,
    ];
    let block = Block {
        at: Some(1_796_094_480_250_000_000),
        samples,
        ..Block::empty()
    };
    let payload = block::encode_cbor(&block, SampleEncoding::S16);
    let read = block::decode(&payload, &Encoding::Cbor, &Limits::default()).unwrap();
    assert_eq!(
        read.samples,
        [
            1.0, -1.0, 1.0, -2.0, 32_767.0, -32_768.0, 32_767.0, -32_768.0
        ]
    );
}
