"""The Python peers of scripts/bench, each as a process of its own:

    peers.py loadtxt FILE | read_csv FILE | welch FILE BYTES HOP | responses FILE | runup FILE | minimax N | robust N | start

What is written here is what a user of NumPy, pandas and SciPy would write who wants the answer fast.
"""
import sys
import time

RATE, CHANNELS, LENGTH = 51200, 8, 8192


def samples(file, width, channels=CHANNELS):
    import numpy as np
    if width == 4:
        data = np.memmap(file, dtype=np.float32, mode="r", offset=44).reshape(-1, channels)
        return [data[:, c].astype(float) for c in range(channels)]
    raw = np.memmap(file, dtype=np.uint8, mode="r", offset=44).reshape(-1, channels, 3)

    def column(c):
        b = raw[:, c, :].astype(np.int32)
        return ((b[:, 0] << 8 | b[:, 1] << 16 | b[:, 2] << 24) >> 8) / 2.0**23
    return (column(c) for c in range(channels))


def loadtxt(file):
    import numpy as np
    np.loadtxt(file, delimiter=",", skiprows=1)


def read_csv(file):
    import pandas
    pandas.read_csv(file, engine="c")


def welch(file, width, hop):
    from scipy import signal
    for x in samples(file, int(width)):
        signal.welch(x, RATE, window="hann", nperseg=LENGTH, noverlap=LENGTH - int(hop), detrend=False)


def responses(file):
    from scipy import signal
    x = samples(file, 4)
    how = {"fs": RATE, "window": "hann", "nperseg": LENGTH, "detrend": False}
    signal.welch(x[0], **how)
    for y in x[1:]:
        signal.csd(x[0], y, **how)
        signal.welch(y, **how)


def runup(file):
    import numpy as np
    from scipy import signal
    from scipy.interpolate import CubicSpline
    x, tacho = samples(file, 4, 2)
    at = np.flatnonzero((tacho[:-1] < 0.5) & (tacho[1:] >= 0.5))
    pulses = (at + (0.5 - tacho[at]) / (tacho[at + 1] - tacho[at])) / RATE
    turns = np.arange(len(pulses))
    times = np.interp(np.arange(64 * (len(pulses) - 1)) / 64, turns, pulses)
    fast = np.repeat(64 / np.diff(pulses), 64)  # rate of the angular samples
    angular = np.zeros(len(times))
    rate, level = float(RATE), x
    while True:  # octave by octave, each part from the level whose band fits it; then a cubic spline
        part = (fast > rate / 10) & (fast <= rate / 5) if rate < RATE else fast > rate / 10
        if part.any():
            span = slice(max(0, int(times[part].min() * rate) - 200), int(times[part].max() * rate) + 200)
            smooth = signal.oaconvolve(level[span], signal.firwin(201, 0.5 * fast[part].min(), fs=rate), mode="same")
            spline = CubicSpline((span.start + np.arange(len(smooth))) / rate, smooth)
            angular[part] = spline(times[part])
        if rate / 10 < fast.min():
            break
        level = signal.resample_poly(level, 1, 2)
        rate /= 2
    signal.spectrogram(angular, 64, window="hann", nperseg=512, noverlap=384, detrend=False, mode="complex")


def clocks():
    return time.perf_counter(), time.process_time()


def cases(count):
    import numpy as np
    n = np.arange(1, count + 1)
    return (0.1 * (0.9 + 0.2 * (n * np.sqrt(2.0) % 1)), 0.01 * (0.67 + 0.66 * (n * np.sqrt(3.0) % 1)),
            0.99 + 0.02 * (n * np.sqrt(5.0) % 1))


def velocity(s, mu, z1, tuning, za):
    t, c = tuning**2, 2 * za * tuning
    real = (1 - s) * (t - s) - mu * t * s - 2 * z1 * c * s
    imaginary = c * (1 - (1 + mu) * s) + 2 * z1 * (t - s)
    return s * ((t - s)**2 + s * c * c) / (real**2 + s * imaginary**2)


def minimax(count):
    import numpy as np
    from scipy.optimize import minimize
    s = np.linspace(0.75, 1.2, 400)**2
    mu, z1, _ = cases(int(count))
    before = clocks()
    for m, z in zip(mu, z1):
        minimize(lambda p: velocity(s, m, z, p[0], p[1]).max(), [(1 + m)**-0.75, 0.6 * np.sqrt(m)], method="Nelder-Mead",
                 options={"xatol": 1e-4, "fatol": 1e-4})
    print("kernel_s", *(after - then for then, after in zip(before, clocks())))


def robust(count):
    import numpy as np
    from scipy.optimize import minimize
    s = (np.linspace(0.7, 1.25, 300)**2)[:, None]
    mu, z1, frequency = cases(int(count))
    before = clocks()
    minimize(lambda p: np.quantile(velocity(s, mu, z1, p[0] / frequency, p[1]).max(axis=0), 0.95),
             [1.1**-0.75, 0.6 * np.sqrt(0.1)], method="Nelder-Mead", options={"xatol": 5e-4, "fatol": 1e-3})
    print("kernel_s", *(after - then for then, after in zip(before, clocks())))


def start():
    import scipy.signal  # noqa: F401


if __name__ == "__main__":
    globals()[sys.argv[1]](*sys.argv[2:])
