# SPDX-License-Identifier: GPL-3.0-or-later
"""Talks to probe_discrete: analog roots in, digital roots, sections and figures out."""
import json
import math
import os
import subprocess

import mpmath as mp
import tap

PROBE = tap.ROOT + "/build/release/outside/probe_discrete"


def whole_pairs(roots):
    """Upper root first, its exact conjugate after it; lower ones are dropped."""
    out = []
    for r in map(complex, roots):
        if r.imag == 0:
            out.append(r)
        elif r.imag > 0:
            out += [r, r.conjugate()]
    return out


class Stage:
    def __init__(
        self,
        zeros,
        poles,
        factor,
        rate,
        method="bilinear",
        prewarp="default",
        hz=0.0,
        infinity=0,
        match=-1.0,
        band=None,
        floor=60.0,
    ):
        self.zeros, self.poles, self.factor, self.rate = (
            whole_pairs(zeros),
            whole_pairs(poles),
            factor,
            rate,
        )
        low, high = band or (rate / 10000, 0.4 * rate)
        numbers = " ".join(f"{r.real!r} {r.imag!r}" for r in self.poles + self.zeros)
        k = factor if isinstance(factor, str) else repr(float(factor))
        self.line = (
            f"stage {method} {prewarp} {float(hz)!r} {infinity} {float(match)!r} {float(rate)!r} "
            f"{float(low)!r} {float(high)!r} {float(floor)!r} {k} {len(self.poles)} "
            f"{len(self.zeros)} {numbers}"
        )


def ask(lines):
    """lines: Stage, ("at", hz) or ("error", low, high); the answers in order."""
    text = "\n".join(
        l.line
        if isinstance(l, Stage)
        else " ".join(repr(x) if not isinstance(x, str) else x for x in l)
        for l in lines
    )
    ran = subprocess.run([PROBE], input=text + "\n", capture_output=True, text=True, check=True)
    answers = [json.loads(l) for l in ran.stdout.splitlines()]
    for a in answers:
        if isinstance(a, dict) and a["status"] == 0:
            a["poles"] = [complex(*r) for r in a["poles"]]
            a["zeros"] = [complex(*r) for r in a["zeros"]]
    return answers


def run(*args, **kwargs):
    return ask([Stage(*args, **kwargs)])[0]


def value_of(answer, z):
    """The digital model at z, in mpmath."""
    v = mp.mpf(answer["factor"])
    for r in answer["zeros"]:
        v *= z - mp.mpmathify(r)
    for r in answer["poles"]:
        v /= z - mp.mpmathify(r)
    return v


def sections_value(sections, z):
    v = mp.mpf(1)
    for s in sections:
        b, a = [mp.mpf(x) for x in s["b"]], [mp.mpf(x) for x in s["a"]]
        v *= (b[0] + b[1] / z + b[2] / z**2) / (a[0] + a[1] / z + a[2] / z**2)
    return v


def on_circle(hz, rate):
    return mp.exp(2j * mp.pi * mp.mpf(hz) / mp.mpf(rate))


def analog_value(zeros, poles, factor, s):
    v = mp.mpf(factor)
    for r in zeros:
        v *= s - mp.mpmathify(r)
    for r in poles:
        v /= s - mp.mpmathify(r)
    return v


def nearest_gap(ours, theirs):
    """Largest distance of a matching by nearest root, against the size of the root; inf where the
    counts differ."""
    if len(ours) != len(theirs):
        return math.inf
    left, worst = list(theirs), 0.0
    for r in sorted(ours, key=abs):
        near = min(left, key=lambda t: abs(t - r))
        left.remove(near)
        worst = max(
            worst, float(abs(near - r)) / max(abs(complex(near)), 1e-300) if near != r else 0.0
        )
    return worst
