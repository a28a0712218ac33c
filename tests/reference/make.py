"""Writes the reference values of the accuracy tests, by scipy, beside this script.

Run: python make.py           (needs numpy and scipy) writes them; each file names this script and the versions used.
     python make.py --check   writes nothing and fails where what is committed is not what scipy gives here.
The inputs are rebuilt in Rust sample by sample from the same formulas and the same congruential
generator, rounded to 32-bit floats on both sides, so only results are kept here.
"""

import json
import pathlib
import sys

import numpy as np
import scipy
import scipy.fft
import scipy.signal
import scipy.stats

CHECK = sys.argv[1:] == ["--check"]
FAULTS = []
HERE = pathlib.Path(__file__).parent
NOTE = f"tests/reference/make.py, scipy {scipy.__version__}, numpy {np.__version__}"


def noise(count, seed):
    """Uniform in -0.5..0.5, 24 bits: state = state * 6364136223846793005 + 1442695040888963407."""
    out, state = np.empty(count), seed
    for i in range(count):
        state = (state * 6364136223846793005 + 1442695040888963407) % 2**64
        out[i] = (state >> 40) / 2**24 - 0.5
    return out


def single(x):
    return x.astype(np.float32).astype(np.float64)


def write(name, **values):
    def plain(v):
        if isinstance(v, np.ndarray):
            return [float(f"{x:.9g}") for x in v]
        return float(v) if isinstance(v, np.floating) else v

    body = {"source": NOTE} | {k: plain(v) for k, v in values.items()}
    path = HERE / f"{name}.json"
    if CHECK:
        difference = differs(json.loads(path.read_text()), json.loads(json.dumps(body)))
        print(f"{path.name}: {difference or 'as committed'}")
        FAULTS.extend([path.name] if difference else [])
    else:
        path.write_text(json.dumps(body) + "\n")


def differs(committed, made, where=""):
    """Says where two bodies differ by more than 1e-6 of the largest value beside it; the source note may differ."""
    if isinstance(made, dict) and isinstance(committed, dict):
        if made.keys() != committed.keys():
            return f"{where}: keys {sorted(committed)} against {sorted(made)}"
        found = (differs(committed[k], made[k], f"{where}.{k}") for k in made if k != "source")
        return next(filter(None, found), None)
    if isinstance(made, list) and isinstance(committed, list):
        if len(made) != len(committed):
            return f"{where}: {len(committed)} values against {len(made)}"
        if made and all(isinstance(v, (int, float)) for v in made):
            largest = max(map(abs, made))
            worst = max(abs(a - b) for a, b in zip(committed, made))
            return None if worst <= 1e-6 * largest else f"{where}: {worst:g} apart, largest {largest:g}"
        found = (differs(c, m, f"{where}[{i}]") for i, (c, m) in enumerate(zip(committed, made)))
        return next(filter(None, found), None)
    if isinstance(made, float):
        return None if abs(committed - made) <= 1e-6 * abs(made) else f"{where}: {committed} against {made}"
    return None if committed == made else f"{where}: {committed!r} against {made!r}"


def welch():
    """Noise and three sines on gravity, frames of 1024 at 12 kHz."""
    rate, n, count = 12_000.0, 1024, 1024 * 10
    t = np.arange(count) / rate
    x = 9.80665 + 4.0 * noise(count, 1)
    for amplitude, hz, phase in [(3.0, 49.3, 0.1), (0.5, 812.0, 1.0), (1.5, 3001.7, 2.0)]:
        x = x + amplitude * np.sin(2 * np.pi * hz * t + phase)
    _, density = scipy.signal.welch(
        single(x), rate, "hann", n, n // 2, detrend="constant", scaling="density"
    )
    write("welch", rate_hz=rate, n=n, count=count, density=density)


