# SPDX-License-Identifier: GPL-3.0-or-later
"""Drawn stages against every claim of range that check --json makes.

The words of the report are run by sections_int128.c, an arithmetic and impulse responses written
again from the specification, under inputs meant to break a bound: signs of each node's reversed
impulse response (the input that attains its L1 norm: common knowledge of the trade), rails that flip
at random, noise of rails, and a search that changes single samples and keeps what helps."""
import ctypes
import math
import os
import subprocess
import sys
import tempfile

import numpy as np

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
import tap
from drawn_stages import draw, hertz, real, roots
from tap import check, done

HERE = os.path.dirname(os.path.abspath(__file__))
COUNT = 220 if tap.FULL else 36
PLACES = ("output", "u1", "u2")


def library(folder):
    out = f"{folder}/sections.so"
    subprocess.run(
        ["gcc", "-O2", "-shared", "-fPIC", f"{HERE}/sections_int128.c", "-o", out, "-lm"],
        check=True,
    )
    return ctypes.CDLL(out)


def pointer(array):
    return array.ctypes.data_as(ctypes.c_void_p)


# ---- the words of a report, run ----


def words(section):
    r = section["realised"]
    if r["structure"] == "coupled":
        w = r["words"]
        return [
            2,
            0,
            0,
            0,
            0,
            0,
            0,
            w["fraction_bits"],
            0,
            0,
            w["sigma"],
            w["omega"],
            w["g"],
            w["c1"],
            w["c2"],
            w["d"],
            w["c_fraction_bits"],
        ]
    return [
        int(r["structure"] == "direct-1-shaped"),
        *r["b_words"],
        *r["a_words"],
        r["b_fraction_bits"],
        r["a_fraction_bits"],
        *(r["error_feedback"] or [0, 0]),
    ] + [0] * 7


