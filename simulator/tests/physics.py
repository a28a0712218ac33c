#!/usr/bin/env python3
"""Rendered scenarios against closed form, measured with scipy.

Renders each scenario with humward-sim, reads the recording with cbor2 (RFC 8742), and measures lines, levels, envelopes
and times with numpy and scipy. Nothing of the daemon takes part. Prints one row a check: scenario, what, measured,
expected, tolerance, where the expectation comes from; ends with 1 if a row is out of tolerance.

    simulator/tests/physics.py target/debug/humward-sim [SCENARIO...]
"""

import json
import subprocess
import sys
import tempfile
from pathlib import Path

import cbor2
import numpy as np
from scipy import signal

G0 = 9.80665
rows = []


class Recording:
    """Blocks by (asset, point), speeds by asset, truth."""

    def __init__(self, program, scenario, directory, *options):
        path = Path(directory) / f"{scenario}.rec"
        subprocess.run(
            [program, "render", scenario, "--out", path, *options], check=True, stdout=subprocess.DEVNULL
        )
        self.blocks, self.speeds, self.process = {}, {}, {}
        with open(path, "rb") as file:
            header = cbor2.load(file)
            self.truth = json.loads(header["truth"])
            while file.peek(1):
                item = cbor2.load(file)
                if isinstance(item, list):
                    self.take(*item)
        path.unlink()

    def take(self, arrival, topic, payload):
        kind, asset, *point = topic.split("/")[3:]
        if kind == "block":
            block = json.loads(payload) if payload[:1] == b"{" else cbor2.loads(payload)
            self.blocks.setdefault((asset, point[0]), []).append((arrival, block))
        elif kind == "speed":
            value = json.loads(payload)
            self.speeds.setdefault(asset, []).append((value["at"], value["rpm"]))
        elif kind == "process":
            value = json.loads(payload)
            self.process.setdefault((asset, value["name"]), []).append((value["at"], value["value"]))

    @property
    def start(self):
        first = min(block["at"] for blocks in self.blocks.values() for _, block in blocks[:3])
        return first

    def asset(self, name):
        return next(asset for asset in self.truth["assets"] if asset["asset"] == name)

    def point(self, asset, point):
        return next(p for p in self.asset(asset)["points"] if p["point"] == point)

    def samples(self, asset, point, start_s=0.0, length_s=None):
        """m/s2 between two times after the start, and the declared rate."""
        blocks = self.blocks[(asset, point)]
        rate = blocks[0][1]["rate"]
        wanted = [
            block
            for _, block in blocks
            if (block["at"] - self.start) / 1e9 >= start_s - 1e-6
            and (length_s is None or (block["at"] - self.start) / 1e9 < start_s + length_s - 1e-6)
        ]
        return np.concatenate([to_ms2(block) for block in wanted]), rate

    def speed_hz(self, asset, start_s, length_s):
        """Mean reported speed in a span, turns per second."""
        inside = [
            rpm
            for at, rpm in self.speeds[asset]
            if start_s <= (nanoseconds(at) - self.start) / 1e9 <= start_s + length_s
        ]
        return np.mean(inside) / 60.0


def nanoseconds(at):
    return at if isinstance(at, int) else int(np.datetime64(at.rstrip("Z")).astype("datetime64[ns]").astype(int))


def to_ms2(block):
    samples = block["samples"]
    if isinstance(samples, cbor2.CBORTag):
        kind = {77: "<i2", 78: "<i4", 85: "<f4", 86: "<f8"}[samples.tag]
        samples = np.frombuffer(samples.value, kind)
    values = np.asarray(samples, float) * block.get("scale", 1.0)
    return values * (G0 if block["unit"] == "g" else 1.0)


def velocity_mm_s(x, rate, low=10.0, high=1000.0):
    """Velocity rms in a band, mm/s: periodogram of Hann-windowed halves over (2 pi f)^2."""
    hz, density = signal.welch(x, rate, nperseg=int(4 * rate), detrend="constant")
    inside = (hz >= low) & (hz <= high)
    return 1e3 * np.sqrt(np.sum(density[inside] / (2 * np.pi * hz[inside]) ** 2) * (hz[1] - hz[0]))


