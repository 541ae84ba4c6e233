# SPDX-License-Identifier: GPL-3.0-or-later
"""Asks the analog station, through its probe, for zeros, poles and factor."""
import json
import os
import subprocess
import sys

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
import tap

PROBE = tap.ROOT + "/build/release/outside/probe_analog"
PUBLISHED = tap.ROOT + "/tests/outside/published/"
SHAPES = ["lowpass", "highpass", "bandpass", "bandstop"]


def ask(descriptions, hz=()):
    """A list of answers, each with lists of complex poles and zeros (and the response at these
    frequencies), or with errors."""
    text = "".join(json.dumps({"analog": d, "hz": list(hz)}) + "\n" for d in descriptions)
    ran = subprocess.run([PROBE], input=text, capture_output=True, text=True)
    lines = ran.stdout.splitlines()
    if ran.returncode != 0 or len(lines) != len(descriptions):
        raise RuntimeError(f"probe: status {ran.returncode}, {len(lines)} answers\n{ran.stderr}")
    sys.stderr.write(ran.stderr)
    answers = [json.loads(line) for line in lines]
    for a in answers:
        for name in ("poles", "zeros", "response"):
            if name in a:
                a[name] = [complex(*pair) for pair in a[name]]
    return answers


def family(approximation, shape, order, corners, ripple=None, stopband=None, corner_at=None, normalise=None):
    f = {"approximation": approximation, "shape": shape, "order": order}
    if isinstance(corners, (list, tuple)):
        f["corners"] = list(corners)
    else:
        f["corner"] = corners
    given = {"ripple": ripple, "stopband": stopband, "corner-at": corner_at}
    f.update({k: f"{v!r} dB" for k, v in given.items() if v is not None})
    if normalise:
        f["normalise"] = normalise
    return {"family": f}


def polynomials(numerator, denominator):
    return {"polynomials": {"numerator": list(numerator), "denominator": list(denominator)}}


def roots(zeros, poles, gain):
    return {"roots": {"zeros": list(zeros), "poles": list(poles), "gain": gain}}


def published(name):
    with open(PUBLISHED + name + ".json", encoding="utf-8") as file:
        return json.load(file)["data"]


def match(got, wanted, scale=abs):
    """The largest |got - wanted| / scale(wanted) once each wanted root has taken its nearest."""
    rest, worst = list(got), 0.0
    if len(rest) != len(wanted):
        return float("inf")
    for w in sorted(wanted, key=abs):
        nearest = min(range(len(rest)), key=lambda i: abs(rest[i] - w))
        off = abs(rest.pop(nearest) - w)
        worst = max(worst, float(off / scale(w)) if off else 0.0)
    return worst


def well_formed(answer):
    """Roots in the left half plane or at 0, pairs exactly conjugate and together, real ones real."""
    for name in ("poles", "zeros"):
        roots, i = answer[name], 0
        while i < len(roots):
            if roots[i].imag > 0:
                if i + 1 >= len(roots) or roots[i + 1] != roots[i].conjugate():
                    return False
                i += 1
            elif roots[i].imag < 0:
                return False
            i += 1
    return all(p.real < 0 or p == 0 for p in answer["poles"])
