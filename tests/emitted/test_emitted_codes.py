# SPDX-License-Identifier: GPL-3.0-or-later
"""Converter codes: every code of a converter to its sample, and samples to their codes, against
exact fractions of the volts in the stage file."""
import tempfile
from fractions import Fraction

from built import build, small_program, stage_of
from emitted import TYPES, sources, tap

MIDDLE = {"low": 0, "high": 3.3, "bits": 12, "zero": 1.65}
PORTS = [
    (MIDDLE, dict(MIDDLE, rails=[0.1, 3.2])),
    (
        {"low": -1, "high": 2.3, "bits": 11, "zero": 0.4},
        {"low": 0.2, "high": 5, "bits": 9, "zero": 1.7},
    ),
    (
        {"low": -10, "high": 10, "bits": 16, "zero": 0},
        {"low": -5, "high": 5, "bits": 16, "zero": 0.3, "rails": [-4, 4.4]},
    ),
]
UNIT = {"q15": 2**15, "q31": 2**31, "float32": 1, "float64": 1}
# How far a float may be from the exact sample (of full scale); a word is the nearest.
FLOAT_SLACK = {"float32": Fraction(1, 2**22), "float64": Fraction(1, 2**50)}
FLAGS = ["-ffp-contract=off", "-fsanitize=undefined", "-fno-sanitize-recover=all"]

PROGRAM = """
#include <stdio.h>
#include "%(name)s.h"
int main(void)
{
    for (unsigned long c = 0; c <= %(last)d; c++)
        printf("from %%lu %%.17g\\n", c, (double)%(name)s_from_code((uint16_t)c));
    for (long long i = -%(count)dLL; i < %(count)dLL; i++) {
        %(type)s y = (%(type)s)(i * %(step)s);
        printf("to %%lu %%.17g\\n", (unsigned long)%(name)s_to_code(y), (double)y);
    }
    return 0;
}
"""


def in_volts(port):
    volt = lambda v: [f"{w} V" for w in v] if isinstance(v, list) else f"{v} V"
    return {key: value if key == "bits" else volt(value) for key, value in port.items()}


def exact(value):
    return Fraction(str(value))


def full_scale(port):
    return max(exact(port["high"]) - exact(port["zero"]), exact(port["zero"]) - exact(port["low"]))


def step_of(port):
    return (exact(port["high"]) - exact(port["low"])) / 2 ** port["bits"]


def wrong_sample(sample, port, code, got):
    volts = exact(port["low"]) + code * step_of(port)
    want = (volts - exact(port["zero"])) / full_scale(port) * UNIT[sample]
    if sample[0] == "q":
        want = min(max(want, -UNIT[sample]), UNIT[sample] - 1)
    return abs(got - want) > FLOAT_SLACK.get(sample, Fraction(501, 1000))


def wrong_code(sample, port, y, got):
    volts = exact(port["zero"]) + y * full_scale(port) / UNIT[sample]
    low, high = port.get("rails", [port["low"], port["high"]])
    volts = min(max(volts, exact(low)), exact(high))
    want = min((volts - exact(port["low"])) / step_of(port), 2 ** port["bits"] - 1)
    return abs(got - want) > Fraction(1, 2) + Fraction(1, 100 if sample[0] == "f" else 10000)


def check(top, number, sample):
    inside, outside = PORTS[number]
    name = f"codes_{number}_{sample}"
    stage = stage_of(name, sample, signal={"input": in_volts(inside), "output": in_volts(outside)})
    stage["arithmetic"]["code"] = "standalone" if number % 2 else "runtime"
    built = build(stage, f"{top}/{name}")
    step = {"q15": "3", "q31": "(1LL << 17) + 3 * i % 5"}.get(sample, "(1 / 2500.0)")
    count = {"q15": 10923, "q31": 16383}.get(sample, 3000)
    last = 2 ** inside["bits"] - 1
    values = dict(name=name, last=last, count=count, step=step, type=TYPES[sample])
    own = [file for file in sources(built["dir"]) if "small" not in file]
    lines = small_program(built["dir"], PROGRAM % values, own, FLAGS).stdout.splitlines()
    bad, codes = [], set()
    for line in lines:
        kind, first, second = line.split()
        code, y = int(first), Fraction(float(second))
        if kind == "to":
            codes.add(code)
        wrong = wrong_code if kind == "to" else wrong_sample
        if wrong(sample, *((outside, y, code) if kind == "to" else (inside, code, y))):
            bad.append(line)
    complete = len(lines) == last + 1 + 2 * count and len(codes) > 300
    what = f"{sample}, converters {number}: {len(lines)} codes and samples to the nearest"
    tap.check(not bad and complete, what, "; ".join(bad[:3]))


with tempfile.TemporaryDirectory() as folder:
    for pair in range(len(PORTS)):
        for word in UNIT:
            check(folder, pair, word)
tap.done()
