"""Averaged spectra as density and as amplitude, cross-spectra and coherence against SciPy on the same samples, to 1e-10
of each line's own size; peak hold and exponential averages against SciPy's spectrogram, block by block.

usage: spectra.py SPECTRA_TOOL
"""

import math
import pathlib
import subprocess
import sys
import tempfile

import numpy as np
from scipy import signal

RATE = 51200.0
FRAMES = 300_000  # more than one range of a pass
TOLERANCE = 1e-10

SCIPY_NAME = {
    "rectangle": "boxcar",
    "hann": "hann",
    "hamming": "hamming",
    "blackman-harris": "blackmanharris",
    "flat-top": "flattop",
}

CASES = [
    (window, block, overlap, "mean", 0.0)
    for window in SCIPY_NAME
    for block in (8192, 4095)  # an even block has a line at rate/2, an odd one has not
    for overlap in (0.0, 0.5, 0.75)
] + [
    ("flat-top", 3375, 0.8, "mean", 0.0),
    ("blackman-harris", 51200, 0.66, "mean", 0.0),
    ("hann", 7, 0.5, "mean", 0.0),
    ("hamming", 262144, 0.9, "mean", 0.0),
    ("hann", 8192, 0.5, "peak-hold", 0.0),
    ("hann", 8192, 0.5, "exponential", 16.0),
    ("flat-top", 4095, 0.75, "exponential", 40.0),
    ("rectangle", 8192, 0.0, "exponential", 1.0),
]


def samples():
    """Three channels: noise with a tone and an offset; the same filtered, with noise of its own; almost only noise."""
    random = np.random.default_rng(20020219)
    time = np.arange(FRAMES) / RATE
    first = random.standard_normal(FRAMES) + 3.0 * np.sin(2 * math.pi * 24.63 * time) + 0.5
    second = signal.lfilter([1.0, -0.4], [1.0, -1.2, 0.5], first) + 0.3 * random.standard_normal(FRAMES)
    third = 1e-6 * (random.standard_normal(FRAMES) + 0.01 * first)
    return np.stack([first, second, third])


def blockwise(channel, averaging, averages, scaling, settings):
    """Greatest or exponentially weighted density of the blocks: each weighs 1 - 1/n of the next."""
    blocks = signal.spectrogram(channel, mode="psd", scaling=scaling, **settings)[2]
    if averaging == "peak-hold":
        return blocks.max(axis=1)
    weights = (1.0 - 1.0 / averages) ** np.arange(blocks.shape[1] - 1, -1, -1)
    return blocks @ (weights / weights.sum())


def expected(x, window, block, overlap, averaging, averages):
    shared = math.floor(overlap * block + 1e-9)
    settings = dict(fs=RATE, window=SCIPY_NAME[window], nperseg=block, noverlap=shared, detrend=False)
    if averaging != "mean":
        parts = [blockwise(channel, averaging, averages, "density", settings) for channel in x]
        return parts + [np.sqrt(blockwise(channel, averaging, averages, "spectrum", settings)) for channel in x]
    parts = [signal.welch(channel, scaling="density", **settings)[1] for channel in x]
    parts += [np.sqrt(signal.welch(channel, scaling="spectrum", **settings)[1]) for channel in x]
    single = FRAMES - block < block - shared
    for channel in x[1:]:
        parts.append(signal.csd(x[0], channel, scaling="density", **settings)[1].view(float))
        if not single:  # of a single block the coherence is not given
            parts.append(signal.coherence(x[0], channel, **settings)[1])
    return parts


def worst(ours, scipy):
    """Greatest difference relative to the line; for a complex line relative to its magnitude."""
    size = np.abs(scipy)
    return float(np.max(np.abs(ours - scipy) / np.maximum(size, 1e-300)))


def check(tool, folder, x, case):
    window, block, overlap, averaging, averages = case
    settings = [str(RATE), str(len(x)), str(block), str(overlap), window, averaging, str(averages)]
    subprocess.run([tool, folder / "samples", *settings, folder / "result"], check=True)
    ours = np.fromfile(folder / "result")
    parts = expected(x, *case)
    if len(ours) != sum(len(part) for part in parts):
        print(f"{case}: {len(ours)} numbers, {sum(len(part) for part in parts)} expected")
        return False
    lines = block // 2 + 1
    differences = []
    at = 0
    for part in parts:
        mine = ours[at : at + len(part)]
        at += len(part)
        if len(part) == 2 * lines:
            differences.append(worst(mine.view(complex), part.view(complex)))
        else:
            differences.append(worst(mine, part))
    print(f"{window:16} block {block:6} overlap {overlap:4} {averaging:11}: worst difference {max(differences):.1e}")
    return max(differences) < TOLERANCE  # False for NaN too


def main():
    tool = sys.argv[1]
    x = samples()
    with tempfile.TemporaryDirectory() as name:
        folder = pathlib.Path(name)
        x.tofile(folder / "samples")
        results = [check(tool, folder, x, case) for case in CASES]
    return 0 if all(results) else 1


sys.exit(main())
