#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Families against definitions worked in mpmath with 50 digits: real and imaginary part of every
root, each against its own size, so that the tiny damping of a narrow band counts in full. The
definitions: |H|^2 as a rational function of w^2 (Daniels 1974; Abramowitz and Stegun 16, 17 for the
elliptic one by Jacobi functions and its nome), and the textbook frequency transformations."""
from mpmath import mp, mpf, mpc

from analog_probe import SHAPES, ask, family, tap

mp.dps = 50
HALF = mpf(2)
ULP = 1.2e-16           # rounded once: half a unit in the last place is 1.11e-16 of it


def depth(db):
    return mpf(10) ** (mpf(db) / 10) - 1


def angles(n):
    return [mp.pi * (2 * k + (n % 2 == 0)) / (2 * n) for k in range((n + 1) // 2)]


def on_circle(n):
    return [mpc(-mp.cos(a), mp.sin(a) if a else 0) for a in angles(n)]


def butterworth(n, o):
    return [], on_circle(n), mpf(1)


def linkwitz_riley(n, o):
    return [], [p for p in on_circle(n // 2) for _ in (0, 1)], mpf(1)


def critically_damped(n, o):
    return [], [mpc(-1 / mp.sqrt(HALF ** (mpf(1) / n) - 1))] * n, mpf(1)


def chebyshev_poles(n, e):
    v = mp.asinh(1 / e) / n
    return [mpc(mp.sinh(v) * p.real, mp.cosh(v) * p.imag) for p in on_circle(n)]


def chebyshev(n, o):
    e = mp.sqrt(depth(o["ripple"]))
    return [], chebyshev_poles(n, e), mpf(1) if n % 2 else 1 / mp.sqrt(1 + e * e)


def inverse_chebyshev(n, o):
    edge = mp.cosh(mp.acosh(mp.sqrt(depth(o["stopband"]))) / n)     # stop edge over the 3.01 dB point
    poles = [edge / mp.conj(p) for p in chebyshev_poles(n, 1 / mp.sqrt(depth(o["stopband"])))]
    zeros = [mpc(0, edge / p.imag) for p in on_circle(n) if p.imag > mpf(10) ** -30][:n // 2]
    return zeros, poles, mpf(1)


def elliptic(n, o):
    if n == 1:
        return chebyshev(n, o)
    e2, s2 = depth(o["ripple"]), depth(o["stopband"])
    m1 = e2 / s2
    q = mp.qfrom(m=m1) ** (mpf(1) / n)
    m = mp.mfrom(q=q)
    big = mp.ellipk(m)
    y = mp.ellipf(mp.atan(1 / mp.sqrt(e2)), 1 - m1)
    shift = y / (n * mp.ellipk(m1)) * big
    us = [mpf(2 * i - 1) / n * big for i in range((n + 1) // 2, 0, -1)]
    cd = [mp.ellipfun("cd", mpc(u, -shift), m=m) for u in us]
    poles = [mpc(-abs(w.imag), 0 if n % 2 and i == 0 else abs(w.real)) for i, w in enumerate(cd)]
    zeros = [mpc(0, 1 / (mp.sqrt(m) * mp.ellipfun("cd", u, m=m).real)) for u in us[n % 2:]]
    return zeros, poles, mpf(1) if n % 2 else 1 / mp.sqrt(1 + e2)


def bessel(n, o):
    c = [mp.factorial(2 * n - k) / (mpf(2) ** (n - k) * mp.factorial(k) * mp.factorial(n - k))
         for k in range(n, -1, -1)]
    roots = mp.polyroots(c, maxsteps=500, extraprec=400)
    poles = [mpc(r.real, 0 if abs(r.imag) < mpf(10) ** -30 else r.imag) for r in roots
             if r.imag > -mpf(10) ** -30]
    return [], poles, mpf(1)


def scaled(z, p, by):
    return [r * by for r in z], [r * by for r in p]


def gain(z, p, dc, w):
    g = dc
    for side, power in ((z, 1), (p, -1)):
        for r in side:
            g *= abs(1 - mpc(0, w) / r) ** power
            if r.imag:
                g *= abs(1 - mpc(0, w) / mp.conj(r)) ** power
    return g


def bessel_scale(n, z, p, o):
    if o.get("normalise") == "delay":
        return mpf(1)
    if o.get("normalise") == "phase":
        return mp.fprod(abs(r) ** (2 if r.imag else 1) for r in p) ** (-mpf(1) / n)
    level = 1 / mp.sqrt(HALF)
    low, high = mpf(0), mpf(1)
    while gain(z, p, 1, high) > level:
        high *= 2
    for _ in range(150):
        middle = (low + high) / 2
        low, high = (middle, high) if gain(z, p, 1, middle) > level else (low, middle)
    return 1 / low


def quadratic(d, w2):
    """Roots of s^2 - 2 d s + w2, upper half only."""
    root = mp.sqrt(d * d - w2)
    both = [d + root, d - root]
    return [mpc(r.real, abs(r.imag)) for r in both]


def shaped(z, p, dc, shape, corners):
    w = [2 * mp.pi * mpf(c) for c in corners]
    excess = sum(2 if r.imag else 1 for r in p) - 2 * len(z)
    if shape == "lowpass":
        return [r * w[0] for r in z], [r * w[0] for r in p]
    if shape == "highpass":
        return ([w[0] / mp.conj(r) for r in z] + [mpc(0)] * excess, [w[0] / mp.conj(r) for r in p])
    w2, width = w[0] * w[1], w[1] - w[0]
    to = (lambda r: r * width / 2) if shape == "bandpass" else (lambda r: width / (2 * r))
    far = [mpc(0)] if shape == "bandpass" else [mpc(0, mp.sqrt(w2))]
    expand = lambda side: [s for r in side for s in quadratic(to(r), w2)]
    poles = []
    for r in p:
        both = quadratic(to(r), w2)
        if r.imag == 0 and both[0].imag:
            both = both[:1]                       # a pair, of which the upper one
        poles += both
    return expand(z) + far * excess, poles


def factor_of(z, p, dc, shape, corners):
    """K from H at 0 (low-pass), at infinity (high-pass, band-stop), or at the centre (band-pass)."""
    if shape in ("highpass", "bandstop"):
        return dc
    w = [2 * mp.pi * mpf(c) for c in corners]
    scale = w[0] if shape == "lowpass" else w[1] - w[0]
    both = lambda side: mp.fprod(abs(r * scale) ** (2 if r.imag else 1) for r in side)
    return dc * both(p) / both(z)


def clean(root):
    """Parts that are 0 but for the 50 digits."""
    re = mpf(0) if abs(root.real) < abs(root) * mpf(10) ** -40 else root.real
    im = mpf(0) if abs(root.imag) < abs(root) * mpf(10) ** -40 else root.imag
    return mpc(re, im)


def off(got, wanted):
    if wanted == 0:
        return 0.0 if got == 0 else float("inf")
    return float(abs(mpf(got) / wanted - 1))


def compare(got, wanted):
    rest = [r for r in got if r.imag >= 0]
    worst = 0.0 if len(rest) == len(wanted) else float("inf")
    for w in map(clean, wanted):
        if not rest:
            return float("inf")
        nearest = min(range(len(rest)), key=lambda i: abs(mpc(rest[i]) - w))
        r = rest.pop(nearest)
        worst = max(worst, off(r.real, w.real), off(r.imag, w.imag))
    return worst


KINDS = [("butterworth", butterworth, {}), ("linkwitz-riley", linkwitz_riley, {}),
         ("critically-damped", critically_damped, {}), ("chebyshev", chebyshev, {"ripple": 0.1}),
         ("inverse-chebyshev", inverse_chebyshev, {"stopband": 70.0}),
         ("elliptic", elliptic, {"ripple": 0.25, "stopband": 80.0}),
         ("elliptic", elliptic, {"ripple": 1.0, "stopband": 20.0}),
         ("elliptic", elliptic, {"ripple": 0.001, "stopband": 140.0}),
         ("bessel", bessel, {"normalise": "magnitude"}), ("bessel", bessel, {"normalise": "phase"}),
         ("bessel", bessel, {"normalise": "delay"})]
BANDS = [(100.0, 10000.0), (49.999, 50.001), (1e-3, 1e5)]


def orders_for(kind):
    orders = range(1, 21) if tap.FULL else (1, 2, 3, 4, 7, 12, 20)
    return [n for n in orders if kind != "linkwitz-riley" or n % 2 == 0]


for kind, make, options in KINDS:
    cases, wanted = [], []
    for n in orders_for(kind):
        z, p, dc = make(n, options)
        if kind == "bessel":
            z, p = scaled(z, p, bessel_scale(n, z, p, options))
        for shape in SHAPES:
            for corners in BANDS if shape.startswith("band") else [(1234.5,)]:
                cases.append(family(kind, shape, n, corners if len(corners) > 1 else corners[0], **options))
                wanted.append((n, shape, corners, shaped(z, p, dc, shape, corners),
                               factor_of(z, p, dc, shape, corners)))
    worst, where, factor = 0.0, None, 0.0
    for answer, (n, shape, corners, (z, p), k) in zip(ask(cases), wanted):
        factor = max(factor, off(answer["factor"], k))
        here = max(compare(answer["poles"], p), compare(answer["zeros"], z))
        if here > worst:
            worst, where = here, (n, shape, corners)
    tap.check(worst < ULP, f"{kind} {options or ''}: every part of every root to {ULP}",
              f"worst {worst:.2e} at {where}, {len(cases)} designs")
    tap.check(factor < 1e-19, f"{kind} {options or ''}: the factor, rounded once to 64 bits", f"{factor:.1e}")
tap.done()