def line(x, rate, low, high, squared=False):
    """The strongest line in a band: Hz and peak amplitude, parabola on the logarithm of a 4 x padded Hann spectrum."""
    x = x - np.mean(x)
    window = signal.windows.hann(len(x), sym=False)
    size = 4 * len(x)
    spectrum = np.abs(np.fft.rfft(x * window, size)) * 2 / np.sum(window)
    first, last = int(np.ceil(low * size / rate)), int(high * size / rate)
    k = first + int(np.argmax(spectrum[first : last + 1]))
    a, b, c = np.log(spectrum[k - 1 : k + 2])
    shift = 0.5 * (a - c) / (a - 2 * b + c)
    return (k + shift) * rate / size, float(np.exp(b - 0.25 * (a - c) * shift))


def over_floor_db(x, rate, hz, width=0.01):
    """Power of the strongest line within +-width of hz over the median of 0.7 to 1.3 of it, dB."""
    x = x - np.mean(x)
    spectrum = np.abs(np.fft.rfft(x * signal.windows.hann(len(x), sym=False))) ** 2
    at = np.fft.rfftfreq(len(x), 1 / rate)
    near = np.abs(at / hz - 1) <= width
    beside = (np.abs(at / hz - 1) <= 0.3) & ~near
    return 10 * np.log10(spectrum[near].max() / np.median(spectrum[beside]))


def envelope(x, rate, low, high):
    """Squared envelope of a band by scipy's hilbert, and its rate after decimation."""
    sections = signal.butter(4, [low, high], "bandpass", fs=rate, output="sos")
    squared = np.abs(signal.hilbert(signal.sosfiltfilt(sections, x))) ** 2
    return signal.decimate(squared, 4, ftype="fir"), rate / 4


def check(scenario, what, got, want, tolerance, source):
    ok = abs(got - want) <= tolerance
    rows.append(ok)
    print(f"{'ok  ' if ok else 'FAIL'} {scenario:20} {what:54} {got:11.4g} {want:11.4g} {tolerance:9.3g}  {source}")


def at_least(scenario, what, got, low, source):
    ok = got >= low
    rows.append(ok)
    print(f"{'ok  ' if ok else 'FAIL'} {scenario:20} {what:54} {got:11.4g} {'>= %.4g' % low:>11} {'':9}  {source}")


def clean_velocity(name, r, asset, point, start_s, length_s, which, tolerance=0.08):
    x, rate = r.samples(asset, point, start_s, length_s)
    want = r.point(asset, point)["velocity_mm_s"][which]
    check(name, f"velocity of {asset}/{point}, mm/s rms", velocity_mm_s(x, rate), want, tolerance * want, "the truth's closed form")


def crossings(name, r, asset, point, length_s=16):
    for crossing in r.point(asset, point)["crossings"]:
        x, rate = r.samples(asset, point, crossing["after_s"] - length_s / 2, length_s)
        check(
            name, f"velocity when it {crossing['direction']} {crossing['mm_s']} (truth), mm/s rms",
            velocity_mm_s(x, rate), crossing["mm_s"], 0.08 * crossing["mm_s"], "the truth's closed form",
        )


def told(r, asset, text, fault=0):
    return next(line for line in r.asset(asset)["faults"][fault]["lines"] if line["line"].startswith(text))


def healthy_pump(name, r):
    for point in ("drive-end", "non-drive-end"):
        clean_velocity(name, r, "P-101A", point, 0, 60, 0, 0.12)
    x, rate = r.samples("P-101A", "drive-end", 0, 20)
    shaft = r.speed_hz("P-101A", 0, 20)
    check(name, "1x over the reported speed", line(x, rate, 20, 30)[0] / shaft, 1.0, 0.002, "definition of 1x")
    at_least(name, "vane pass (5x) over its floor, dB", over_floor_db(x, rate, 5 * shaft), 10, "Z x f, reference of the trade")
    hz, density = signal.welch(x, rate, nperseg=8192)
    wide = np.sqrt(np.sum(density[(hz > 1000) & (hz < 5000)]) * hz[1]) / G0
    check(name, "acceleration 1-5 kHz, g rms", wide, 0.12, 0.1, "0.05-0.3 g, common practice, no source")


