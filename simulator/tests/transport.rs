//! How blocks, speeds and process values travel: exact cases, and shares within four standard deviations.
#![expect(
    clippy::unwrap_used,
    reason = "the helpers of a test stop at its first surprise"
)]

use humward_sim::scenario::{Scenario, parse};
use humward_sim::transport::Delivery;
use humward_sim::world::World;
use humward_wire::block::{Block, Encoding, Limits, Unit, decode};
use humward_wire::{process, speed};

const S: i64 = 1_000_000_000;
const MS: i64 = 1_000_000;

/// One pump with one sensor, blocks of 0.1 s at 1 kHz; `asset` and `point` are further lines.
fn scenario(duration: &str, asset: &str, point: &str) -> Scenario {
    let text = format!(
        "about = \"a test\"\nsite = \"harbour\"\nseed = 5\nduration = \"{duration}\"\n\
         [[asset]]\nid = \"P-1\"\nrpm = 1482\n{asset}\n\
         [[asset.point]]\nid = \"de\"\nrate_hz = 1000\nblock = \"100ms\"\n{point}"
    );
    parse("test", &text).unwrap()
}

fn with_fault(duration: &str, fault: &str) -> Vec<Arrived> {
    let text = format!("[[asset.point.transport]]\n{fault}");
    blocks(&scenario(duration, "", &text))
}

/// A block as it arrived; times count from the start of the scenario, ns.
#[derive(Debug)]
struct Arrived {
    arrival: i64,
    at: i64,
    seq: u64,
    bytes: Vec<u8>,
    block: Block,
}

fn read(delivery: Delivery, start: i64) -> Arrived {
    let encoding = Encoding::detect(&delivery.payload).unwrap();
    let block = decode(&delivery.payload, &encoding, &Limits::default()).unwrap();
    Arrived {
        arrival: delivery.arrival_ns - start,
        at: block.at.unwrap() - start,
        seq: block.seq.unwrap(),
        bytes: delivery.payload,
        block,
    }
}

fn blocks(scenario: &Scenario) -> Vec<Arrived> {
    let start = scenario.start_ns();
    World::new(scenario)
        .unwrap()
        .filter(|delivery| delivery.topic == "humward/v1/harbour/block/P-1/de")
        .map(|delivery| read(delivery, start))
        .collect()
}

fn seqs(blocks: &[Arrived]) -> Vec<u64> {
    blocks.iter().map(|block| block.seq).collect()
}

#[test]
fn blocks_follow_each_other_without_a_seam_and_arrive_a_few_milliseconds_after_their_end() {
    let blocks = blocks(&scenario("60s", "", ""));
    assert_eq!(seqs(&blocks), (0..600).collect::<Vec<u64>>());
    for (index, block) in blocks.iter().enumerate() {
        assert_eq!(block.at, index as i64 * 100 * MS);
        assert_eq!(
            (block.block.rate_hz, block.block.samples.len()),
            (1000.0, 100)
        );
        let latency = block.arrival - block.at - 100 * MS;
        assert!((MS..60 * MS).contains(&latency), "{latency} ns");
    }
    let mean = blocks
        .iter()
        .map(|b| b.arrival - b.at - 100 * MS)
        .sum::<i64>()
        / 600;
    // 1 ms + an exponential of 2 ms mean: four standard errors of 2 ms / sqrt(600).
    assert!((mean - 3 * MS).abs() < 330_000, "{mean} ns");
}

#[test]
fn an_oscillator_two_percent_fast_declares_its_nominal_rate_and_spaces_its_blocks_shorter() {
    let blocks = blocks(&scenario("60s", "", "oscillator_percent = 2"));
    assert_eq!(blocks.len(), 612);
    for (index, block) in blocks.iter().enumerate() {
        let true_at = index as f64 * 0.1 / 1.02 * 1e9;
        assert!(
            (block.at as f64 - true_at).abs() <= 1.0,
            "{index}: {}",
            block.at
        );
        assert_eq!(block.block.rate_hz, 1000.0);
    }
}

