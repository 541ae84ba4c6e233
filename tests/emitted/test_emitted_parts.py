# SPDX-License-Identifier: GPL-3.0-or-later
"""Emitted stages on every part that is here: the self-test of the folder, built with the part's own
compiler under strict flags and run under its emulator, every sample equal."""
import os
import random
import sys
import tempfile

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), "../targets"))
import harness
import words
from emitted import emit, sources, tap

random.seed(5)
MAIN = """
#include "part.h"
#include "%(name)s_selftest.h"
int main(void)
{
    long bad = %(name)s_selftest();
    return bad == 0 ? 42 : bad < 40 ? (int)bad : 41;
}
"""


def stages(target):
    for sample, bits in (("q15", 16), ("q15", 32), ("q31", 32), ("q31", 16)):
        loud = bits == 16
        for standalone in (1, 0):
            yield dict(sample=sample, bits=bits, standalone=standalone, wrap=0,
                       sections=[words.direct(sample, bits, False, 2, loud), words.direct(sample, bits, False, 1, False)])
        if tap.FULL or (sample, bits) in (("q15", 16), ("q31", 32)):
            yield dict(sample=sample, bits=bits, standalone=1, truncate=1,
                       sections=[words.coupled(sample, bits, loud), words.direct(sample, bits, True, 2, False)])
    for sample in ("float32", "float64"):
        if sample == "float64" and "double" not in target.settings["has"] and not tap.FULL:
            continue
        yield dict(sample=sample, bits=0, standalone=int(sample == "float32"),
                   sections=[words.real(sample == "float32", "transposed-2", 2)])


def main():
    with tempfile.TemporaryDirectory() as top:
        for target in harness.present():
            todo = list(stages(target))
            for i, stage in enumerate(todo):
                stage.update(name=f"on_{i}", dir=f"{top}/{target.name}/{i}", length=30 if target.name == "avr" else 90,
                             target=target.name)
            replies = emit(todo)
            good = clips = 0
            for stage, reply in zip(todo, replies):
                if target.name == "avr" and stage["sample"] == "float64":
                    continue
                main_c = f"{stage['dir']}/main_part.c"
                with open(main_c, "w", encoding="utf-8") as file:
                    file.write(MAIN % stage)
                what = f"{target.name} {stage['sample']} {stage['bits']} standalone {stage['standalone']}"
                try:
                    built = target.build(f"{stage['dir']}/run", [*sources(stage["dir"])])
                    status = target.run(built).returncode
                except RuntimeError as error:
                    status = str(error)
                good += status == 42
                clips += sum(reply["clips"].values())
                if status != 42:
                    tap.check(False, what, f"{status}")
            ran = len([s for s in todo if not (target.name == "avr" and s["sample"] == "float64")])
            tap.check(good == ran and clips > 0, f"{target.name}: {good} of {ran} stages equal their vectors ({clips} clips)")
    tap.done()


main()
