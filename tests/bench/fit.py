# SPDX-License-Identifier: GPL-3.0-or-later
"""Fits the cost model of every part: measures stages of each shape and writes the `cost` map of
targets/<name>/settings.yaml. Usage: fit.py [TARGET ...]; tests/bench/test_cost.py checks the result.

A row is [a section, what a proof against clipping changes, what a right shift of b changes, what
both change together besides, what first order changes, what feedback of one error instead of two
changes, a cascade as such]: instructions (AVR: cycles)
a sample, in blocks of 64; bytes of flash [a section, a kernel, a proved section, its kernel, all
else]; and bytes of stack, which floats of the library make deeper."""
import os
import re
import sys

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
import measure  # noqa: E402
import harness  # noqa: E402 (measure knows where)

MARK = "# Fitted by tests/bench/fit.py to what the emulator counts and `size` prints."


def shapes(target):
    """key: (sample, bits, structure, standalone, wrap)."""
    rows = {}
    for code, standalone in (("", 1), ("runtime-", 0)):
        for sample in ("q15", "q31"):
            for bits in (16, 32):
                rows[f"{code}{sample}-{bits}-direct-1"] = (sample, bits, "direct-1", standalone, 0)
            own = 16 if sample == "q15" else 32
            rows[f"{code}{sample}-direct-1-shaped"] = (sample, own, "direct-1-shaped", standalone, 0)
            rows[f"{code}{sample}-coupled"] = (sample, own, "coupled", standalone, 0)
            if not code and sample == "q15":
                rows["q15-wrap-direct-1"] = (sample, 16, "direct-1", 1, 1)
        for sample in ("float32", "float64"):
            if (target.name, sample) != ("avr", "float64"):
                rows[f"{code}{sample}-transposed-2"] = (sample, 0, "transposed-2", standalone, 0)
                rows[f"{code}{sample}-direct-1"] = (sample, 0, "direct-1", standalone, 0)
    return rows


def measured(target, shape, n, tag, **how):
    """(instructions a sample, bytes of flash, of stack); shift may be a list."""
    sample, bits, structure, standalone, wrap = shape
    shift = how.get("shift", 0)
    sections = [measure.section(k, sample, how.get("proved", 0), shift[k] if isinstance(shift, list) else shift, structure,
                                bits or None, how.get("order", 2), how.get("errors", 2)) for k in range(n)]
    got = measure.count(target, sample, sections, tag=f"fit{tag}", bits=bits, standalone=standalone, wrap=wrap)
    return got[0] / 64, got[4], got[3]


def line(points):
    """(slope, intercept) with the smallest largest relative error at the points {n: cost}."""
    best = (1e9, 0, 0)
    slopes = [(points[b] - points[a]) / (b - a) for a in points for b in points if a < b]
    for k in range(201):
        slope = min(slopes) + (max(slopes) - min(slopes)) * k / 200
        for intercept in (v - slope * n for n, v in points.items()):
            for lift in (0, 0.25, 0.5):                       # between this point and the worst one
                low = min(points.items(), key=lambda p: slope * p[0] + intercept - p[1])
                at = intercept + lift * (low[1] - slope * low[0] - intercept)
                worst = max(abs((slope * n + at) / v - 1) for n, v in points.items())
                best = min(best, (worst, slope, at))
    return best[1:]


def row(target, key, shape):
    structure, fixed = shape[2], shape[0][0] == "q"
    direct, shifts = structure != "coupled", fixed and structure != "coupled"
    got = {n: measured(target, shape, n, key) for n in (1, 2, 4)}
    section, cascade = line({n: v[0] for n, v in got.items()})
    four = got[4]
    other = lambda **how: measured(target, shape, 4, key, **how)
    proved = other(proved=1) if fixed else four
    right = other(shift=2) if shifts else four
    both = other(shift=2, proved=1) if shifts else proved
    first = other(order=1) if direct else four
    one_error = other(errors=1) if structure == "direct-1-shaped" else four
    mixed = other(shift=[0, 2, 0, 2])[1] - (four[1] + right[1]) / 2 if shifts else 0
    mixed_proved = other(shift=[0, 2, 0, 2], proved=1)[1] - (proved[1] + both[1]) / 2 if shifts else 0
    one_proved = measured(target, shape, 1, key, proved=1)[1] if fixed else got[1][1]
    cycles = [section, *((v[0] - four[0]) / 4 for v in (proved, right)), (both[0] - proved[0] - right[0] + four[0]) / 4,
              (first[0] - four[0]) / 4, (one_error[0] - four[0]) / 4, cascade]
    flash = [(four[1] - got[1][1]) / 3, max(0, mixed), (proved[1] - one_proved) / 3, max(0, mixed_proved)]
    rest = (got[1][1] - flash[0] - flash[1] + one_proved - flash[2] - flash[3]) / 2
    return cycles, [*flash, rest, four[2]]


def write(target, rows):
    path = f"{target.root}/{target.name}/settings.yaml"
    with open(path, encoding="utf-8") as file:
        text = file.read()
    text = re.sub(r"\n*(# Fitted by|cost:).*", "", text, flags=re.S).rstrip("\n") + f"\n{MARK}\ncost:\n"
    for key, (cycles, flash) in rows.items():
        text += f"  {key}: [{', '.join(f'{v:.2f}' for v in cycles)}, {', '.join(f'{v:.0f}' for v in flash)}]\n"
    with open(path, "w", encoding="utf-8") as file:
        file.write(text)


if __name__ == "__main__":
    for target in harness.present(sys.argv[1:] or None):
        if target.name != "host":
            write(target, {key: row(target, key, shape) for key, shape in shapes(target).items()})
            print(target.name, "fitted", flush=True)
