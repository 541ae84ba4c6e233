#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Sections: product against the model, exact words, order; responses and delays, in mpmath."""
import itertools
import math
import os
import sys

sys.path[:0] = [os.path.join(os.path.dirname(__file__), ".."), os.path.dirname(__file__)]
import mpmath as mp
import numpy as np
import scipy.signal as sig
from tap import FULL, check, done

from discrete_probe import Stage, ask, on_circle, run, sections_value, value_of, whole_pairs

mp.mp.dps = 60
RNG = np.random.default_rng(1971)
METHODS = ("bilinear", "matched-z", "impulse-invariant", "step-invariant")


def random_stage(rate):
    n = int(RNG.integers(1, 12))

    def roots(count, zero):
        out = []
        while len(out) < count:
            size = rate * 10 ** RNG.uniform(-3, 0.3)
            if count - len(out) >= 2 and RNG.random() < 0.6:
                angle = RNG.uniform(0.05, 1.57)
                r = complex(-size * np.cos(angle), size * np.sin(angle))
                out += [r, r.conjugate()]
            else:
                out.append(0j if RNG.random() < (0.3 if zero else 0.0) else complex(-size))
        return out

    return roots(int(RNG.integers(0, n)), True), roots(n, False)


def one_or_two(sections):
    return sum(s["order"] == 1 for s in sections) <= 1 and all(
        s["order"] in (1, 2) for s in sections
    )


def product():
    """Each word is rounded once, so at a point of the circle the product may differ by a few half
    units of each word against the size of the section's polynomial there: that is the bound.
    """
    worst, shape, same = 0.0, True, True
    for _ in range(40 if not FULL else 300):
        zeros, poles = random_stage(1.0)
        for method in METHODS:
            a = run(zeros, poles, 1.0, 1.0, method=method)
            shape &= one_or_two(a["sections"]) and one_or_two(a["listed"])
            for kind in ("sections", "listed"):
                used = sorted((p[0], p[1]) for s in a[kind] for p in s["poles"])
                same &= used == sorted((p.real, p.imag) for p in a["poles"])
                used = sorted((p[0], p[1]) for s in a[kind] for p in s["zeros"])
                same &= used == sorted((p.real, p.imag) for p in a["zeros"])
            for hz in (0.013, 0.11, 0.31, 0.44):
                z = on_circle(hz, 1)
                allowed = mp.mpf(0)
                for s in a["sections"]:
                    for c in (s["b"], s["a"]):
                        value = abs(c[0] + c[1] / z + c[2] / z**2)
                        allowed += mp.mpf(2) ** -52 * sum(map(abs, c)) / value
                truth = value_of(a, z)
                worst = max(
                    worst,
                    float(abs(sections_value(a["sections"], z) - truth) / abs(truth) / allowed),
                )
    check(
        worst < 1,
        "sections multiply to the model within the rounding of their words",
        f"{worst:.2f} of it",
    )
    check(shape, "second-order sections, one of first order at most")
    check(same, "every root stands in one section, unchanged")


def exact_words():
    a = run([], [complex(-300, 400)], 5e5, 8000.0)
    b = a["sections"][0]["b"]
    check(b[0] == b[2] and b[1] == 2 * b[0], "double zero at -1: g (1, 2, 1)")
    a = run([], [0, 0], 3.0, 8000.0)
    check(a["sections"][0]["a"] == [1, -2, 1], "double integrator: (1, -2, 1)")
    a = run([-30.0], [0, 0, -900.0, -5000.0], 3.0, 8000.0)
    check(
        [1, -2, 1] in [s["a"] for s in a["sections"]] and a["sections"][-1]["a"] == [1, -2, 1],
        "its poles stay together, and come last",
    )
    a = run([0], [-40.0], 1.0, 8000.0)
    b = a["sections"][0]["b"]
    check(b[1] == -b[0] and b[2] == 0, "a DC block has b = g (1, -1)")
    a = run([2 * np.pi * 50j], [complex(-20, 2 * np.pi * 50)], 1.0, 1000.0, prewarp="at", hz=50)
    b = a["sections"][0]["b"]
    check(b[0] == b[2], "a notch on the unit circle has b2 = b0")
    a = run([], [-900.0, -901.0, -902.0], 1.0, 8000.0, method="matched-z", infinity=2)
    check(
        sorted(s["b"][: s["order"]] for s in a["sections"]) == [[0.0], [0.0, 0.0]],
        "kept zeros at infinity are delays",
    )
    check(all(s["b"][s["order"]] != 0 for s in a["sections"]), "of one sample for each pole")
    a = run([], [], 2.5, 8000.0)
    check(
        a["sections"][0]["order"] == 0 and a["sections"][0]["b"] == [2.5, 0, 0],
        "no poles: a plain gain",
    )


def listed():
    poles = [complex(-5000, 100), -20.0, complex(-10, 9000), -3000.0]
    a = run([], poles, 1e14, 48000.0)
    first = [s["poles"][0] for s in a["listed"]]
    index = [min(a["poles"].index(complex(*p)) for p in s["poles"]) for s in a["listed"]]
    check(index == sorted(index), "as-listed keeps the order of the poles", str(first))


