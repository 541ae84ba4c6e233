# SPDX-License-Identifier: GPL-3.0-or-later
"""The examples that start from a circuit, all the way: the emitted C on the emulated part gives the
vectors, and the vectors' frequency response is that of the schematic, solved by numpy alone."""
import csv
import os
import sys

import numpy as np
import yaml

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), "..", "outside"))
import circuits  # noqa: E402
import harness  # noqa: E402
import tap  # noqa: E402

MAIN = r"""
#include "part.h"
#include "%(name)s_selftest.h"
int main(void)
{
    long failed = %(name)s_selftest();
    part_write(failed ? "not ok\n" : "ok\n");
    return failed ? 1 : 0;
}
"""
PREFIX = {"p": 1e-12, "n": 1e-9, "u": 1e-6, "m": 1e-3, "k": 1e3, "M": 1e6}

# name of the folder, samples until its impulse response is over, frequencies, limits in dB and degrees
EXAMPLES = [
    ("rudder-loop", 4000, [2, 20, 102.6, 500, 1500], 0.5, 5),
    ("mooring-load", 60000, [0.1, 0.16, 1, 10, 100, 400], 0.1, 1),
    ("echo-antialias", 2000, [20, 1000, 5000, 8000, 12000], 0.5, 2),
    ("wardroom-gramophone", 120000, [20, 50, 500, 1000, 2122, 10000, 20000], 0.3, None),
]


def quantity(text):
    """A part's value as the examples write it: 4k7, 10n, 2n83, 680, 10 MHz."""
    text = str(text).replace(" ", "").replace("Hz", "").replace("ohm", "")
    for letter, factor in PREFIX.items():
        if letter in text:
            whole, _, rest = text.partition(letter)
            return float(f"{whole}.{rest or 0}") * factor if "." not in whole else float(whole) * factor
    return float(text)


def schematic(stage):
    """The stage's circuit as lines of tests/outside/circuits.py."""
    c = stage["analog"]["circuit"]
    lines = [f"V {c['input']['voltage']}"]
    for name, part in c["parts"].items():
        if "op-amp" in part:
            op = part["op-amp"]
            real = "" if op == "ideal" else (f" {quantity(op['gain-bandwidth'])!r} "
                                             f"{10 ** (float(op['dc-gain'].split()[0]) / 20)!r} "
                                             f"{op.get('output-resistance', 0)}")
            lines.append(f"U {name} {part['plus']} {part['minus']} {part['out']}{real}")
        else:
            kind = "resistor" if "resistor" in part else "capacitor"
            lines.append(f"{kind[0].upper()} {name} {' '.join(part['between'])} {quantity(part[kind])!r}")
    return lines + [f"O {c['output']}"]


def program(*args):
    ran = tap.polewright(*args)
    if ran.returncode:
        raise RuntimeError(f"{args}: {ran.returncode}\n{ran.stderr}")
    return ran


def on_the_part(target, name, folder, out):
    with open(out + "/main.c", "w", encoding="utf-8") as file:
        file.write(MAIN % {"name": name})
    sources = sorted(os.path.join(folder, f) for f in os.listdir(folder) if f.endswith(".c"))
    objects = [target.compile(s, f"{out}/{os.path.basename(s)}.o", "-O2", [*harness.STRICT, f"-I{folder}"]) for s in sources]
    built = target.build(f"{out}/{name}", [out + "/main.c"], flags=["-std=gnu99", "-Wno-pedantic", f"-I{folder}"],
                         objects=objects)
    ran = target.run(built)
    tap.check(ran.returncode == 0 and ran.stdout.strip() == "ok", f"{name}: the self-test passes on {target.name}",
              f"{ran.returncode} {ran.stdout!r} {ran.stderr[:200]!r}")


def read_impulse(path):
    with open(path, encoding="utf-8", newline="") as file:
        rows = csv.DictReader(line for line in file if not line.startswith("#"))
        data = [(float(r["input"]), float(r["expected"])) for r in rows]
    return np.array(data).T


def against_the_schematic(stage, path, out, length, frequencies, limit_db, limit_deg):
    name = stage["stage"]
    program("vectors", path, "-o", out + "/long", "--set", "vectors.signals=[impulse]", "--set", f"vectors.length={length}")
    x, y = read_impulse(out + "/long/vectors/impulse.csv" if os.path.exists(out + "/long/vectors") else out + "/long/impulse.csv")
    signal = tap.report(open(path, encoding="utf-8").read())["signal"]
    scale = signal["output_full_scale_v"] / signal["input_full_scale_v"]
    rate = float(stage["rate"].split()[0]) * 1000
    lines = schematic(stage)
    integrates = abs(y[-1]) > 1e-6 * np.abs(y).max()     # what is left is a step: its difference ends
    worst_db = worst_deg = 0
    for hz in frequencies:
        z = np.exp(-2j * np.pi * hz / rate * np.arange(len(y)))
        h = (np.diff(y, prepend=0) @ z) / (1 - z[1]) if integrates else y @ z
        h = h / (x @ z) * scale
        true = circuits.nodal(lines, 2j * np.pi * hz)
        worst_db = max(worst_db, abs(20 * np.log10(abs(h / true))))
        worst_deg = max(worst_deg, abs(np.degrees(np.angle(h / true))))
    tap.check(worst_db < limit_db, f"{name}: the vectors' magnitude is the schematic's", f"{worst_db:.4f} dB")
    if limit_deg:
        tap.check(worst_deg < limit_deg, f"{name}: and their phase", f"{worst_deg:.3f} deg")


def main():
    parts = harness.present(["cortex-m4f"])
    for folder, length, frequencies, limit_db, limit_deg in EXAMPLES:
        path = f"{tap.ROOT}/examples/{folder}/stage.yaml"
        with open(path, encoding="utf-8") as file:
            stage = yaml.safe_load(file)
        out = f"{tap.ROOT}/build/parts/circuits/{folder}"
        os.makedirs(out, exist_ok=True)
        program("build", path, "-o", out + "/c", "--set", "vectors.length=256")
        for target in parts:
            on_the_part(target, stage["stage"], out + "/c", out)
        against_the_schematic(stage, path, out, length, frequencies, limit_db, limit_deg)
    tap.done()


main()