#[test]
fn a_share_of_one_loses_every_block_of_its_time_and_no_other() {
    let blocks = with_fault(
        "10s",
        "kind = \"lost\"\nat = \"2s\"\nuntil = \"4s\"\nshare = 1",
    );
    let expected: Vec<u64> = (0..20).chain(40..100).collect();
    assert_eq!(seqs(&blocks), expected);
}

#[test]
fn three_of_ten_blocks_are_lost_by_chance() {
    let blocks = with_fault("300s", "kind = \"lost\"\nshare = 0.3");
    let lost = 3000.0 - blocks.len() as f64;
    assert!(
        (lost - 900.0).abs() < 4.0 * (3000.0_f64 * 0.3 * 0.7).sqrt(),
        "{lost}"
    );
}

#[test]
fn a_doubled_block_comes_again_with_the_same_bytes_within_fifty_milliseconds() {
    let blocks = with_fault(
        "10s",
        "kind = \"doubled\"\nat = \"1s\"\nuntil = \"9s\"\nshare = 1",
    );
    assert_eq!(blocks.len(), 180);
    for seq in 10..90 {
        let twice: Vec<&Arrived> = blocks.iter().filter(|block| block.seq == seq).collect();
        assert_eq!(twice.len(), 2, "block {seq}");
        assert_eq!(twice[0].bytes, twice[1].bytes);
        let after = twice[1].arrival - twice[0].arrival;
        assert!((5 * MS..50 * MS).contains(&after), "{after} ns");
    }
    assert_eq!(blocks.iter().filter(|block| block.seq < 10).count(), 10);
}

#[test]
fn a_reordered_block_changes_places_with_the_next() {
    let blocks = with_fault("1s", "kind = \"reordered\"\nshare = 1\nuntil = \"600ms\"");
    assert_eq!(seqs(&blocks), [1, 0, 3, 2, 5, 4, 6, 7, 8, 9]);
    // One that still waits at the end is sent.
    let odd = with_fault("1100ms", "kind = \"reordered\"\nshare = 1");
    assert_eq!(seqs(&odd), [1, 0, 3, 2, 5, 4, 7, 6, 9, 8, 10]);
}

#[test]
fn a_late_block_arrives_by_so_much_later_and_others_pass_it() {
    let blocks = with_fault(
        "5s",
        "kind = \"late\"\nat = \"1s\"\nuntil = \"2s\"\nby = \"3s\"",
    );
    assert_eq!(blocks.len(), 50);
    for block in &blocks {
        let latency = block.arrival - block.at - 100 * MS;
        let late = if (S..2 * S).contains(&block.at) {
            3 * S
        } else {
            0
        };
        assert!(
            (late + MS..late + 60 * MS).contains(&latency),
            "{latency} ns"
        );
    }
    let place = |seq: u64| blocks.iter().position(|block| block.seq == seq).unwrap();
    assert!(place(10) > place(30));
}

#[test]
fn a_clock_step_moves_the_time_of_blocks_and_nothing_else_until_it_is_set_right() {
    let fault = "kind = \"clock-step\"\nat = \"2s\"\nuntil = \"4s\"\nby_s = -3.5";
    let stepped = with_fault("6s", fault);
    let right = blocks(&scenario("6s", "", ""));
    assert_eq!(stepped.len(), right.len());
    for (block, right) in stepped.iter().zip(&right) {
        let by = if (2 * S..4 * S).contains(&right.at) {
            -3_500 * MS
        } else {
            0
        };
        assert_eq!(block.at, right.at + by);
        assert_eq!((block.arrival, block.seq), (right.arrival, right.seq));
        assert_eq!(block.block.samples, right.block.samples);
    }
}

#[test]
fn a_restarted_sensor_counts_from_zero_again_once() {
    let blocks = with_fault("1s", "kind = \"counter-restart\"\nat = \"450ms\"");
    assert_eq!(seqs(&blocks), [0, 1, 2, 3, 4, 0, 1, 2, 3, 4]);
}

