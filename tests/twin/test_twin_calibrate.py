#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""--calibrate: boards with known parts. The response is recovered, the stated errors cover the truth as
often as they say, what cannot be told apart is held, and the new stage file is the old one but for the values."""
import os
import re
import sys
import tempfile

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
from boards import (CHAIN, NOMINAL, band_limited, chain_response, drawn, np, stage_file, tap, through, twin,
                    write_record, write_response)

BOARDS = 200 if tap.FULL else 30
HZ = np.geomspace(50, 9e3, 40)

# Parallel branches of different kinds: with the source's resistance known, every part shows.
BRIDGE = """stage: mooring
rate: 50 kHz
analog:
  circuit:   # every part can be told from the others, for the load is known
    input: {voltage: in}
    output: out
    load: 10k
    parts:
      R1: {resistor: 4k7, between: [in, out], tolerance: 5 %}
      C1: {capacitor: '2n2', between: [in, out], tolerance: 10 %}
      C2: {capacitor: 33 nF, between: [out, low], tolerance: 10 %}
      R2: {resistor: R220k, between: [low, ground], tolerance: 5 %}
""".replace("R220k", "220")
BRIDGE_PARTS = {"R1": (4700.0, 0.05), "C1": (2.2e-9, 0.1), "C2": (33e-9, 0.1), "R2": (220.0, 0.05)}


def bridge_response(p, hz):
    s = 2j * np.pi * hz
    series = 1 / (1 / p["R1"] + s * p["C1"])
    shunt = 1 / (1 / 10e3 + 1 / (p["R2"] + 1 / (s * p["C2"])))
    return shunt / (series + shunt)


ROOTS = """stage: echo
rate: 48 kHz
analog:
  roots:
    poles: [{frequency: 1 kHz, q: 1.2}, -40 krad/s, '-3000 ± 25000j']   # three kinds
    zeros: [{real: -1500}]
    gain: {at: 1 kHz, is: 6 dB}
