# SPDX-License-Identifier: GPL-3.0-or-later
"""The cost model against what the emulator counts and `size` prints, for stages that it was not
fitted to: instructions (AVR: cycles) a sample within 15 %, or 20 % where a stage mixes forms (what
the compiler inlines then is not foreseen), flash within a factor of 2.6 (what the
compiler makes of constants is not foreseen). Prints model against measured.

The stages of MISSED are known to be farther off, a section or two that the compiler makes shorter
than the model thinks: they are named one by one, judged against the error that was measured, and
have to leave the list when the model learns them."""
import os
import sys

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
import measure  # noqa: E402
import harness  # noqa: E402 (measure knows where)
import stages  # noqa: E402
from tap import FULL, check, done  # noqa: E402

NEAR, MIXED_NEAR = 0.15, 0.20
MISSED = {   # name of the stage: error of instructions that was measured, rounded up
    "avr": {"q15_16_direct_1_loud": 0.22, "q15_32_direct_1": 0.16},
    "cortex-m55": {"q31_wrap": 0.34},
    "rv32imac": {"q15_16_direct_1": 0.20, "q31_16_direct_1": 0.40, "q31_16_direct_1_loud": 0.42},
    "rv32imafc": {"q15_16_direct_1": 0.20, "q31_16_direct_1": 0.40, "q31_16_direct_1_loud": 0.42},
}
MISSED_FLASH = {"cortex-m0": {"q15_mixed": 0.64}}
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
    missed, missed_flash = MISSED.get(target.name, {}), MISSED_FLASH.get(target.name, {})
    for row, stage in zip(rows, wanted):
        if stage["name"] in missed:
            known = missed[stage["name"]]
            check(NEAR < abs(row[0]) <= known, f"{target.name}: {stage['name']} is off by what is known", f"{row[0]:+.1%}")
    for mixed, near in ((False, NEAR), (True, MIXED_NEAR)):
        errors = [abs(row[0]) for row, stage in zip(rows, wanted)
                  if stage["name"].endswith("mixed") == mixed and stage["name"] not in missed]
        check(max(errors) <= near, f"{target.name}: instructions of {len(errors)} {'mixed ' if mixed else ''}stages "
              f"within {near:.0%}", f"worst {max(errors):.1%}")
    flash = [row[1] for row, stage in zip(rows, wanted) if not -missed_flash.get(stage["name"], 0) <= row[1] < 0]
    low, high = min(flash), max(flash)
    check(near_flash(low) and near_flash(high), f"{target.name}: flash within a factor of 2.6", f"{low:.0%} to {high:+.0%}")
done()
