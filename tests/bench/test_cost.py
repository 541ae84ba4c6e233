# SPDX-License-Identifier: GPL-3.0-or-later
"""The cost model against what the emulator counts and `size` prints, for stages that it was not
fitted to: instructions (AVR: cycles) a sample within 15 %, or 20 % where a stage mixes forms (what
the compiler inlines then is not foreseen), flash within a factor of 2.6 (what the
compiler makes of constants is not foreseen). Prints model against measured."""
import os
import sys

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
import measure  # noqa: E402
import harness  # noqa: E402 (measure knows where)
import stages  # noqa: E402
from tap import FULL, check, done  # noqa: E402

NEAR, MIXED_NEAR = 0.15, 0.20
QUICK = ("q15_16_direct_4", "q31_32_direct_4_loud", "q15_mixed", "f32_1", "q31_integrator")


def near_flash(error):
    return -0.62 <= error <= 1.5


def compare(target, stage):
    """(relative error of instructions, of flash, a line)."""
    shape = {k: v for k, v in stage.items() if k not in ("name", "sample", "sections")}
    folder = f"{measure.ROOT}/build/parts/bench/{target.name}/estimate"
    guess = measure.emit(target, folder, "bench", stage["sample"], stage["sections"], **shape)
    got = measure.count(target, stage["sample"], stage["sections"], tag="-" + stage["name"], **shape)
    cycles = got[0] / 64
    return (guess["cycles"] / cycles - 1, guess["flash"] / got[4] - 1,
            f"{target.name:10} {stage['name']:24} {guess['cycles']:8.1f} {cycles:8.1f}   {guess['flash']:6d} {got[4]:6d}")


for target in harness.present(sys.argv[1:] or None):
    if target.name == "host":
        continue
    wanted = [s for s in stages.every(FULL) if (FULL or s["name"] in QUICK) and not (target.name == "avr" and s["sample"] == "float64")]
    rows = [compare(target, s) for s in wanted]
    print("# target     stage                       model measured    model   flash")
    for row in rows:
        print("# " + row[2] + ("" if abs(row[0]) <= NEAR else "   <- instructions") + ("" if near_flash(row[1]) else "   <- flash"))
    for mixed, near in ((False, NEAR), (True, MIXED_NEAR)):
        errors = [abs(row[0]) for row, stage in zip(rows, wanted) if stage["name"].endswith("mixed") == mixed]
        check(max(errors) <= near, f"{target.name}: instructions of {len(errors)} {'mixed ' if mixed else ''}stages "
              f"within {near:.0%}", f"worst {max(errors):.1%}")
    low, high = min(r[1] for r in rows), max(r[1] for r in rows)
    check(near_flash(low) and near_flash(high), f"{target.name}: flash within a factor of 2.6", f"{low:.0%} to {high:+.0%}")
done()