def imbalance_growing(name, r):
    crossings(name, r, "P-103A", "drive-end")
    # Residual and growing imbalance meet at an angle: |r + a g|^2 is a parabola in g, the stated growth.
    grown, level = [], []
    for after in range(150, 720, 30):
        x, rate = r.samples("P-103A", "drive-end", after, 10)
        hz, peak = line(x, rate, 20, 30)
        level.append((peak / (2 * np.pi * hz) * 1e3 / np.sqrt(2)) ** 2)
        grown.append(0.3 * 30 ** ((after + 5 - 120) / 600))
    fit = np.polyfit(grown, level, 2, w=1 / np.array(level))
    worst = np.max(np.abs(np.polyval(fit, grown) / level - 1)) / 2
    check(name, "1x off the stated growth, worst share of 19 times", worst, 0, 0.12, "exponential 0.3 to 9 in 10 min; both lines are at unrest by 5 % and 0.05 cycles")
    check(name, "grown 1x over its statement, dB", 10 * np.log10(fit[0]), 0, 2.5, "9 mm/s through a path of +-1.5 dB")


def misaligned_coupling(name, r):
    crossings(name, r, "P-102A", "drive-end")
    clean_velocity(name, r, "P-102A", "axial", 840, 50, 1)
    x, rate = r.samples("P-102A", "drive-end", 840, 20)
    shaft = r.speed_hz("P-102A", 840, 20)
    for order in (1, 2, 3):
        hz = line(x, rate, (order - 0.3) * shaft, (order + 0.3) * shaft)[0]
        check(name, f"{order}x over the reported speed", hz / shaft, order, 0.002 * order, "definition of orders")
    level = [line(r.samples("P-102A", "drive-end", 60 * m, 10)[0], rate, 94, 103)[1] for m in (4, 6, 8)]
    check(name, "2x grows evenly: (8 min - 6) over (6 - 4)", (level[2] - level[1]) / (level[1] - level[0]), 1.0, 0.25, "linear law")


def race(name, r, asset, text, sides):
    expected = told(r, asset, text)
    nominal = r.asset(asset)["rpm"] / 60
    x, rate = r.samples(asset, "drive-end", 1080, 20)
    shaft = r.speed_hz(asset, 1080, 20)
    squared, low_rate = envelope(x, rate, 1600, 5400)
    want = expected["hz"] * shaft / nominal
    hz, _ = line(squared, low_rate, 0.97 * want, 1.03 * want)
    check(name, f"{text} in the envelope at minute 18, Hz", hz, want, 0.004 * want, "Z/2 f (1 -+ d/D cos) with the drawn slip, Randall & Antoni 2011")
    geometry = {"outer race": 3.5848, "inner race": 5.4152}[text]
    check(name, "the same in orders, against geometry", hz / shaft, geometry, 0.015 * geometry, "9 balls, 7.94 on 39.04 mm; slip to 1 %")
    at_least(name, "the same over its floor, dB", over_floor_db(squared, low_rate, hz), 12, "stage 2.5")
    for side in sides:
        got = over_floor_db(squared, low_rate, want + side * shaft, 0.005)
        at_least(name, f"sideband {side:+d}x over its floor, dB", got, 6, "load zone turns with the shaft, McFadden & Smith 1984")
    stages = {}
    for minute in (20, 27):
        x, _ = r.samples(asset, "drive-end", 60 * minute, 20)
        stages[minute] = over_floor_db(*envelope(x, rate, 1600, 5400), want, 0.02)
    at_least(name, "line over floor, minute 20 above minute 27, dB", stages[20] - stages[27], 3, "stage 4: lines sink in the floor")
    before = velocity_mm_s(r.samples(asset, "drive-end", 0, 60)[0], rate)
    early = velocity_mm_s(r.samples(asset, "drive-end", 600, 60)[0], rate)
    check(name, "velocity at stage 1.5 over healthy", early / before, 1.0, 0.06, "an early pit leaves velocity alone")
    clean_velocity(name, r, asset, "drive-end", 1740, 55, 1, 0.10)


