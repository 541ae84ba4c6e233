#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Roots of polynomials against mpmath: coefficients are expanded from chosen roots with 60 digits
and rounded to doubles, so that the chosen roots are the truth and the rounding is the only fault.
Wilkinson's polynomial: J. H. Wilkinson, "Rounding Errors in Algebraic Processes" (1963)."""
import numpy as np
from mpmath import mp, mpf, mpc

from analog_probe import ask, match, polynomials, tap

mp.dps = 60


def expand(roots, lead=1):
    c = [mpf(lead)]
    for r in roots:
        c = [a - b for a, b in zip(c + [0], [0] + [r * x for x in c])]
    return [float(mp.re(x)) for x in c]


def both(p):
    return [p, mp.conj(p)]


def poles_of(roots):
    return ask([polynomials([1.0], expand(roots))])[0]["poles"]


def zeros_of(numerator):
    n = len(numerator)
    return ask([polynomials(numerator, expand([-1e3] * n))])[0]["zeros"]


def structure(name, roots, most):
    """As many different roots as there are, each with its multiplicity, to this accuracy."""
    got, wanted = poles_of(roots), [complex(r) for r in roots]
    off = match(got, wanted)
    same = sorted(got.count(g) for g in set(got)) == sorted(wanted.count(w) for w in set(wanted))
    tap.check(same and off < most, name, f"{len(set(got))} different roots, off by {off:.1e}")


w, p, q = 2 * mp.pi * mpf("1234.5"), mpc(-1, "2.7"), mpc(-30, 40)
EIGHT = [mp.expjpi(mpf(2 * k + 9) / 16) for k in range(8)]
A_WEIGHTING = [-2 * mp.pi * mpf(f) for f in
               ("20.598997", "20.598997", "107.65265", "737.86223", "12194.217", "12194.217")]
TABLE = [
    ("a double pole [1, 2, 1] w^2", [-w] * 2, 1e-15),
    ("(s + 1000)^4", [mpf(-1000)] * 4, 1e-15),
    ("(s + 1000 pi)^4", [-1000 * mp.pi] * 4, 1e-15),
    ("a triple pole beside two others", [-mp.pi] * 3 + [-100, mpf(-1e5) / 3], 1e-14),
    ("a double pair", both(p) * 2, 1e-14),
    ("a triple pair and a double pole", both(p) * 3 + [-mp.e] * 2, 1e-13),
    ("a double pair beside a double pair", both(p) * 2 + both(q) * 2, 1e-13),
    ("multiplicities 10 and 3", [-mp.pi] * 10 + [-2 * mp.pi] * 3, 1e-12),
    ("a butterworth stage of order 8, squared", EIGHT * 2, 1e-12),
    ("(s + pi)^20", [-mp.pi] * 20, 1e-15),
    ("(s + pi)^64", [-mp.pi] * 64, 1e-14),
    ("IEC 61672-1 A weighting, multiplied out", A_WEIGHTING, 1e-15),
    ("poles 1e-4 apart", [-1, mpf("-1.0001")], 1e-10),
    ("three poles 1e-4 apart", [-1, mpf("-1.0001"), mpf("-1.0002")], 1e-6),
    ("pairs 1e-4 apart", both(p) + both(p * mpf("1.0001")), 1e-10),
    ("poles 1e-6 apart", [-1, mpf("-1.000001"), -5], 1e-8),
    ("a pair 1e-9 from the axis", both(mpc(-1e-9, 1)) + [-3], 1e-15),
    ("eighteen decades", [-mpf(10) ** k for k in range(-9, 9)], 1e-14),
    ("poles 1 to 18 (Wilkinson)", [mpf(-k) for k in range(1, 19)], 1e-15),
    ("a butterworth stage of order 20", [mp.expjpi(mpf(2 * k + 21) / 40) for k in range(20)], 1e-7),
]
for row in TABLE:
    structure(*row)


def exactly(name, got, wanted):
    tap.check(sorted(got, key=lambda z: (abs(z), z.imag)) == sorted(wanted, key=lambda z: (abs(z), z.imag)),
              name, str(got))


exactly("a notch numerator lies on the axis", zeros_of([1.0, 0.0, 9.0]), [3j, -3j])
exactly("a double notch lies on the axis, twice", zeros_of([1.0, 0.0, 8.0, 0.0, 16.0]), [2j, 2j, -2j, -2j])
f = 2 * np.pi * 50.3
got = zeros_of(np.poly([1j * f, -1j * f, -7.7 * f]).real.tolist())
tap.check(sum(z.real == 0 for z in got) == 2 and match(got, [1j * f, -1j * f, -7.7 * f]) < 1e-15,
          "a notch beside another zero lies on the axis", str(got))
got = zeros_of(np.poly([1j * f, -1j * f, 1j * f * 1.01, -1j * f * 1.01]).real.tolist())
tap.check(all(z.real == 0 for z in got) and len(set(got)) == 4, "two notches a hundredth apart", str(got))
exactly("zeros in the right half plane stay there", zeros_of([1.0, -3.0, 2.0]), [1, 2])
exactly("trailing zeros are zeros at exactly 0", zeros_of([2.0, 4.0, 0.0, 0.0]), [0, 0, -2])

answer = ask([polynomials([3.0, 0.0], [2.0, 8.0, 0.0, 0.0])])[0]
tap.check(answer["zeros"] == [] and answer["poles"] == [0, -4] and float(answer["factor"]) == 1.5,
          "a power of s in both polynomials cancels; the factor is the quotient of the leading ones")

# Wilkinson's 20 roots are not those of the rounded coefficients: the reference solves the latter.
c = expand([mpf(-k) for k in range(1, 21)])
truth = mp.polyroots([mpf(x) for x in c], maxsteps=1000, extraprec=500)
got = ask([polynomials([1.0], c)])[0]["poles"]
tap.check(match(got, [complex(r) for r in truth]) < 1e-15, "Wilkinson's 20 roots, of the rounded coefficients")

# Random structures from coefficients that numpy multiplied out in double precision.
rng, worst, wrong = np.random.default_rng(20261201), 0.0, 0
cases = []
for _ in range(1000 if tap.FULL else 200):
    roots = []
    for _ in range(rng.integers(1, 4)):
        size, many = 10 ** rng.uniform(0, 5), int(rng.integers(1, 4))
        pair = size * np.exp(1j * np.pi * (0.5 + rng.uniform(0.02, 0.48)))
        roots += ([-size] if rng.random() < 0.5 else [pair, pair.conjugate()]) * many
    cases.append(roots)
asked = [polynomials([1.0], np.poly(r).real.tolist()) for r in cases]
for roots, answer in zip(cases, ask(asked)):
    wrong += len(set(answer["poles"])) != len(set(roots))
    worst = max(worst, match(answer["poles"], roots))
tap.check(wrong == 0 and worst < 1e-12, f"{len(cases)} random products, multiplicities 1 to 3",
          f"{wrong} with another structure, off by {worst:.1e}")

# Simple roots of random coefficients: the polynomial as given, solved by mpmath.
worst = 0.0
asked = [polynomials(rng.normal(size=n).tolist(), expand([-1] * n))
         for n in range(2, 26 if tap.FULL else 16)]
for description, answer in zip(asked, ask(asked)):
    truth = mp.polyroots([mpf(x) for x in description["polynomials"]["numerator"]], maxsteps=500, extraprec=300)
    worst = max(worst, match(answer["zeros"], [complex(r) for r in truth]))
tap.check(worst < 3e-16, "random coefficients against mpmath", f"off by {worst:.1e}")
tap.done()
