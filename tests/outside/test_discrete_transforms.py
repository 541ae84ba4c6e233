#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Transforms against scipy.signal (bilinear_zpk, cont2discrete) and mpmath at 60 digits and more."""
import os
import sys

sys.path[:0] = [os.path.join(os.path.dirname(__file__), ".."), os.path.dirname(__file__)]
import mpmath as mp
import numpy as np
import scipy.signal as sig
from tap import FULL, check, done

from discrete_probe import (
    Stage,
    analog_value,
    ask,
    nearest_gap,
    on_circle,
    run,
    value_of,
    whole_pairs,
)

mp.mp.dps = 60
RNG = np.random.default_rng(20120)


def random_set(most=10, rate=1.0, zeros_below=0):
    """Stable poles from rate/10^5 to 4 rate, in rad/s; zeros anywhere, fewer by zeros_below."""
    n = int(RNG.integers(1 + zeros_below, most + 1))

    def roots(count, right):
        out = []
        while len(out) < count:
            size = rate * 10 ** RNG.uniform(-5, 0.6)
            side = RNG.choice([-1, 1]) if right else -1
            if count - len(out) >= 2 and RNG.random() < 0.6:
                angle = RNG.uniform(0.02, 1.55)
                r = complex(side * size * np.cos(angle), size * np.sin(angle))
                out += [r, r.conjugate()]
            else:
                out.append(complex(side * size))
        return out

    m = int(RNG.integers(0, n - zeros_below + 1))
    return roots(m, True), roots(n, False), float(RNG.uniform(0.1, 10) * RNG.choice([-1, 1]))


def relative(a, b):
    return float(abs(a - b) / abs(b)) if b != 0 else float(abs(a))


def bilinear_against_scipy():
    sets = [random_set() for _ in range(300)]
    answers = ask([Stage(z, p, k, 1.0) for z, p, k in sets])
    worst = gain = exact = 0.0
    for (z, p, k), a in zip(sets, answers):
        zz, pp, kk = sig.bilinear_zpk(z, p, k, 1.0)
        worst = max(
            [worst]
            + [relative(x, y) for x, y in zip(a["poles"], pp)]
            + [relative(x, y) for x, y in zip(a["zeros"], zz)]
        )
        gain = max(gain, relative(mp.mpf(a["factor"]), mp.mpf(float(kk))))
        for ours, s in zip(a["poles"] + a["zeros"][: len(z)], p + z):
            true = (2 + mp.mpmathify(s)) / (2 - mp.mpmathify(s))
            exact = max(exact, relative(mp.mpmathify(ours), true))
        check_count = len(a["zeros"]) == len(pp) and all(x == -1 for x in a["zeros"][len(z) :])
        if not check_count:
            check(False, "zeros at infinity at exactly -1", str(a["zeros"]))
    check(
        worst < 1e-12,
        "bilinear roots of 300 random stable sets, scipy.signal.bilinear_zpk, 1e-12",
        f"{worst:.1e}",
    )
    check(gain < 1e-12, "bilinear factor of the same, 1e-12", f"{gain:.1e}")
    check(
        exact < 1.3e-16,
        "the same roots against 60 digits, to the rounding of double",
        f"{exact:.1e}",
    )


def warped_response():
    """H(e^jwT) = Ha(j c tan(wT/2)), c from the prewarp: the definition, in 60 digits."""
    worst = at_place = 0.0
    for share in (1e-6, 0.01, 0.2, 0.3, 0.49, 0.4999):
        z, p, k = random_set(rate=48000.0)
        f = share * 48000
        a = run(z, p, k, 48000.0, prewarp="at", hz=f)
        w0 = 2 * mp.pi * mp.mpf(f)
        c = w0 / mp.tan(w0 / 96000)
        for hz in (0.001, 1, 440, 9000, 23000):
            truth = analog_value(z, p, k, 1j * c * mp.tan(mp.pi * mp.mpf(hz) / 48000))
            worst = max(worst, relative(value_of(a, on_circle(hz, 48000)), truth))
        truth = analog_value(z, p, k, 1j * w0)
        at_place = max(at_place, relative(value_of(a, on_circle(f, 48000)), truth))
    check(
        worst < 1e-9,
        "prewarped bilinear is the analog response at the warped frequency, 1e-9",
        f"{worst:.1e}",
    )
    check(
        at_place < 1e-9, "and equal to the analog one at the prewarp frequency", f"{at_place:.1e}"
    )


