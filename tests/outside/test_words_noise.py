# SPDX-License-Identifier: GPL-3.0-or-later
"""Predicted noise against bit-true runs on random input, bounds against runs that try to break them, and
the overflow probe. Noise model: Bennett's uniform white error for each rounding (common practice)."""
import numpy as np
from scipy import signal

import words_probe as wp
from tap import check, done, FULL

RATE = 48000


def designs():
    """Stages of many kinds: (name, zeros, poles, factor)."""
    made = [("low-pass 1 kHz", signal.butter(2, 1000, fs=RATE, output="zpk")),
            ("low-pass of order 5", signal.butter(5, 3000, fs=RATE, output="zpk")),
            ("high-pass", signal.cheby1(3, 0.5, 300, "high", fs=RATE, output="zpk")),
            ("band-pass", signal.butter(3, [1000, 2500], "band", fs=RATE, output="zpk")),
            ("band-stop", signal.ellip(2, 0.5, 40, [900, 2200], "stop", fs=RATE, output="zpk")),
            ("elliptic", signal.ellip(6, 0.3, 60, 4000, fs=RATE, output="zpk")),
            ("near Nyquist", signal.butter(4, 19000, "high", fs=RATE, output="zpk"))]
    return [(name, *zpk) for name, zpk in made]


def measured_noise():
    cases, questions = [], []
    for name, z, p, k in designs():
        for sample, bits in (("q15", 32), ("q15", 16), ("q31", 32)):
            for structure in ("direct-1", "direct-1-shaped", "coupled"):
                for truncate in (0, 1) if structure != "coupled" else (0,):
                    cases.append(f"{name}, {sample}, {bits} bits, {structure}{', truncated' if truncate else ''}")
                    questions.append(wp.question(z, p, k, sample=sample, bits=bits, structure=structure,
                                                 truncate=truncate, random=1200000 if FULL else 300000, level=0.3))
    worst = worst_mean = 0
    for case, answer in zip(cases, wp.ask(questions)):
        noise, got = answer["noise"], answer["random"]
        db = 20 * np.log10(noise["rms_lsb"] / got["rms"])
        off = abs(noise["offset_lsb"] - got["mean"]) / (0.02 * abs(got["mean"]) + 0.06 * noise["rms_lsb"] + 0.005)
        worst, worst_mean = max(worst, abs(db)), max(worst_mean, off)
        if abs(db) > 0.3 or off > 1 or got["clipped"]:
            check(False, case, f"{noise} {got}")
    check(worst <= 0.3, f"noise of {len(cases)} filters within 0.3 dB of bit-true runs", f"{worst:.3f} dB")
    check(worst_mean <= 1, "their offsets within 2 % and what chance allows", f"{worst_mean:.3f}")


def probes():
    """The probe reaches 99 % of the bound of the worst node, and no node passes its bound."""
    cases, questions = [], []
    for name, z, p, k in designs():
        for structure in ("direct-1", "direct-1-shaped", "coupled"):
            for scale in (0.3, 1):
                cases.append((f"{name}, {structure}, gain {scale}", scale))
                questions.append(wp.question(z, p, k * scale, sample="q31", bits=32, structure=structure, probe=6000))
    low, passed, clips, shown = 1, 0, 0, 0
    for (case, scale), answer in zip(cases, wp.ask(questions)):
        most, nodes, worst = answer["probe"]["most"], answer["nodes"], answer["worst_node"]
        if not any(n["can_clip"] for n in nodes if "accumulator" not in n["name"]):
            low = min(low, most[worst] / nodes[worst]["bound"])
            passed += answer["probe"]["clipped"] == 0
        else:
            clips += 1
            shown += answer["probe"]["clipped"] > 0
        over = [n["name"] for n, m in zip(nodes, most) if m > n["bound"]]
        if over:
            check(False, f"{case}: nodes above their bounds", str(over))
    check(low >= 0.99, "the probe attains the bound of the worst node", f"{low:.5f}")
    check(passed > 10 and shown == clips > 5, "it clips exactly where the proof says that it can",
          f"{passed} without, {shown} of {clips} with")


def hostile_inputs():
    """Random sign sequences and slow squares never pass a bound; where none can clip nothing clips."""
    rng = np.random.default_rng(5)
    for name, z, p, k in designs()[:5]:
        n, full = 6000, 32767
        noise = rng.choice([-full - 1, full], n)
        square = np.where(np.arange(n) // rng.integers(3, 60) % 2, full, -full - 1)
        questions = [wp.question(z, p, k * 0.25, sample="q15", input=[int(v) for v in x]) for x in (noise, square)]
        for answer in wp.ask(questions):
            bound = wp.outputs(answer)[-1]["bound"] * 32768
            most = max(map(abs, answer["output"]))
            check(most <= bound, f"{name}: output within its bound", f"{most} of {bound:.1f}")


def scalings():
    """l2 and linf leave nodes that the probe clips; the report says at which level."""
    z, p, k = signal.butter(3, [1000, 1300], "band", fs=RATE, output="zpk")
    for scaling in ("l1", "linf", "l2", "none"):
        answer = wp.one(z, p, k, sample="q31", scaling=scaling, probe=20000)
        inner = [n["can_clip"] for n in wp.outputs(answer)[:-1]]
        if scaling == "l1":
            check(not any(inner), "l1: nothing before the output can clip")
        if scaling in ("linf", "l2"):
            check(any(inner) and answer["probe"]["clipped"] > 0 and answer["first_clip_input"] < 1,
                  f"{scaling}: the probe clips", str(answer["first_clip_input"]))


measured_noise()
probes()
hostile_inputs()
scalings()
done()
