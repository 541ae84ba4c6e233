#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Families against scipy's analog designs (scipy.signal: butter, cheby1, cheby2, ellip, bessel with
analog=True, output='zpk'), orders 1 to 10, four shapes."""
import math

import numpy as np
import scipy.signal as ss

from analog_probe import SHAPES, ask, family, match, tap, well_formed

TYPES = dict(lowpass="lowpass", highpass="highpass", bandpass="bandpass", bandstop="bandstop")
CORNERS = {"single": [1000.0, 0.37], "band": [(300.0, 3400.0), (990.0, 1010.0)]}


def stop_edge(order, stopband):
    """Where inverse-chebyshev's stop band begins, its 3.01 dB point being 1."""
    return math.cosh(math.acosh(math.sqrt(10 ** (stopband / 10) - 1)) / order)


def corners_for(shape):
    return CORNERS["band" if shape.startswith("band") else "single"]


def reference(kind, order, corners, shape, options):
    w = 2 * np.pi * np.array(corners)
    if kind == "butterworth":
        return ss.butter(order, w, shape, analog=True, output="zpk")
    if kind == "chebyshev":
        return ss.cheby1(order, options["ripple"], w, shape, analog=True, output="zpk")
    if kind == "elliptic":
        return ss.ellip(order, options["ripple"], options["stopband"], w, shape, analog=True, output="zpk")
    if kind == "bessel":
        norm = {"magnitude": "mag", "phase": "phase", "delay": "delay"}[options["normalise"]]
        return ss.bessel(order, w, shape, analog=True, output="zpk", norm=norm)
    # inverse chebyshev: scipy's corner is the stop edge; move its prototype and transform
    z, p, k = ss.cheb2ap(order, options["stopband"])
    edge = stop_edge(order, options["stopband"])
    z, p, k = z * edge, p * edge, k * edge ** (len(p) - len(z))
    if shape == "lowpass":
        return ss.lp2lp_zpk(z, p, k, w)
    if shape == "highpass":
        return ss.lp2hp_zpk(z, p, k, w)
    move = ss.lp2bp_zpk if shape == "bandpass" else ss.lp2bs_zpk
    return move(z, p, k, wo=math.sqrt(w[0] * w[1]), bw=w[1] - w[0])


KINDS = [("butterworth", {}), ("chebyshev", {"ripple": 0.5}), ("chebyshev", {"ripple": 3.0}),
         ("inverse-chebyshev", {"stopband": 40.0}), ("elliptic", {"ripple": 0.5, "stopband": 60.0}),
         ("elliptic", {"ripple": 0.1, "stopband": 30.0})]
KINDS += [("bessel", {"normalise": n}) for n in ("magnitude", "phase", "delay")]


def compare(kind, options, shape):
    cases = [(order, c) for order in range(1, 11) for c in corners_for(shape)]
    answers = ask([family(kind, shape, order, c, **options) for order, c in cases])
    roots = factors = 0.0
    formed = True
    for (order, c), a in zip(cases, answers):
        z, p, k = reference(kind, order, c, shape, options)
        # a zero that scipy leaves at 1e-17 instead of 0 is measured against the corner
        size = 2 * math.pi * max(c if isinstance(c, tuple) else (c,))
        roots = max(roots, match(a["poles"], p), match(a["zeros"], z, lambda w: max(abs(w), size * 1e-3)))
        factors = max(factors, abs(float(a["factor"]) / k - 1))
        formed &= well_formed(a)
    return roots, factors, formed


for kind, options in KINDS:
    for shape in SHAPES:
        roots, factors, formed = compare(kind, options, shape)
        name = f"{kind} {options or ''} {shape}, orders 1 to 10, against scipy"
        tap.check(roots < 1e-12 and factors < 1e-12, name, f"roots {roots:.1e}, factor {factors:.1e}")
        tap.check(formed, name + ": exact pairs, left half plane")
tap.done()
