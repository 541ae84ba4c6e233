# SPDX-License-Identifier: GPL-3.0-or-later
"""Fits the cost model of every part: measures stages of each shape and writes the `cost` map of
targets/<name>/settings.yaml. Usage: fit.py [TARGET ...]; tests/bench/test_cost.py checks the result.

A row is [a section, what a proof against clipping changes, what a right shift of b changes, what
first order changes, a cascade as such]: instructions (AVR: cycles) a sample, in blocks of 64; then
[a section, all else]: bytes of flash; then bytes of stack, which floats of the library make deeper."""
import os
import re
import sys

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
import measure  # noqa: E402
import harness  # noqa: E402 (measure knows where)

MARK = "# Fitted by tests/bench/fit.py to what the emulator counts and `size` prints."


def shapes(target):
    """key: (sample, bits, structure, standalone)."""
    rows = {}
    for code, standalone in (("", 1), ("runtime-", 0)):
        for sample in ("q15", "q31"):
            for bits in (16, 32):
                rows[f"{code}{sample}-{bits}-direct-1"] = (sample, bits, "direct-1", standalone)
            own = 16 if sample == "q15" else 32
            rows[f"{code}{sample}-direct-1-shaped"] = (sample, own, "direct-1-shaped", standalone)
            rows[f"{code}{sample}-coupled"] = (sample, own, "coupled", standalone)
        for sample in ("float32", "float64"):
            if (target.name, sample) != ("avr", "float64"):
                rows[f"{code}{sample}-transposed-2"] = (sample, 0, "transposed-2", standalone)
                rows[f"{code}{sample}-direct-1"] = (sample, 0, "direct-1", standalone)
    return rows


def measured(target, shape, n, tag, **how):
    sample, bits, structure, standalone = shape
    sections = [measure.section(k, sample, how.get("proved", 0), how.get("shift", 0), structure, bits or None, how.get("order", 2))
                for k in range(n)]
    got = measure.count(target, sample, sections, tag=f"fit{tag}", bits=bits, standalone=standalone)
    return got[0] / 64, got[4], got[3]


def row(target, key, shape):
    structure, fixed = shape[2], shape[0][0] == "q"
    one, flash_one, _ = measured(target, shape, 1, key)
    four, flash_four, stack = measured(target, shape, 4, key)
    section = (four - one) / 3
    delta = lambda **how: (measured(target, shape, 4, key, **how)[0] - four) / 4
    cycles = [section, delta(proved=1) if fixed else 0, delta(shift=2) if fixed and structure != "coupled" else 0,
              delta(order=1) if structure != "coupled" else 0, one - section]
    per_section = (flash_four - flash_one) / 3
    return cycles, [per_section, flash_one - per_section, stack]


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
