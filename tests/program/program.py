#!/usr/bin/env python3
"""Runs the program as its users do and checks text, standard error, exit code and files.

    program.py PROGRAM SOURCE_DIR GROUP
"""
import json
import os
import pathlib
import shutil
import signal
import struct
import subprocess
import sys
import tempfile
import time

PROGRAM = str(pathlib.Path(sys.argv[1]).resolve())
SOURCE = pathlib.Path(sys.argv[2])
DEMO = SOURCE / "data/demo"
SURVEY = str(DEMO / "survey.toml")
COMMANDS = ["check", "spectrum", "runup", "bump", "absorber", "survey", "simulate"]
faults = []


def run(*words, **options):
    return subprocess.run([PROGRAM, *map(str, words)], capture_output=True, check=False, timeout=200, **options)


def claim(what, holds, done=None):
    if holds:
        return
    text = "" if done is None else f"\n  exit {done.returncode}\n  stdout {done.stdout[-600:]!r}\n  stderr {done.stderr[-600:]!r}"
    faults.append(f"FALSE: {what}{text}")


def refused(what, code, *words, text=b"", **options):
    """One line on standard error that begins with the program's name, nothing on standard output, that exit code."""
    done = run(*words, **options)
    lines = done.stderr.splitlines()
    claim(f"{what}: exit {code}", done.returncode == code, done)
    claim(f"{what}: one line", len(lines) == 1 and lines[0].startswith(b"stillmass: "), done)
    claim(f"{what}: says {text!r}", text in done.stderr, done)
    claim(f"{what}: nothing on standard output", done.stdout == b"", done)


def recording(kind):
    """Name of a demo recording of that kind, from the survey file's text."""
    name = ""
    for line in pathlib.Path(SURVEY).read_text(encoding="utf-8").splitlines():
        if line.startswith("file"):
            name = line.split('"')[1]
        if line.startswith("kind") and f'"{kind}"' in line and name:
            return DEMO / name
    raise SystemExit(f"the demo survey has no {kind} recording")


def help_():
    for words in ([], ["--help"], ["-h"]):
        done = run(*words)
        claim(f"help with {words}", done.returncode == 0 and all(c.encode() in done.stdout for c in COMMANDS), done)
    done = run("--version")
    claim("--version", done.returncode == 0 and done.stdout.startswith(b"stillmass ") and done.stdout.count(b".") == 2, done)
    for command in COMMANDS:
        done = run(command, "--help")
        claim(f"{command} --help", done.returncode == 0 and b"--threads" in done.stdout and done.stderr == b"", done)
        claim(f"{command} --help fits a screen", max(map(len, done.stdout.decode().splitlines())) <= 110, done)
    keys = run("manual", "keys")
    readme = (SOURCE / "README.md").read_bytes()
    claim("README's reference of the survey file is the program's own", keys.returncode == 0 and keys.stdout.strip() in readme, keys)
    for what, word in (("page", b".SH EXIT STATUS"), ("completion", b"complete -o filenames")):
        done = run("manual", what)
        claim(f"manual {what}", done.returncode == 0 and word in done.stdout and b"--pulses-per-turn" in done.stdout.replace(b"\\-", b"-"), done)
    refused("an unknown manual", 2, "manual", "novel")
    claim("the hammer test's help has its caution", b"locked out" in run("bump", "--help").stdout)


