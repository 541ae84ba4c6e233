# SPDX-License-Identifier: GPL-3.0-or-later
"""Sections with drawn words, as probe_emit reads them. Draw from a seeded random.random."""
import math
import random
import struct


def single(value):
    return struct.unpack("f", struct.pack("f", value))[0]


def analog_pole_pair(order):
    """a1, a2 of a stable section."""
    radius, angle = random.uniform(0.3, 0.99), random.uniform(0.05, 3.0)
    if order == 2:
        return [-2 * radius * math.cos(angle), radius * radius]
    return [random.uniform(-0.95, 0.5), 0] if order == 1 else [0, 0]


def direct(sample, bits, shaped, order, loud):
    """A stable direct-1 section whose sums stay below 2^63; loud: with a gain that clips."""
    af = random.choice([12, 13, 14]) if bits == 16 else random.choice([26, 29])
    one, bf, limit = 1 << af, af + random.choice([-1, 0, 0, 1, 2]), (1 << (bits - 1)) - 1
    a = analog_pole_pair(order)
    gain = (2 if loud else 0.1) * max(0.05, 1 + sum(a))
    b = [gain * random.uniform(-1, 1) for _ in range(order + 1)] + [0] * (2 - order)
    word_b = [max(-limit, min(limit, round(v * (1 << bf)))) for v in b]
    if random.random() < 0.3 and order == 2:
        word_b = [word_b[0] // 2, -2 * (word_b[0] // 2), word_b[0] // 2]  # blocks a constant
    word_a = [max(-limit, min(limit, round(v * one))) for v in a]
    k = [random.choice([1, 2, -1]), random.choice([0, -1, 1])] if shaped else [0, 0]
    reach = (
        sum(map(abs, word_b)) * 2.0 ** (af - bf)
        + sum(map(abs, word_a))
        + sum(map(abs, k)) * one / 2**31
    )
    if reach * 2.0 ** (15 if sample == "q15" else 31) >= 2.0**62:
        return direct(sample, bits, shaped, order, loud)  # the precondition of every kernel
    return {
        "structure": "direct-1-shaped" if shaped else "direct-1",
        "order": order,
        "b": word_b,
        "a": word_a,
        "bf": bf,
        "af": af,
        "k": k,
    }


def coupled(sample, bits, loud):
    f = 14 if bits == 16 else 30
    one = 1 << f
    radius, angle = random.uniform(0.5, 0.97), random.uniform(0.1, 3.0)
    gain = (1.5 if loud else 0.2) * (1 - radius)
    return {
        "structure": "coupled",
        "order": 2,
        "sigma": round(radius * math.cos(angle) * one),
        "omega": round(radius * math.sin(angle) * one),
        "g": round(gain * one),
        "c1": round(random.uniform(-1, 1) * one),
        "c2": round(random.uniform(-1, 1) * one),
        "d": round(random.uniform(-0.5, 0.5) * one),
        "af": f,
        "cf": f,
    }


def real(is_single, structure, order):
    a = analog_pole_pair(order)
    b = [random.uniform(-1, 1) * max(0.05, 1 + sum(a)) for _ in range(order + 1)] + [0] * (
        2 - order
    )
    to = single if is_single else (lambda v: v)
    return {
        "structure": structure,
        "order": order,
        "b": [to(v) for v in b],
        "a": [to(v) for v in a],
    }