def outer_race_growing(name, r):
    race(name, r, "P-103A", "outer race", [])


def inner_race_growing(name, r):
    race(name, r, "P-103B", "inner race", [-1, 1])


def vane_pass_strong(name, r):
    x, rate = r.samples("P-104", "casing", 420, 20)
    shaft = r.speed_hz("P-104", 420, 20)
    for text, order in (("vane pass", 6), ("vane pass - 1x", 5), ("vane pass + 1x", 7), ("2 x vane", 12)):
        hz, _ = line(x, rate, (order - 0.3) * shaft, (order + 0.3) * shaft)
        check(name, f"{text}, orders", hz / shaft, order, 0.002 * order, "Z x f and one shaft beside it")
    check(name, "vane pass at 2950 r/min, Hz", told(r, "P-104", "vane pass")["hz"], 295, 1e-6, "6 x 2950 / 60 = 295 Hz, handbook example")
    clean_velocity(name, r, "P-104", "casing", 540, 55, 1, 0.12)


def cavitation(name, r):
    def high(start):
        x, rate = r.samples("P-105", "casing", start, 20)
        hz, density = signal.welch(x, rate, nperseg=8192)
        inside = (hz > 3000) & (hz < 7000)
        return np.sum(density[inside]), density[inside], x, rate

    before, after = high(60), high(480)
    at_least(name, "3-7 kHz, after over before, dB", 10 * np.log10(after[0] / before[0]), 15, "broadband noise rises, Gao et al. 2017")
    at_least(name, "strongest bin over the median at 3-7 kHz, at most 10 dB", -10 * np.log10(after[1].max() / np.median(after[1])), -10, "a mound has no lines")
    squared, rate = envelope(after[2], after[3], 3000, 7000)
    vane = 5 * r.speed_hz("P-105", 480, 20)
    at_least(name, "vane pass in the envelope over its floor, dB", over_floor_db(squared, rate, vane), 10, "collapse recurs with the vanes, Mousmoulis et al. 2021")
    clean_velocity(name, r, "P-105", "casing", 540, 55, 1, 0.12)


def loose_foot(name, r):
    x, rate = r.samples("P-106", "drive-end", 480, 40)
    shaft = r.speed_hz("P-106", 480, 40)
    for order in (1, 2, 3, 4, 1.5, 2.5):
        at_least(name, f"{order}x over its floor, dB", over_floor_db(x, rate, order * shaft, 0.004), 8, "harmonics and halves of a foot that bounces")
    clean_velocity(name, r, "P-106", "drive-end", 540, 55, 1, 0.12)


def dc_motor(name, r, line_hz):
    x, rate = r.samples("P-107", "motor", 480, 40)
    for n in (6, 12, 18):
        if n * line_hz < 0.45 * rate:
            hz, _ = line(x, rate, n * line_hz - 4, n * line_hz + 4)
            check(name, f"{n} x line, Hz", hz, n * line_hz, 0.001 * n * line_hz, "six-pulse bridge: 6k x line")
    shaft = r.speed_hz("P-107", 480, 40)
    for side in (-1, 1):
        got = over_floor_db(x, rate, 6 * line_hz + side * shaft, 0.003)
        at_least(name, f"6 x line {side:+d}x over its floor, dB", got, 6, "shaft sidebands of the firing line")
    clean_velocity(name, r, "P-107", "motor", 540, 55, 1, 0.10)


def dc_motor_50hz(name, r):
    dc_motor(name, r, 50)


def dc_motor_60hz(name, r):
    dc_motor(name, r, 60)


