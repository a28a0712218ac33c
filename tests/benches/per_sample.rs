//! What one new sample costs, in ns, beside the floor under it, all from one run.
//!
//! The compute floor is what no design of this kind can do without: decoding the block and two windowed real FFTs
//! of 8192 samples at 50 % overlap. Each row is the median of rounds in which all rows take turns, so a drift of
//! the machine's speed hits all alike: quote the ratios. Run with `cargo bench`.

use std::{
    error::Error,
    hint::black_box,
    io::{Write, stdout},
    sync::Arc,
    time::Instant,
};

use humward_monitor::{
    Action, Group, Input,
    analysis::{Arriving, PointAnalysis, Speeds},
    input::{Identity, Source},
    judge::{AssetJudge, Context},
    plan::{
        AssetPlan, AssetSpec, Calibration, GroupPlan, Limits, Measure, Persistence, PointPlan,
        PointSpec, Quantity, Race, RunningRule, SpeedRange, StartingRule, WatchPlan, WatchSpec,
    },
    reading::{Reading, ShaftSpeed},
    time::{Arrival, SignalTime, Span},
};
use humward_signal::{bearing::BearingOrders, frame::Scratch};
use humward_wire::{
    block::{self, Block, Encoding, Limits as BlockLimits, SampleEncoding, Unit},
    id::Id,
    speed::Speed,
};
use realfft::{RealFftPlanner, RealToComplex, num_complex::Complex};

type Failure = Box<dyn Error>;
/// One row's work: all blocks once.
type Work<'a> = Box<dyn FnMut() -> Result<(), Failure> + 'a>;

const RATE_HZ: f64 = 25_600.0;
const FRAME: usize = 8192;
const BLOCK: usize = 5120;
const BLOCKS: usize = 200;
const ROUNDS: usize = 15;

fn main() -> Result<(), Failure> {
    let blocks = blocks();
    let s16: Vec<Vec<u8>> = blocks
        .iter()
        .map(|block| block::encode_cbor(block, SampleEncoding::S16))
        .collect();
    let f32s: Vec<Vec<u8>> = blocks
        .iter()
        .map(|block| block::encode_cbor(block, SampleEncoding::F32))
        .collect();
    let json: Vec<Vec<u8>> = blocks.iter().map(block::encode_json).collect();
    let plan = plan()?;
    let mut rows: Vec<(&str, Work<'_>)> = vec![
        ("compute floor: decode s16 + 2 windowed FFTs", floor(&s16)),
        ("floor of the FFTs alone: 2 windowed FFTs", ffts(&blocks)),
        ("decode CBOR, 16-bit typed array", decoding(&s16)),
        ("decode CBOR, 32-bit float typed array", decoding(&f32s)),
        ("decode JSON, numbers as text", decoding(&json)),
        (
            "analysis: frames, spectra, envelope, velocity, statistics",
            analysing(&blocks, &plan),
        ),
        (
            "judge: 5 watches, a reading of 10 s",
            judging(&blocks, &plan)?,
        ),
        (
            "whole path in process: decode s16 + step",
            stepping(&s16, &plan),
        ),
    ];
    let mut times = vec![Vec::new(); rows.len()];
    for _ in 0..ROUNDS {
        for ((_, work), times) in rows.iter_mut().zip(&mut times) {
            let began = Instant::now();
            work()?;
            times.push(began.elapsed().as_secs_f64() * 1e9 / (BLOCK * BLOCKS) as f64);
        }
    }
    let mut out = stdout().lock();
    writeln!(
        out,
        "\nns per new sample at {RATE_HZ} samples/s, frame {FRAME}, median of {ROUNDS} rounds; x = times the floor of the same round"
    )?;
    for (row, (name, _)) in rows.iter().enumerate() {
        let ratios = times[row]
            .iter()
            .zip(&times[0])
            .map(|(time, floor)| time / floor)
            .collect();
        writeln!(
            out,
            "{:9.3} ns {:7.2} x  {name}",
            median(times[row].clone()),
            median(ratios)
        )?;
    }
    Ok(())
}

fn median(mut values: Vec<f64>) -> f64 {
    values.sort_by(f64::total_cmp);
    values[values.len() / 2]
}

