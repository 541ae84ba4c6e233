# SPDX-License-Identifier: GPL-3.0-or-later
"""report.json against its contract, and its figures against numpy's own arithmetic on the roots and
coefficients that stand in the same report. Also what check prints: one screen, no wider than 100."""
import json
import math
import os
import re
import sys
import unicodedata

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), "..", "html"))
import numpy as np
from stages import STAGES
from tap import check, done, polewright

# Beside the stages whose pages are looked at: zeros at z = 0, whose words are exactly 0.
FIGURES = dict(STAGES, delayed={
    "stage": "echo_gate", "rate": "2 MHz", "transform": {"method": "impulse-invariant"},
    "analog": {"family": {"approximation": "bessel", "shape": "lowpass", "order": 6, "corner": "200 kHz"}},
    "limits": {"band": ["10 Hz", "300 kHz"], "delay": "1 ns"}})
N, I, S, B = (int, float), int, str, bool
PEAK = {"max": N, "at_hz": N}
ERROR = {"magnitude_db": PEAK, "phase_deg": PEAK}
ROOTS = {"poles": [[N, N]], "zeros": [[N, N]], "factor": (int, float, None)}
FIXED = (int, float, None)
CONTRACT = {
    "format": S, "stage": S, "rate_hz": N, "version": S, "stage_file_sha256": S, "analog": ROOTS,
    "transform": {"method": S, "prewarp_hz": (int, float, str, None), "match_gain_hz": FIXED,
                  "candidates": [{"method": S, "magnitude_error_db": FIXED, "phase_error_deg": FIXED}]},
    "digital": ROOTS,
    "sections": [{"ideal": {"b": [N, N, N], "a": [N, N, N]},
                  "realised": {"b": [N, N, N], "a": [N, N, N], "b_words": ([I], None), "a_words": ([I], None),
                               "b_fraction_bits": (int, None), "a_fraction_bits": (int, None), "structure": S}}],
    "response": {"band_hz": [N, N], "transform_error": ERROR, "quantisation_error": ERROR, "total_error": ERROR,
                 "table": [{"hz": N, "analog_db": FIXED, "analog_deg": N, "digital_db": FIXED, "digital_deg": N}]},
    "nodes": [{"name": S, "section": I, "bound": FIXED, "full_scale": N, "headroom_db": FIXED, "can_clip": B,
               "integrates": B, "samples_to_clip": (int, float, None)}],
    "noise": {"output_rms_lsb": FIXED, "output_offset_lsb": FIXED, "output_dbfs": FIXED, "snr_db": FIXED, "grows": B},
    "limit_cycle": {"bound_lsb": FIXED, "found_lsb": FIXED},
    "cost": {"target": S, "sections": I, "multiplies_per_sample": I, "cycles_per_sample": FIXED, "flash_bytes": (int, None),
             "ram_bytes": I},
    "limits": [{"name": S, "limit": N, "value": FIXED, "unit": S, "met": B}], "verdict": S,
}


def faults(value, kind, at="report"):
    """Where value is not as the contract says."""
    if isinstance(kind, tuple) and None in kind:
        if value is None:
            return []
        kind = tuple(k for k in kind if k is not None)
        kind = kind[0] if len(kind) == 1 else kind
    if isinstance(kind, dict):
        if not isinstance(value, dict):
            return [f"{at} is no object"]
        return [f for k, v in kind.items()
                for f in (faults(value[k], v, f"{at}.{k}") if k in value else [f"{at}.{k} is missing"])]
    if isinstance(kind, list):
        if not isinstance(value, list):
            return [f"{at} is no list"]
        if len(kind) > 1 and len(value) != len(kind):
            return [f"{at} has {len(value)} elements"]
        return [f for i, v in enumerate(value) for f in faults(v, kind[i % len(kind)], f"{at}[{i}]")]
    if not isinstance(value, kind) or (isinstance(value, bool) and kind is not bool):
        return [f"{at} is {value!r}"]
    return []


def numbers(value):
    if isinstance(value, (list, dict)):
        for v in value.values() if isinstance(value, dict) else value:
            yield from numbers(v)
    elif isinstance(value, float):
        yield value


def cnum(pairs):
    return np.array([complex(*p) for p in pairs])


def from_roots(model, x):
    """log of the factor and the roots first, so that nothing overflows."""
    log = np.full(x.shape, math.log(10) * model["log10_factor"], complex)
    for z in cnum(model["zeros"]):
        log += np.log(x - z)
    for p in cnum(model["poles"]):
        log -= np.log(x - p)
    h = np.exp(log)
    return h if model["factor"] is None or model["factor"] > 0 else -h


def from_sections(sections, kind, z):
    h = np.ones(z.shape, complex)
    for s in sections:
        h *= np.polyval(s[kind]["b"], z) / np.polyval(s[kind]["a"], z)
    return h


def degrees(a):
    return np.angle(a) * 180 / np.pi


