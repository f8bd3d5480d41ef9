#!/usr/bin/env python3
"""Measured recordings in the formats that real loggers wrote: the facts that their data sets state (see the folder's
README). Skipped, and said, where the folder is absent.

    measured.py PROGRAM FOLDER
"""
import json
import os
import pathlib
import subprocess
import sys

program = sys.argv[1]
folder = pathlib.Path(os.environ.get("STILLMASS_RECORDINGS", sys.argv[2]))
if not (folder / "README.md").exists():
    print("skipped: no measured recordings here")
    sys.exit(77)
faults = []


def result(*words, codes=(0,)):
    run = subprocess.run([program, *map(str, words), "--json", "-", "--quiet"], capture_output=True, text=True, check=False)
    if run.returncode not in codes:
        faults.append(f"{words}: exit {run.returncode}: {run.stderr}")
        return None
    return json.loads(run.stdout)


def claim(what, holds):
    print(("holds: " if holds else "FALSE: ") + what)
    if not holds:
        faults.append(what)


def peaks(spectrum, channel):
    return [peak["frequency"]["value"] for peak in spectrum["result"]["channels"][channel]["peaks"]]


def near(values, wanted, within):
    return any(abs(value - wanted) <= within for value in values)


for name in ("shaker-beam-tones.txt", "footbridge-blow-node.csv", "footbridge-mode2.txt", "model-tower-jittery.csv"):
    result("check", folder / name)

beam = folder / "shaker-beam-tones.txt"
first = result("spectrum", beam, "--to", "8")
whole = result("check", beam)
if first and whole:
    claim("beam: 3200 Hz, from the time column", abs(whole["inputs"][0]["rate_hz"] - 3200) < 1)
    claim("beam: units V, lbf, g from the header", [c["unit"] for c in whole["inputs"][0]["channels"]] == ["V", "lbf", "g"])
    claim("beam: tones at 100, 120, 150 Hz in the drive", all(near(peaks(first, 0), f, 0.2) for f in (100, 120, 150)))
    amplitudes = {round(p["frequency"]["value"]): p["amplitude"]["value"] for p in first["result"]["channels"][0]["peaks"]}
    claim("beam: each of 0.25 V peak", all(abs(amplitudes.get(f, 0) * 2**0.5 - 0.25) < 0.01 for f in (100, 120, 150)))
    duration = whole["inputs"][0]["duration_s"]
    second = result("spectrum", beam, "--from", str(duration * 0.6))
    if second:
        claim("beam: 150 Hz is gone in the second half", not near(peaks(second, 0), 150, 1.0) and near(peaks(second, 0), 100, 0.2))

# SciPy's welch (Hann, 32768 samples) on the same columns finds 11.72, 25.39 and 35.7 to 35.9 Hz strongest; the mode near
# 17.5 Hz that the data set states is hardly excited in it (16.99 Hz, 11 dB below).
bridge = result("spectrum", folder / "footbridge-mode2.txt", "--max-frequency", "40", "--resolution", "0.2")
if bridge:
    claim("footbridge: its strongest lines, as SciPy has them", all(near(peaks(bridge, c), f, 0.2) for c in range(3) for f in (11.7, 25.4, 35.8)))
    claim("footbridge: 6400 Hz", abs(bridge["inputs"][0]["rate_hz"] - 6400) < 15)

node = result("spectrum", folder / "footbridge-blow-node.csv", "--channel", "1=node:g", "--max-frequency", "40", "--resolution", "0.25")
if node:
    claim("node: natural frequencies near 12.0 and 17.5 Hz", near(peaks(node, 0), 12.0, 0.1) and near(peaks(node, 0), 17.5, 0.2))
    claim("node: its two gaps are found", [finding["code"] for finding in node["warnings"]].count("gap") == 2)

tower = result("check", folder / "model-tower-jittery.csv")
if tower:
    codes = [finding["code"] for finding in tower["warnings"]]
    claim("tower: uneven times are said", "uneven-times" in codes)
    claim("tower: about 19 Hz", 17 < tower["inputs"][0]["rate_hz"] < 21)

sys.exit(1 if faults else 0)