def exact_places():
    a = run([0, 0, -5.0], [0, 0, -3.0, complex(-1, 2)], 2.0, 100.0)
    check(
        a["poles"][:2] == [1, 1] and a["zeros"][:2] == [1, 1], "bilinear: roots at 0 are exactly 1"
    )
    check(a["zeros"][3:] == [-1, -1], "bilinear: zeros at infinity are exactly -1")
    a = run([0], [0, 0, -3.0], 2.0, 100.0, method="matched-z")
    check(a["poles"][:2] == [1, 1] and a["zeros"][0] == 1, "matched-z: roots at 0 are exactly 1")
    for method in ("impulse-invariant", "step-invariant"):
        a = run([-7.0], [0, 0, -3.0], 2.0, 100.0, method=method)
        check(a["poles"][:2] == [1, 1], f"{method}: poles at 0 are exactly 1")
    a = run([0], [complex(-3, 4)], 2.0, 10.0, method="step-invariant")
    check(
        1 in a["zeros"], "step-invariant: a zero at 0 gives one zero at exactly 1", str(a["zeros"])
    )
    a = run([200.0], [-200.0], 1.0, 100.0)
    check(
        a["zeros"] == [] and a["poles"] == [0] and float(a["factor"]) == -1,
        "bilinear: an all-pass with its zero at c = 2/T is minus one sample of delay",
    )


def each_section_value(parts, rate, hz):
    """Every (zeros, poles, K) through its own substitution; w0 is the mean of its poles."""
    value = mp.mpf(1)
    for z, p, k in parts:
        w0 = abs(mp.fprod([mp.mpmathify(x) for x in p])) ** (mp.mpf(1) / len(p))
        c = w0 / mp.tan(w0 / (2 * rate)) if w0 else mp.mpf(2 * rate)
        value *= analog_value(z, p, k, 1j * c * mp.tan(mp.pi * mp.mpf(hz) / rate))
    return value


def each_section():
    rate = 48000.0
    notch = ([6000j, -6000j], [complex(-300, 5990), complex(-300, -5990)], 1.0)
    shelf = (
        [complex(-30000, 20000), complex(-30000, -20000)],
        [complex(-20000, 35000), complex(-20000, -35000)],
        3.0,
    )
    first = ([-90000.0], [-60000.0], 0.5)
    block = ([0.0], [-40.0], 1.0)
    slow = ([], [0.0], 50.0)
    twin_t = ([1e4j, -1e4j], [-1e4 * (2 - 3**0.5), -1e4 * (2 + 3**0.5)], 1.0)
    slower = ([], [complex(-900, 6200), complex(-900, -6200)], 4e7)
    faster = ([12566j, -12566j], [complex(-4000, 21620), complex(-4000, -21620)], 2.0)
    for name, parts in (
        ("a zero pair an octave above one, less below the other", [slower, faster]),
        ("notch, shelf, first order", [notch, shelf, first]),
        ("with a DC block", [shelf, block, notch]),
        ("with an integrator", [slow, shelf, first]),
        ("twin-T: real poles, a zero pair", [twin_t, block]),
    ):
        zeros = [r for q in parts for r in q[0]]
        poles = [
            r for q in reversed(parts) for r in q[1]
        ]  # which zero belongs where is to be found
        a = run(zeros, poles, float(np.prod([q[2] for q in parts])), rate, prewarp="each-section")
        worst = max(
            relative(value_of(a, on_circle(hz, rate)), each_section_value(parts, rate, hz))
            for hz in (2, 333.3, 954.0, 1500, 6543, 12000, 21000)
        )
        check(
            worst < 1e-11,
            f"each-section: {name}: every section at its own natural frequency",
            f"{worst:.1e}",
        )
    a = run(*[twin_t[0], twin_t[1], 1.0], 48000.0, prewarp="each-section")
    angle = np.angle(a["zeros"][0]) * rate / (2 * np.pi)
    check(
        abs(angle - 1e4 / (2 * np.pi)) < 1e-9,
        "each-section: the twin-T notch stays at its frequency",
        f"{angle!r}",
    )
    a = run([], [complex(-100, 900), -20.0], 1e9, 300.0, prewarp="each-section")
    dc = float(mp.re(value_of(a, mp.mpf(1))))
    check(
        relative(dc, analog_value([], whole_pairs([complex(-100, 900), -20.0]), 1e9, 0)) < 1e-13,
        "each-section: the gain at 0 Hz stays",
        f"{dc!r}",
    )


