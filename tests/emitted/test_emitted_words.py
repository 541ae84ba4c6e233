# SPDX-License-Identifier: GPL-3.0-or-later
"""Emitted C of every format, structure, rounding and overflow, from drawn words, against the
simulation: compiled strictly by gcc and clang at several levels, as C++, and with UBSan."""
import random
import tempfile

from words import coupled, direct, real, single
from emitted import UBSAN, compile_strictly, emit, run, tap

random.seed(2)
LONG = 300


def stages(folder):
    number = 0
    for sample in ("q15", "q31"):
        for bits in (16, 32):
            for kind in ("direct", "shaped", "coupled", "mixed"):
                for standalone in (0, 1):
                    number += 1
                    loud = number % 3 != 0
                    if kind == "mixed":
                        sections = [direct(sample, bits, False, 0, loud), coupled(sample, bits, loud),
                                    direct(sample, bits, True, 2, False), direct(sample, bits, False, 1, False)]
                    elif kind == "coupled":
                        sections = [coupled(sample, bits, loud), coupled(sample, bits, False)]
                    else:
                        sections = [direct(sample, bits, kind == "shaped", order, loud)
                                    for order in random.choice([[2], [2, 2], [1, 2, 2]])]
                    yield dict(sample=sample, bits=bits, standalone=standalone, sections=sections,
                               truncate=number % 2, wrap=int(number % 5 == 0))
    for sample in ("float32", "float64"):
        for structure in ("transposed-2", "direct-1"):
            for standalone in (0, 1):
                sections = [real(sample == "float32", structure, order) for order in random.choice([[2], [0, 1, 2], [2, 2, 1]])]
                yield dict(sample=sample, bits=0, standalone=standalone, sections=sections)


def drawn(sample):
    """An input for the comparison with the simulation: quiet, loud, and full-scale stretches."""
    full = {"q15": 32767, "q31": 2**31 - 1}.get(sample)
    values = [random.uniform(-1, 1) * (0.01 if i % 100 < 30 else 1) for i in range(LONG)]
    values += [1 if (i // 9) % 2 else -1 for i in range(100)]
    if full:
        return [round(v * full) for v in values]
    return [single(v) for v in values]


def main():
    with tempfile.TemporaryDirectory() as top:
        todo = list(stages(top))
        for i, stage in enumerate(todo):
            stage.update(name=f"stage_{i}", dir=f"{top}/{i}", length=LONG, x=drawn(stage["sample"]))
            stage["settle"] = stage["x"][5] if i % 2 else None
        replies = emit(todo)
        configurations = [("gcc", ("-O2",)), ("clang", ("-Os",)), ("gcc", ("-O0", *UBSAN)), ("clang", ("-O2", *UBSAN)),
                          ("gcc", ("-Os",)), ("clang", ("-O0",))]
        clips = clean = right = tested = 0
        for i, (stage, reply) in enumerate(zip(todo, replies)):
            chosen = configurations if tap.FULL else [configurations[(2 * i + j + i // 3) % 6] for j in range(2)]
            for j, (compiler, flags) in enumerate(chosen):
                tested += 1
                what = f"{i} {stage['sample']} {stage['bits']} {[s['structure'] for s in stage['sections']]} " \
                       f"standalone {stage['standalone']} {compiler} {flags}"
                message = compile_strictly(stage, compiler, flags)
                if message:
                    tap.check(False, "compiles: " + what, message[:600])
                    continue
                clean += 1
                start = "rest" if stage["settle"] is None else repr(stage["settle"])
                selftest, y, clipped, status, errors = run(stage, stage["x"], start)
                good = selftest == 0 and status == 0 and not errors and y == reply["y"]
                right += good
                if not good:
                    first = next((n for n, (p, q) in enumerate(zip(y, reply["y"])) if p != q), None)
                    tap.check(False, "equals the simulation: " + what,
                              f"selftest {selftest} status {status} first {first} {errors[:300]}")
                clips += clipped or 0
        tap.check(clean == tested, f"{clean} of {tested} builds are clean")
        tap.check(right == tested, f"{right} of {tested} equal the simulation in step, block, in place, settle and self-test")
        tap.check(clips > 1000, f"the inputs make nodes clip ({clips} times)")
        named = sum(sum(r["clips"].values()) for r in replies)
        tap.check(named > 1000, f"the vectors make nodes clip ({named} times)")
        plus = 0
        for stage in todo[::5]:
            message = compile_strictly(stage, "g++", ("-O1",), "cpp", language=("-x", "c++"))
            plus += not message
            if message:
                tap.check(False, f"C++: {stage['name']}", message[:600])
        tap.check(plus == len(todo[::5]), f"{plus} stages are part of a C++ program")
    tap.done()


main()
