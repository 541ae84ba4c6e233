# SPDX-License-Identifier: GPL-3.0-or-later
"""Instructions (AVR: cycles) of emitted code on every part, exact and repeatable: what `make bench`
prints, the tests pin and the cost model is fitted to."""
import json
import math
import os
import struct
import subprocess
import sys

HERE = os.path.dirname(os.path.abspath(__file__))
sys.path.insert(0, os.path.join(HERE, "..", "targets"))
import harness  # noqa: E402
from tap import ROOT  # noqa: E402

PROBE = ROOT + "/build/release/outside/probe_emit"
TYPES = {"q15": "int16_t", "q31": "int32_t", "float32": "float", "float64": "double"}

# Eight generic sections, five different values each; L1 gain below 1, so that none of them can clip.
POLES = [(0.83, 0.35), (0.71, 0.9), (0.88, 0.55), (0.64, 1.4), (0.79, 0.21), (0.9, 1.1), (0.55, 0.7), (0.75, 1.9)]


def reals(k):
    """b and a of section k."""
    radius, angle = POLES[k]
    a = [-2 * radius * math.cos(angle), radius * radius]
    raw = [0.31 + 0.02 * k, 0.17 + 0.03 * k, 0.23 - 0.011 * k]
    x1 = x2 = y1 = y2 = total = 0.0
    for i in range(3000):
        x = 1.0 if i == 0 else 0.0
        y = raw[0] * x + raw[1] * x1 + raw[2] * x2 - a[0] * y1 - a[1] * y2
        x2, x1, y2, y1 = x1, x, y1, y
        total += abs(y)
    return [v * 0.9 / total for v in raw], a


def section(k, sample, proved, shift=0, structure=None, bits=None, order=2, errors=2):
    """A section of this shape; shift: how many fraction bits b has more than a."""
    b, a = reals(k)
    if order == 1:
        b, a = [b[0], b[1], 0], [-0.5 - 0.04 * k, 0]
    if sample[0] == "f":
        to32 = lambda v: struct.unpack("f", struct.pack("f", v))[0] if sample == "float32" else v
        return {"structure": structure or "transposed-2", "order": order, "b": [to32(v) for v in b], "a": [to32(v) for v in a]}
    f = (bits or {"q15": 16, "q31": 32}[sample]) - 2
    if structure == "coupled":
        radius, angle = POLES[k]
        sigma, omega = radius * math.cos(angle), radius * math.sin(angle)
        return dict({name: round(v * 2.0 ** f) for name, v in dict(sigma=sigma, omega=omega, g=0.2 + 0.013 * k,
                                                                  c1=0.83 - 0.07 * k, c2=-0.71 + 0.05 * k, d=0.37 - 0.03 * k).items()},
                    structure="coupled", order=2, af=f, cf=f, cannot_clip=int(proved))
    return {"structure": structure or "direct-1", "order": order, "b": [round(v * 2.0 ** (f + shift)) for v in b],
            "a": [round(v * 2.0 ** f) for v in a], "bf": f + shift, "af": f, "cannot_clip": int(proved),
            "k": [1, errors - 1] if structure == "direct-1-shaped" else [0, 0]}


def emit(target, folder, name, sample, sections, bits=None, **more):
    stage = dict(name=name, sample=sample, bits=bits or {"q15": 16, "q31": 32}.get(sample, 0), sections=sections,
                 length=4, dir=folder, target=target.name, **dict(dict(standalone=1), **more))
    ran = subprocess.run([PROBE], input=json.dumps(stage) + "\n", capture_output=True, text=True)
    if ran.returncode:
        raise RuntimeError(ran.stderr)
    return json.loads(ran.stdout)


def yard(sample, sections):
    """Macros for the yardstick: its words are those of the stage, feedback negated; none for other shapes."""
    if sample == "float64" or any("sigma" in s for s in sections):
        return []
    rows = ", ".join("{" + ", ".join(repr(float(v)) + "f" if sample == "float32" else str(v)
                                    for v in [*s["b"], *(-w for w in s["a"])]) + "}" for s in sections)
    name = {"float32": "float"}.get(sample, sample)
    return [f"-DYARD_WORDS={{{rows}}}", f"-DYARD_CALL=plain_{name}", f"-DYARD_WORD={TYPES[sample]}",
            f"-DYARD_STATE={TYPES[sample]}", f"-DYARD_DELAYS={2 if sample == 'float32' else 4}"]


def count(target, sample, sections, optimise="-O2", tag="", **more):
    """(block of 64, 64 steps, yardstick, stack bytes, bytes of code and constants) for the sections."""
    folder = f"{ROOT}/build/parts/bench/{target.name}/{sample}{len(sections)}{tag}"
    emit(target, folder, "bench", sample, sections, **more)
    flags = [f"-I{folder}", f"-I{HERE}", "-DSTAGE=bench", f"-DSAMPLE={TYPES[sample]}", f"-DSECTIONS={len(sections)}",
             '-DHEADER="bench.h"', "-DQUIET=" + {"q15": "100", "q31": "((SAMPLE)1 << 22)", "float32": "0.001f",
                                                      "float64": "0.001"}[sample],
             *yard(sample, sections), "-std=c99", "-ffp-contract=off"]
    for left in (f for f in os.listdir(folder) if f.startswith("pw_") and more.get("standalone", 1)):
        os.remove(f"{folder}/{left}")
    emitted = target.compile(folder + "/bench.c", folder + "/bench.o", optimise, flags)
    runtime = [target.compile(f"{folder}/{f}", f"{folder}/{f}.o", optimise, flags)
               for f in os.listdir(folder) if f.startswith("pw_") and f.endswith(".c")]
    yardstick = target.compile(HERE + "/yardstick.c", folder + "/yardstick.o", "-O2", flags)
    program = target.build(folder + "/program", [HERE + "/bench_main.c"], "-O2", flags, strict=False,
                           objects=[emitted, yardstick, *runtime])
    ran = target.run(program)
    words = ran.stdout.split()
    if ran.returncode or len(words) != 4:
        raise RuntimeError(f"{target.name} {sample}: {ran.returncode} {ran.stdout!r} {ran.stderr[:300]}")
    return (*map(int, words), sum(flash_of(target, o) for o in [emitted, *runtime]))


def flash_of(target, path):
    """Code and constants of an object file, from `size`."""
    tool = target.settings["compiler"].replace("gcc", "size")
    out = subprocess.run([tool, path], capture_output=True, text=True, check=True).stdout.splitlines()[1].split()
    return int(out[0]) + int(out[1])


def formats(target):
    """The formats that a row is measured in; soft floats cannot be helped by code shape, and are left out."""
    return ["q15", "q31"] + (["float32"] if target.has("float") and target.name != "host" else [])


def per(total, sections):
    return total / 64 / sections