def matched_roots():
    worst = gain = 0.0
    for _ in range(60):
        z, p, k = random_set(rate=8000.0)
        z = [r for r in z if r.real < 50000]
        for infinity, at_minus_one in (
            (0, lambda n: n),
            (1, lambda n: max(n - 1, 0)),
            (2, lambda n: 0),
        ):
            a = run(z, p, k, 8000.0, method="matched-z", infinity=infinity, match=700.0)
            count = at_minus_one(len(p) - len(z))
            if a["zeros"][len(z) :] != [-1] * count:
                check(False, "matched-z: zeros at infinity", str(a["zeros"]))
            for ours, s in zip(a["poles"] + a["zeros"][: len(z)], p + z):
                true = mp.exp(mp.mpmathify(s) / 8000)
                true = min((true, mp.conj(true)), key=lambda t: abs(t - mp.mpmathify(ours)))
                worst = max(worst, relative(mp.mpmathify(ours), true))
            truth = abs(analog_value(z, p, k, 2j * mp.pi * 700))
            gain = max(gain, relative(abs(value_of(a, on_circle(700, 8000))), truth))
            if np.sign(float(a["factor"])) != np.sign(k):
                check(False, "matched-z keeps the sign of the factor")
    check(worst < 1.3e-16, "matched-z roots are exp(sT) to the rounding of double", f"{worst:.1e}")
    check(gain < 1e-12, "matched-z gain at the asked frequency", f"{gain:.1e}")


def matched_default_place():
    """Common practice leaves the place open; ours: the largest analog gain in the band."""
    f0 = 1234.5
    w = 2 * np.pi * f0
    pole = complex(-w / 40, w * np.sqrt(1 - 1 / 1600))
    a = run([], [pole], 1e8, 48000.0, method="matched-z")
    top = abs(pole) * np.sqrt(1 - 2 / 1600) / (2 * np.pi)  # textbook peak of a low-pass of Q = 20
    check(
        abs(a["match_hz"] - top) < 1e-4 * top,
        "matched-z: a resonance is matched at its peak",
        f"{a['match_hz']}",
    )
    a = run([], [-500.0], 500.0, 48000.0, method="matched-z")
    check(
        a["match_hz"] == 0 and relative(value_of(a, mp.mpf(1)), mp.mpf(1)) < 1e-15,
        "matched-z: a low-pass is matched at 0 Hz",
    )
    a = run([-300.0], [0, -3000.0], 1.0, 8000.0, method="matched-z", band=(5, 3000))
    check(
        a["match_hz"] == 5,
        "matched-z: an integrator is matched at the band's lower end",
        str(a["match_hz"]),
    )
    a = run([0, 0], [complex(-100, 100)], 1.0, 8000.0, method="matched-z", band=(5, 3000))
    check(a["match_hz"] == 3000, "matched-z: a high-pass at the upper end", str(a["match_hz"]))


def apart(poles):
    """Equal roots set apart by 10^-40 of their size, so that simple residues serve in many digits."""
    out = []
    for i, p in enumerate(poles):
        same = poles[:i].count(p)
        out.append(mp.mpmathify(p) + same * mp.mpf(10) ** -40 * max(abs(p), 1))
    return out


def sampled(zeros, poles, factor, rate, z, step):
    """T sum h(nT) z^-n with h(0) halved where it jumps, or the held form, from simple residues."""
    p = apart(poles + ([0j] if step else []))
    T, total, jump = 1 / mp.mpf(rate), mp.mpf(0), mp.mpf(0)
    for i, pi in enumerate(p):
        r = mp.mpf(factor) * mp.fprod([pi - mp.mpmathify(x) for x in zeros])
        r /= mp.fprod([pi - q for k, q in enumerate(p) if k != i])
        total += r / (1 - mp.exp(pi * T) / z)
        jump += r
    return (1 - 1 / z) * total if step else T * (total - jump / 2)


