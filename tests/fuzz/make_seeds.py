#!/usr/bin/env python3
"""Writes the seeds of the fuzzers: small whole files of every kind that the readers take.

    make_seeds.py [FOLDER]     default: tests/fuzz/seeds; the same bytes on every run

Layouts from memory of the public descriptions: RIFF/WAVE, EBU Tech 3306 (RF64), Sony Wave64, AIFF 1.3, RFC 9639 (FLAC).
"""
import math
import pathlib
import struct
import sys

ROOT = pathlib.Path(__file__).resolve().parent.parent.parent
RATE = 1000


def sine(frames, channels=2):
    return [[0.5 * math.sin(0.7 * i + c) for c in range(channels)] for i in range(frames)]


# --- text ---------------------------------------------------------------------------------------------------------------
def table(separator, decimal, header, rows=24, time=lambda i: f"{i * 0.002:.3f}", end="\n", channels=2):
    lines = [header] if header else []
    for i, values in enumerate(sine(rows, channels)):
        cells = ([time(i)] if time else []) + [f"{v:.3f}" for v in values]
        lines.append(separator.join(c.replace(".", decimal) for c in cells))
    return (end.join(lines) + end).encode()


def jittered(i):
    return f"{i * 0.002 + (0.0004 if i % 3 == 0 else 0.0):.4f}"


def with_gap(i):
    return f"{i * 0.002 + (0.5 if i > 10 else 0.0):.3f}"


def stamp(i):
    return f"2024-05-01T12:00:{i * 0.01:06.3f}Z"


def holes():
    lines = table(",", ".", "time [s],a [g],tacho").decode().splitlines()
    lines[4] = lines[4].rsplit(",", 1)[0] + ",NaN"
    lines[5] = lines[5].rsplit(",", 1)[0] + ","
    lines[7] = "," + lines[7].split(",", 1)[1]
    lines[8] = "# a remark"
    lines[9] = ""
    lines[10] = lines[10].rsplit(",", 1)[0] + ",overload"
    lines[11] += "e3"
    return "\n".join(lines).encode()


def texts():
    preamble = "logger;7\nrate;500 Hz\nrange;8 g\n\n"
    quoted = "\n".join(f'"{i}","{i * 0.002:.3f}","{v[0]:.3f}"' for i, v in enumerate(sine(20))) + "\n"
    return {
        "comma": table(",", ".", "time [s],a [g],force [N]"),
        "semicolon-decimal-comma": preamble.encode() + table(";", ",", "Zeit [s];a [m/s²];b [mm/s]", end="\r\n"),
        "tab": table("\t", ".", "t\tx\ty\ns\tg\tV"),
        "blanks": table("  ", ".", "% time a b"),
        "no-header": table(",", ".", ""),
        "no-times": table(";", ".", "a [g];b [um]", time=None),
        "milliseconds": table(",", ".", "Time (ms),Accel (g)", time=lambda i: str(2 * i), channels=1),
        "microseconds": table(",", ".", "timestamp_us,x,y", time=lambda i: str(1700000000000000 + 2000 * i)),
        "jitter": table(",", ".", "time [s],a [g],b", time=jittered, rows=40),
        "gap": table(",", ".", "time [s],a [g],b", time=with_gap),
        "back": table(",", ".", "time [s],a [g],b", rows=40, time=lambda i: f"{(i % 20) * 0.002:.4f}"),
        "repeated": table(",", ".", "time [s],a [g],b", time=lambda i: f"{i // 3 * 0.01:.2f}"),
        "stamps": table(",", ".", "when,a [g],b", time=stamp),
        "day-stamps": table(";", ".", "Datum;a [g];b", time=lambda i: f"2024/05/01 12:00:{i * 0.01:06.3f}"),
        "quoted": ('"no","time [s]","a [g]"\n' + quoted).encode(),
        "exponents": table(",", ".", "time [s],a,b", time=lambda i: f"{i * 0.002:.6E}"),
        "holes": holes(),
        "byte-order-mark": b"\xef\xbb\xbf" + table(",", ".", "time [s],a [g],b"),
        "utf-16": ("\ufeff" + table("\t", ".", "time [s]\ta [m/s²]\tb", rows=12).decode()).encode("utf-16-le"),
        "latin-1": table(";", ",", "Zeit [s];a [m/s²];b [µm]").decode().encode("latin-1"),
        "counter": b"no;t [s];a\n" + b"".join(b"%d;%.3f;%d\n" % (i, i * 0.01, i * i % 7) for i in range(30)),
        "two-tables": b"t,a,,t,b\n" + b"".join(b"%.2f,%d,,%.2f,%d\n" % (i * 0.01, i % 5, i * 0.01, i % 3) for i in range(20)),
        "demo": (ROOT / "data/demo/logger.csv").read_bytes()[:1200],
    }


