#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""What a family promises about its response, measured on the model: depth at the corners, ripple,
stop band, delay; and the evaluation itself against mpmath. All closed forms or definitions."""
import math

from mpmath import mp, mpf, mpc

from analog_probe import SHAPES, ask, family, polynomials, roots, tap

mp.dps = 40
TWO_POWERS = 20 * math.log10(math.sqrt(2))        # 3.0103 dB
FAMILIES = {"butterworth": ({}, TWO_POWERS), "bessel": ({}, TWO_POWERS), "critically-damped": ({}, TWO_POWERS),
            "inverse-chebyshev": ({"stopband": 50.0}, TWO_POWERS), "chebyshev": ({"ripple": 0.25}, 0.25),
            "elliptic": ({"ripple": 0.25, "stopband": 50.0}, 0.25), "linkwitz-riley": ({}, 2 * TWO_POWERS)}


def level(h):
    return 20 * math.log10(abs(h)) if h else -math.inf


def orders(kind):
    chosen = range(1, 21) if tap.FULL else (1, 2, 3, 4, 7, 12, 20)
    return [n for n in chosen if kind != "linkwitz-riley" or n % 2 == 0]


def corners(shape):
    return (80.0, 130.0) if shape.startswith("band") else 1000.0


def as_list(c):
    return list(c) if isinstance(c, tuple) else [c]


def corner_depths(kind, depth, most, **options):
    worst = 0.0
    for shape in SHAPES:
        asked = [family(kind, shape, n, corners(shape), **options) for n in orders(kind)]
        for a in ask(asked, as_list(corners(shape))):
            worst = max([worst] + [abs(level(h) + depth) for h in a["response"]])
    tap.check(worst < most, f"{kind} {options}: {depth:.4g} dB at every corner, all shapes and orders",
              f"off by {worst:.1e} dB")


# The roots are rounded to doubles; an elliptic edge of order 20 is a millionth wide and feels it.
for kind, (options, depth) in FAMILIES.items():
    most = 1e-9 if kind == "elliptic" else 1e-12
    corner_depths(kind, depth, most, **options)
    for other in (0.25, 1.0, 12.0, 49.0):
        corner_depths(kind, other, most, corner_at=other, **options)


# ---- pass band and stop band, where they ripple ----

def grid(low, high, n=2000):
    return [low * (high / low) ** (i / (n - 1)) for i in range(n)]


def extremes(kind, n, band, **options):
    a = ask([family(kind, "lowpass", n, 1.0, **options)], band)[0]
    levels = [level(h) for h in a["response"]]
    return min(levels), max(levels)


worst_top = worst_bottom = worst_stop = 0.0
for kind in ("chebyshev", "elliptic"):
    for n in range(1, 13):
        options = FAMILIES[kind][0]
        bottom, top = extremes(kind, n, grid(1e-3, 1.0), **options)
        worst_top, worst_bottom = max(worst_top, abs(top)), max(worst_bottom, abs(bottom + 0.25))
tap.check(worst_top < 1e-4 and worst_bottom < 1e-4, "the pass band runs between 0 dB and the ripple",
          f"off by {max(worst_top, worst_bottom):.1e} dB (a grid)")
for kind in ("elliptic", "inverse-chebyshev"):
    for n in range(2, 13):
        options = FAMILIES[kind][0]
        a = ask([family(kind, "lowpass", n, 1.0, **options)])[0]
        first = min(abs(z) for z in a["zeros"]) / (2 * math.pi)
        top = extremes(kind, n, grid(first, 200.0 * first), **options)[1]
        worst_stop = max(worst_stop, abs(top + 50.0))
tap.check(worst_stop < 5e-3, "the stop band rises to its depth and no further", f"off by {worst_stop:.1e} dB")

# ---- normalisations of bessel, closed forms ----

a = ask([family("bessel", "lowpass", n, 7.0, normalise="delay") for n in range(1, 21)], [0.0])
off = max(abs(x["delay"][0] * 2 * math.pi * 7.0 - 1) for x in a)
tap.check(off < 1e-14, "bessel, normalise: delay: 1/w at 0 Hz", f"off by {off:.1e}")
a = ask([family("bessel", "lowpass", n, 7.0, normalise="phase") for n in range(1, 21)])
off = max(abs(float(mpf(x["factor"]) ** (mpf(1) / n) / (14 * mp.pi)) - 1) for n, x in enumerate(a, 1))
tap.check(off < 1e-14, "bessel, normalise: phase: the asymptotes meet at the corner", f"off by {off:.1e}")

# ---- an integrator with a lead zero: -20 dB a decade, level, -20 dB a decade ----

lead = roots(["-100 Hz"], [0, "-10 kHz"], {"at": "1 kHz", "is": "0 dB"})
hz = [1e-3, 1e-2, 1e3, 1e7, 1e8]
a = ask([lead], hz)[0]
db = [level(h) for h in a["response"]]
tap.check(abs(db[1] - db[0] + 20) < 1e-6 and abs(db[4] - db[3] + 20) < 1e-5 and abs(db[2]) < 1e-12,
          "integrator with a lead zero: falls 20 dB a decade, 0 dB at 1 kHz, falls again")
flat = ask([lead], [950.0, 1050.0])[0]["response"]
tap.check(abs(level(flat[0]) - level(flat[1])) < 0.02, "and is level between the zero and the pole")
tap.check(a["poles"].count(0) == 1, "its pole at 0 is exactly 0")

# ---- a double pole: (w/(s+w))^2 is -6.02 dB and -90 deg at w ----

w = 2 * math.pi * 321.0
h = ask([polynomials([w * w], [1.0, 2 * w, w * w])], [321.0])[0]
tap.check(abs(level(h["response"][0]) + 2 * TWO_POWERS) < 1e-14 and abs(h["log"][0][1] + math.pi / 2) < 1e-15
          and len(set(h["poles"])) == 1, "a double pole: -6.02 dB and -90 deg at its corner")


# ---- the evaluation against mpmath ----

def truth(a, w):
    s, h = mpc(0, w), mpf(a["factor"])
    delay = mpf(0)
    for side, sign in ((a["zeros"], 1), (a["poles"], -1)):
        for r in side:
            h *= (s - mpc(r)) ** sign
            delay -= sign * (1 / (s - mpc(r)) * mpc(0, 1)).imag if r.real else 0
    return h, delay


HZ = [0.1, 3.0, 80.0, 103.0, 130.0, 2e4, 1e6]
asked = [family(k, s, n, corners(s), **FAMILIES[k][0]) for k in FAMILIES for s in SHAPES for n in (2, 7, 20)
         if n in orders(k)]
value = logarithm = delay = 0.0
for a in ask(asked, HZ):
    for f, h, (log, phase), d in zip(HZ, a["response"], a["log"], a["delay"]):
        want, want_delay = truth(a, 2 * mp.pi * mpf(f))
        value = max(value, float(abs(mpc(h) - want) / abs(want)))
        delay = max(delay, float(abs(mpf(d) - want_delay) / abs(want_delay)))
        want, _ = truth(a, mpf(2 * math.pi * f))           # the probe asks at this double
        turns = (mpf(phase) - mp.arg(want)) / (2 * mp.pi)
        logarithm = max(logarithm, float(abs(mpf(log) - mp.log(abs(want))) / (1 + abs(mp.log(abs(want))))),
                        float(abs(turns - mp.nint(turns))) * 2 * math.pi)
# The edge of an elliptic stage of order 20 magnifies the last of the 64 bits of w 1e5 times.
tap.check(value < 2e-14, f"H of {len(asked)} designs against mpmath", f"relative {value:.1e}")
tap.check(logarithm < 1e-14, "log|H| and phase against mpmath", f"off by {logarithm:.1e}")
tap.check(delay < 2e-14, "group delay against mpmath", f"relative {delay:.1e}")

a = ask([family("butterworth", "lowpass", 20, 1000.0)], grid(1.0, 1e6, 2000))[0]
phases = [p for _, p in a["log"]]
tap.check(all(0 >= q - p > -2 for p, q in zip(phases, phases[1:])) and abs(phases[-1] + 10 * math.pi) < 0.02,
          "the phase of a twentieth-order low-pass runs down to -10 pi without a wrap")

# ---- 64 fast poles stay in range ----

fast = {"cascade": [family("butterworth", "lowpass", 20, 1e8)] * 3 + [family("butterworth", "lowpass", 4, 1e8)]}
a = ask([fast], [1e8, 1e3])[0]
tap.check(len(a["poles"]) == 64 and abs(level(a["response"][0]) + 4 * TWO_POWERS) < 1e-12
          and abs(level(a["response"][1])) < 1e-12, "64 poles at 100 MHz", f"factor {a['factor'][:6]}..")

# ---- a cascade is the product ----

parts = [family("bessel", "bandpass", 3, (30.0, 90.0)), polynomials([1.0, 0.0, 400.0], [1.0, 3.0, 500.0]), lead]
each = [x["response"] for x in ask(parts, HZ)]
both = ask([{"cascade": [parts[0], {"cascade": parts[1:]}]}], HZ)[0]["response"]
off = max(abs(b / (x * y * z) - 1) for b, x, y, z in zip(both, *each))
tap.check(off < 1e-14, "a cascade within a cascade is the product", f"relative {off:.1e}")

# ---- gains ----

base = [["-3 krad/s"], ["-2 +- 40j krad/s", 0]]
for gain, sign in (({"at": "2 kHz", "is": -2.5}, -1), ({"at": "2 kHz", "is": 2.5}, 1),
                   ({"at": "2 kHz", "is": 2.5, "invert": True}, -1)):
    a = ask([roots(*base, gain)], [2000.0])[0]
    tap.check(abs(abs(a["response"][0]) / 2.5 - 1) < 1e-15 and float(a["factor"]) * sign > 0, f"gain {gain}")
a = ask([roots([500], [-50], {"at": 0, "is": -2.5})], [0.0])[0]
tap.check(a["response"] == [-2.5] and float(a["factor"]) > 0, "at 0 Hz the gain itself is set, sign and all",
          f"{a}")
tap.done()