def twice_line(name, r):
    x, rate = r.samples("P-108", "motor", 480, 60)
    shaft = r.speed_hz("P-108", 480, 60)
    check(name, "twice line, Hz", line(x, rate, 99.7, 100.5)[0], 100.0, 0.1, "2 x 50 Hz")
    check(name, "2x of the shaft beside it, Hz", line(x, rate, 98.6, 99.6)[0], 2 * shaft, 0.1, "2 x 2976 / 60 = 99.2 Hz")
    crossings(name, r, "P-108", "motor")


def start_stop(name, r):
    for start, rpm in ((180, 1480), (420, 1100)):
        x, rate = r.samples("P-109", "drive-end", start, 20)
        hz, _ = line(x, rate, 12, 30)
        check(name, f"1x at {rpm} r/min, Hz", hz, rpm / 60, 0.01 * rpm / 60, "the schedule")
    for start, middle in ((68, 370), (74, 666)):
        x, rate = r.samples("P-109", "drive-end", start, 1)
        reported = [rpm for at, rpm in r.speeds["P-109"] if abs((nanoseconds(at) - r.start) / 1e9 - start) < 1.1]
        check(name, f"speed {start - 60} s into the ramp, r/min", np.mean(reported), (start - 60) * 1480 / 30, 55, "linear ramp, 1480 in 30 s")
    levels = []
    for start in (180, 420):
        x, rate = r.samples("P-109", "drive-end", start, 20)
        levels.append(line(x, rate, 15, 28)[1])
    check(name, "1x at 1100 over 1480 r/min", levels[1] / levels[0], (1100 / 1480) ** 2, 0.06, "F = m e omega^2")
    still, rate = r.samples("P-109", "drive-end", 600, 40)
    check(name, "velocity while it stands, mm/s rms", velocity_mm_s(still, rate), 0.12, 0.12, "background and sensor only")


def load_walk(name, r):
    flow = np.array([value for _, value in r.process[("P-110", "flow")]])
    check(name, "mean flow, m3/h", flow.mean(), 110 * 0.75, 25, "rated x load, walk 0.25 over 4 min")
    at, rpm = np.array([(nanoseconds(at) / 1e9, rpm) for at, rpm in r.speeds["P-110"]]).T
    rate = 1 / np.median(np.diff(at))
    hz, density = signal.periodogram(signal.detrend(rpm), rate)
    check(name, "period of the speed's swing, s", 1 / hz[np.argmax(density)], 60, 4, "1.5 % with a period of 60 s")
    check(name, "swing of the speed, r/min peak", np.sqrt(2) * rpm.std(), 0.015 * 1470, 8, "1.5 % of 1470 r/min")


def knocks(name, r):
    x, rate = r.samples("P-111", "drive-end")
    times = [120, 121.3, 280, 420, 672, 673, 675]
    for at in times:
        near = x[int((at - 0.05) * rate) : int((at + 0.05) * rate)] / G0
        check(name, f"height of the knock at {at} s, g", near.max(), 25, 1.5, "half sine of 25 g")
    at_least(name, "lowest sample, g (one-sided)", x.min() / G0, -2, "a half sine has one sign")
    beyond = np.flatnonzero(x > 10 * G0)
    groups = 1 + np.count_nonzero(np.diff(beyond) > rate / 2)
    check(name, "knocks in all", groups, len(times), 0, "the list")


def neighbour(name, r):
    own, rate = r.samples("P-112A", "drive-end", 600, 20)
    next_door, _ = r.samples("P-112B", "drive-end", 600, 20)
    shaft = r.speed_hz("P-112A", 600, 20)
    hz, peak = line(next_door, rate, 20, 30)
    check(name, "line at the standby pump over the neighbour's 1x", hz / shaft, 1.0, 0.002, "through the foundation")
    share = peak / line(own, rate, 20, 30)[1]
    check(name, "its level over the neighbour's", 20 * np.log10(share / 0.12), 0, 6, "foundation 0.12 within 3 dB of it and 1.5 of each path")
    clean_velocity(name, r, "P-112B", "drive-end", 660, 50, 1, 0.12)
    crossings(name, r, "P-112A", "drive-end")