#[test]
fn bursts_begin_at_multiples_of_their_interval_and_hold_what_a_stream_would_have_held() {
    let bursts = blocks(&scenario("20s", "", "burst_every = \"6s\""));
    assert_eq!(seqs(&bursts), [0, 1, 2, 3]);
    let stream = blocks(&scenario("20s", "", ""));
    for (index, burst) in bursts.iter().enumerate() {
        assert_eq!(burst.at, index as i64 * 6 * S);
        assert_eq!(burst.block.samples, stream[index * 60].block.samples);
    }
}

#[test]
fn every_encoding_tells_the_same_signal_within_half_a_step() {
    let of = |lines: &str| blocks(&scenario("2s", "", lines));
    let codes = of("range_g = 2");
    let step = 2.0 * 9.80665 / 32768.0;
    for (lines, unit, g) in [
        ("encoding = \"cbor-f32\"", Unit::MetrePerSecondSquared, 1.0),
        ("encoding = \"json\"", Unit::MetrePerSecondSquared, 1.0),
        ("encoding = \"cbor-f32\"\nunit = \"g\"", Unit::G, 9.80665),
    ] {
        let floats = of(&format!("range_g = 2\n{lines}"));
        assert_eq!(floats.len(), codes.len());
        for (float, code) in floats.iter().zip(&codes) {
            assert_eq!((float.block.unit, float.block.scale), (unit, 1.0));
            assert!((code.block.scale / step - 1.0).abs() < 1e-12);
            for (x, c) in float.block.samples.iter().zip(&code.block.samples) {
                let off = f64::from(*x) * g - f64::from(*c) * step;
                assert!(off.abs() <= 0.5 * step + 1e-5, "{off} m/s²");
            }
        }
    }
    assert!(
        codes
            .iter()
            .all(|code| code.block.integer_rail == Some((-32768.0, 32767.0)))
    );
}

#[test]
fn a_bias_voltage_stands_in_the_block_only_if_the_point_has_one() {
    let biased = blocks(&scenario("1s", "", "bias_volts = 11.5"));
    assert!(biased.iter().all(|block| block.block.bias == Some(11.5)));
    let plain = blocks(&scenario("1s", "", ""));
    assert!(plain.iter().all(|block| block.block.bias.is_none()));
}

/// A plant with every fault of the way at once, two machines, speeds and process values.
fn busy(seed: u64) -> Vec<Delivery> {
    let faults = ["lost", "doubled", "reordered"]
        .map(|kind| format!("[[asset.point.transport]]\nkind = \"{kind}\"\nshare = 0.2\n"))
        .join("");
    let point = format!(
        "{faults}[[asset.point.transport]]\nkind = \"late\"\nshare = 0.1\nby = \"2s\"\n\
         [[asset.point.sensor]]\nkind = \"cable\"\nat = \"1s\"\nper_minute = 60\n\
         [[asset]]\nid = \"P-2\"\nrpm = 2960\nspeed_every = \"700ms\"\n[[asset.point]]\nid = \"nde\"\nencoding = \"json\""
    );
    let asset =
        "speed_every = \"1s\"\nprocess = { every = \"2s\", run = \"run\", flow_m3_h = 120 }";
    let mut scenario = scenario("30s", asset, &point);
    scenario.seed = seed;
    World::new(&scenario).unwrap().collect()
}

#[test]
fn messages_come_in_order_of_arrival_whatever_goes_wrong_and_the_same_seed_gives_the_same_bytes() {
    let first = busy(5);
    assert!(
        first
            .windows(2)
            .all(|two| two[0].arrival_ns <= two[1].arrival_ns)
    );
    assert!(first == busy(5), "the same seed");
    let payloads = |all: &[Delivery]| -> Vec<Vec<u8>> {
        let blocks = all.iter().filter(|d| d.topic.contains("/block/"));
        blocks.map(|d| d.payload.clone()).collect()
    };
    let other = payloads(&busy(6));
    assert!(other.len() > 250);
    assert!(payloads(&first).iter().all(|block| !other.contains(block)));
}

