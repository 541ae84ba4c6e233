# SPDX-License-Identifier: GPL-3.0-or-later
"""The part of `make bench` that depends on this machine: generator time, and host samples per second
of emitted code beside the yardstick. Best of several runs; other work on the machine shows."""
import glob
import os
import subprocess
import sys
import tempfile
import time

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
import measure  # noqa: E402
import harness  # noqa: E402 (measure knows where)
from tap import PROGRAM, ROOT  # noqa: E402

HERE = os.path.dirname(os.path.abspath(__file__))
SECTIONS = 4


def generator_times():
    """Seconds of `build` without plots for every example, best of five."""
    for stage in sorted(glob.glob(ROOT + "/examples/*/*.yaml")):
        with tempfile.TemporaryDirectory() as folder:
            best = 1e9
            for _ in range(5):
                began = time.perf_counter()
                ran = subprocess.run([PROGRAM, "build", stage, "-o", folder + "/out", "--quiet", "--no-plots"], capture_output=True)
                best = min(best, time.perf_counter() - began)
            ok = "" if ran.returncode in (0, 1) else f"   (exit status {ran.returncode})"
            print(f"  {os.path.relpath(stage, ROOT):44} {1000 * best:7.1f} ms{ok}", flush=True)


def speed(sample):
    """(emitted, yardstick) in million samples a second, four sections."""
    target = harness.Target("host")
    folder = f"{ROOT}/build/parts/bench/host/{sample}"
    sections = [measure.section(k, sample, 0) for k in range(SECTIONS)]
    measure.emit(target, folder, "bench", sample, sections)
    yard = measure.yard(sample if sample != "float64" else "float32", sections)
    flags = [f"-I{folder}", f"-I{HERE}", "-DSTAGE=bench", f"-DSAMPLE={measure.TYPES[sample]}", f"-DSECTIONS={SECTIONS}",
             '-DHEADER="bench.h"', "-std=c99", "-ffp-contract=off", "-D_POSIX_C_SOURCE=199309L", *yard]
    if sample == "float64":
        flags.append("-DDOUBLES")
    built = target.build(folder + "/speed", [HERE + "/host_main.c", folder + "/bench.c", HERE + "/yardstick.c"], "-O2", flags,
                         strict=False)
    return tuple(map(float, target.run(built).stdout.split()))


def main():
    print("\nTime of the generator, `build` without plots:")
    generator_times()
    print(f"\nThis machine, million samples a second through {SECTIONS} sections, emitted / yardstick:")
    for sample in ("float32", "float64", "q31", "q15"):
        ours, yard = speed(sample)
        print(f"  {sample:8} {ours:7.1f} / {yard:.1f}" if yard else f"  {sample:8} {ours:7.1f}", flush=True)


if __name__ == "__main__":
    main()