def noise_of(sections, grid):
    """Jackson's sum for peak scaling, worked out anew: max|prefix|^2 mean|rest|^2 of every prefix."""
    h = [
        abs(np.polyval(s["b"][::-1], 1 / grid) / np.polyval(s["a"][::-1], 1 / grid)) ** 2
        for s in sections
    ]
    total = 0.0
    for k in range(1, len(h) + 1):
        total += np.max(np.prod(h[:k], axis=0)) * (
            np.mean(np.prod(h[k:], axis=0)) if k < len(h) else 1
        )
    return total


def order():
    """scipy.signal.ellip's analog roots; every order of the sections found is tried."""
    grid = np.exp(1j * np.pi * (np.arange(20000) + 0.5) / 20000)
    for n in (5, 7, 8):
        z, p, k = sig.ellip(n, 0.5, 60, 2 * np.pi * 2000, analog=True, output="zpk")
        a = run(z, p, float(k), 16000.0)
        ours = noise_of(a["sections"], grid)
        best = min(noise_of(q, grid) for q in itertools.permutations(a["sections"]))
        worst = max(noise_of(q, grid) for q in itertools.permutations(a["sections"]))
        check(
            ours <= best * 1.02,
            f"elliptic of order {n}: no order of the sections is quieter",
            f"{10 * math.log10(ours / best):.3f} dB above the best, "
            f"the worst is {10 * math.log10(worst / best):.1f}",
        )
    for what, roots in (
        (
            "narrow band-pass",
            sig.butter(8, [2 * np.pi * 900, 2 * np.pi * 1100], "bandpass", True, "zpk"),
        ),
        ("band-pass", sig.butter(4, [2 * np.pi * 900, 2 * np.pi * 1100], "bandpass", True, "zpk")),
        (
            "wide band-pass",
            sig.cheby1(4, 1, [2 * np.pi * 90, 2 * np.pi * 4100], "bandpass", True, "zpk"),
        ),
        (
            "elliptic band-pass",
            sig.ellip(4, 1, 60, [2 * np.pi * 1900, 2 * np.pi * 2500], "bandpass", True, "zpk"),
        ),
    ):
        a = run(roots[0], roots[1], float(roots[2]), 16000.0)
        ours = noise_of(a["sections"], grid)
        sos = sig.zpk2sos(a["zeros"], a["poles"], float(a["factor"]))
        theirs = noise_of([{"b": list(q[:3]), "a": list(q[3:])} for q in sos], grid)
        check(
            ours <= theirs * 1.001,
            f"{what}: no noisier than scipy.signal.zpk2sos",
            f"{10 * math.log10(theirs / ours):.2f} dB quieter",
        )
    z, p, k = sig.butter(
        8, [2 * np.pi * 900, 2 * np.pi * 1100], btype="bandpass", analog=True, output="zpk"
    )
    a = run(z, p, float(k), 16000.0)
    top = 0
    for n in range(1, len(a["sections"]) + 1):
        h = np.prod(
            [
                abs(np.polyval(s["b"][::-1], 1 / grid) / np.polyval(s["a"][::-1], 1 / grid))
                for s in a["sections"][:n]
            ],
            axis=0,
        )
        top = max(top, np.max(h))
    check(
        top < 1.3,
        "gain is spread so that a narrow band-pass never peaks much above 1 on the way",
        f"{top:.3f}",
    )


def responses():
    worst = delay = low = 0.0
    for _ in range(40):
        zeros, poles = random_stage(1.0)
        hzs = (0.01, 0.12, 0.37)
        a, *at = ask(
            [Stage(zeros, poles, 1.0, 1.0, method="bilinear")] + [("at", hz) for hz in hzs]
        )
        for hz, got in zip(hzs, at):
            truth = value_of(a, on_circle(hz, 1))
            worst = max(worst, float(abs(mp.mpc(got[0], got[1]) - truth) / abs(truth)))
            turn = lambda t: mp.arg(value_of(a, mp.expj(t)) / truth)
            true_delay = -mp.diff(turn, 2 * mp.pi * mp.mpf(hz))
            scale = sum(
                1 + 1 / abs(on_circle(hz, 1) - mp.mpmathify(r)) for r in a["poles"] + a["zeros"]
            )
            delay = max(
                delay,
                float(abs(got[2] - true_delay) / scale),
                float(abs(got[5] - true_delay) / scale) / 1e3,
            )
    check(worst < 1e-15, "digital response from roots against 60 digits", f"{worst:.1e}")
    check(
        delay < 1e-14,
        "group delay in closed form against a derivative of the phase",
        f"{delay:.1e}",
    )
    # A corner of 0.01 Hz at 1 MHz: z - p in plain double has nine digits left there.
    w = 2 * np.pi * 0.01
    hz = 0.013
    a, got = ask(
        [Stage([], [complex(-0.7 * w, 0.714 * w)], w * w, 1e6, band=(0.001, 1)), ("at", hz)]
    )
    truth = value_of(a, on_circle(hz, 1e6))
    low = float(abs(mp.mpc(got[0], got[1]) - truth) / abs(truth))
    check(low < 1e-11, "a corner of 0.01 Hz at a rate of 1 MHz keeps its digits", f"{low:.1e}")


product()
exact_words()
listed()
order()
responses()
done()
