"""Makes the recordings that scripts/bench measures:

    recordings.py spectra FOLDER SECONDS    f.wav, i.wav: 8 channels of noise at 51.2 kHz, 32-bit float and 24-bit
    recordings.py csv FOLDER ROWS           t.csv: a time and three channels, 7 decimals
    recordings.py runup FOLDER SECONDS      r.wav: 10 to 50 turns a second, orders 1, 2, 6, a tone of 8 kHz; a tacho
    recordings.py start FOLDER              s.wav: one channel, 10 s at 5.12 kHz
    recordings.py long FOLDER RATE BITS     l.wav: 10 hours, 8 channels, an RF64 with holes: noise at a few places only
"""
import pathlib
import struct
import sys

import numpy as np

RATE, CHANNELS = 51200, 8


def header(channels, rate, bits, size, kind=1):
    block = channels * bits // 8
    form = b"fmt " + struct.pack("<IHHIIHH", 16, kind, channels, rate, rate * block, block, bits)
    if size < 2**32 - 100:
        return b"RIFF" + struct.pack("<I", 36 + size) + b"WAVE" + form + b"data" + struct.pack("<I", size)
    sizes = b"ds64" + struct.pack("<IQQQI", 28, 72 + size, size, size // block, 0)
    return b"RF64\xff\xff\xff\xffWAVE" + sizes + form + b"data\xff\xff\xff\xff"


def as_integers(samples, bits):
    whole = (samples * 2.0 ** (bits - 1)).astype("<i4")
    return whole.view(np.uint8).reshape(*samples.shape, 4)[..., : bits // 8].tobytes()


def spectra(folder, seconds):
    frames = int(float(seconds) * RATE)
    random = np.random.default_rng(1)
    with open(folder / "f.wav", "wb") as floats, open(folder / "i.wav", "wb") as integers:
        floats.write(header(CHANNELS, RATE, 32, frames * CHANNELS * 4, kind=3))
        integers.write(header(CHANNELS, RATE, 24, frames * CHANNELS * 3))
        for first in range(0, frames, RATE):
            noise = 0.1 * random.standard_normal((min(RATE, frames - first), CHANNELS), dtype=np.float32)
            floats.write(noise.tobytes())
            integers.write(as_integers(noise, 24))


def csv(folder, rows):
    random = np.random.default_rng(2)
    with open(folder / "t.csv", "w") as file:
        file.write("time [s],a [g],b [g],c [g]\n")
        for first in range(0, int(rows), 500000):
            times = np.arange(first, min(first + 500000, int(rows))) / 10000
            table = np.column_stack([times, 0.1 * random.standard_normal((len(times), 3))])
            np.savetxt(file, table, fmt=["%.4f", "%.7f", "%.7f", "%.7f"], delimiter=",")


def runup(folder, seconds):
    seconds = float(seconds)
    t = np.arange(int(seconds * RATE)) / RATE
    turn = 10 * t + 40 / (2 * seconds) * t * t
    x = sum(a * np.cos(2 * np.pi * order * turn) for order, a in ((1, 0.3), (2, 0.1), (6, 0.05)))
    x += 0.05 * np.sin(2 * np.pi * 8000 * t) + 0.02 * np.random.default_rng(3).standard_normal(len(t))
    data = np.column_stack([x, turn % 1 < 0.05]).astype("<f4")
    (folder / "r.wav").write_bytes(header(2, RATE, 32, data.nbytes, kind=3) + data.tobytes())


def start(folder):
    noise = 0.1 * np.random.default_rng(4).standard_normal((51200, 1))
    data = as_integers(noise, 16)
    (folder / "s.wav").write_bytes(header(1, 5120, 16, len(data)) + data)


def long(folder, rate, bits):
    rate, bits = int(rate), int(bits)
    size = 36000 * rate * CHANNELS * bits // 8
    random = np.random.default_rng(5)
    with open(folder / "l.wav", "wb") as file:
        head = header(CHANNELS, rate, bits, size)
        file.write(head)
        file.truncate(len(head) + size)
        for second in (0, 60, 7200, 18000, 35990):
            file.seek(len(head) + second * rate * CHANNELS * bits // 8)
            file.write(as_integers(0.1 * random.standard_normal((5 * rate, CHANNELS)), bits))


if __name__ == "__main__":
    globals()[sys.argv[1]](pathlib.Path(sys.argv[2]), *sys.argv[3:])