# --- sound --------------------------------------------------------------------------------------------------------------
def samples(kind, bits, order="<", frames=40, channels=2):
    out = b""
    for frame in sine(frames, channels):
        for v in frame:
            if kind == 3:
                out += struct.pack(order + ("f" if bits == 32 else "d"), v)
            elif bits == 8:
                out += struct.pack("B", int(v * 127) + 128)
            else:
                whole = int(v * (2 ** (bits - 1) - 1)).to_bytes(bits // 8, "little" if order == "<" else "big", signed=True)
                out += whole
    return out


def format_chunk(kind, bits, order="<", channels=2, extensible=False):
    block = channels * bits // 8
    tag = 0xFFFE if extensible else kind
    body = struct.pack(order + "HHIIHH", tag, channels, RATE, RATE * block, block, bits)
    if extensible:
        body += struct.pack(order + "HHI", 22, bits, 3) + struct.pack(order + "H", kind)
        body += bytes.fromhex("000000001000800000aa00389b71")
    return body


def chunk(name, body, order="<"):
    return name + struct.pack(order + "I", len(body)) + body + b"\0" * (len(body) & 1)


def wav(kind=1, bits=16, order="<", extra=b"", extensible=False, data_size=None):
    data = samples(kind, bits, order)
    body = b"WAVE" + chunk(b"fmt ", format_chunk(kind, bits, order, extensible=extensible), order) + extra
    body += b"data" + struct.pack(order + "I", len(data) if data_size is None else data_size) + data
    return (b"RIFF" if order == "<" else b"RIFX") + struct.pack(order + "I", len(body)) + body


def rf64():
    data = samples(1, 24)
    form = chunk(b"fmt ", format_chunk(1, 24))
    sizes = struct.pack("<QQQI", 4 + 36 + len(form) + 8 + len(data), len(data), 40, 0)
    return b"RF64\xff\xff\xff\xffWAVE" + chunk(b"ds64", sizes) + form + b"data\xff\xff\xff\xff" + data


def w64():
    tail = bytes.fromhex("f3acd3118cd100c04f8edb8a")
    data = samples(1, 16)
    form = format_chunk(1, 16)
    body = b"fmt " + tail + struct.pack("<Q", 24 + len(form)) + form + b"data" + tail + struct.pack("<Q", 24 + len(data)) + data
    head = b"riff" + bytes.fromhex("2e91cf11a5d628db04c10000")
    return head + struct.pack("<Q", 40 + len(body)) + b"wave" + tail + body


def aiff(bits=16, compressed=None):
    data = samples(1, bits, ">")
    rate = struct.pack(">HQ", 16383 + 9, RATE << (63 - 9))  # 80-bit extended: 1000 = 1.95 * 2^9
    common = struct.pack(">HIH", 2, 40, bits) + rate
    if compressed:
        common += compressed + b"\x04none\0"
    body = (b"AIFC" if compressed else b"AIFF") + chunk(b"COMM", common, ">") + chunk(b"SSND", bytes(8) + data, ">")
    return b"FORM" + struct.pack(">I", len(body)) + body


def crc(data, width, polynomial):
    value = 0
    for byte in data:
        value ^= byte << (width - 8)
        for _ in range(8):
            value = (value << 1) ^ (polynomial if value >> (width - 1) else 0)
            value &= (1 << width) - 1
    return value.to_bytes(width // 8, "big")


def flac(frames=64):
    """Two blocks of 32 frames of one channel of 16 bits, stored verbatim."""
    block = frames // 2
    info = struct.pack(">HH", block, block) + bytes(6) + ((RATE << 44) | (0 << 41) | (15 << 36) | frames).to_bytes(8, "big") + bytes(16)
    out = b"fLaC" + b"\x80" + len(info).to_bytes(3, "big") + info
    values = [int(v[0] * 32767) for v in sine(frames, 1)]
    for number in range(2):
        # sync, fixed blocks; block size from 8 bits at the end of the header, rate from the stream; mono, 16 bits
        head = b"\xff\xf8" + b"\x60" + b"\x08" + bytes([number]) + bytes([block - 1])
        head += crc(head, 8, 0x07)
        body = head + b"\x02" + b"".join(struct.pack(">h", v) for v in values[number * block:(number + 1) * block])
        out += body + crc(body, 16, 0x8005)
    return out


def sounds():
    return {
        "wav-8": wav(bits=8),
        "wav-16": wav(),
        "wav-24": wav(bits=24),
        "wav-32": wav(bits=32),
        "wav-float": wav(3, 32, extra=chunk(b"fact", struct.pack("<I", 40))),
        "wav-double": wav(3, 64),
        "wav-extensible": wav(bits=24, extensible=True),
        "wav-chunks": wav(extra=chunk(b"bext", b"recorder" + bytes(31)) + chunk(b"LIST", b"INFOINAM\x02\0\0\0a\0")),
        "wav-size-never-written": wav(data_size=0xFFFFFFFF),
        "wav-size-too-large": wav(data_size=1 << 20),
        "wav-size-too-small": wav(data_size=80),
        "rifx": wav(order=">"),
        "rf64": rf64(),
        "w64": w64(),
        "aiff-16": aiff(),
        "aiff-24": aiff(24),
        "aifc": aiff(16, b"NONE"),
        "flac": flac(),
        "demo": (ROOT / "data/demo/duty.wav").read_bytes()[:1500],
    }


# --- surveys ------------------------------------------------------------------------------------------------------------
def surveys():
    least = '[machine]\nname = "M"\n[[point]]\nname = "p"\n'
    wide = least + """direction = "+x"
on = "structure"
position_m = [0, 0.5, -1e-1]
[[recording]]
file = "a.wav"
kind = "bump"
stage = "bench"
state = "stopped"
filled = true
flow_percent_bep = 90
part_s = [0.5, 2]
added_mass_kg = 5
trial_absorber = { mass_kg = 10, frequency_hz = 24.6, damping_ratio = 0.005 }
trial_weight = { g = 25, radius_mm = 180, angle_deg = 90 }
[[recording.channel]]
index = 1
point = "p"
role = "force"
unit = "lbf"
scale = -50.0
[[recording.channel]]
index = 2
role = "tacho"
pulses_per_turn = 2
edge = "falling"
[[recording]]
file = 'b.csv'
kind = "steady"
rate_hz = 1000
speed_rpm = 1478
[[recording.channel]]
index = 1
name = "ü"
unit = "mil"
sensitivity_mv_per_unit = 100
full_scale_v = 10
mounting = "stud"
low_corner_hz = 0.3
"""
    machine = """# every key of the machine
machine.name = \"\"\"two
lines\"\"\"
machine.kind = "fan"
machine.power_kw = 30
machine.speed_rpm = [600, 1_500]
machine.supply = "drive"
machine.line_frequency_hz = 50
machine.motor_poles = 4
machine.vanes = 6
machine.foundation = "rigid"
machine.foundation_vertical = "flexible"
machine.mass_kg = 900.0
machine.rotor_mass_kg = 65
machine.stopped_shift = { frequency = 0.02, damping = 0.3 }
machine.shaft = [{ name = "pinion", ratio = 2.5 }]
[[machine.bearing]]
name = "6312"
rolling_elements = 8
ball_mm = 22.2
pitch_mm = 96
contact_angle_deg = 15
shaft = "pinion"
[[point]]
name = "p"
[[limit]]
standard = "ISO 10816-3"
category = "2"
shaft_height_mm = 315
target_mm_s = 2.8
[[absorber]]
point = "p"
axes = ["horizontal", "vertical"]
max_mass_kg = 15
max_travel_mm = 4
temperature_c = [-20, 40]
"""
    demo = (ROOT / "data/demo/survey.toml").read_text()
    for name in ("duty.wav", "coast-down.wav", "hammer.wav", "fitted.wav"):
        demo = demo.replace(name, "a.wav")
    return {"least": least.encode(), "recordings": wide.encode(), "machine": machine.encode(),
            "demo": demo.replace("logger.csv", "b.csv").encode()}


def main():
    folder = pathlib.Path(sys.argv[1] if len(sys.argv) > 1 else ROOT / "tests/fuzz/seeds")
    for kind, ending, files in (("text", ".csv", texts()), ("sound", "", sounds()), ("survey", ".toml", surveys())):
        (folder / kind).mkdir(parents=True, exist_ok=True)
        for name, data in files.items():
            (folder / kind / (name + ending)).write_bytes(data)


if __name__ == "__main__":
    main()
