#!/usr/bin/env python3
"""Awkward recordings through the real program: each broken one refused in one line, each damaged one read with its finding,
options and survey keys of text files taken by every command, long recordings in little memory.

    formats.py PROGRAM SOURCE_DIR
"""
import json
import os
import pathlib
import struct
import subprocess
import sys
import tempfile

PROGRAM = str(pathlib.Path(sys.argv[1]).resolve())
SOURCE = pathlib.Path(sys.argv[2])
BROKEN = SOURCE / "tests/broken/recording"
faults = []


def run(*words):
    return subprocess.run([PROGRAM, *map(str, words)], capture_output=True, check=False, timeout=300)


def claim(what, holds, done=None):
    if not holds:
        faults.append(f"FALSE: {what}" + ("" if done is None else f"\n  exit {done.returncode}\n  {done.stderr[-400:]!r}"))


def table(name):
    for line in (BROKEN / name).read_text(encoding="utf-8").splitlines():
        if line and not line.startswith("#"):
            yield [part.strip() for part in line.split("|")]


def peak_memory(*words):
    """Exit code and largest resident size in MB of one run."""
    with subprocess.Popen([PROGRAM, *map(str, words)], stdout=subprocess.DEVNULL) as process:
        _, status, usage = os.wait4(process.pid, 0)
        process.returncode = os.waitstatus_to_exitcode(status)
    return process.returncode, usage.ru_maxrss / 1024


def sparse_wav(path, seconds, channels=2, rate=12800):
    size = seconds * rate * channels * 2
    head = b"RIFF" + struct.pack("<I", (36 + size) & 0xFFFFFFFF) + b"WAVEfmt " + struct.pack(
        "<IHHIIHH", 16, 1, channels, rate, rate * channels * 2, channels * 2, 16) + b"data" + struct.pack("<I", size & 0xFFFFFFFF)
    with open(path, "wb") as file:
        file.write(head)
        file.truncate(len(head) + size)


# Every broken and every damaged file, as the lists have them.
listed = set()
for file, code, text in table("cases.txt"):
    listed.add(file)
    done = run("check", BROKEN / file)
    lines = done.stderr.splitlines()
    claim(f"{file}: exit {code}", done.returncode == int(code), done)
    claim(f"{file}: one line that says {text!r}", len(lines) == 1 and text.encode() in lines[0], done)
for file, code, _, _, text in table("warned.txt"):
    listed.add(file)
    done = run("check", BROKEN / file)
    claim(f"{file}: read, with {code}", done.returncode == 0 and f"[{code}]".encode() in done.stdout, done)
    done = run("check", BROKEN / file, "--json", "-", "--quiet")
    findings = json.loads(done.stdout)["warnings"] if done.returncode == 0 else []
    # What only the samples show stands with the channels, not with the file.
    whole = done.stdout.decode()
    claim(f"{file}: the JSON says {text!r}", any(text in finding["text"] for finding in findings) or text in whole, done)
files = {path.name for path in BROKEN.iterdir()} - {"cases.txt", "warned.txt"}
claim(f"every file is in a list, and every list's file is there: {files ^ listed}", files == listed)
claim("they are small", all((BROKEN / file).stat().st_size < 8192 for file in files))

with tempfile.TemporaryDirectory() as folder:
    place = pathlib.Path(folder)

    # A comma that may be both: an error that names the options, and the options take it in each command.
    rows = "".join(f"{i % 9},{(i * 7) % 10}\n" for i in range(4000))
    (place / "both.csv").write_text(rows)
    for command in ("check", "spectrum", "bump", "runup"):
        done = run(command, place / "both.csv", "--rate", "1000")
        claim(f"{command}: the error names the option", done.returncode == 3 and b"--decimal comma" in done.stderr, done)
        done = run(command, place / "both.csv", "--rate", "1000", "--decimal", "comma", "--channel", "1=a:g", "--time-column", "0")
        claim(f"{command}: --decimal is taken", done.returncode in (0, 1) and b"may be a decimal sign" not in done.stderr, done)
    done = run("check", place / "both.csv", "--rate", "1000", "--separator", "comma", "--time-column", "0", "--json", "-", "--quiet")
    claim("--separator comma gives two channels", len(json.loads(done.stdout)["inputs"][0]["channels"]) == 2, done)
    done = run("check", place / "both.csv", "--separator", "colon")
    claim("a separator that is none is wrong usage", done.returncode == 2 and b"one of comma|semicolon|tab|blanks" in done.stderr, done)

    # The same by keys of a survey file.
    (place / "survey.toml").write_text(
        '[machine]\nname = "m"\n[[point]]\nname = "p"\n[[recording]]\nfile = "both.csv"\nkind = "steady"\nrate_hz = 1000\n'
        'decimal = "comma"\ntime_column = 0\n[[recording.channel]]\nindex = 1\npoint = "p"\nunit = "g"\n')
    done = run("check", place / "both.csv", "--survey", place / "survey.toml")
    claim("keys of a survey file say how a text file is written", done.returncode == 0 and b"decimal comma" in done.stdout, done)

    # Hours of samples in the memory of seconds: a sparse file, and text.
    sparse_wav(place / "short.wav", 60)
    sparse_wav(place / "long.wav", 3 * 3600)
    _, short = peak_memory("check", place / "short.wav", "--threads", "1")
    code, long = peak_memory("check", place / "long.wav", "--threads", "1")
    claim(f"three hours of sound take {long:.0f} MB, one minute {short:.0f} MB", code == 0 and long < short + 24)
    done = run("check", place / "long.wav", "--json", "-", "--quiet", "--to", "1")
    claim("three hours are counted", json.loads(done.stdout)["inputs"][0]["duration_s"] == 3 * 3600, done)
    line = "".join(f"{i / 1000:.3f},{(i * 37) % 19 - 9}.25,{(i * 11) % 23 - 11}.5\n" for i in range(20000))
    (place / "short.csv").write_text(line)
    with open(place / "long.csv", "w", encoding="ascii") as file:
        for block in range(100):
            file.write("".join(f"{20 * block + i / 1000:.3f},{(i * 37) % 19 - 9}.25,{(i * 11) % 23 - 11}.5\n" for i in range(20000)))
    _, short = peak_memory("check", place / "short.csv", "--threads", "1")
    code, long = peak_memory("check", place / "long.csv", "--threads", "1")
    claim(f"two million rows take {long:.0f} MB, twenty thousand {short:.0f} MB", code == 0 and long < short + 24)

for fault in faults:
    print(fault)
sys.exit(1 if faults else 0)
