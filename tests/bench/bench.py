# SPDX-License-Identifier: GPL-3.0-or-later
"""`make bench`: what emitted code costs, beside the yardstick and the floor of the arithmetic.

Per sample and section, in blocks of 64: instructions on Arm and RISC-V, cycles on AVR, all exact and
repeatable. Writes tests/bench/table.md (which README quotes) and tests/bench/counts.json (which
tests/bench/test_counts.py pins) with --write. Then, as measured here and now: how long the program
takes for each example, and samples per second of emitted code on this machine.
Usage: bench.py [--write] [TARGET ...]"""
import json
import os
import sys

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
import measure  # noqa: E402
import harness  # noqa: E402 (measure knows where)

HERE = os.path.dirname(os.path.abspath(__file__))
COUNTS = (1, 2, 4, 8)

# Paper floors, clips kept and proved away: what the arithmetic of one section must cost at least, its
# load and store included. Worked out in tests/bench/FLOORS.md.
FLOORS = {
    "cortex-m0": {"q15": (23, 20), "q31": (125, 120)},
    "cortex-m3": {"q15": (8, 8), "q31": (13, 9)},
    "cortex-m4f": {"q15": (6, 5.5), "q31": (13, 9), "float32": (9.5, 9.5)},
    "cortex-m55": {"q15": (6, 5.5), "q31": (8, 8), "float32": (9.5, 9.5)},
    "rv32imac": {"q15": (13.5, 11.5), "q31": (34.5, 32.5)},
    "avr": {"q15": (126, 124), "q31": (520, 515)},
}
for name, same in (("cortex-m7", "cortex-m4f"), ("cortex-m33", "cortex-m4f"), ("rv32imafc", "rv32imac")):
    FLOORS[name] = dict(FLOORS[same], float32=(9.5, 9.5))


def measure_target(target, counts=COUNTS):
    """{"q15 kept 4": [block, step, yardstick]} in instructions for 64 samples."""
    got = {}
    for sample in measure.formats(target):
        for proved in (0, 1) if sample[0] == "q" else (0,):
            for n in counts:
                sections = [measure.section(k, sample, proved) for k in range(n)]
                row = measure.count(target, sample, sections, tag=f"-{proved}")
                got[f"{sample} {'proved' if proved else 'kept'} {n}"] = list(row[:3])
    return got


def lines(name, got):
    """Rows of the table for one target."""
    for sample in ("float32", "q31", "q15"):
        for kind in ("kept", "proved"):
            if f"{sample} {kind} 1" not in got:
                continue
            per = [got[f"{sample} {kind} {n}"][0] / 64 / n for n in COUNTS]
            four = got[f"{sample} {kind} 4"]
            clamps = {"kept": "clamped", "proved": "proved not to clip"}[kind] if sample[0] == "q" else ""
            yield (f"| {name} | {sample} | {clamps} | {' / '.join(f'{v:.1f}' for v in per)} | {four[1] / 256:.1f} | "
                   f"{four[2] / 256:.1f} | {FLOORS[name][sample][kind == 'proved']:g} | {four[2] / four[0]:.1f} |")


HEAD = """| target | format | | 1 / 2 / 4 / 8 sections | step, 4 | yardstick, 4 | floor | yardstick / ours |
| --- | --- | --- | --- | --- | --- | --- | --- |"""


def main():
    names = [a for a in sys.argv[1:] if not a.startswith("--")]
    every, rows = {}, []
    print(HEAD, flush=True)
    for target in harness.present(names or None):
        if target.name == "host":
            continue
        every[target.name] = measure_target(target)
        for line in lines(target.name, every[target.name]):
            rows.append(line)
            print(line, flush=True)
    if "--write" in sys.argv and not names:
        with open(HERE + "/table.md", "w", encoding="utf-8") as file:
            file.write("Instructions a sample and section (AVR: cycles), blocks of 64, `code: standalone`, -O2; made by "
                       "`make bench-write`.\n\n" + HEAD + "\n" + "\n".join(rows) + "\n")
        with open(HERE + "/counts.json", "w", encoding="utf-8") as file:
            json.dump(every, file, indent=1, sort_keys=True)
            file.write("\n")
    if not names:
        import host
        import circuits_bench
        host.main()
        circuits_bench.main()


if __name__ == "__main__":
    main()