def first_alarm(name, r):
    crossings(name, r, "P-103A", "drive-end", 6)


def harbour_watch(name, r):
    for asset in ("P-101", "P-103A"):
        for point in ("drive-end", "non-drive-end"):
            clean_velocity(name, r, asset, point, 60, 50, 0, 0.12)
    x, rate = r.samples("P-103A", "drive-end", 540, 20)
    shaft = r.speed_hz("P-103A", 540, 20)
    want = told(r, "P-103A", "outer race")["order"] * shaft
    hz, _ = line(*envelope(x, rate, 1600, 5000), 0.97 * want, 1.03 * want)
    check(name, "outer race in the envelope at minute 9, Hz", hz, want, 0.004 * want, "Z/2 f (1 - d/D cos) with the drawn slip")
    x, _ = r.samples("P-111", "drive-end", 485, 590)
    check(name, "codes of the flat sensor", len(np.unique(x)), 1, 0, "flat")


def sensor_failures(name, r):
    def after(point, start=200, length=20):
        return r.samples("P-113", point, start, length)

    check(name, "codes of the flat sensor", len(np.unique(after("flat")[0])), 1, 0, "flat")
    dead, rate = after("dead")
    floor = 60e-6 * G0 * np.sqrt(rate / 2)
    check(name, "rms of the dead sensor, m/s2", dead.std(), floor, 0.03 * floor, "noise n sqrt(rate/2), 60 ug/rtHz")
    hz, density = signal.welch(dead, rate, nperseg=4096)
    check(name, "its density, ug/rtHz", np.sqrt(np.median(density[hz > 10])) / G0 * 1e6, 60, 2, "the sensor's data sheet value")
    check(name, "its mean, g", dead.mean() / G0, 0, 1e-3, "no offset")

    def high(point, start):
        x, rate = after(point, start)
        hz, density = signal.welch(x, rate, nperseg=4096)
        return np.sqrt(np.sum(density[hz > 800]) * hz[1])

    at_least(name, "fallen off: high band lost, dB", 20 * np.log10(high("well", 300) / high("fallen", 300)), 12, "not in contact, common practice, no source")
    cable = after("cable", 190, 300)[0]
    at_least(name, "cable: samples beyond 5 g in 5 min", np.count_nonzero(np.abs(cable) > 5 * G0), 20, "contact bounce, common practice, no source")
    check(name, "drifting: mean after the drift, g", after("drifting", 600, 20)[0].mean() / G0, 4.0, 0.02, "4 g within 5 min")
    clipped = r.samples("P-113", "clipping", 60, 20)[0]
    step = 0.2 * G0 / 32768
    check(name, "clipping: highest sample, g", clipped.max() / G0, (0.2 * G0 - step) / G0, 1e-5, "rail of 16 bits, one step below the range")
    at_least(name, "clipping: samples at the rails in 20 s", np.count_nonzero(np.abs(clipped) > 0.19999 * G0), 50, "range 0.2 g")


def oscillator_off(name, r):
    lines = {}
    for point in ("exact", "slow"):
        x, rate = r.samples("P-114", point, 60, 60)
        lines[point] = line(x, rate, 95, 106)[0]
    check(name, "twice line by the slow sensor over the exact one", lines["slow"] / lines["exact"], 1 / 0.98, 3e-4, "6400 / 6272 samples/s")
    blocks = r.blocks[("P-114", "slow")]
    spacing = np.diff([block["at"] for _, block in blocks]) / 1e9
    check(name, "time from block to block of the slow one, s", spacing.mean(), 6400 / 6272, 1e-4, "6400 samples at 6272 a second")