def check_response(name, r):
    table, rate = r["response"]["table"], r["rate_hz"]
    hz = np.array([row["hz"] for row in table])
    z = np.exp(2j * np.pi * hz / rate)
    scale = r["signal"]["output_full_scale_v"] / r["signal"]["input_full_scale_v"]
    for which, h in (("analog", from_roots(r["analog"], 2j * np.pi * hz)),
                     ("digital", from_sections(r["sections"], "realised", z) * scale)):
        stated = np.array([10 ** (row[which + "_db"] / 20) * np.exp(1j * np.pi / 180 * row[which + "_deg"])
                           for row in table])
        off = np.max(np.abs(stated - h) / np.max(np.abs(h)))
        check(off < 1e-6, f"{name}: the {which} columns are the response", f"{off:.1e}")
    ideal, digital = from_sections(r["sections"], "ideal", z), from_roots(r["digital"], z)
    off = np.max(np.abs(ideal - digital) / np.max(np.abs(digital)))
    check(off < 1e-6, f"{name}: the ideal sections make the digital model", f"{off:.1e}")


def check_errors(name, r, floor=60):
    """The largest errors again, on a grid of our own: never above what is stated, and near it."""
    low, high = r["response"]["band_hz"]
    hz = np.geomspace(low, high, 20001)
    z = np.exp(2j * np.pi * hz / r["rate_hz"])
    scale = r["signal"]["output_full_scale_v"] / r["signal"]["input_full_scale_v"]
    analog, digital = from_roots(r["analog"], 2j * np.pi * hz), from_roots(r["digital"], z)
    realised = from_sections(r["sections"], "realised", z) * scale
    db = 20 * np.log10(np.abs(analog))
    judged = db >= np.max(db) - floor
    for which, a, b in (("transform", analog, digital), ("total", analog, realised)):
        stated = r["response"][which + "_error"]
        found = np.max(np.abs(20 * np.log10(np.abs(b / a)))[judged])
        check(found <= stated["magnitude_db"]["max"] * (1 + 1e-6) + 1e-9 and
              found >= stated["magnitude_db"]["max"] * 0.98 - 1e-6, f"{name}: the {which} error in dB",
              f"{found:.6g} stated {stated['magnitude_db']['max']:.6g}")
        found = np.max(np.abs(degrees(b / a))[judged])
        check(found <= stated["phase_deg"]["max"] * (1 + 1e-6) + 1e-7 and
              found >= stated["phase_deg"]["max"] * 0.98 - 1e-5, f"{name}: the {which} error in degrees",
              f"{found:.6g} stated {stated['phase_deg']['max']:.6g}")


def check_words(name, r):
    for i, section in enumerate(r["sections"]):
        s = section["realised"]
        if r["arithmetic"]["sample"] == "float32":
            check(all(float(np.float32(v)) == v for v in s["b"] + s["a"]), f"{name}: section {i + 1} is of floats")
        if s["b_words"] is None:
            continue
        b = [w * 2.0 ** -s["b_fraction_bits"] for w in s["b_words"]]
        a = [1.0] + [w * 2.0 ** -s["a_fraction_bits"] for w in s["a_words"]]
        check(b == s["b"] and a == s["a"], f"{name}: section {i + 1} is its words, exactly")


def check_verdict(name, r, status):
    met = all(row["met"] for row in r["limits"])
    check((r["verdict"] == "met") == met == (status == 0), f"{name}: verdict, limits and exit status agree")
    wanted = set(FIGURES[name].get("limits", {})) - {"band", "floor"}
    check({row["name"] for row in r["limits"]} == wanted, f"{name}: a row for each limit that was given")
    named = r["transform"]["candidates"]
    check(any(c["method"] == r["transform"]["method"] for c in named), f"{name}: the method is one that was tried")


def check_text(name, stage):
    ran = polewright("check", "-", "--color", "never", stdin=json.dumps(stage))
    lines = ran.stdout.split("\n")
    wide = max(sum(1 for c in line if not unicodedata.combining(c)) for line in lines)
    check(len(lines) - 1 <= 22 and wide <= 100, f"{name}: one screen", f"{len(lines) - 1} lines of {wide}")
    loud = polewright("check", "-", "--color", "always", stdin=json.dumps(stage))
    check("\x1b[" not in ran.stdout and "\x1b[" in loud.stdout
          and re.sub("\x1b\\[[0-9;]*m", "", loud.stdout) == ran.stdout, f"{name}: colour adds no word")
    check("nan" not in ran.stdout.split() and "inf" not in ran.stdout.split(), f"{name}: no bare nan or inf")


def main():
    for name, stage in FIGURES.items():
        ran = polewright("check", "-", "--json", stdin=json.dumps(stage))
        report = json.loads(ran.stdout)
        wrong = faults(report, CONTRACT)
        check(not wrong, f"{name}: every field of the contract", "; ".join(wrong[:5]))
        check("loop" in report and all(map(math.isfinite, numbers(report))), f"{name}: finite numbers, and loop")
        fixed = stage.get("arithmetic", {}).get("sample", "float32").startswith("q")
        check((report["noise"]["output_offset_lsb"] is None) == (not fixed), f"{name}: noise is for fixed point")
        check_response(name, report)
        check_errors(name, report)
        check_words(name, report)
        check_verdict(name, report, ran.returncode)
        check_text(name, stage)
    done()


if __name__ == "__main__":
    main()
