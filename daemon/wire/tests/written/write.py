"""Writes messages.txt beside this file: CBOR messages as cbor2 writes them, one "name hex" to a line.

The values are those of tests/contract/written.rs. Run: python write.py (needs cbor2).
"""

import pathlib
import struct

import cbor2

AT = 1_796_094_480_250_000_000
SAMPLES = [1.0, -2.0, 300.0]


def typed(tag, form, values):
    return cbor2.CBORTag(tag, struct.pack(f"<{len(values)}{form}", *values))


def block(samples, **optional):
    return cbor2.dumps({"at": AT, **optional_in(optional, "seq"), "rate": 25600.0, "unit": "m/s2", "scale": -0.25,
                        "channels": 3, **optional_in(optional, "rpm", "bias"), "samples": samples})


def optional_in(optional, *keys):
    return {key: optional[key] for key in keys if key in optional}


# cbor2 writes 32-bit floats only in its canonical form, and there for numbers that need them.
singles = [cbor2.dumps(value, canonical=True) for value in (100000.0, 3.4028234663852886e38)]
assert all(single[0] == 0xFA for single in singles)
plain = block([]).removesuffix(b"\x80") + b"\x82" + b"".join(singles)

evidence = {
    "schema": "humward/evidence/1", "gateway": "north-gw-1", "epoch": 0, "site": "north", "asset": "P-103A",
    "at": "2026-12-01T03:08:00.250Z", "event": "0-1", "point": "drive-end", "watch": None, "rpm": 1482.3,
    "spectrum": None, "envelope": None,
    "waveform": {"start": 0.0, "step": 0.5, "step_unit": "s", "unit": "m/s2 rms", "band_hz": [2000.0, 5000.0],
                 "resolution_hz": None, "thinned": 70000, "values": typed(85, "f", [0.0, 1.0, -2.5])},
    "truncated": True,
}

recording = [
    {"format": "humward-recording", "version": 1, "site": "north", "config_hash": "5f0c", "epoch": 0},
    {"plan": 90, "config_hash": "5f0c"},
    {"started": 100},
    {"link": 100, "up": True},
    [120, "humward/v1/north/speed/P-103A", b"1482.3"],
    {"gap": 130, "topic": "humward/v1/north/block/P-103A/de", "reason": "shed", "blocks": 3},
    {"clock_step": 140, "by": -2_000_000_000},
    [150, "plant/7", bytes(300)],
]

MESSAGES = {
    "s16": block(typed(77, "h", [1, -2, 300]), seq=23, rpm=1482.3, bias=-9.5),
    "s32": block(typed(78, "i", [1, -2, 300]), seq=2**64 - 1),
    "f32": block(typed(85, "f", SAMPLES)),
    "f64": block(typed(86, "d", SAMPLES)),
    "plain": plain,
    "evidence": cbor2.dumps(evidence),
    "recording": b"".join(cbor2.dumps(item) for item in recording),
}

lines = [f"{name} {message.hex()}\n" for name, message in MESSAGES.items()]
pathlib.Path(__file__).with_name("messages.txt").write_text("".join(lines))