def envelope():
    """Bursts at 97 a second ringing at 4.1 kHz, in noise, with a strong line at 24.7 Hz."""
    rate, n, count = 25_600.0, 4096, 4096 * 6
    t = np.arange(count) / rate
    since = np.mod(t, 1 / 97.0)
    x = 8.0 * np.exp(-since / 0.0008) * np.sin(2 * np.pi * 4100.0 * since)
    x = single(x + 2.0 * noise(count, 2) + 5.0 * np.sin(2 * np.pi * 24.7 * t + 0.3))
    df, edge = rate / n, 4
    first, last = int(np.ceil(2500.0 / df)), int(np.floor(6500.0 / df))
    side = (last - first) // 2
    bins = 2 * side + 1
    weight = np.zeros(n // 2 + 1)
    inside = np.ones(bins)
    rise = 0.5 - 0.5 * np.cos(np.pi * np.arange(1, edge + 1) / (edge + 1))
    inside[:edge], inside[-edge:] = rise, rise[::-1]
    weight[first : first + bins] = inside
    window = scipy.signal.get_window("hann", n)
    total, frames = np.zeros(n // 2 + 1), 0
    for start in range(0, count - n + 1, n // 2):
        band = scipy.fft.irfft(scipy.fft.rfft(x[start : start + n]) * weight, n)
        squared = np.abs(scipy.signal.hilbert(band)) ** 2
        line = scipy.fft.rfft((squared - squared.mean()) * window) * 2 / window.sum()
        total, frames = total + np.abs(line) ** 2, frames + 1
    write(
        "envelope", rate_hz=rate, n=n, count=count, f1_hz=2500.0, f2_hz=6500.0,
        power=(total / frames)[: 241],
    )


def analog_velocity(hz, lower_edge_hz):
    """HP3 (with its phase), the magnitude of LP3, one integration, mm/s out of m/s2."""
    high = scipy.signal.butter(3, 2 * np.pi * lower_edge_hz / 10**0.1, "high", analog=True)
    low = scipy.signal.butter(3, 2 * np.pi * 1000.0 * 10**0.1, "low", analog=True)
    s = 2j * np.pi * np.where(hz > 0, hz, 1.0)
    response = np.polyval(high[0], s) / np.polyval(high[1], s)
    response = response * np.abs(np.polyval(low[0], s) / np.polyval(low[1], s)) / s * 1e3
    return np.where(hz > 0, response, 0.0)


def velocity():
    """One period, in its steady state, of a periodic record: exact in frequency."""
    cases = []
    for rate, factor, lower in [(12_000, 4, 10.0), (25_600, 8, 10.0), (25_600, 8, 2.0), (48_000, 16, 10.0)]:
        count = 2 * rate
        t = np.arange(count) / rate
        phases = noise(60, 3)
        tones = np.zeros(count)
        for i in range(60):
            hz = round(3.0 * 1.1**i) / 2.0 + 0.5
            if hz <= 1000.0:
                tones += (0.05 + 0.004 * i) * np.sin(2 * np.pi * (hz * t + phases[i]))
        hz = np.fft.rfftfreq(count, 1 / rate)
        wave = scipy.fft.irfft(scipy.fft.rfft(single(tones)) * analog_velocity(hz, lower), count)
        broad = scipy.fft.irfft(
            scipy.fft.rfft(single(6.0 * noise(count, 4))) * analog_velocity(hz, lower), count
        )
        low = wave[::factor]
        cases.append(
            {
                "rate_hz": float(rate), "factor": factor, "lower_edge_hz": lower, "count": count,
                "tones_rms": float(wave.std()), "tones_peak": float(np.abs(low).max()),
                "tones": [float(f"{v:.9g}") for v in low[::37]],
                "noise_rms": float(broad.std()),
            }
        )
    write("velocity", stride=37, cases=cases)


def weighting():
    hz = np.array([1, 2, 5, 7.943282347242815, 10, 20, 40, 80, 160, 500, 1000, 1258.925411794167, 2000, 10000])
    write("weighting", hz=hz, lower_10=np.abs(analog_velocity(hz, 10.0) * 2 * np.pi * hz / 1e3),
          lower_2=np.abs(analog_velocity(hz, 2.0) * 2 * np.pi * hz / 1e3))


def moments():
    """Noise with gravity, a slow drift and a few hard knocks, the first sample one of them."""
    count = 100_000
    i = np.arange(count)
    x = 9.80665 + 3.0 * noise(count, 5) + 2e-5 * i
    x[::9973] += 60.0
    x = single(x)
    about = x - x.mean()
    write("moments", count=count, mean=x.mean(), rms=x.std(), peak=np.abs(about).max(),
          kurtosis=scipy.stats.kurtosis(x, fisher=False), skewness=scipy.stats.skew(x),
          crest=np.abs(about).max() / x.std())


for case in (welch, envelope, velocity, weighting, moments):
    case()
if FAULTS:
    sys.exit(f"not what scipy gives: {', '.join(FAULTS)}; run this script and look at what changed")