/// A pump's noise with 1x, vane pass and bursts, as 16-bit codes of 0.488 mg; the generator is seeded and explicit.
fn blocks() -> Vec<Block> {
    let mut state = 1u64;
    let mut noise = move || {
        state = state
            .wrapping_mul(6_364_136_223_846_793_005)
            .wrapping_add(1_442_695_040_888_963_407);
        (state >> 40) as f64 / f64::from(1u32 << 24) - 0.5
    };
    let sample = |i: usize, noise: f64| {
        let t = i as f64 / RATE_HZ;
        let burst = (-(t * 97.0).fract() * 20.0).exp() * (std::f64::consts::TAU * 4100.0 * t).sin();
        let shaft = (std::f64::consts::TAU * 24.7 * t).sin()
            + 0.3 * (std::f64::consts::TAU * 148.2 * t).sin();
        (400.0 * noise + 300.0 * shaft + 200.0 * burst + 2048.0).round() as f32
    };
    (0..BLOCKS)
        .map(|k| Block {
            at: Some(
                1_764_547_200_000_000_000 + (k * BLOCK) as i64 * 1_000_000_000 / RATE_HZ as i64,
            ),
            seq: Some(k as u64),
            rate_hz: RATE_HZ,
            unit: Unit::G,
            scale: 0.000_488_281_25,
            channels: 1,
            rpm: None,
            bias: None,
            samples: (0..BLOCK).map(|i| sample(k * BLOCK + i, noise())).collect(),
            integer_rail: Some((-32_768.0, 32_767.0)),
        })
        .collect()
}

fn id(text: &str) -> Result<Id, Failure> {
    Ok(Id::new(text)?)
}

fn faults(faults: Vec<humward_monitor::plan::PlanFault>) -> Failure {
    faults
        .iter()
        .map(ToString::to_string)
        .collect::<Vec<_>>()
        .join("; ")
        .into()
}

fn plan() -> Result<Arc<GroupPlan>, Failure> {
    let point = PointPlan::new(PointSpec {
        id: id("drive-end")?,
        name: "drive end".into(),
        source: id("drive-end")?,
        channel: 0,
        rate_hz: Some(RATE_HZ),
        frame: FRAME,
        calibration: Calibration::FromUnit,
        range_ms2: None,
        noise_ug_rthz: None,
        velocity_from_hz: 10.0,
        bearing: Some(BearingOrders {
            outer: 3.5848,
            inner: 5.4152,
            cage: 0.398_28,
            element: 4.7135,
        }),
        envelope_hz: Some((2000.0, 8000.0)),
        bands: Vec::new(),
    })
    .map_err(faults)?;
    let measures = [
        ("velocity", Measure::VelocityRms, Quantity::VelocityRms),
        ("high", Measure::HighBandRms, Quantity::AccelerationRms),
        ("outer", Measure::Bearing(Race::Outer), Quantity::Decibel),
        ("inner", Measure::Bearing(Race::Inner), Quantity::Decibel),
        (
            "element",
            Measure::Bearing(Race::Element),
            Quantity::Decibel,
        ),
    ];
    let watches = measures
        .into_iter()
        .map(|(name, measure, quantity)| {
            let spec = WatchSpec {
                name: name.into(),
                point: 0,
                measure,
                quantity,
                limits: Limits::new(Some(1e6), Some(2e6), 1.0).map_err(faults)?,
                at_least_ms2: None,
                alert_after: Persistence::Readings(3),
                danger_after: Persistence::Readings(3),
                clear_after: Persistence::Readings(3),
                source: String::new(),
            };
            WatchPlan::new(spec, "drive-end").map_err(faults)
        })
        .collect::<Result<Vec<_>, Failure>>()?;
    let asset = AssetPlan::new(AssetSpec {
        id: id("P-1")?,
        name: "bench pump".into(),
        speed: SpeedRange {
            lowest: 1480.0,
            nominal: 1482.0,
            highest: 1500.0,
        },
        running: RunningRule {
            from_rpm: 300.0,
            from_mm_s: 0.2,
            speed_valid: Span::from_secs(86_400),
        },
        run_signal: None,
        starting: StartingRule::USUAL,
        zones: None,
        reading_every: Span::from_secs(10),
        status_every: Span::from_secs(300),
        sensor_after: Span::from_secs(60),
        points: vec![point],
        watches,
    })
    .map_err(faults)?;
    Ok(Arc::new(
        GroupPlan::new(id("bench")?, vec![asset]).map_err(faults)?,
    ))
}

/// Two windowed real FFTs a frame at 50 % overlap, and nothing else.
struct TwoFfts {
    fft: Arc<dyn RealToComplex<f32>>,
    window: Vec<f32>,
    frame: Vec<f32>,
    filled: usize,
    input: Vec<f32>,
    output: Vec<Complex<f32>>,
    work: Vec<Complex<f32>>,
}

impl TwoFfts {
    fn new() -> Self {
        let fft = RealFftPlanner::<f32>::new().plan_fft_forward(FRAME);
        let angle = |i: usize| std::f32::consts::TAU * i as f32 / FRAME as f32;
        Self {
            window: (0..FRAME).map(|i| 0.5 - 0.5 * angle(i).cos()).collect(),
            frame: vec![0.0; FRAME],
            filled: 0,
            input: fft.make_input_vec(),
            output: fft.make_output_vec(),
            work: fft.make_scratch_vec(),
            fft,
        }
    }