#[test]
fn a_fault_at_one_sensor_changes_no_byte_of_another() {
    let second = "\n[[asset.point]]\nid = \"nde\"\nrate_hz = 1000\nblock = \"100ms\"";
    let of = |fault: &str| -> Vec<Delivery> {
        World::new(&scenario("5s", "", &format!("{fault}{second}")))
            .unwrap()
            .filter(|delivery| delivery.topic.ends_with("nde"))
            .collect()
    };
    let fault = "[[asset.point.sensor]]\nkind = \"dead\"\nat = \"1s\"\n[[asset.point.transport]]\nkind = \"lost\"\nshare = 0.5";
    assert!(of("").len() == 50 && of("") == of(fault));
}

#[test]
fn speeds_come_at_their_interval_with_a_fiftieth_of_a_percent_of_error() {
    let asset = "speed_every = \"100ms\"\nwander_percent = 0";
    let scenario = scenario("300s", asset, "");
    let start = scenario.start_ns();
    let speeds: Vec<speed::Speed> = World::new(&scenario)
        .unwrap()
        .filter(|delivery| delivery.topic == "humward/v1/harbour/speed/P-1")
        .map(|delivery| speed::decode(&delivery.payload).unwrap())
        .collect();
    assert_eq!(speeds.len(), 3000);
    let mut square = 0.0;
    for (index, speed) in speeds.iter().enumerate() {
        assert_eq!(speed.at, Some(start + index as i64 * 100 * MS));
        square += (speed.rpm / 1482.0 - 1.0).powi(2) / 3000.0;
    }
    let percent = 100.0 * square.sqrt();
    assert!(
        (percent / 0.02 - 1.0).abs() < 4.0 / 6000_f64.sqrt(),
        "{percent} %"
    );
}

#[test]
fn the_run_bit_follows_the_motors_power_and_the_flow_speed_and_load() {
    let asset = "wander_percent = 0\nload = { mean = 0.8 }\n\
         schedule = [[\"0s\", 0], [\"10s\", 0], [\"20s\", 1482], [\"40s\", 1482], [\"50s\", 0]]\n\
         process = { every = \"1s\", run = \"run\", flow_m3_h = 120 }";
    let scenario = scenario("60s", asset, "");
    let start = scenario.start_ns();
    let values: Vec<(i64, process::Process)> = World::new(&scenario)
        .unwrap()
        .filter(|delivery| delivery.topic == "humward/v1/harbour/process/P-1")
        .map(|delivery| process::decode(&delivery.payload).unwrap())
        .map(|value| ((value.at.unwrap() - start) / S, value))
        .collect();
    let at = |name: &str, s: i64| {
        let mut found = values
            .iter()
            .filter(|(at, v)| *at == s && v.name.as_str() == name);
        found.next().unwrap().1.clone()
    };
    assert_eq!(values.len(), 120);
    for (s, run, flow) in [
        (5, 0.0, 0.0),
        (15, 1.0, 48.0),
        (30, 1.0, 96.0),
        (45, 0.0, 48.0),
        (55, 0.0, 0.0),
    ] {
        assert_eq!(at("run", s).value, run, "at {s} s");
        let told = at("flow", s);
        assert!(
            (told.value - flow).abs() < 0.1,
            "{} m3/h at {s} s",
            told.value
        );
        assert_eq!(told.unit.as_deref(), Some("m3/h"));
    }
}

#[test]
fn another_start_moves_every_time_and_an_endless_world_goes_on_after_the_duration() {
    let scenario = scenario("2s", "", "");
    let start = scenario.start_ns() + 86_400 * S;
    let moved: Vec<Arrived> = World::starting(&scenario, start)
        .unwrap()
        .map(|delivery| read(delivery, start))
        .collect();
    let usual = blocks(&scenario);
    assert_eq!(moved.len(), 20);
    for (moved, usual) in moved.iter().zip(&usual) {
        assert_eq!((moved.at, moved.arrival), (usual.at, usual.arrival));
        assert_eq!(moved.block.samples, usual.block.samples);
    }
    let endless = World::endless(&scenario, start).unwrap().nth(100).unwrap();
    assert_eq!(read(endless, start).at, 10 * S);
}