def usage():
    refused("an unknown command", 2, "specturm", text=b"did you mean 'spectrum'?")
    refused("an option before the command", 2, "--quiet", "check", text=b"a command comes first")
    refused("an unknown option", 2, "check", "x.wav", "--thread", "1", text=b"did you mean --threads?")
    refused("another command's option", 2, "check", "x.wav", "--window", "hann", text=b"it belongs to spectrum")
    refused("no file", 2, "check", text=b"takes RECORDING...")
    refused("too many files", 2, "spectrum", "a", "b")
    refused("an option without its argument", 2, "spectrum", "a.wav", "--window")
    refused("a wrong choice", 2, "spectrum", "a.wav", "--window", "hat", text=b"one of hann")
    for value in ("nan", "inf", "-1", "0", "", "1e999", "2x"):
        refused(f"--resolution {value}", 2, "spectrum", "a.wav", "--resolution", value, text=b"above 0")
    refused("a reversed range", 2, "spectrum", "a.wav", "--band", "100:10", text=b"LO:HI")
    refused("a wrong channel", 2, "check", "a.wav", "--channel", "1=a:furlong", text=b"unknown unit")
    refused("a channel without a name", 2, "check", "a.wav", "--channel", "1", text=b"INDEX=NAME")
    refused("an option twice", 2, "check", "a.wav", "--rate", "1", "--rate", "2", text=b"more than once")
    refused("absorber without a mode", 2, "absorber", text=b"needs a mode")
    refused("absorber without a forcing", 2, "absorber", "--mode-frequency", "24", "--mode-damping", "0.01", "--mode-mass",
            "100", text=b"needs a forcing")
    refused("a negative uncertainty", 2, "absorber", "--mode-frequency", "24+--1")
    duty = recording("steady")
    refused("a channel that is not there", 2, "check", duty, "--channel", "77=x:g")
    refused("a part behind the end", 2, "check", duty, "--from", "1e6", text=b"holds no samples")
    refused("lines finer than the recording", 2, "spectrum", duty, "--resolution", "1e-6")
    done = run("check", duty, "--channel", "1=a:g*50", "--threads", "1", duty)
    claim("a file behind --channel is a file", done.returncode == 0 and done.stdout.count(str(duty).encode()) == 2, done)


