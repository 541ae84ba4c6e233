#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""The JSON Schema of the stage file, judged by Debian's python3-jsonschema and PyYAML.

It is itself valid (draft 2020-12); every example stage file satisfies it; so does every example that
it holds; every bad stage file that a schema can see fails it; and over many texts of quantities the
schema and the reader agree.
"""
import glob
import json
import os
import subprocess
import sys
import warnings

import jsonschema
import yaml

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
import tap

warnings.simplefilter("ignore", DeprecationWarning)
PROBE = tap.ROOT + "/build/release/outside/probe_stage"
SCHEMA = json.loads(tap.polewright("schema").stdout)
VALIDATOR = jsonschema.Draft202012Validator(SCHEMA)

# Bad files whose fault is not in the data that an editor sees (text, YAML, command line) or that
# need more than one look at one place (against the rate, between values, against the poles).
UNSEEN = set("""
    about-long alias-bomb alias-inside-itself alias-unknown at-sign bad-indent band-above-half
    band-falling bracket-open brace-open byte-order-mark cell-kind-mistyped cell-part-missing
    cell-part-unknown cell-unknown circuit-no-ground circuit-node-unknown colon-twice
    control-character cycles-without-target duplicate-key duplicate-key-deep
    family-corner-at-delay family-corners-falling family-odd-linkwitz-riley
    family-stopband-below-ripple gain-at-integrator impulse-invariant-flat integrators-three
    key-without-colon list-as-key match-gain-at-half merge-key not-utf8 nul-byte nul-escape number-hex
    number-huge number-nan number-tiny
    only-comment overlong-utf8 part-coupling-one pole-on-axis pole-right polynomial-all-zero polynomial-improper
    polynomial-leading-zero prewarp-above-half quote-open rate-impossible root-q-infinite-pole root-right-pole
    roots-too-many-in-cascade second-document signal-peak-above signal-rails-falling
    signal-rails-outside signal-upside-down signal-zero-outside structure-coupled-float
    structure-transposed-q15 tab-indent tag target-unknown unknown-escape utf16
    zeros-more-than-poles coefficient-24 signal-amperes node-with-blank root-pair-unit
