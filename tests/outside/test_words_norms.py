# SPDX-License-Identifier: GPL-3.0-or-later
"""Norms, bounds and noise gains against an independent reference: scipy's filters summed until nothing is
left, and mpmath with 40 digits. The rigorous bound is Volkova, Hilaire and Lauter's: never below the sum,
at most one per cent above it."""
import json
import time

import mpmath
import numpy as np
from scipy import signal

import words_probe as wp
from tap import check, done

SMALL = 1e-12


def random_filter(rng, order):
    """Poles with radii up to 0.999, zeros anywhere near the circle, some exactly on it or at 1 and -1."""
    poles, zeros = [], []
    while len(poles) < order:
        r = 1 - 10 ** rng.uniform(-3, -0.3)
        if order - len(poles) >= 2 and rng.random() < 0.75:
            p = r * np.exp(1j * rng.uniform(0.02, np.pi - 0.02))
            poles += [p, p.conjugate()]
        else:
            poles.append(r * rng.choice([1, 1, -1]))
    while len(zeros) < order and rng.random() < 0.95:
        kind = rng.random()
        if order - len(zeros) >= 2 and kind < 0.5:
            r = 1 if kind < 0.25 else rng.uniform(0.5, 1.3)
            z = r * np.exp(1j * rng.uniform(0.05, np.pi - 0.05))
            zeros += [z, z.conjugate()]
        else:
            zeros.append(rng.choice([1, -1, rng.uniform(-0.9, 0.9)]))
    return zeros, poles


def responses(sections, source):
    """Impulse responses from an input of sections[source:] to each of their outputs, long enough."""
    radius = max(max(abs(np.roots(s["a"])), default=0) for s in sections)
    n = int(45 / -np.log(max(radius, 0.3))) + 200
    v = np.zeros(n)
    v[0] = 1
    out = []
    for s in sections[source:]:
        v = signal.lfilter(s["b"], s["a"], v)
        out.append(v)
    return out


def rounding_responses(sections, source):
    """From the rounding error of one direct section to each later output."""
    s = sections[source]
    error = dict(s, b=[1, -s["k1"], -s["k2"]])
    return responses([error] + sections[source + 1:], 0)


def norms_of_published():
    """L1 and L2 of the published and textbook sections, computed with mpmath to 40 digits (the file says so)."""
    with open(wp.PUBLISHED + "scaling-noise-deadband.json", encoding="utf-8") as file:
        listed = json.load(file)["data"]["norms_computed"]
    pad = lambda c: (list(c) + [0, 0, 0])[:3]
    chains = [{"chain": [{"b": pad(v["b"]), "a": pad(v["a"])}]} for v in listed.values()]
    for (name, v), answer in zip(listed.items(), wp.ask(chains)):
        got, l1, l2 = answer["norms"][0], float(v["L1"]), float(v["L2"])
        check(got["low"] <= l1 * (1 + 1e-9) and l1 * (1 - 1e-9) <= got["l1"] <= l1 * 1.005,
              f"L1 of {name}", f"{got['l1']} for {l1}")
        check(abs(got["l2"] / l2 - 1) < 0.003, f"L2 of {name}", f"{got['l2']} for {l2}")


def norms_in_mpmath():
    """Two chains of slow sections in 40 digits: the bounds enclose the sum."""
    mpmath.mp.dps = 40
    chains = [[([1, 2, 1], [1, -1.98, 0.9805]), ([1, -2, 1], [1, -1.95, 0.9551])],
              [([1, 0, -1], [1, -1.2, 0.99]), ([1, -1.5, 1], [1, -1.3, 0.97]), ([1, 1, 0], [1, -0.97, 0])]]
    questions = [{"chain": [{"b": b, "a": a} for b, a in chain]} for chain in chains]
    for chain, answer in zip(chains, wp.ask(questions)):
        v = [mpmath.mpf(1)] + [mpmath.mpf(0)] * 6000
        for k, (b, a) in enumerate(chain):
            b, a, out = [mpmath.mpf(x) for x in b], [mpmath.mpf(x) for x in a], []
            for i in range(len(v)):
                y = sum(b[j] * v[i - j] for j in range(3) if i >= j)
                y -= sum(a[j] * out[i - j] for j in (1, 2) if i >= j)
                out.append(y)
            v = out
            l1, got = float(sum(map(abs, v))), answer["norms"][k]
            check(got["low"] <= l1 <= got["l1"] <= 1.005 * l1, f"L1 enclosed, chain of {len(chain)}, section {k + 1}",
                  f"{got['low']} {l1} {got['l1']}")


