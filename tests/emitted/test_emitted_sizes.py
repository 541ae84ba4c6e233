# SPDX-License-Identifier: GPL-3.0-or-later
"""The smallest and the largest: a stage without poles, one with forty, vectors of one sample and of
very many."""
import tempfile

from built import build, compiled, stage_of
from emitted import compile_strictly, run, tap

GAIN = {"polynomials": {"numerator": [0.5], "denominator": [1]}}
FORTY = {
    "family": {
        "approximation": "butterworth",
        "shape": "bandpass",
        "order": 20,
        "corners": ["400 Hz", "1600 Hz"],
    }
}


def extremes(top):
    for sample in ("q15", "q31", "float32", "float64"):
        for code in ("runtime", "standalone"):
            for name, analog in (("gain", GAIN), ("forty", FORTY)):
                stage = stage_of(f"{name}_{sample}_{code}", sample, analog=analog)
                stage["arithmetic"]["code"] = code
                built = build(stage, f"{top}/{stage['stage']}")
                message = "".join(compile_strictly(built, cc, ("-O1",)) for cc in ("gcc", "clang"))
                x = 1000 if sample[0] == "q" else 0.25
                selftest, y, _, status, _ = ran = run(built, [x, 0, 0], start=x, repeats=2)
                good = not message and selftest == 0 and status == 0
                halves = name == "forty" or y == [x / 2, 0, 0]
                tap.check(
                    good and halves, stage["stage"], "" if good else message[:300] or str(ran)
                )


def lengths(top):
    signals = ["noise", "overflow-probe", "sine"]
    for length in (1, 2, 3, 1_000_000 if tap.FULL else 60_000):
        for sample in ("q15", "float64"):
            stage = stage_of(f"long_{length}_{sample}", sample)
            stage["vectors"] = {"length": length, "signals": signals if length < 9 else ["noise"]}
            built = compiled(stage, f"{top}/{stage['stage']}", flags=("-O0",))
            with open(f"{built['dir']}/vectors/noise.csv", encoding="utf-8") as file:
                rows = [line.split(",") for line in file if line[0].isdigit()]
            counted = [int(row[0]) for row in rows] == list(range(length))
            selftest = run(built, [0], repeats=0)[0]
            tap.check(selftest == 0 and counted, f"vectors of {length} samples in {sample}")


with tempfile.TemporaryDirectory() as folder:
    extremes(folder)
    lengths(folder)
tap.done()
