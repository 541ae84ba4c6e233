# SPDX-License-Identifier: GPL-3.0-or-later
"""Instruction counts under the emulators are exact: four sections in every format must cost what
tests/bench/counts.json says (written by `make bench-write`). With PW_FULL=1 also 1, 2 and 8 sections."""
import json
import os
import sys

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
import bench  # noqa: E402
import harness  # noqa: E402
from tap import FULL, check, done  # noqa: E402

with open(os.path.dirname(os.path.abspath(__file__)) + "/counts.json", encoding="utf-8") as file:
    pinned = json.load(file)
for target in harness.present():
    if target.name == "host":
        continue
    got = bench.measure_target(target, bench.COUNTS if FULL else (4,))
    wrong = [f"{key}: {row} is not {pinned[target.name].get(key)}" for key, row in got.items()
             if row != pinned[target.name].get(key)]
    check(got and not wrong, f"{target.name}: {len(got)} counts as pinned", "; ".join(wrong)[:300])
done()