def settle_peaks(sections, k):
    """What half a step from rest in each section before k can do at the output of k: the largest value of
    the response to y1 = y2 = 1/2, where rounding cannot hold the section there by itself."""
    total = 0
    for j in range(k + 1):
        a = sections[j]["a"]
        if sections[j]["order"] and (sections[j]["structure"] == wp.SHAPED or sum(a) > 1):
            rest = dict(sections[j], b=[-(a[1] + a[2]), -a[2], 0])
            total += np.max(np.abs(responses([rest] + sections[j + 1:k + 1], 0)[-1])) / 2
    return total


def check_one(answer, q, worst):
    """Peak gains, bounds and noise of one realisation; keeps the worst ratios."""
    sections, lsb = answer["sections"], 2.0 ** (-15 if q["sample"] == "q15" else -31)
    n = len(sections)
    into = [np.sum(np.abs(h)) for h in responses(sections, 0)]
    errors = [rounding_responses(sections, j) for j in range(n)]
    ok = True
    for k, node in enumerate(wp.outputs(answer)):
        if k and answer["nodes"][k - 1]["can_clip"]:
            break                # behind a clamp the bound starts anew
        ratio = node["peak_gain"] / into[k]
        worst["gain"] = max(worst["gain"], ratio)
        ok = ok and 1 - SMALL <= ratio <= 1.01
        plain = q["peak"] * into[k] + lsb / 2 * sum(np.sum(np.abs(errors[j][k - j])) for j in range(k + 1))
        ok = ok and (plain + lsb * settle_peaks(sections, k)) * (1 - SMALL) <= node["bound"]
        if plain < 2 * q["peak"] * into[k]:
            worst["bound"] = max(worst["bound"], node["bound"] / plain)
    power = sum(np.sum(errors[j][n - 1 - j] ** 2) for j in range(n)) / 12
    db = 20 * np.log10(answer["noise"]["rms_lsb"] / np.sqrt(power))
    worst["noise"] = max(worst["noise"], abs(db))
    through = np.sqrt(np.sum(responses(sections, 0)[-1] ** 2) / 12)
    worst["input"] = max(worst["input"], abs(answer["noise"]["input_rms_lsb"] / through - 1))
    return ok


def random_filters():
    """200 random filters of order 1 to 10, both fixed formats, both direct structures."""
    rng = np.random.default_rng(20250921)
    questions = []
    for i in range(200):
        zeros, poles = random_filter(rng, 1 + i % 10)
        structure = ["direct-1", "direct-1-shaped"][i % 2]
        w = np.linspace(0.001, np.pi, 300)
        peak = np.max(np.abs(signal.freqz_zpk(zeros, poles, 1, worN=w)[1]))
        questions.append(wp.question(zeros, poles, rng.uniform(0.1, 1) / peak, structure=structure, bits=32,
                                     sample=["q15", "q31"][i // 2 % 2], peak=float(rng.choice([1, 0.3])), rate=1000))
    worst = {"gain": 0, "bound": 0, "noise": 0, "input": 0}
    good = done_ones = 0
    for q, answer in zip(questions, wp.ask(questions)):
        if answer["status"] == 0:
            done_ones += 1
            good += check_one(answer, q, worst)
    check(done_ones == 200, "every random filter finds words", str(done_ones))
    check(good == done_ones, "no peak gain or bound below the reference", f"{good} of {done_ones}")
    check(worst["gain"] <= 1.01, "peak gains at most one per cent above the sum", str(worst["gain"]))
    check(worst["bound"] <= 1.02, "bounds close to peak gain plus rounding", str(worst["bound"]))
    check(worst["noise"] < 0.05, "noise of the reference, dB", str(worst["noise"]))
    check(worst["input"] < 0.01, "the input's own quantisation noise", str(worst["input"]))


def slow_ones():
    """0.05 Hz at 48 kHz: closed form of a first-order section, and the time for a fourth-order chain."""
    a = 1 - 2 * np.pi * 0.05 / 48000
    lo = {"b": [1, 0, 0], "a": [1, -a, 0]}
    hi = {"b": [1, -1, 0], "a": [1, -a, 0]}
    got = wp.ask([{"chain": [lo]}, {"chain": [hi]}])
    for answer, exact, name in ((got[0], 1 / (1 - a), "low-pass"), (got[1], 2.0, "high-pass")):
        n = answer["norms"][0]
        check(n["low"] <= exact * (1 + 1e-12) and exact * (1 - 1e-12) <= n["l1"] <= exact * 1.005,
              f"0.05 Hz first-order {name}", f"{n['l1']} for {exact}")
    z, p, k = signal.butter(2, 0.05, "high", fs=48000, output="zpk")
    began = time.monotonic()
    answer = wp.one([1, 1], p, k, sample="q31")
    check(answer["status"] == 0, "0.05 Hz second-order high-pass has words",
          f"{time.monotonic() - began:.2f} s")


norms_of_published()
norms_in_mpmath()
random_filters()
slow_ones()
done()
