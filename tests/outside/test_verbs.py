#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""What the verbs promise beside their figures: a screen, a clean output folder, an honest verdict."""
import math
import os
import sys
import tempfile

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
import tap

EXAMPLES = tap.ROOT + "/examples"


def test_screen():
    for name in sorted(os.listdir(EXAMPLES)):
        stage = f"{EXAMPLES}/{name}/stage.yaml"
        if not os.path.exists(stage):
            continue
        for verb in ("show", "check"):
            lines = tap.polewright(verb, stage).stdout.splitlines()
            tap.check(0 < len(lines) <= 40 and max(map(len, lines)) <= 100, f"{verb} of {name} fits a screen",
                      f"{len(lines)} lines, {max(map(len, lines))} columns")
    full = tap.polewright("show", EXAMPLES + "/echo-antialias/stage.yaml", "--verbose").stdout
    short = tap.polewright("show", EXAMPLES + "/echo-antialias/stage.yaml").stdout
    tap.check("sensitivity to each part" in full and "--verbose" in short, "what has no room is a --verbose away")


def test_old_vectors(folder):
    def build(name, *args):
        return tap.polewright("build", f"{EXAMPLES}/{name}/stage.yaml", "-o", folder, "--no-plots", "--quiet", *args)

    build("tide-coupling")
    with open(folder + "/vectors/mine.csv", "w") as f:
        f.write("n,input\n")
    before = set(os.listdir(folder + "/vectors"))
    ran = build("tide-coupling", "--set", "vectors.signals=[step, noise]")
    after = set(os.listdir(folder + "/vectors"))
    tap.check(ran.returncode == 0 and len(before) == 9 and after == {"step.csv", "noise.csv", "mine.csv"},
              "vectors that are no longer asked for go, other files stay", str(after))
    build("hull-strain", "--set", "vectors.signals=[impulse]")
    tap.check(set(os.listdir(folder + "/vectors")) == after | {"impulse.csv"}, "those of another stage stay")


def test_every_mistake():
    """A mistyped kind of cell is told beside a mistake that only the reader of the file can see."""
    ran = tap.polewright("check", "-", stdin="stage: two\nrate: 10 kHz\nanalog:\n  cascade:\n"
                         "    - cell: {kind: rc-lowpas, R1: 33k, C1: 100n}\n    - cell: {kind: rc-highpass, R1: 33 Hz, C1: 1n}\n")
    lines = ran.stderr.splitlines()
    tap.check(ran.returncode == 2 and len(lines) == 2 and lines[0].startswith("stdin:5:20: there is no cell 'rc-lowpas'")
              and lines[1].startswith("stdin:6:"), "an unknown kind and a wrong unit are told in one run", ran.stderr)


def test_noise_verdict():
    """White-noise theory does not see a limit cycle. Where the search found one that is louder, the
    verdict on `noise` goes by the cycle: 0 dBFS is a sine of full scale."""
    stage = {"stage": "quiet", "rate": "48 kHz", "arithmetic": {"sample": "q15", "structure": "coupled"},
             "analog": {"roots": {"zeros": [{"frequency": "50 Hz", "q": "infinite"}],
                                  "poles": [{"frequency": "50 Hz", "q": 30}], "gain": {"at": "1 kHz", "is": "0 dB"}}},
             "transform": {"method": "bilinear"}, "limits": {"noise": "40 dB"}}

    found = tap.report(stage)
    row = next(r for r in found["limits"] if r["name"] == "noise")
    cycle = found["limit_cycle"]["found_lsb"]
    loud = 20 * math.log10(cycle / 32768)
    tap.check(loud > found["noise"]["output_dbfs"], "this stage has a cycle louder than its noise", f"{loud:.1f} dBFS")
    tap.check(abs(row["value"] + loud) < 1e-9, "and the verdict goes by it", str(row))


with tempfile.TemporaryDirectory() as scratch:
    test_screen()
    test_old_vectors(scratch)
    test_noise_verdict()
    test_every_mistake()
tap.done()
