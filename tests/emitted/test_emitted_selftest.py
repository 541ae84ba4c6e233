# SPDX-License-Identifier: GPL-3.0-or-later
"""The self-test: a wrong sample is named, contraction stays within the stated tolerance."""
import re
import tempfile

from built import build, compiled, stage_of, text_of
from emitted import compile_strictly, run, tap


def contraction(top):
    if "fma" not in text_of("/proc/cpuinfo"):
        return tap.check(True, "contraction # SKIP no fused multiply-add here")
    moved = 0
    for sample in ("float32", "float64"):
        stage = stage_of(f"fused_{sample}", sample)
        built = build(stage, f"{top}/fused_{sample}")
        for compiler in ("gcc", "clang"):
            flags = ("-O2", "-mfma", "-ffp-contract=fast")
            results = []
            for extra in ((), (f"-D{built['name'].upper()}_TOLERANCE=0",)):
                message = compile_strictly(built, compiler, (*flags, *extra))
                results.append(None if message else run(built, [0.0], repeats=0)[0])
            moved += results[1] != 0
            tap.check(
                results[0] == 0,
                f"{sample} by {compiler}, contracted, is within the stated tolerance",
                str(results),
            )
        message = compile_strictly(
            built, "gcc", ("-O2", "-mfma", f"-D{built['name'].upper()}_TOLERANCE=0")
        )
        tap.check(
            not message and run(built, [0.0], repeats=0)[0] == 0,
            f"{sample} uncontracted is bit for bit",
        )
    tap.check(moved > 0, f"contraction does move samples ({moved} of 4 builds)")


def caught(top):
    """A wrong expected sample is found at its index."""
    built = compiled(stage_of("caught"), f"{top}/caught")
    path = f"{built['dir']}/caught_selftest.c"
    text = text_of(path)
    at = text.index("caught_noise_expected[200] = {")
    values = re.findall(r"-?\d+", text[at + 30 : text.index("};", at)])
    head, tail = text[: at + 30], text[text.index("};", at) :]
    values[123] = str(int(values[123]) + 1)
    with open(path, "w", encoding="utf-8") as file:
        file.write(head + ", ".join(values) + tail)
    message = compile_strictly(built)
    tap.check(
        not message and run(built, [0], repeats=0)[0] == 1 + 4 * 200 + 123,
        "the self-test names the sample that differs",
        message[:200],
    )


with tempfile.TemporaryDirectory() as folder:
    contraction(folder)
    caught(folder)
tap.done()
