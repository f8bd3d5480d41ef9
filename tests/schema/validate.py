#!/usr/bin/env python3
"""Runs every command on the demo data with --json - and validates what comes out against the published schema, closed:
a key that the schema does not know is a fault. Also checks that the schema itself is valid and that it can refuse.

    validate.py PROGRAM SOURCE_DIR
"""
import copy
import json
import pathlib
import subprocess
import sys
import tempfile

import jsonschema

program, source = sys.argv[1], pathlib.Path(sys.argv[2])
schema = json.loads((source / "data/schema/result-1.schema.json").read_text(encoding="utf-8"))
jsonschema.Draft202012Validator.check_schema(schema)


def closed(node):
    """The schema with every object closed to unknown keys."""
    if isinstance(node, dict):
        node = {key: closed(value) for key, value in node.items()}
        if node.get("type") == "object" and "properties" in node and "required" in node and "allOf" not in node:
            node.setdefault("additionalProperties", False)
        return node
    return [closed(each) for each in node] if isinstance(node, list) else node


strict = jsonschema.Draft202012Validator(closed(schema))
demo = source / "data/demo"
survey = str(demo / "survey.toml")


def no_constant(text):
    raise ValueError(f"{text} is not JSON")


def result(*words, codes=(0,)):
    run = subprocess.run([program, *words, "--json", "-", "--quiet"], capture_output=True, text=True, check=False)
    if run.returncode not in codes:
        sys.exit(f"{words}: exit {run.returncode}: {run.stderr}")
    value = json.loads(run.stdout, parse_constant=no_constant)
    faults = sorted(strict.iter_errors(value), key=lambda each: list(each.path))
    for fault in faults[:10]:
        print(words, list(fault.absolute_path), fault.message)
    if faults:
        sys.exit(1)
    return value


with tempfile.TemporaryDirectory() as folder:
    whole = result("survey", survey, "--out", folder + "/report", codes=(0, 1))
    saved = folder + "/report/result.json"
    if json.loads(pathlib.Path(saved).read_text(encoding="utf-8")) != whole:
        sys.exit("the survey's file and its standard output differ")

    recordings = sorted(each for each in demo.iterdir() if each.suffix in (".wav", ".csv"))
    result("check", *map(str, recordings), "--survey", survey)
    for recording in recordings:
        result("check", str(recording), "--survey", survey)
        result("spectrum", str(recording), "--survey", survey)
        result("runup", str(recording), "--survey", survey, codes=(0, 1))
        result("bump", str(recording), "--survey", survey, codes=(0, 1))
    result("absorber", "--result", saved, "--mode", "1", "--forcing-frequency", "24.6")
    result("absorber", "--mode-frequency", "23.8+-0.1", "--mode-damping", "0.01+-0.001", "--mode-mass", "280+-10",
           "--speed", "1400:1480", "--before", "7", "--target", "2.8", "--max-mass", "15")

# A check that cannot fail proves nothing.
for spoil in (lambda v: v.pop("schema"), lambda v: v["result"].update(extra=1), lambda v: v["result"]["modes"].append({}),
              lambda v: v["result"]["quality"][0].update(verdict="fine")):
    wrong = copy.deepcopy(whole)
    spoil(wrong)
    if strict.is_valid(wrong):
        sys.exit("the schema accepts what it must refuse")
