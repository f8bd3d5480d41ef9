"""Mean, r.m.s. values, crest factor and kurtosis of time signals against NumPy and SciPy on the same samples.

usage: features.py FEATURES_TOOL
"""

import itertools
import math
import pathlib
import subprocess
import sys
import tempfile

import numpy as np
from scipy import stats

RATE = 51200.0
FRAMES = 700_001  # more than two ranges of a pass, and no whole number of anything
TOLERANCE = 1e-10


def samples():
    random = np.random.default_rng(19180512)
    time = np.arange(FRAMES) / RATE
    noise = random.standard_normal(FRAMES)
    blows = 0.1 * noise
    blows[::5120] += 8.0
    hits = np.convolve(blows, np.exp(-np.arange(400) / 60.0) * np.cos(np.arange(400) * 0.4))[:FRAMES]
    return {
        "sine": 3.0 * np.sin(2 * math.pi * 47.3 * time),
        "sine on an offset": 1e5 + np.sin(2 * math.pi * 3.1 * time),
        "Gaussian noise": 0.2 * noise - 0.7,
        "blows": hits,
        "drift": np.linspace(0.0, 50.0, FRAMES) + noise,
        "clipped sine": np.clip(np.sin(2 * math.pi * 20.0 * time), -0.8, 0.8),
        "one spike": np.where(np.arange(FRAMES) == 262_144, 1e4, 1e-3 * noise),
    }


def longest_at_extreme(x):
    longest = 0
    for extreme in (x.max(), x.min()):
        longest = max([longest] + [len(list(run)) for at, run in itertools.groupby(x == extreme) if at])
    return longest


def expected(x):
    mean = x.mean()
    deviation = x.std()
    peak = np.abs(x - mean).max()
    return [
        mean,
        math.sqrt(np.mean(x * x)),
        deviation,
        peak,
        peak / deviation,
        stats.kurtosis(x, fisher=False, bias=True),
        longest_at_extreme(x),
    ]


def main():
    signals = samples()
    with tempfile.TemporaryDirectory() as name:
        folder = pathlib.Path(name)
        np.stack(list(signals.values())).tofile(folder / "samples")
        subprocess.run([sys.argv[1], folder / "samples", str(len(signals)), folder / "result"], check=True)
        ours = np.fromfile(folder / "result").reshape(len(signals), -1)
    good = True
    for (label, x), mine in zip(signals.items(), ours):
        theirs = np.array(expected(x))
        size = np.maximum(np.abs(theirs), theirs[2])  # a mean near 0 is known to the signal's own size
        difference = np.abs(mine - theirs) / size
        # The offset is 1e5 times the sine: NumPy's own mean loses as many digits.
        limit = 1e-9 if label == "sine on an offset" else TOLERANCE
        print(f"{label:18}: kurtosis {mine[5]:12.6g} (SciPy {theirs[5]:12.6g}), worst difference {difference.max():.1e}")
        good = good and bool(np.all(difference < limit))  # False for NaN too
    return 0 if good else 1


sys.exit(main())