def invariant_against_residues():
    fixed = [
        ([], [-1000.0] * 4, 1e12),
        ([-50.0], [complex(-200, 900)] * 3, 1e12),
        ([], [0, 0, -30.0], 10.0),
        ([-1.0, -2.0], [0, 0, -700.0, -700.0], 1e6),
        ([0], [complex(-30, 3000)] * 2, 1e9),
        ([], [-100.0, -100.0000001, -100.0000002], 1e6),
        ([900.0], [-900.0, -1e5], 1e5),
    ]
    fixed += [random_set(6, 1000.0, 1) for _ in range(12 if not FULL else 80)]
    worst = {False: 0.0, True: 0.0}
    mp.mp.dps = 220
    for zeros, poles, k in fixed:
        zeros, poles = whole_pairs(zeros), whole_pairs(poles)
        for step in (False, True):
            a = run(
                zeros, poles, k, 1000.0, method="step-invariant" if step else "impulse-invariant"
            )
            for hz in (0.7, 41, 260, 499):
                z = on_circle(hz, 1000)
                worst[step] = max(
                    worst[step], relative(value_of(a, z), sampled(zeros, poles, k, 1000, z, step))
                )
    mp.mp.dps = 60
    check(
        worst[False] < 1e-11,
        "impulse-invariant against residues in 220 digits, multiple and near poles too",
        f"{worst[False]:.1e}",
    )
    check(worst[True] < 1e-11, "step-invariant against the same", f"{worst[True]:.1e}")


def invariant_against_scipy():
    """scipy.signal.cont2discrete: zoh, and impulse, which leaves h(0) whole."""
    worst = {"zoh": 0.0, "impulse": 0.0}
    for _ in range(40):
        zeros, poles, k = random_set(5, 1.0, 1)
        b, a = np.atleast_1d(k * np.poly(zeros)).real, np.poly(poles).real
        points = np.exp(2j * np.pi * np.array([0.02, 0.1, 0.3, 0.45]))
        for method, ours in (("zoh", "step-invariant"), ("impulse", "impulse-invariant")):
            A, B, C, D, _ = sig.cont2discrete(sig.tf2ss(b, a), 1.0, method)
            theirs = np.array(
                [(C @ np.linalg.solve(z * np.eye(len(A)) - A, B) + D)[0, 0] for z in points]
            )
            if method == "impulse" and len(poles) == len(zeros) + 1:
                theirs -= k / 2
            answer = run(zeros, poles, k, 1.0, method=ours)
            mine = np.array([complex(value_of(answer, mp.mpmathify(z))) for z in points])
            worst[method] = max(worst[method], float(np.max(abs(mine - theirs) / abs(theirs))))
    check(
        worst["zoh"] < 1e-8,
        "step-invariant against scipy.signal.cont2discrete(zoh)",
        f"{worst['zoh']:.1e}",
    )
    check(
        worst["impulse"] < 1e-8,
        "impulse-invariant against scipy.signal.cont2discrete(impulse)",
        f"{worst['impulse']:.1e}",
    )


