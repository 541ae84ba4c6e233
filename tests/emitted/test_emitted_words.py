# SPDX-License-Identifier: GPL-3.0-or-later
"""Emitted C of every format, structure, rounding and overflow, from drawn words, against the
simulation: compiled strictly by gcc and clang at several levels, as C++, and with UBSan."""
import random
import tempfile

from words import coupled, direct, real, single
from emitted import UBSAN, compile_strictly, emit, run, tap

random.seed(2)
LONG = 300
CONFIGURATIONS = [
    ("gcc", ("-O2",)),
    ("clang", ("-Os",)),
    ("gcc", ("-O0", *UBSAN)),
    ("clang", ("-O2", *UBSAN)),
    ("gcc", ("-Os",)),
    ("clang", ("-O0",)),
]


def fixed_sections(kind, sample, bits, loud):
    if kind == "mixed":
        return [
            direct(sample, bits, False, 0, loud),
            coupled(sample, bits, loud),
            direct(sample, bits, True, 2, False),
            direct(sample, bits, False, 1, False),
        ]
    if kind == "coupled":
        return [coupled(sample, bits, loud), coupled(sample, bits, False)]
    orders = random.choice([[2], [2, 2], [1, 2, 2]])
    return [direct(sample, bits, kind == "shaped", order, loud) for order in orders]


def fixed_stages():
    kinds = ("direct", "shaped", "coupled", "mixed")
    number = 0
    for sample in ("q15", "q31"):
        for bits in (16, 32):
            for kind in kinds:
                for standalone in (0, 1):
                    number += 1
                    stage = dict(sample=sample, bits=bits, standalone=standalone)
                    stage.update(truncate=number // 2 % 2, wrap=number // 3 % 2)
                    yield dict(stage, sections=fixed_sections(kind, sample, bits, number % 5 != 0))


def float_stages():
    for sample in ("float32", "float64"):
        for structure in ("transposed-2", "direct-1"):
            for standalone in (0, 1):
                orders = random.choice([[2], [0, 1, 2], [2, 2, 1]])
                sections = [real(sample == "float32", structure, order) for order in orders]
                yield dict(sample=sample, bits=0, standalone=standalone, sections=sections)


def drawn(sample):
    """An input for the comparison with the simulation: quiet, loud, and full-scale stretches."""
    full = {"q15": 2**15 - 1, "q31": 2**31 - 1}.get(sample)
    values = [random.uniform(-1, 1) * (0.01 if i % 100 < 30 else 1) for i in range(LONG)]
    values += [1 if (i // 9) % 2 else -1 for i in range(100)]
    return [round(v * full) for v in values] if full else [single(v) for v in values]


def small_state(section):
    """A state for the silence to start from, as a limit cycle leaves one: x1 x2 y1 y2 e1 e2."""
    half = 1 << (section["af"] - 1)
    errors = [random.randint(0, half - 1) for _ in range(2)]
    return [random.randint(-99, 99) for _ in range(4)] + errors


def chosen(number):
    """Every configuration in turn, two for a stage; all of them in the full run."""
    if tap.FULL:
        return CONFIGURATIONS
    return [CONFIGURATIONS[(2 * number + j + number // 3) % 6] for j in range(2)]


def try_out(stage, reply, compiler, flags):
    """(clean, right, clips) of one stage by one compiler; failures are told."""
    what = f"{stage['name']} {stage['sample']} {stage['bits']} standalone {stage['standalone']} "
    what += f"{[s['structure'] for s in stage['sections']]} {compiler} {flags}"
    message = compile_strictly(stage, compiler, flags)
    if message:
        tap.check(False, "compiles: " + what, message[:600])
        return False, False, 0
    total = 0
    for settle, play in zip(stage["settle"], reply["plays"]):
        start = "rest" if settle is None else repr(settle)
        selftest, y, clips, status, errors = run(stage, stage["x"], start, repeats=2)
        total += clips or 0
        right = selftest == 0 and status == 0 and not errors and y == play["y"]
        if not right or (clips or 0) != play["clips"]:
            first = next((n for n, (p, q) in enumerate(zip(y, play["y"])) if p != q), None)
            told = f"selftest {selftest} status {status} first {first} clips {clips} {errors[:300]}"
            tap.check(False, f"equals the simulation from {start}: {what}", told)
            return True, False, total
    return True, True, total


def as_cpp(stages):
    clean = 0
    for stage in stages:
        message = compile_strictly(stage, "g++", ("-O1",), "cpp", language=("-x", "c++"))
        clean += not message
        if message:
            tap.check(False, f"C++: {stage['name']}", message[:600])
    tap.check(clean == len(stages), f"{clean} stages are part of a C++ program")


def main(top):
    stages = [*fixed_stages(), *float_stages()]
    for i, stage in enumerate(stages):
        stage.update(name=f"stage_{i}", dir=f"{top}/{i}", length=LONG, x=drawn(stage["sample"]))
        stage["settle"] = [None, *stage["x"][5:9]]
        if stage["sample"][0] == "q":
            stage["state"] = [small_state(section) for section in stage["sections"]]
    replies = emit(stages)
    found = [
        try_out(stage, reply, *configuration)
        for i, (stage, reply) in enumerate(zip(stages, replies))
        for configuration in chosen(i)
    ]
    clean, right, clips = map(sum, zip(*found))
    tap.check(clean == len(found), f"{clean} of {len(found)} builds are clean")
    what = "equal the simulation: step, block, in place, settle, self-test"
    tap.check(right == len(found), f"{right} of {len(found)} {what}")
    tap.check(clips > 1000, f"the inputs make nodes clip ({clips} times)")
    named = sum(sum(reply["clips"].values()) for reply in replies)
    tap.check(named > 1000, f"the vectors make nodes clip ({named} times)")
    as_cpp(stages[::5])


with tempfile.TemporaryDirectory() as folder:
    main(folder)
tap.done()