def broken():
    one_file = [c for c in COMMANDS if c != "absorber"]
    with tempfile.TemporaryDirectory() as folder:
        place = pathlib.Path(folder)
        (place / "empty.wav").write_bytes(b"")
        (place / "text.wav").write_bytes(b"this is not a recording at all\n" * 20)
        wav = (DEMO / recording("steady").name).read_bytes()
        (place / "cut.wav").write_bytes(wav[:30])
        for command in one_file:
            toml = command in ("survey", "simulate")
            kind = 2 if toml else 3
            refused(f"{command}: a missing file", kind, command, place / "none.wav", cwd=folder)
            refused(f"{command}: an empty file", kind, command, place / "empty.wav", cwd=folder)
            refused(f"{command}: text for a recording", kind, command, place / "text.wav", cwd=folder)
            refused(f"{command}: a header cut off", kind, command, place / "cut.wav", cwd=folder)
            refused(f"{command}: a folder", kind, command, place, cwd=folder)
        refused("absorber: a missing result", 3, "absorber", "--result", place / "none.json", "--forcing-frequency", "24")
        refused("absorber: text for a result", 3, "absorber", "--result", place / "text.wav", "--forcing-frequency", "24")
        claim("nothing was written", sorted(p.name for p in place.iterdir()) == ["cut.wav", "empty.wav", "text.wav"])

        fifo = place / "fifo"
        os.mkfifo(fifo)
        refused("a pipe", 3, "check", fifo)

        half = place / "half.wav"
        half.write_bytes(wav[: len(wav) // 2])
        done = run("check", half)
        claim("a truncated recording is read as far as it goes, and said", done.returncode == 0 and b"[truncated]" in done.stdout, done)

        done = run("check", place / "none.wav", half)
        claim("a batch goes on past a bad file", done.returncode == 3 and b"half.wav" in done.stdout and b"none.wav" in done.stderr, done)

        text = pathlib.Path(SURVEY).read_text(encoding="utf-8")
        for what, wrong, said in (
            ("an unknown key", text.replace("power_kw", "power_kW", 1), b"did you mean 'power_kw'?"),
            ("a missing recording", text.replace(recording("bump").name, "gone.wav"), b"gone.wav"),
            ("an unknown point", text.replace('point = "pump-de-h"', 'point = "pump-de-x"', 1), b"did you mean"),
            ("a wrong unit", text.replace('unit = "g"', 'unit = "gg"', 1), b"not a unit"),
            ("not TOML", "[machine\n", b"survey.toml:1"),
        ):
            copy = place / "survey"
            shutil.copytree(DEMO, copy, ignore=shutil.ignore_patterns("*-report", "*.png"))
            (copy / "survey.toml").write_text(wrong, encoding="utf-8")
            refused(f"survey: {what}", 2, "survey", copy / "survey.toml", text=said)
            claim(f"survey: {what}: nothing was written", not (copy / "survey-report").exists())
            shutil.rmtree(copy)

    cases = SOURCE / "tests/broken/recording/cases.txt"
    rows = [line.split("|") for line in cases.read_text(encoding="utf-8").splitlines() if line.strip() and not line.startswith("#")]
    claim("there are broken recordings to try", len(rows) >= 8)
    for name, code, text in ([field.strip() for field in row] for row in rows):
        refused(f"broken/{name}", int(code), "check", cases.parent / name, text=text.encode())


def outputs():
    duty = recording("steady")
    with tempfile.TemporaryDirectory() as folder:
        place = pathlib.Path(folder)
        done = run("spectrum", duty, "--survey", SURVEY, "--json", place / "r.json", "--html", place / "r.html", "--csv", place / "csv")
        claim("files are written", done.returncode == 0 and all((place / n).exists() for n in ("r.json", "r.html", "csv")), done)
        result = json.loads((place / "r.json").read_text(encoding="utf-8"))
        claim("the JSON is that command's", result["command"] == "spectrum" and result["inputs"][0]["rate_hz"] > 0)
        refused("a JSON file that exists", 3, "spectrum", duty, "--json", place / "r.json", text=b"exists already")
        refused("a page that exists", 3, "spectrum", duty, "--html", place / "r.html", text=b"exists already")
        refused("a folder that is not there", 3, "check", duty, "--json", place / "none/r.json", text=b"folder is not there")
        refused("an output folder that is a file", 3, "survey", SURVEY, "--out", place / "r.json", text=b"is not a folder")
        refused("an output folder below a file", 3, "survey", SURVEY, "--out", place / "r.json/x")
        refused("an output folder that cannot be made", 3, "survey", SURVEY, "--out", "/proc/none/report")
        if os.geteuid() != 0:
            (place / "closed").mkdir(mode=0o500)
            refused("a closed folder", 3, "survey", SURVEY, "--out", place / "closed/report")

        out = place / "report"
        done = run("survey", SURVEY, "--out", out, "--quiet")
        claim("--quiet is quiet", done.returncode in (0, 1) and done.stdout == b"" and done.stderr == b"", done)
        names = sorted(p.name for p in out.iterdir() if not p.name.startswith("."))
        claim(f"the report is there: {names}", names == ["csv", "report.html", "result.json"])
        first = (out / "result.json").read_bytes()
        done = run("survey", SURVEY, "--out", out, "--quiet")
        claim("a second run replaces its own files", done.returncode in (0, 1) and (out / "result.json").read_bytes() == first, done)
        with open(out / "report.html", "a", encoding="utf-8") as page:
            page.write("<!-- a remark -->")
        refused("a report changed by hand is kept", 3, "survey", SURVEY, "--out", out, text=b"was changed")
        claim("the remark is still there", (out / "report.html").read_text(encoding="utf-8").endswith("<!-- a remark -->"))

        done = run("check", duty, "--json", "-")
        claim("--json - gives nothing but JSON on standard output", json.loads(done.stdout)["command"] == "check" and done.stderr != b"", done)
        page = (place / "r.html").read_text(encoding="utf-8")
        claim("the page asks for nothing outside", 'src="http' not in page and "Content-Security-Policy" in page)


def threads():
    for kind, command in (("steady", "spectrum"), ("bump", "bump"), ("coastdown", "runup"), ("steady", "check")):
        texts = [run(command, recording(kind), "--survey", SURVEY, "--json", "-", "--quiet", "--threads", n).stdout for n in (1, 2, 5)]
        plain = []
        for text in texts:
            value = json.loads(text)
            value["settings"].pop("threads")
            plain.append(json.dumps(value))
        claim(f"{command}: 1, 2 and 5 threads give the same digits", plain[0] == plain[1] == plain[2])


def stop():
    with tempfile.TemporaryDirectory() as folder:
        out = pathlib.Path(folder) / "report"
        for wait in (0.02, 0.2):
            process = subprocess.Popen([PROGRAM, "survey", SURVEY, "--out", str(out)], stdout=subprocess.PIPE, stderr=subprocess.PIPE)
            time.sleep(wait)
            process.send_signal(signal.SIGTERM)
            process.communicate(timeout=60)
            complete = process.returncode in (0, 1)
            claim(f"a stop after {wait} s leaves all or nothing (exit {process.returncode})",
                  (process.returncode in (130, -15) and not (out / "result.json").exists()) or (complete and (out / "result.json").exists()))
            shutil.rmtree(out, ignore_errors=True)
        process = subprocess.Popen([PROGRAM, "survey", SURVEY, "--out", str(out)], stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
        time.sleep(0.2)
        process.kill()
        process.wait()
        done = run("survey", SURVEY, "--out", out, "--quiet")
        claim("a killed run does not hinder the next one", done.returncode in (0, 1), done)


def streams():
    """A recording far longer than the memory allowed: a sparse file of 3 hours, 8 channels."""
    frames, channels, rate = 3 * 3600 * 8192, 8, 8192
    size = frames * channels * 2
    with tempfile.TemporaryDirectory() as folder:
        file = pathlib.Path(folder) / "long.wav"
        header = b"RIFF" + struct.pack("<I", 36 + size) + b"WAVEfmt " + struct.pack("<IHHIIHH", 16, 1, channels, rate, rate * channels * 2, channels * 2, 16)
        with open(file, "wb") as out:
            out.write(header + b"data" + struct.pack("<I", size))
            out.truncate(44 + size)
        # A sanitizer keeps records of its own: measured here 1.3 times as much, or 5 to 10 times (clang's documentation).
        binary = pathlib.Path(PROGRAM).read_bytes()
        limit = 90 if b"__asan_init" in binary else 600 if b"__tsan_init" in binary else 60
        for command in ("check", "spectrum"):
            code = ("import resource,subprocess,sys\n"
                    f"subprocess.run([{PROGRAM!r}, {command!r}, {str(file)!r}, '--quiet'], check=True)\n"
                    "print(resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss)")
            done = subprocess.run([sys.executable, "-c", code], capture_output=True, check=False, timeout=280)
            peak = int(done.stdout or b"0") / 1024
            print(f"{command}: {size / 2**20:.0f} MiB of samples, peak memory {peak:.0f} MiB")
            claim(f"{command}: {peak:.0f} MiB for a long recording", done.returncode == 0 and 0 < peak < limit, done)


def demo():
    done = run("survey", SURVEY, "--out", tempfile.mkdtemp() + "/report")
    text = done.stdout.decode()
    claim("the survey answers everything", done.returncode == 0, done)
    claim("one screen", len(text.splitlines()) <= 50, done)
    for word in ("Recordings", "Severity", "Cause", "Mode", "Absorber", "After fitting", "report.html"):
        claim(f"the summary has {word}", word in text, done)
    claim("no progress bar off a terminal", b"\r" not in done.stderr, done)
    for kind, command, word in (("steady", "check", b"verdict"), ("steady", "spectrum", b"vane pass"), ("bump", "bump", b"modal mass"),
                                ("coastdown", "runup", b"coast-down")):
        done = run(command, recording(kind), "--survey", SURVEY)
        claim(f"{command} on the demo says {word!r}", done.returncode == 0 and word in done.stdout, done)
    done = run("bump", recording("steady"))
    claim("a question that the data cannot answer: exit 1 and what to measure", done.returncode == 1 and done.stdout != b"", done)


def spectrum_options():
    """Each option of `spectrum` changes what it says it changes."""
    duty, survey = str(recording("steady")), ("--survey", SURVEY)

    def result(*words):
        done = run("spectrum", *words, "--json", "-", "--quiet")
        claim(f"spectrum {words} runs", done.returncode == 0, done)
        return json.loads(done.stdout or b"{}").get("result", {}) if done.returncode == 0 else {"channels": [{}]}

    def says(word, *words):
        done = run("spectrum", *words)
        claim(f"spectrum {words[1:]} says {word!r}", done.returncode == 0 and word in done.stdout, done)

    plain = result(duty, *survey)
    first = plain["channels"][0]
    claim("the survey's background is used", first["background"]["share"]["value"] < 0.05)
    claim("the neighbour's line is background", any(p["cause"] == "background" and abs(p["frequency"]["value"] - 16.63) < 0.05 for p in first["peaks"]))
    claim("the blocks have their reason", plain["lines_chosen"]["reason"] == "separation")
    claim("the speed is found", abs(plain["speed"]["value"] - 1478) < 1)
    alone = result(duty)
    claim("without a survey no zone and no force", alone["channels"][0]["severity"] is None and alone["forcing"] == [])
    named = result(duty, "--speed", "1480")
    claim("a speed by hand names the orders", any(p["cause"] == "1x" for p in named["channels"][0]["peaks"]))
    ranged = result(duty, "--speed", "1400:1500")
    claim("a range of speeds too", abs(ranged["speed"]["value"] - 1478) < 1)
    peak, both = (result(duty, *survey, "--detector", d)["channels"][0]["overall"]["value"] for d in ("peak", "peak-to-peak"))
    claim("peak is sqrt 2, peak-to-peak 2 sqrt 2 of r.m.s.", abs(peak / first["overall"]["value"] - 2**0.5) < 1e-9 and abs(both / peak - 2) < 1e-9)
    claim("acceleration has no low limit", result(duty, "--quantity", "acceleration")["channels"][0]["low_limit_hz"] is None)
    claim("so many lines as asked for", abs(result(duty, "--lines", "800", "--max-frequency", "400")["resolution_hz"] - 0.5) < 0.02)
    claim("an exponential average is worth what it says", 20 < result(duty, "--average", "exponential", "--averages", "16", "--overlap", "0", "--resolution", "2")["effective_averages"] < 32)
    says(b"peak hold", duty, "--average", "peak-hold")
    says(b"31.5 Hz", duty, "--third-octaves")
    says(b"(mm/s)", duty, "--density")
    says(b"no envelope: ", duty, "--envelope", "auto")
    says(b"envelope of 500 to 1500 Hz", duty, "--envelope", "500:1500")
    says(b"its highest lines", duty, "--zoom", "20:30")
    refused("a reference that is not there", 2, "spectrum", duty, "--reference", "nobody", text=b"nobody")
    done = run("spectrum", duty, "--average", "synchronous")
    claim("no tacho, no synchronous average: exit 1", done.returncode == 1 and b"Not answered" in done.stdout, done)
    refused("averages without their average", 2, "spectrum", duty, "--averages", "4", text=b"exponential")
    refused("a level's band that is not there", 2, "spectrum", duty, "--band", "3000:5000", text=b"reaches from")
    refused("two line spacings", 2, "spectrum", duty, "--lines", "400", "--resolution", "1", text=b"one of them")
    refused("a hammer test as background", 2, "spectrum", duty, *survey, "--background", recording("bump"), text=b"background")
    says(b"a peak hold is not searched", duty, *survey, "--average", "peak-hold")
    claim("a hammer test has no severity", all(c["severity"] is None for c in result(str(recording("bump")), *survey)["channels"]))
    claim("a part of one second has spectra", len(result(duty, *survey, "--from", "10", "--to", "11")["channels"]) == 5)
    coast = str(recording("coastdown"))
    says(b"repeats with the shaft", coast, *survey, "--average", "synchronous", "--to", "8")
    claim("a reference by name", all(d["reference"] == "motor-de-h" for d in result(duty, *survey, "--reference", "motor-de-h")["deflections"]))
    with tempfile.TemporaryDirectory() as folder:
        done = run("spectrum", duty, *survey, "--zoom", "90:110", "--csv", folder + "/csv", "--html", folder + "/z.html", "--quiet")
        names = {each.name for each in pathlib.Path(folder, "csv").iterdir()} if done.returncode == 0 else set()
        claim("zoom, third octaves and deflections have files", {"zoom-pump-de-h.csv", "third-octaves-pump-de-h.csv", "deflections.csv"} <= names, done)
        lines = pathlib.Path(folder, "csv/zoom-pump-de-h.csv").read_text(encoding="utf-8").splitlines()
        claim("the zoom's lines are finer than a fiftieth of a hertz", float(lines[2].split(",")[0]) - float(lines[1].split(",")[0]) < 0.02)
        header = pathlib.Path(folder, "csv/spectrum-pump-de-h.csv").read_text(encoding="utf-8").splitlines()
        low, high = (float(cell) for cell in header[100].split(",")[3:5])
        claim("each line has its interval", 0 < low < float(header[100].split(",")[2]) < high)
    refused("a band that is not there", 2, "spectrum", duty, "--zoom", "5000:6000")
    refused("an envelope that does not fit", 2, "spectrum", duty, "--envelope", "1500:9000")
    refused("a background that is not there", 3, "spectrum", duty, "--background", "nowhere.wav", text=b"nowhere.wav")


{"spectrum": spectrum_options, "help": help_, "usage": usage, "broken": broken, "outputs": outputs, "threads": threads, "stop": stop, "streams": streams, "demo": demo}[sys.argv[3]]()
print("\n".join(faults))
sys.exit(1 if faults else 0)
