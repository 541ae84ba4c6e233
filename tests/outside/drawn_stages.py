# SPDX-License-Identifier: GPL-3.0-or-later
"""Stages drawn from a seed, of every kind that fixed point finds hard: slow, sharp, loud, faint,
with integrators and delays. Our own draws."""
import math
import os
import random
import sys

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
import tap


def hertz(value):
    return f"{value:.9g} Hz"


def roots(zeros, poles, at, level_db):
    return {
        "roots": {"zeros": zeros, "poles": poles, "gain": {"at": at, "is": f"{level_db:.3f} dB"}}
    }


def real(hz):
    return f"-{2 * math.pi * hz:.9g}"


def family(r, rate, low):
    shape = r.choice(["lowpass", "highpass", "bandpass", "bandstop"])
    kind = r.choice(["butterworth", "chebyshev", "inverse-chebyshev", "elliptic", "bessel"])
    if shape[:4] == "band" and kind == "bessel":
        kind = "butterworth"
    made = {
        "approximation": kind,
        "shape": shape,
        "order": r.randint(2, 10 if shape[:4] != "band" else 5),
    }
    f = rate * 10 ** r.uniform(low, -0.6)
    if shape[:4] == "band":
        made["corners"] = [hertz(f), hertz(min(f * 10 ** r.uniform(0.05, 0.6), 0.45 * rate))]
    else:
        made["corner"] = hertz(f)
    if kind in ("chebyshev", "elliptic"):
        made["ripple"] = f"{r.uniform(0.05, 2):.3f} dB"
    if kind in ("inverse-chebyshev", "elliptic"):
        made["stopband"] = f"{r.uniform(20, 70):.2f} dB"
    return {"family": made}


def analog(r, rate, low):
    kind = r.choice(
        ["family", "family", "family", "notch", "shelf", "peak", "coupling", "integrator", "double"]
    )
    f, q = rate * 10 ** r.uniform(low, -0.5), round(10 ** r.uniform(-0.3, 1.7), 3)
    if kind == "family":
        return family(r, rate, low)
    if kind == "notch":
        return roots(
            [{"frequency": hertz(f), "q": "infinite"}],
            [{"frequency": hertz(f), "q": q}],
            "0 Hz",
            r.uniform(-20, 20),
        )
    if kind == "shelf":
        return roots([real(f * 10 ** r.uniform(-1.5, 0.5))], [real(f)], "0 Hz", r.uniform(-60, 60))
    if kind == "peak":
        return roots([], [{"frequency": hertz(f), "q": q}], "0 Hz", r.uniform(-60, 60))
    if kind == "coupling":
        return roots(["0"], [real(f / 3)], hertz(0.4 * rate), r.uniform(-60, 40))
    if kind == "integrator":
        return roots([real(f)], ["0", real(3 * f)], hertz(f), r.uniform(-30, 20))
    return roots([real(f / 3)], ["0", "0", real(3 * f)], hertz(f / 3), r.uniform(-30, 10))


def draw(seed):
    r = random.Random(seed)
    rate, low = r.choice([8000, 44100, 48000, 1e6]), r.choice(
        [-5, -3, -2]
    ) if tap.FULL else r.choice([-3, -2])
    stage = {"stage": f"drawn_{seed}", "rate": hertz(rate), "analog": analog(r, rate, low)}
    stage["arithmetic"] = {
        "sample": r.choice(["q15", "q31"]),
        "structure": r.choice(["auto", "auto", "direct-1", "direct-1-shaped", "coupled"]),
        "scaling": r.choice(["l1", "l1", "linf", "l2", "none"]),
        "rounding": r.choice(["nearest", "nearest", "truncate"]),
        "overflow": r.choice(["saturate", "saturate", "wrap"]),
        "coefficient": r.choice(["16 bits", "32 bits", "32 bits"]),
    }
    method = r.choice([None, "bilinear", "matched-z", "kept delays", "step-invariant"])
    if method == "kept delays":
        stage["transform"] = {"method": "matched-z", "zeros-at-infinity": "keep"}
    elif method:
        stage["transform"] = {"method": method}
    if r.random() < 0.4:
        stage["signal"] = {
            "input": {"low": "-1 V", "high": "1 V", "peak": f"{10 ** r.uniform(-3, 0):.6g} V"}
        }
    return stage
