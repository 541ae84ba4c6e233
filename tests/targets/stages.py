# SPDX-License-Identifier: GPL-3.0-or-later
"""Stages for the targets, given by their words: every sample format and structure, 1 to 8 sections,
an integrator, stages that clip and stages that are proved not to."""
import math
import random
import struct


def real_section(rng, order, structure="transposed-2"):
    radius, angle = rng.uniform(0.3, 0.97), rng.uniform(0.05, 3.0)
    a = [-2 * radius * math.cos(angle), radius * radius] if order == 2 else [rng.uniform(-0.95, 0.5), 0.0]
    scale = max(0.05, 1 + sum(a))
    b = [rng.uniform(-1, 1) * scale for _ in range(order + 1)] + [0.0] * (2 - order)
    return {"structure": structure, "order": order, "b": b, "a": a}


def single(section):
    to32 = lambda v: struct.unpack("f", struct.pack("f", v))[0]
    return dict(section, b=[to32(v) for v in section["b"]], a=[to32(v) for v in section["a"]])


def l1(b, a, n=4000):
    """Sum of |impulse response|: the largest |output| for |input| <= 1."""
    x1 = x2 = y1 = y2 = total = 0.0
    for i in range(n):
        x = 1.0 if i == 0 else 0.0
        y = b[0] * x + b[1] * x1 + b[2] * x2 - a[0] * y1 - a[1] * y2
        x2, x1, y2, y1 = x1, x, y1, y
        total += abs(y)
    return total


def direct(rng, sample, bits, order=2, gain=0.9, shift=0, kind="direct-1"):
    """Words of a stable section whose L1 gain is `gain`; gain < 1: it cannot clip (rounding and all)."""
    part = real_section(rng, order)
    fa, limit = bits - 2, (1 << (bits - 1)) - 1
    fb = fa + shift
    factor = gain / l1(part["b"], part["a"])
    b = [round(v * factor * 2.0 ** fb) for v in part["b"]]
    if max(map(abs, b)) > limit or (shift > 0 and 4 * max(map(abs, b)) < limit):
        step = math.floor(math.log2(limit / max(map(abs, b))))
        return direct(rng, sample, bits, order, gain, shift + min(step, 0) - (shift > 0 and step < 0), kind) \
            if step < 0 else _words(b, part, fb, fa, order, kind, gain)
    return _words(b, part, fb, fa, order, kind, gain)


def _words(b, part, fb, fa, order, kind, gain):
    return {"structure": kind, "order": order, "b": b, "a": [round(v * 2.0 ** fa) for v in part["a"]], "bf": fb,
            "af": fa, "k": [1, 0] if kind == "direct-1-shaped" else [0, 0], "cannot_clip": int(gain < 0.95)}


def integrator(sample, bits):
    fa = bits - 2
    return {"structure": "direct-1", "order": 2, "b": [1 << (fa - 6), 0, -(1 << (fa - 7))], "a": [-(1 << fa) - (1 << (fa - 1)),
            1 << (fa - 1)], "bf": fa, "af": fa, "k": [0, 0]}


def coupled(rng, bits):
    one, fraction = 1 << (bits - 2), bits - 2
    radius, angle = rng.uniform(0.5, 0.97), rng.uniform(0.1, 3.0)
    gain = 0.7 * (1 - radius)
    return {"structure": "coupled", "order": 2, "sigma": round(radius * math.cos(angle) * one),
            "omega": round(radius * math.sin(angle) * one), "g": round(gain * one), "c1": round(rng.uniform(-1, 1) * one),
            "c2": round(rng.uniform(-1, 1) * one), "d": round(rng.uniform(-0.5, 0.5) * one), "af": fraction, "cf": fraction}


def cascade(rng, sample, bits, count, loud=False, **how):
    return [direct(rng, sample, bits, order=1 if k == count - 1 and count % 2 else 2, gain=1.9 if loud else 0.9, **how)
            for k in range(count)]


def every(full):
    """(name, stage) for the check: the quick set, or all of it."""
    rng = random.Random(11)
    out = []

    def add(name, sample, bits, sections, **more):
        out.append(dict(name=name, sample=sample, bits=bits, sections=sections, standalone=1, **more))

    for count in (1, 2, 3, 4, 5, 6, 7, 8) if full else (1, 4):
        for sample, bits in (("q15", 16), ("q31", 32), ("q15", 32), ("q31", 16)) if full else (("q15", 16), ("q31", 32)):
            for loud in (False, True):
                add(f"{sample}_{bits}_direct_{count}{'_loud' if loud else ''}", sample, bits,
                    cascade(rng, sample, bits, count, loud, shift=count % 3 * 2))
        add(f"f32_{count}", "float32", 0, [single(real_section(rng, 1 if k == 2 else 2)) for k in range(count)])
    for sample, bits in (("q15", 16), ("q31", 32)):
        add(f"{sample}_integrator", sample, bits, [direct(rng, sample, bits), integrator(sample, bits)])
        add(f"{sample}_mixed", sample, bits, [direct(rng, sample, bits, gain=1.9), coupled(rng, bits),
                                              direct(rng, sample, bits, kind="direct-1-shaped", gain=1.5)])
        if full:
            add(f"{sample}_coupled", sample, bits, [coupled(rng, bits), coupled(rng, bits)])
            add(f"{sample}_wrap", sample, bits, cascade(rng, sample, bits, 3, True), wrap=1)
            add(f"{sample}_truncate", sample, bits, cascade(rng, sample, bits, 3, True, shift=2), truncate=1)
            out.append(dict(out[-1], name=f"{sample}_runtime", standalone=0))
    if full:
        add("f32_direct", "float32", 0, [single(real_section(rng, 2, "direct-1"))])
        add("f64_2", "float64", 0, [real_section(rng, 2), real_section(rng, 2)])
        out.append(dict(out[-1], name="f64_runtime", standalone=0))
    out.append(dict(next(s for s in out if s["name"] == "f32_4"), name="f32_runtime", standalone=0))
    return out