class Machine:
    """A stage of a report. clips: of y, u1, u2 a section; reach, of full scale: y before rounding,
    then y, u1 and u2 before the clamp; total: the largest accumulator."""

    def __init__(self, lib, stage, report):
        self.lib, self.report = lib, report
        self.words = np.array([words(s) for s in report["sections"]], dtype=np.int64)
        self.count, a = len(self.words), stage["arithmetic"]
        self.bits = 16 if a["sample"] == "q15" else 32
        self.modes = int(a["rounding"] == "truncate"), int(a["overflow"] == "wrap")
        self.full = 2.0 ** (self.bits - 1)
        self.peak = min(
            1, report["signal"]["input_peak_v"] / report["signal"]["input_full_scale_v"]
        )
        self.nodes = {n["name"]: n for n in report["nodes"]}

    def node(self, k, what):
        return self.nodes[f"section {k + 1} {what}"]

    def places(self, k):
        return range(3 if self.words[k][0] == 2 else 1)

    def levels(self, peak):
        low = math.floor(peak * self.full)
        return -low, int(min(low, self.full - 1))

    def run(self, x):
        x, n = np.ascontiguousarray(x, dtype=np.int32), self.count
        y, state = np.zeros(len(x), np.int32), np.zeros((n, 6), np.int64)
        self.clips, self.reach, self.total = (
            np.zeros((n, 3), np.int64),
            np.zeros((n, 4)),
            np.zeros(n),
        )
        self.lib.run_sections(
            n,
            pointer(self.words),
            self.bits,
            *self.modes,
            pointer(x),
            ctypes.c_long(len(x)),
            pointer(y),
            pointer(state),
            pointer(self.clips),
            pointer(self.reach),
            pointer(self.total),
        )
        self.reach /= self.full
        return y

    def impulse(self, start, k, place, n):
        h = np.zeros(n)
        self.lib.impulse_response(
            start, k, pointer(self.words), place, ctypes.c_long(n), pointer(h)
        )
        return h

    def settled_impulse(self, start, k, place):
        """So long that what follows is below 1e-4 of the sum; None where it takes too long."""
        n = 4096
        while n <= (1 << 20 if tap.FULL else 1 << 17):
            h = self.impulse(start, k, place, n)
            if not np.isfinite(h).all():
                return None
            if np.abs(h[-n // 8 :]).sum() <= 1e-5 * np.abs(h).sum():
                return h
            n *= 4
        return None


def complaints_of_run(m, within_peak):
    """What the last run shows that the report denies."""
    found = []
    for k in range(m.count):
        for place in m.places(k) if within_peak else ():
            node = m.node(k, PLACES[place])
            if not node["can_clip"] and (
                m.clips[k, place] or m.reach[k, 1 + place] > node["bound"]
            ):
                found.append(
                    f"{node['name']} reaches {m.reach[k, 1 + place]} above {node['bound']}"
                )
        if within_peak and m.words[k][0] != 2 and m.reach[k, 0] > m.node(k, "accumulator")["bound"]:
            found.append(f"accumulator of section {k + 1} reaches {m.reach[k, 0]}")
        if m.report["sections"][k]["realised"]["cannot_clip"] and m.clips[k].any():
            found.append(f"section {k + 1} clips and was said not to")
        if m.total[k] >= 2.0**62.999 or (
            m.report["sections"][k]["realised"]["accumulator_bits"] == 32
            and m.reach[k, 0] * 2.0 ** int(m.words[k][7]) * m.full > 2.0**31
        ):
            found.append(f"the accumulator of section {k + 1} is too short")
    return found


def segment_starts(m):
    """The section that each linear bound counts from: behind the last clamp that can act."""
    starts, start = [], 0
    for k in range(m.count):
        starts.append(start)
        if any(
            m.node(k, PLACES[p])["can_clip"] or m.node(k, PLACES[p])["integrates"]
            for p in m.places(k)
        ):
            start = k + 1
    return starts


def norms(m, starts):
    """The peak gains of the report against sums of |h|: never below, at most 1 % above."""
    found = []
    for k in range(m.count):
        for place in m.places(k):
            node, h = m.node(k, PLACES[place]), m.settled_impulse(starts[k], k, place)
            if node["bound"] is None or h is None:
                continue
            total = float(np.abs(h).sum())
            if not total * (1 - 1e-9) <= node["peak_gain"] <= total * 1.01:
                found.append(f"{node['name']}: peak gain {node['peak_gain']}, sum of |h| {total}")
    return found


def inputs(m, seed, peak):
    low, high = m.levels(peak)
    rng = np.random.default_rng(seed)
    for k in range(m.count):
        for place in m.places(k):
            h = m.impulse(0, k, place, 16384)
            if np.isfinite(h).all():
                for sign in (1, -1):
                    s = sign * h[::-1]
                    yield np.where(s > 0, high, np.where(s < 0, low, 0))
    for flips in (0.002, 0.02, 0.2, 0.5):
        yield np.where(np.cumsum(rng.random(6000) < flips) % 2, high, low)


def greedy(m, seed):
    """From the probe of the output: changes that bring the last node further up."""
    rng, (low, high) = np.random.default_rng(seed), m.levels(m.peak)
    h = m.impulse(0, m.count - 1, 0, 512)
    if not np.isfinite(h).all():
        return []
    x, best, found = np.where(h[::-1] > 0, high, low), 0, []
    for _ in range(40):
        trial = x.copy()
        at = rng.integers(0, len(x), 3)
        trial[at] = rng.integers(low, high + 1, 3)
        m.run(trial)
        found += complaints_of_run(m, True)
        if m.reach[-1, 1] >= best:
            x, best = trial, m.reach[-1, 1]
    return found


def longest_sums(m):
    """Whether int64_t holds every sum for any state and input, in whole numbers."""
    found, full = [], int(m.full)
    for k, w in enumerate(m.words.tolist()):
        if w[0] == 2:
            sums = [
                sum(map(abs, w[13:16])) * full + (1 << w[16]) // 2,
                sum(map(abs, w[10:13])) * full + (1 << w[7]) // 2,
            ]
        else:
            b, shift = sum(map(abs, w[1:4])) * full, w[6] - w[7]
            b += (1 << shift) // 2 if shift > 0 else 0
            aligned = (b >> shift) + 1 if shift > 0 else b << -shift
            feedback = (abs(w[8]) + abs(w[9])) << w[7]
            sums = [b, aligned + (abs(w[4]) + abs(w[5])) * full + feedback + (1 << w[7]) // 2]
        found += [f"section {k + 1}: {s} of 2^63" for s in sums if s >= 1 << 63]
    return found


def realised(m):
    """realised.b and .a are what the words say."""
    found = []
    for k, (w, s) in enumerate(zip(m.words.tolist(), m.report["sections"])):
        got = s["realised"]
        if w[0] == 2:
            sg, om, g, c1, c2, d = (
                w[i] * 2.0 ** -(w[7] if i < 13 else w[16]) for i in range(10, 16)
            )
            b = [d, g * c1 - 2 * sg * d, d * (sg * sg + om * om) + g * (c2 * om - c1 * sg)]
            a = [1, -2 * sg, sg * sg + om * om]
        else:
            b, a = [v * 2.0 ** -w[6] for v in w[1:4]], [1] + [v * 2.0 ** -w[7] for v in w[4:6]]
        if not np.allclose(got["b"], b, rtol=1e-12, atol=1e-15) or not np.allclose(
            got["a"], a, rtol=1e-14, atol=0
        ):
            found.append(f"section {k + 1}: {got['b']} {got['a']} against {b} {a}")
    return found


def cycles(m):
    c = m.report["limit_cycle"]
    bound = m.full if c["bound_lsb"] is None else c["bound_lsb"]
    return (
        []
        if c["found_lsb"] <= bound <= m.full
        else [f"found {c['found_lsb']}, proved {c['bound_lsb']}"]
    )


def verdicts(m):
    """An accumulator can clip where the clamp behind it can act."""
    return [
        f"section {k + 1}"
        for k in range(m.count)
        if m.words[k][0] != 2
        and m.node(k, "accumulator")["can_clip"] != m.node(k, "output")["can_clip"]
    ]


def examine(lib, seed, tally):
    stage = draw(seed)
    text = tap.json.dumps(stage)
    ran = tap.polewright("check", "-", "--json", stdin=text)
    if ran.returncode not in (0, 1):
        if ran.returncode != 2 or "expected" not in ran.stderr and "would do" not in ran.stderr:
            tally["refusals"].append(f"{seed}: {ran.returncode} {ran.stderr[:200]}")
        return False
    m = Machine(lib, stage, tap.json.loads(ran.stdout))
    broken = []
    for x in inputs(m, seed, m.peak):
        m.run(x)
        broken += complaints_of_run(m, True)
    for x in inputs(m, seed, 1):
        m.run(x)
        broken += complaints_of_run(m, False)
    broken += greedy(m, seed)
    for name, list_ in (
        ("range", broken),
        ("norms", norms(m, segment_starts(m))),
        ("sums", longest_sums(m)),
        ("words", realised(m)),
        ("cycles", cycles(m)),
        ("verdicts", verdicts(m)),
    ):
        tally[name] += [f"{seed}: {c} {text}" for c in list_[:1]]
    return True


NAMES = {
    "refusals": "stages that are refused are told what would do",
    "range": "no node passes its bound or clips against its word, no accumulator is too short",
    "norms": "peak gains are not below the sum of |h| and at most 1 % above it",
    "sums": "no sum can leave int64_t, whatever the state",
    "words": "the realised coefficients are what the words say",
    "cycles": "no limit cycle was found above what was proved",
    "verdicts": "an accumulator is said to clip where its clamp can act, and only there",
}


def drawn_stages(lib):
    tally = {name: [] for name in NAMES}
    made = sum(examine(lib, seed, tally) for seed in range(COUNT))
    for name, claim in NAMES.items():
        check(not tally[name], claim, f"{made} stages of {COUNT}; " + "; ".join(tally[name][:2]))
    check(made > COUNT / 2, "most drawn stages have words", str(made))


# ---- cases that were wrong once ----


def low_pass(**arithmetic):
    return {
        "stage": "low",
        "rate": "48 kHz",
        "arithmetic": arithmetic,
        "analog": {
            "family": {
                "approximation": "butterworth",
                "shape": "lowpass",
                "order": 2,
                "corner": "100 Hz",
            }
        },
    }


def mended():
    for hz in (0.05, 1, 1000):
        for sample in ("q15", "q31"):
            stage = {
                "stage": "block",
                "rate": "48 kHz",
                "arithmetic": {"sample": sample, "coefficient": "32 bits"},
                "analog": {
                    "family": {
                        "approximation": "butterworth",
                        "shape": "highpass",
                        "order": 1,
                        "corner": hertz(hz),
                    }
                },
            }
            cycle = tap.report(stage)["limit_cycle"]
            check(
                cycle["bound_lsb"] <= 1 and cycle["found_lsb"] <= 1,
                f"coupling at {hz} Hz in {sample} is proved to rest within 1 LSB of zero",
                str(cycle),
            )
    node = tap.report(low_pass(sample="q31", structure="coupled"))["nodes"][0]
    check(
        node["peak_gain"] <= node["bound"] <= 1.01 * node["peak_gain"],
        "a rotation of which only the output clips keeps its linear bound",
        f"{node['bound']} {node['peak_gain']}",
    )
    slow = [real(0.05), real(0.05)]
    for bits in ("16 bits", "32 bits"):
        twice = tap.polewright(
            "check",
            "-",
            "--json",
            stdin=tap.json.dumps(
                {
                    "stage": "twice",
                    "rate": "48 kHz" if bits[0] == "3" else "100 Hz",
                    "analog": roots(["0", "0"], slow, "20 Hz", 0),
                    "arithmetic": {"sample": "q31", "coefficient": bits},
                }
            ),
        )
        made = tap.json.loads(twice.stdout)["sections"] if twice.stdout else []
        made = [s for s in made if s["realised"]["a"][1] != 0]  # a gain may stand apart
        check(
            len(made) == 2
            and all(
                s["realised"]["a"][2] == 0 and s["realised"]["b"][0] == -s["realised"]["b"][1]
                for s in made
            ),
            f"two couplings of 0.05 Hz in a row are held by two sections of first order, {bits}",
            twice.stderr,
        )
    wrapping = roots([], [{"frequency": "70.7333792 Hz", "q": 3.2071}], "0 Hz", -52.329)
    cycle = tap.report(
        {
            "stage": "wrapping",
            "rate": "44100 Hz",
            "analog": wrapping,
            "signal": {"input": {"low": "-1 V", "high": "1 V", "peak": "0.205948 V"}},
            "arithmetic": {
                "sample": "q15",
                "structure": "direct-1",
                "scaling": "none",
                "overflow": "wrap",
            },
        }
    )["limit_cycle"]
    check(
        cycle["found_lsb"] <= cycle["bound_lsb"],
        "cycles that only wrapping keeps up are not counted where nothing wraps",
        str(cycle),
    )


def main():
    with tempfile.TemporaryDirectory() as folder:
        drawn_stages(library(folder))
    mended()
    done()


main()
