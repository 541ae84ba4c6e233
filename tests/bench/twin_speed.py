#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""How fast a record is replayed bit for bit, beside scipy.signal.sosfilt on the same eight sections,
one thread, one channel. All take turns in one run, round after round, so that other work on the
machine meets each alike; the best round of each counts.
Usage: twin_speed.py [ROUNDS] [KIND]   (KIND: plain, SSE2, AVX2: no more than this instruction set)"""
import os
import subprocess
import sys
import tempfile
import time

import numpy as np
from scipy import signal

ROOT = os.path.dirname(os.path.dirname(os.path.dirname(os.path.abspath(__file__))))
PROBE = ROOT + "/build/release/outside/probe_twin"
N = 200_000
FORMATS = ("float32", "float64", "q31", "q15")
STAGE = """stage: bench_lowpass
rate: 48 kHz
analog: {{family: {{approximation: butterworth, shape: lowpass, order: 16, corner: 4 kHz}}}}
transform: {{method: bilinear}}
arithmetic: {{sample: {0}, structure: {1}, scaling: none}}
"""


class Twin:
    def __init__(self, folder, sample, kind):
        path = f"{folder}/{sample}.yaml"
        structure = "transposed-2" if sample.startswith("float") else "direct-1"
        with open(path, "w") as f:
            f.write(STAGE.format(sample, structure))
        self.process = subprocess.Popen([PROBE, "speed", path, str(N), *kind], stdin=subprocess.PIPE,
                                        stdout=subprocess.PIPE, text=True)
        lines = list(iter(lambda: self.process.stdout.readline().strip(), ""))
        self.kind = lines.pop()
        self.sos = [[*map(float, b[:3]), 1.0, *map(float, b[3:])] for b in map(str.split, lines)]

    def run(self):
        self.process.stdin.write("\n")
        self.process.stdin.flush()
        return float(self.process.stdout.readline().split()[0])

    def end(self):
        self.process.stdin.close()
        self.process.wait()


def best_of(rounds, kind):
    """{name: best seconds}, the instruction set, the number of sections"""
    with tempfile.TemporaryDirectory() as folder:
        twins = {sample: Twin(folder, sample, kind) for sample in FORMATS}
        noise = 0.5 * np.random.default_rng(1).uniform(-1, 1, N)
        runs = {sample: twin.run for sample, twin in twins.items()}
        for name, kind in (("sosfilt float32", np.float32), ("sosfilt float64", np.float64)):
            sos, x = np.array(twins["float64"].sos, kind), noise.astype(kind)

            def filt(sos=sos, x=x):
                began = time.perf_counter()
                signal.sosfilt(sos, x)
                return time.perf_counter() - began

            runs[name] = filt
        best = {name: min(run() for _ in range(1)) for name, run in runs.items()}
        for _ in range(rounds):
            for name, run in runs.items():
                best[name] = min(best[name], run())
        for twin in twins.values():
            twin.end()
        return best, twins["q31"].kind, len(twins["float64"].sos)


def main():
    rounds = int(sys.argv[1]) if len(sys.argv) > 1 else 9
    best, kind, sections = best_of(rounds, sys.argv[2:3])
    print(f"\nReplay of a record, {sections} sections, one channel, {kind}, million samples a second "
          f"(best of {rounds} interleaved rounds of {N}), and times as fast as scipy's sosfilt:")
    for name, seconds in best.items():
        same = best["sosfilt float32" if name == "float32" else "sosfilt float64"]
        times = "" if name.startswith("sosfilt") else f"  {same / seconds:5.2f} x"
        print(f"  {name:16} {N / seconds / 1e6:8.1f}{times}")


if __name__ == "__main__":
    main()