""".split())


def faults(data):
    return [e.message[:120] for e in VALIDATOR.iter_errors(data)]


def check_examples():
    files = sorted(glob.glob(tap.ROOT + "/examples/**/*.yaml", recursive=True))
    tap.check(len(files) >= 5, "there are example stage files", str(len(files)))
    for path in files:
        with open(path, encoding="utf-8") as f:
            found = faults(yaml.safe_load(f))
        tap.check(not found, os.path.relpath(path, tap.ROOT), "; ".join(found))


def walk(node, path=""):
    """Every schema below a node that holds examples or a default."""
    if isinstance(node, dict):
        if isinstance(node.get("examples"), list) and "description" in node:
            yield path, node
        for key, value in node.items():
            yield from walk(value, path + "/" + key)
    elif isinstance(node, list):
        for i, value in enumerate(node):
            yield from walk(value, f"{path}/{i}")


def check_own_examples():
    resolver = jsonschema.RefResolver.from_schema(SCHEMA)
    count, bad = 0, []
    for path, node in walk(SCHEMA):
        validator = jsonschema.Draft202012Validator(node, resolver=resolver)
        for example in node["examples"] + ([node["default"]] if "default" in node else []):
            count += 1
            if not validator.is_valid(example):
                bad.append(f"{path}: {example!r}")
    tap.check(not bad and count > 100, f"{count} examples and defaults satisfy their own schemas", "; ".join(bad))
    lacking = [path for path, node in walk(SCHEMA) if not node["description"]]
    tap.check(not lacking, "every key has a description", "; ".join(lacking))


def check_bad_files():
    seen = 0
    cases = sorted(glob.glob(tap.ROOT + "/tests/bad-input/cases/*.yaml"))
    for path in cases:
        name = os.path.basename(path)[:-5]
        if name in UNSEEN or os.path.exists(path[:-5] + ".args"):
            continue
        try:
            with open(path, "rb") as f:
                data = yaml.safe_load(f)
        except yaml.YAMLError as fault:
            tap.check(False, "bad file " + name, "not read: " + str(fault)[:100])
            continue
        seen += 1
        tap.check(bool(faults(data)), "bad file " + name)
    names = {os.path.basename(path)[:-5] for path in cases}
    tap.check(not UNSEEN - names, "the list of unseen faults is current", " ".join(sorted(UNSEEN - names)))
    tap.check(seen >= 60, "most bad files are seen", f"{seen} of {len(cases)}")


KEYS = {
    "rate": lambda text: {"rate": text},
    "limits.magnitude": lambda text: {"limits": {"magnitude": text}},
    "limits.phase": lambda text: {"limits": {"phase": text}},
    "limits.delay": lambda text: {"limits": {"delay": text}},
    "limits.flash": lambda text: {"limits": {"flash": text}},
    "vectors.length": lambda text: {"vectors": {"length": text}},
    "signal.input.high": lambda text: {"signal": {"input": {"low": "-2e30", "zero": "-1e30", "high": text}}},
    "pole": lambda text: {"analog": {"roots": {"poles": [text], "gain": {"factor": 1}}}},
    "R1": lambda text: {"analog": {"cell": {"kind": "rc-lowpass", "R1": text, "C1": "4n7"}}},
    "C1": lambda text: {"analog": {"cell": {"kind": "rc-lowpass", "R1": "1k", "C1": text}}},
    "gain.is": lambda text: {"analog": {"roots": {"poles": [-1], "gain": {"at": 0, "is": text}}}},
}
TEXTS = ["1", "1.5", ".5", "5.", ".", "-1", "+1", "0", "0.0", "-0", "1e3", "1e", "1e+2", "1k", "1K", "10 M", "1 m", "1u",
         "1 \u00b5s", "1 kHz", "1kHz", "1 khz", "1 Hz", "-1 krad/s", "4k7", "R47", "47R", "4n7", "n47", "4M7", "4 nF", "4.7 nF",
         "0R0", "0.1 dB", "-3 dB", "0 dB", "1 kdB", "1 deg", "1 \u00b0", "1 %", "12 bits", "4 KiB", "4 bytes", "3.3 V", "50 mV",
         "10 k\u03a9", "10 kohm", "12 us", "1,5", "1 2", "abc", "nan", "inf", "1 V V", "- 1", "\u22121", "2e3 k", "1n5F",
         "-222 \u00b1 333j", "-222 +- 333j", "-222 \u00b1 333", "-1 \u00b1 2j krad/s", "-1+2j"]


# Impossible capacitances: a schema does not see the size of a number in a text.
TOO_LARGE = {("C1", "10 M"), ("C1", "2e3 k")}


def check_agreement():
    base = {"stage": "quay_hum", "rate": 8000, "analog": {"roots": {"poles": [-1], "gain": {"factor": 1}}}}
    differ, count = [], 0
    for key, make in KEYS.items():
        for text in TEXTS:
            data = dict(base, **make(text))
            ran = subprocess.run([PROBE, "-"], input=json.dumps(data).encode(), capture_output=True)
            count += 1
            if (key, text) in TOO_LARGE:
                continue
            if (ran.returncode == 0) != VALIDATOR.is_valid(data):
                differ.append(f"{key} {text!r}: reader {ran.returncode}")
    tap.check(not differ, f"reader and schema agree on {count} texts", "; ".join(differ[:20]))


if __name__ == "__main__":
    jsonschema.Draft202012Validator.check_schema(SCHEMA)
    tap.check(SCHEMA["$schema"].endswith("2020-12/schema"), "the schema is valid, draft 2020-12")
    check_examples()
    check_own_examples()
    check_bad_files()
    check_agreement()
    tap.done()