    fn feed(&mut self, mut samples: &[f32]) -> Result<(), Failure> {
        while !samples.is_empty() {
            let part = samples.len().min(FRAME - self.filled);
            self.frame[self.filled..self.filled + part].copy_from_slice(&samples[..part]);
            samples = &samples[part..];
            self.filled += part;
            if self.filled == FRAME {
                for _ in 0..2 {
                    let windowed = self.frame.iter().zip(&self.window);
                    for (slot, (sample, weight)) in self.input.iter_mut().zip(windowed) {
                        *slot = sample * weight;
                    }
                    self.fft.process_with_scratch(
                        &mut self.input,
                        &mut self.output,
                        &mut self.work,
                    )?;
                    black_box(&self.output);
                }
                self.frame.copy_within(FRAME / 2.., 0);
                self.filled = FRAME / 2;
            }
        }
        Ok(())
    }
}

fn ffts(blocks: &[Block]) -> Work<'_> {
    let mut two = TwoFfts::new();
    Box::new(move || blocks.iter().try_for_each(|block| two.feed(&block.samples)))
}

fn floor(payloads: &[Vec<u8>]) -> Work<'_> {
    let (mut two, mut block) = (TwoFfts::new(), Block::empty());
    Box::new(move || {
        for payload in payloads {
            block::decode_into(
                &mut block,
                payload,
                &Encoding::Cbor,
                &BlockLimits::default(),
            )?;
            two.feed(&block.samples)?;
        }
        Ok(())
    })
}

fn decoding(payloads: &[Vec<u8>]) -> Work<'_> {
    let mut block = Block::empty();
    Box::new(move || {
        for payload in payloads {
            let encoding = Encoding::detect(payload)?;
            block::decode_into(&mut block, payload, &encoding, &BlockLimits::default())?;
            black_box(&block);
        }
        Ok(())
    })
}

struct Steady;

impl Speeds for Steady {
    fn over(&self, _: SignalTime, _: SignalTime) -> (ShaftSpeed, bool) {
        (ShaftSpeed::Reported(1482.0), false)
    }
}

fn analyse(blocks: &[Block], plan: &GroupPlan, scratch: &mut Scratch, closed: &mut Vec<Reading>) {
    let spec = plan.assets()[0].spec();
    let mut analysis = PointAnalysis::new(spec.reading_every, spec.speed.lowest);
    for block in blocks {
        let at = block.at.unwrap_or_default();
        let arriving = Arriving {
            block,
            at: SignalTime::from_ns(at),
            arrival: Arrival::from_ns(at),
            speeds: &Steady,
        };
        analysis.push(spec.points[0].spec(), arriving, scratch, closed);
    }
}

fn analysing<'a>(blocks: &'a [Block], plan: &'a GroupPlan) -> Work<'a> {
    let (mut scratch, mut closed) = (Scratch::new(), Vec::new());
    Box::new(move || {
        closed.clear();
        analyse(blocks, plan, &mut scratch, &mut closed);
        black_box(&closed);
        Ok(())
    })
}

fn judging<'a>(blocks: &[Block], plan: &'a GroupPlan) -> Result<Work<'a>, Failure> {
    let identity = Identity {
        gateway: id("gw")?,
        site: id("bench")?,
        epoch: 0,
    };
    let (mut scratch, mut readings, mut actions) = (Scratch::new(), Vec::new(), Vec::new());
    analyse(blocks, plan, &mut scratch, &mut readings);
    let asset = &plan.assets()[0];
    let mut judge = AssetJudge::new(asset, Arrival::from_ns(0));
    Ok(Box::new(move || {
        for reading in &readings {
            let context = Context {
                identity: &identity,
                plan: asset,
                arrival: reading.closed,
            };
            judge.reading(context, 0, reading.clone(), &|| None, &mut actions);
        }
        black_box(&actions);
        actions.clear();
        Ok(())
    }))
}

fn stepping<'a>(payloads: &'a [Vec<u8>], plan: &'a Arc<GroupPlan>) -> Work<'a> {
    let (mut scratch, mut actions): (Scratch, Vec<Action>) = (Scratch::new(), Vec::new());
    Box::new(move || {
        let mut group = Group::new();
        let start = Arrival::from_ns(1_764_547_200_000_000_000);
        let identity = Identity {
            gateway: id("gw")?,
            site: id("bench")?,
            epoch: 0,
        };
        let asset = id("P-1")?;
        let source = Source {
            asset: asset.clone(),
            source: id("drive-end")?,
        };
        let speed = Speed {
            at: Some(start.ns()),
            rpm: 1482.0,
            shaft: None,
        };
        for input in [
            Input::Started(identity),
            Input::Plan(Arc::clone(plan)),
            Input::Speed(asset, speed),
        ] {
            group.step(start, &input, &mut scratch, &mut actions);
        }
        let mut input = Input::Block(source, Block::empty());
        for payload in payloads {
            if let Input::Block(_, block) = &mut input {
                block::decode_into(block, payload, &Encoding::Cbor, &BlockLimits::default())?;
                let arrival = Arrival::from_ns(block.at.unwrap_or_default());
                group.step(arrival, &input, &mut scratch, &mut actions);
            }
        }
        black_box(&actions);
        actions.clear();
        Ok(())
    })
}