def closed_forms():
    T, a = 1 / mp.mpf(8000), mp.mpf(1000)
    pole = mp.exp(-a * T)
    r = run([], [-1000.0], 1000.0, 8000.0, method="impulse-invariant")
    check(
        nearest_gap(r["poles"], [pole]) < 2e-16
        and nearest_gap(r["zeros"], [-pole]) < 2e-16
        and relative(mp.mpf(r["factor"]), a * T / 2) < 1e-18,
        "first-order low-pass, impulse: aT/2 (z + p)/(z - p)",
    )
    r = run([], [-1000.0], 1000.0, 8000.0, method="step-invariant")
    check(
        r["zeros"] == [] and relative(mp.mpf(r["factor"]), 1 - pole) < 1e-18,
        "first-order low-pass, step: (1 - p)/(z - p)",
    )
    r = run([], [-1000.0, -1000.0], 1e6, 8000.0, method="impulse-invariant")
    check(
        r["zeros"] == [0] and relative(mp.mpf(r["factor"]), (a * T) ** 2 * pole) < 1e-18,
        "double pole, impulse: (aT)^2 p z/(z - p)^2",
    )
    r = run([], [-1000.0, -1000.0], 1e6, 8000.0, method="step-invariant")
    lead = 1 - pole - a * T * pole
    check(
        relative(mp.mpf(r["factor"]), lead) < 1e-18
        and nearest_gap(r["zeros"], [-(pole**2 - pole + a * T * pole) / lead]) < 2e-16,
        "double pole, step: from the table",
    )
    # Integrator with a lead zero, (s + w2)/(s (s + w1)): step form from partial fractions.
    w1, w2 = mp.mpf(6000), mp.mpf(300)
    r = run([-300.0], [0, -6000.0], 1.0, 8000.0, method="step-invariant")
    e = mp.exp(-w1 * T)
    c = w2 / w1
    rest = (1 - c) / w1 * (1 - e)
    for hz in (3, 400, 3900):
        z = on_circle(hz, 8000)
        truth = c * T / (z - 1) + rest / (z - e)
        check(
            relative(value_of(r, z), truth) < 1e-12,
            f"integrator with a lead zero, step, at {hz} Hz",
        )
    r = run([-300.0], [0, -6000.0], 1.0, 8000.0)
    db = [20 * mp.log10(abs(value_of(r, on_circle(hz, 8000)))) for hz in (0.1, 1, 150, 300, 10)]
    check(
        abs(db[0] - db[1] - 20) < 0.01,
        "it falls 20 dB a decade below its zero",
        f"{float(db[0] - db[1]):.4f}",
    )
    check(
        abs(db[2] - db[3]) < 1.0,
        "and is nearly level between its zero and its pole",
        f"{float(db[2] - db[3]):.4f}",
    )
    # Euler-Frobenius polynomials: the zeros of T^n/n! sampled, the step form of 1/s^n (textbook).
    r = run([], [0, 0], 1.0, 1.0, method="step-invariant")
    check(
        r["zeros"] == [-1] and mp.mpf(r["factor"]) == mp.mpf("0.5"),
        "double integrator, step: (z + 1)/2 /(z - 1)^2",
    )


def samples_of_responses():
    """The sections run over an impulse and a step (scipy.signal.lfilter) give the analog responses at
    the samples: the textbook responses of a resonance, e^-at sin(wt) and its integral."""
    a, w, rate, n = 300.0, 2500.0, 8000.0, np.arange(200)
    t = n / rate
    k = a * a + w * w
    h = k / w * np.exp(-a * t) * np.sin(w * t)
    step = 1 - np.exp(-a * t) * (np.cos(w * t) + a / w * np.sin(w * t))
    for method, signal, truth in (
        ("impulse-invariant", n == 0, h / rate),
        ("step-invariant", n >= 0, step),
    ):
        y = signal.astype(float)
        for s in run([], [complex(-a, w)], k, rate, method=method)["sections"]:
            y = sig.lfilter(s["b"], s["a"], y)
        check(
            np.max(abs(y - truth)) < 1e-13,
            f"{method}: a resonance, sample by sample",
            f"{np.max(abs(y - truth)):.1e}",
        )


def high_orders():
    """Zeros of sampled systems tend to those of the Euler-Frobenius polynomials as T falls; the
    large orders need the digits. Compared with residues in 220 digits."""
    mp.mp.dps = 400
    for n, corner, rate in ((10, 100.0, 1e5), (20, 100.0, 48000.0)):
        _, p, k = sig.butter(n, 2 * np.pi * corner, analog=True, output="zpk")
        p = whole_pairs(p)
        a = run([], p, float(k), rate, method="step-invariant")
        worst = max(
            relative(
                value_of(a, on_circle(hz, rate)),
                sampled([], p, float(k), rate, on_circle(hz, rate), True),
            )
            for hz in (1, 90, 1000)
        )
        check(
            worst < 1e-9,
            f"step-invariant Butterworth of order {n}, corner {corner:g} Hz at {rate:g} Hz",
            f"{worst:.1e}",
        )
    mp.mp.dps = 1000  # 19 divisions by 1e-40
    p = [-2 * np.pi * 500.0] * 20
    a = run([], p, 1.0, 48000.0, method="impulse-invariant")
    worst = max(
        relative(
            value_of(a, on_circle(hz, 48000)),
            sampled([], p, 1.0, 48000, on_circle(hz, 48000), False),
        )
        for hz in (1, 400, 2000)
    )
    check(worst < 1e-9, "impulse-invariant of a pole of multiplicity 20", f"{worst:.1e}")
    mp.mp.dps = 60


bilinear_against_scipy()
warped_response()
exact_places()
each_section()
matched_roots()
matched_default_place()
closed_forms()
invariant_against_residues()
invariant_against_scipy()
samples_of_responses()
high_orders()
done()