"""


def roots_response(f0, q, real, pair, zero, gain, hz):
    def h(hz):
        s = 2j * np.pi * np.asarray(hz, complex)
        w = 2 * np.pi * f0
        return (s + zero) / ((s * s + w / q * s + w * w) * (s + real) * ((s - pair[0]) ** 2 + pair[1] ** 2))
    return gain * h(hz) / abs(h(1000.0))


def fitted(found):
    return {p["name"]: p for p in found["calibration"]["parameters"]}


def test_recovered(folder):
    """1 % parts, no noise: the response to 0.01 dB (asked for); parts stay inside."""
    path = stage_file(folder, CHAIN)
    rng = np.random.default_rng(11)
    worst = after = 0
    for _ in range(BOARDS):
        board = drawn(rng)
        write_response(f"{folder}/r.csv", HZ, chain_response(board, HZ))
        found = twin(path, "--response", f"{folder}/r.csv", "--calibrate", "-o", f"{folder}/new.yaml")
        values = {name: p["value"] for name, p in fitted(found).items()}
        worst = max(worst, max(abs(values[n] / NOMINAL[n] - 1) for n in values))
        everywhere = np.geomspace(1, 1e5, 200)
        error = 20 * np.log10(abs(chain_response(values, everywhere) / chain_response(board, everywhere)))
        after = max(after, abs(error).max())
    tap.check(after < 0.01, f"{BOARDS} boards: the response is recovered to 0.01 dB over five decades", f"{after:.2e} dB")
    tap.check(worst <= 0.01 + 1e-9, "no part leaves its tolerance", f"{worst:.5f}")
    tap.check(found["calibration"]["told_apart"] == 2, "two combinations of four parts can be told apart")
    held = fitted(found)
    tap.check(abs(sum(p["held_share"] for p in held.values()) - 2) < 1e-6, "the other two are held")
    again = twin(f"{folder}/new.yaml", "--response", f"{folder}/r.csv")
    error = max(abs(p["db"] - p["analog_db"]) for p in again["points"])
    tap.check(error < 1e-3, "the written file gives that response too", f"{error:.1e} dB")
    # What is held is held: nothing along the directions said to be so.
    moved = [sum(c["of"][n] * np.tan(np.pi / 2 * (values[n] / NOMINAL[n] - 1) / 0.01) for n in values)
             for c in found["calibration"]["combinations"] if c["held"]]
    tap.check(max(map(abs, moved)) < 1e-6, "held combinations stay at nominal", str(moved))


def test_record(folder):
    """A record: response and delay of a board, from noise-free and 16-bit samples."""
    path = stage_file(folder, CHAIN)
    rng = np.random.default_rng(12)
    x = band_limited(rng, 40000, 20e3, 8000)
    for lsb, limit in ((0, 0.01), (5 / 65536, 0.01)):
        board, delay = drawn(rng), 12.3e-6
        y = through(x, 20e3, lambda hz: chain_response(board, hz) * np.exp(-2j * np.pi * hz * delay))
        if lsb:
            y, xs = np.round(y / lsb) * lsb, np.round(x / lsb) * lsb
        write_record(f"{folder}/b.csv", xs if lsb else x, y)
        found = twin(path, "--record", f"{folder}/b.csv", "--calibrate", "-o", f"{folder}/new.yaml")
        values = {name: p["value"] for name, p in fitted(found).items()}
        error = abs(20 * np.log10(abs(chain_response(values, HZ) / chain_response(board, HZ)))).max()
        tap.check(error < limit, f"record, LSB {lsb:.2g} V: the response to {limit} dB", f"{error:.2e} dB")
        tap.check(abs(found["calibration"]["delay_s"] - delay) < 5e-8, f"record, LSB {lsb:.2g} V: the delay beside it",
                  f"{found['calibration']['delay_s']:.4e}")


def test_coverage_parts(folder):
    """Noise of a known size: standard errors cover 68 % of true parts where all can be told apart."""
    path = stage_file(folder, BRIDGE)
    rng = np.random.default_rng(13)
    hz = np.geomspace(20, 200e3, 60)
    hits = total = 0
    for _ in range(BOARDS):
        board = {n: v * (1 + t * rng.uniform(-0.9, 0.9)) for n, (v, t) in BRIDGE_PARTS.items()}
        h = bridge_response(board, hz) * np.exp(3e-3 * (rng.standard_normal(60) + 1j * rng.standard_normal(60)))
        write_response(f"{folder}/r.csv", hz, h)
        found = twin(path, "--response", f"{folder}/r.csv", "--calibrate", "-o", f"{folder}/new.yaml")
        for name, p in fitted(found).items():
            hits += abs(p["value"] - board[name]) < p["standard_error"]
            total += 1
    tap.check(found["calibration"]["told_apart"] == 4, "all four parts can be told apart")
    spread = 3 * np.sqrt(0.68 * 0.32 / total)
    tap.check(abs(hits / total - 0.683) < spread, f"errors of parts cover 68 % (within {spread:.3f})", f"{hits / total:.3f} of {total}")
    return hz, h


def test_coverage_roots(folder):
    path = stage_file(folder, ROOTS)
    rng = np.random.default_rng(14)
    hz = np.geomspace(30, 20e3, 80)
    hits, total = 0, 0
    for _ in range(BOARDS):
        k = 1 + 0.05 * rng.uniform(-1, 1, 7)
        board = (1000 * k[0], 1.2 * k[1], 40e3 * k[2], (-3000 * k[3], 25000 * k[4]), 1500 * k[5], 10 ** 0.3 * k[6])
        h = roots_response(*board, hz) * np.exp(2e-3 * (rng.standard_normal(80) + 1j * rng.standard_normal(80)))
        write_response(f"{folder}/r.csv", hz, h)
        found = twin(path, "--response", f"{folder}/r.csv", "--calibrate", "-o", f"{folder}/roots.yaml", "--set", "limits.band=[30 Hz, 19 kHz]")
        p = fitted(found)
        pair = abs(complex(*board[3]))
        truth = {"pole 1 f0": board[0], "pole 1 q": board[1], "pole 2 f0": board[2] / (2 * np.pi), "pole 3 f0": pair / (2 * np.pi),
                 "pole 3 q": pair / (-2 * board[3][0]), "zero 1 f0": board[4] / (2 * np.pi), "gain": board[5]}
        tap.FULL or sorted(p) == sorted(truth) or tap.check(False, "the parameters are those of the roots", str(sorted(p)))
        hits += sum(abs(p[n]["value"] - v) < p[n]["standard_error"] for n, v in truth.items())
        total += len(truth)
    spread = 3 * np.sqrt(0.68 * 0.32 / total)
    tap.check(abs(hits / total - 0.683) < spread, f"errors of roots cover 68 % (within {spread:.3f})", f"{hits / total:.3f} of {total}")
    text = open(f"{folder}/roots.yaml").read()
    again = twin(f"{folder}/roots.yaml", "--response", f"{folder}/r.csv", "--set", "limits.band=[30 Hz, 19 kHz]")
    rms = np.sqrt(np.mean([(q["db"] - q["analog_db"]) ** 2 for q in again["points"]]))
    tap.check(rms < 0.03 and "# three kinds" in text, "roots of every kind are written back", f"{rms:.4f} dB")


def skeleton(text):
    """The text with every number taken out of its values."""
    return re.sub(r"\d[\d.]*(e-?\d+)?|k2|k7|n2", "#", text).replace("#k", "#").replace("##", "#")


def test_text(folder, hz, h):
    for stage, data in ((CHAIN, chain_response(drawn(np.random.default_rng(5)), HZ)), (BRIDGE, h)):
        path = stage_file(folder, stage)
        write_response(f"{folder}/r.csv", HZ if stage is CHAIN else hz, data)
        ran = tap.polewright("twin", path, "--response", f"{folder}/r.csv", "--calibrate", "--quiet")
        tap.check(ran.returncode in (0, 1), "the fitted file goes beside the stage file", ran.stderr.strip())
        old, new = stage.splitlines(), open(f"{folder}/stage.fitted.yaml").read().splitlines()
        changed = [i for i in range(len(old)) if old[i] != new[i]]
        names = [re.match(r"\s*(\w+):", old[i]).group(1) for i in changed]
        tap.check(len(old) == len(new) and sorted(names) == ["C1", "C2", "R1", "R2"], "only the lines of the parts change", str(names))
        same = all(old[i].split("tolerance")[1] == new[i].split("tolerance")[1] and old[i].split(":")[0] == new[i].split(":")[0] for i in changed)
        tap.check(same, "comments and layout on those lines stay", "\n".join(new) * (not same))


def test_refusals(folder):
    path = stage_file(folder, CHAIN)
    write_response(f"{folder}/r.csv", HZ, chain_response(NOMINAL, HZ))
    response = ["--response", f"{folder}/r.csv", "--calibrate"]
    ran = tap.polewright("twin", path, *response, "--set", "analog.cell.R1=10k")
    tap.check(ran.returncode == 2 and "put what --set changes" in ran.stderr, "--set on the analog side is refused", ran.stderr.strip())
    bare = stage_file(folder, re.sub(r"\{value: +([^,]+), tolerance: 1 %\}", r"\1", CHAIN), "bare.yaml")
    ran = tap.polewright("twin", bare, *response)
    tap.check(ran.returncode == 2 and "nothing may move" in ran.stderr, "parts without tolerance cannot be fitted", ran.stderr.strip())
    for place in ([], ["-o", f"{folder}/x.yaml"]):
        ran = tap.polewright("twin", "-", *response, *place, stdin=CHAIN)
        tap.check(ran.returncode == 2 and "by name" in ran.stderr, "standard input cannot be edited", ran.stderr.strip())
    write_response(f"{folder}/few.csv", HZ[:1], chain_response(NOMINAL, HZ[:1]))
    ran = tap.polewright("twin", path, "--response", f"{folder}/few.csv", "--calibrate")
    tap.check(ran.returncode == 2 and "fewer than two" in ran.stderr, "one point is too few", ran.stderr.strip())
    ran = tap.polewright("twin", path, *response, "-o", f"{folder}/none/x.yaml")
    tap.check(ran.returncode == 3 and "cannot write" in ran.stderr, "a place that is not there", ran.stderr.strip())


with tempfile.TemporaryDirectory() as scratch:
    test_recovered(scratch)
    test_record(scratch)
    last = test_coverage_parts(scratch)
    test_coverage_roots(scratch)
    test_text(scratch, *last)
    test_refusals(scratch)
tap.done()
