"""Envelope spectra and spectral kurtosis against SciPy on the same samples, by another road: a long FIR band-pass of the
whole signal at its full rate, `hilbert`, magnitude.

usage: envelope.py ENVELOPE_TOOL
"""

import math
import pathlib
import subprocess
import sys
import tempfile

import numpy as np
from scipy import signal

RATE = 25600.0
SECONDS = 12.0
TAPS = 8193  # resolves the flanks of the narrowest band (94 Hz) into thirty parts
STRETCHES = 6  # of 2 s

# On 12 s the mean of an envelope line scatters by a fifth; both roads see the same samples, so what is left is what the
# square root of the envelope puts beyond half of its rate (it folds back) and the ends of the blocks.
LINE_TOLERANCE = 0.06  # of the density of a line, or of the median one: a zero of the envelope is a kink
FLOOR_TOLERANCE = 0.005  # of the mean density over all lines
MEAN_TOLERANCE = 5e-4
# The search drops the ends of its blocks and takes few samples of each band: same signal, other instants.
BAND_TOLERANCE = 0.08


def samples(case):
    random = np.random.default_rng(20061)
    time = np.arange(int(SECONDS * RATE)) / RATE
    x = random.standard_normal(len(time))
    for h in range(1, 6):
        x += 7.0 * np.cos(2 * math.pi * 24.63 * h * time + h)
    if case == "blows":
        at = 0.0
        while at < SECONDS:
            first = math.ceil(at * RATE)
            t = np.arange(first, min(first + 600, len(time))) / RATE - at
            x[first : first + 600] += 4.0 * np.exp(-0.03 * 2 * math.pi * 3200 * t) * np.sin(2 * math.pi * 3200 * t)
            at += (1.0 + 0.01 * random.standard_normal()) / 88.29
    if case == "gear":
        x += 2.0 * (1.0 + 0.4 * np.cos(2 * math.pi * 16.42 * time)) * np.cos(2 * math.pi * 3150.0 * time)
    return x


def analytic(x, lo, hi):
    """The complex envelope in the band with raised-cosine flanks, an eighth of the width each."""
    flank = (hi - lo) / 8
    steps = np.linspace(-0.5, 0.5, 21)
    rise = 0.5 * (1 + np.sin(math.pi * steps))
    f = np.concatenate([[0.0], lo + flank * steps, hi + flank * steps, [RATE / 2]])
    gain = np.concatenate([[0.0], rise, rise[::-1], [0.0]])
    taps = signal.firwin2(TAPS, f, gain, nfreqs=2**16 + 1, fs=RATE, window="hamming")
    return signal.hilbert(signal.oaconvolve(x, taps, mode="same"))


def envelope_spectrum(z, block):
    window = signal.get_window("hann", block)
    weight = window / window.sum()
    power, means, second, fourth = [], [], [], []
    for start in range(0, len(z) - block + 1, block - block // 2):
        envelope = np.abs(z[start : start + block])
        means.append(np.dot(weight, envelope))
        second.append(np.dot(weight, envelope**2))
        fourth.append(np.dot(weight, envelope**4))
        power.append(np.abs(np.fft.rfft(window * (envelope - means[-1]))) ** 2)
    density = 2 * np.mean(power, axis=0) / (RATE * np.dot(window, window))
    return np.mean(means), np.mean(fourth) / np.mean(second) ** 2 - 2, density


def median_kurtosis(z):
    part = len(z) // STRETCHES
    values = []
    for s in range(STRETCHES):
        square = np.abs(z[s * part : (s + 1) * part]) ** 2
        values.append(np.mean(square**2) / np.mean(square) ** 2 - 2)
    return sorted(values)[(STRETCHES - 1) // 2]


def check(tool, folder, case, lo, hi, block):
    x = samples(case)
    x.tofile(folder / "samples")
    subprocess.run([tool, folder / "samples", str(RATE), str(lo), str(hi), str(block), folder / "result"], check=True)
    result = np.fromfile(folder / "result")
    mean, kurtosis, lines = result[0], result[1], int(result[2])
    ours = result[3 : 3 + lines]
    bands = result[3 + lines :].reshape(-1, 3)

    expected_mean, expected_kurtosis, density = envelope_spectrum(analytic(x, lo, hi), block)
    density = density[1:lines]
    allowed = np.maximum(density, np.median(density))
    line = float(np.max(np.abs(ours[1:] - density) / allowed))
    floor = abs(float(np.mean(ours[1:] / density)) - 1)
    level = abs(mean / expected_mean - 1)
    band = max(abs(k - median_kurtosis(analytic(x, a, b))) / max(1.0, abs(k)) for a, b, k in bands)
    print(
        f"{case:6} {lo:5.0f} to {hi:5.0f} Hz, block {block:5}: lines within {line:.1e}, all {floor:.1e}, mean {level:.1e}, "
        f"kurtosis {kurtosis:.3f} against {expected_kurtosis:.3f}, {len(bands)} bands within {band:.3f}"
    )
    return (
        lines > 100
        and len(bands) > 20
        and line < LINE_TOLERANCE
        and floor < FLOOR_TOLERANCE
        and level < MEAN_TOLERANCE
        and abs(kurtosis - expected_kurtosis) < 0.02
        and band < BAND_TOLERANCE
    )


def main():
    tool = sys.argv[1]
    with tempfile.TemporaryDirectory() as name:
        folder = pathlib.Path(name)
        results = [
            check(tool, folder, "blows", 2500, 4000, 25600),
            check(tool, folder, "blows", 2000, 8000, 12000),
            check(tool, folder, "gear", 2900, 3400, 51200),
            check(tool, folder, "noise", 3000, 5000, 25600),
        ]
    return 0 if all(results) else 1


sys.exit(main())