def rough_transport(name, r):
    def of(point):
        return r.blocks[("P-115", point)]

    def late_s(pairs):
        return np.array([(arrival - block["at"]) / 1e9 - len(to_ms2(block)) / block["rate"] for arrival, block in pairs])

    seqs = [block["seq"] for _, block in of("lost")]
    check(name, "lost: share of blocks", 1 - len(seqs) / (seqs[-1] + 1), 0.1 * 10 / 12, 0.05, "10 % from minute 2 to 12")
    seqs = [block["seq"] for _, block in of("doubled")]
    check(name, "doubled: share of blocks", len(seqs) / len(set(seqs)) - 1, 0.3 * 10 / 12, 0.08, "30 % from minute 2 to 12")
    back = np.count_nonzero(np.diff([block["seq"] for _, block in of("reordered")]) < 0)
    check(name, "reordered: blocks behind their successor", back, 0.3 / 1.3 * 600, 45, "30 % from minute 2 to 12; a swap takes two")
    slow = late_s(of("late")) > 2
    check(name, "late: share while it lasts", np.count_nonzero(slow) / 360, 0.5, 0.12, "50 % from minute 2 to 8")
    check(name, "late: by, s", np.median(late_s(of("late"))[slow]), 4, 0.05, "4 s")
    shift = late_s(of("clock"))
    check(name, "clock step: seconds fast", -np.median(shift[250:530]), 30, 0.05, "30 s from minute 4 to 9")
    check(name, "clock step: right before and after", max(abs(np.median(shift[:230])), abs(np.median(shift[550:]))), 0, 0.05, "0 s")
    falls = np.flatnonzero(np.diff([block["seq"] for _, block in of("counter")]) < 0)
    check(name, "counter restart: after block", falls[0] if len(falls) == 1 else -1, 359, 2, "once, at minute 6")


def burst_sensor(name, r):
    blocks = r.blocks[("P-116", "casing")]
    check(name, "blocks in an hour", len(blocks), 12, 0, "one each 5 min")
    check(name, "from burst to burst, s", np.median(np.diff([block["at"] for _, block in blocks])) / 1e9, 300, 0.01, "5 min")
    check(name, "samples of a burst", len(to_ms2(blocks[0][1])), 2 * 25600, 0, "2 s of 25.6 kHz")
    rms = [to_ms2(block).std() for _, block in blocks]
    at_least(name, "rms of the last over the first", rms[-1] / rms[0], 3, "cavitation grows between bursts")


CHECKS = {
    function.__name__.replace("_", "-"): (function, options)
    for function, options in [
        (healthy_pump, ["--duration", "70s"]),
        (imbalance_growing, []),
        (misaligned_coupling, []),
        (outer_race_growing, []),
        (inner_race_growing, []),
        (vane_pass_strong, []),
        (cavitation, []),
        (loose_foot, []),
        (dc_motor_50hz, []),
        (dc_motor_60hz, []),
        (twice_line, []),
        (start_stop, []),
        (load_walk, []),
        (knocks, []),
        (neighbour, []),
        (first_alarm, []),
        (harbour_watch, []),
        (sensor_failures, []),
        (oscillator_off, ["--duration", "3min"]),
        (rough_transport, []),
        (burst_sensor, []),
    ]
}


def main():
    program, *wanted = sys.argv[1:]
    listed = {row.split()[0] for row in subprocess.run([program, "list"], check=True, capture_output=True, text=True).stdout.splitlines() if row[:1].strip()}
    if listed != set(CHECKS):
        print(f"FAIL scenarios without checks, or checks without a scenario: {sorted(listed ^ set(CHECKS))}")
        rows.append(False)
    print(f"{'':4} {'scenario':20} {'what':54} {'measured':>11} {'expected':>11} {'tolerance':>9}  source")
    with tempfile.TemporaryDirectory() as directory:
        for name, (function, options) in CHECKS.items():
            if not wanted or name in wanted:
                function(name, Recording(program, name, directory, *options))
    print(f"{sum(rows)} of {len(rows)} checks within their tolerance")
    sys.exit(0 if rows and all(rows) else 1)


if __name__ == "__main__":
    main()
