#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Error peaks against brute force, the choice of `best`, and every message of the transforms."""
import os
import sys

sys.path[:0] = [os.path.join(os.path.dirname(__file__), ".."), os.path.dirname(__file__)]
import numpy as np
import scipy.signal as sig
from tap import check, done

from discrete_probe import Stage, ask, run, whole_pairs


def response(zeros, poles, factor, x):
    value = np.full(x.shape, complex(factor))
    for i, p in enumerate(poles):
        value /= x - p
        if i < len(zeros):
            value *= x - zeros[i]
    return value


def brute(stage, answer, low, high, floor, extra=()):
    """Errors on a grid of a million points and more around the given frequencies and zeros."""
    circle = [
        abs(np.angle(r)) * stage.rate / (2 * np.pi)
        for r in answer["zeros"]
        if abs(abs(r) - 1) < 1e-9
    ]
    extra = list(extra) + [(f, 10.0**-k) for f in circle for k in (0, 3, 6)]
    hz = [np.linspace(max(low, 1e-9), high, 600001), np.geomspace(max(low, 1e-9), high, 400001)]
    hz += [f + w * np.linspace(-1, 1, 20001) for f, w in extra]
    hz = np.unique(np.concatenate(hz))
    hz = hz[(hz >= low) & (hz <= high)]
    truth = response(stage.zeros, stage.poles, stage.factor, 2j * np.pi * hz)
    other = response(
        answer["zeros"],
        answer["poles"],
        float(answer["factor"]),
        np.exp(2j * np.pi * hz / stage.rate),
    )
    keep = abs(truth) >= np.max(abs(truth)) * 10 ** (-floor / 20)
    ratio = other[keep] / truth[keep]
    bottom = np.max(abs(truth)) * 10 ** (-2 * floor / 20)
    level = np.maximum(abs(other[keep]), bottom) / abs(truth[keep])
    return np.max(abs(20 * np.log10(level))), np.max(
        abs(np.degrees(np.angle(ratio[abs(other[keep]) >= bottom])))
    )


def peaks():
    w = 2 * np.pi
    cases = {
        "low-pass": ([], [complex(-w * 700, w * 700)], 4e7, ()),
        "peak of Q = 5000": ([], [complex(-w * 0.0777, w * 777.3)], 1e7, [(777.3, 1.0)]),
        "notch of Q = 2000": ([w * 1234.5j], [complex(-w * 0.3, w * 1234.5)], 1.0, [(1234.5, 5.0)]),
        "elliptic": sig.ellip(6, 0.5, 50, w * 1500, analog=True, output="zpk") + ((),),
        "integrator with a lead zero": ([-300.0], [0, -6000.0], 1.0, ()),
    }
    for name, (zeros, poles, k, extra) in cases.items():
        for method, floor in (("bilinear", 60), ("matched-z", 40)):
            stage = Stage(
                zeros, poles, float(k), 8000.0, method=method, floor=floor, band=(1, 3200)
            )
            a, e = ask([stage, ("error", 1.0, 3200.0)])
            db, deg = brute(stage, a, 1, 3200, floor, extra)
            near = abs(e[0] - db) <= 2e-3 * db + 1e-6 and e[0] >= db * (1 - 1e-6) - 1e-7
            turn = abs(e[2] - deg) <= 2e-3 * deg + 1e-6 and e[2] >= deg * (1 - 1e-6) - 1e-7
            check(
                near and turn,
                f"error peaks of a {name}, {method}, against a million frequencies",
                f"{e[0]:.6g} dB and {db:.6g}, {e[2]:.6g} deg and {deg:.6g}",
            )
            check(
                a["candidates"][0]["db"] == e[0] and a["candidates"][0]["deg"] == e[2],
                "the candidate has these figures",
            )


def choice():
    w = 2 * np.pi
    stages = {
        "low-pass": ([], [complex(-w * 700, w * 700)], 4e7),
        "notch": ([w * 1000j], [complex(-w * 20, w * 1000)], 1.0),
        "shelf": ([-w * 900], [-w * 300], 1.0),
        "integrator with a lead zero": ([-300.0], [0, -6000.0], 1.0),
        "plain lag": ([], [-50.0], 50.0),
    }
    for name, (zeros, poles, k) in stages.items():
        a = run(zeros, poles, k, 8000.0, method="best")
        ordered = [c for c in a["candidates"] if c["possible"]]
        keys = [c["db"] for c in ordered]
        check(
            all(x <= y + 1e-6 for x, y in zip(keys, keys[1:])) and len(ordered) >= 5,
            f"best, {name}: candidates stand best first",
            " ".join(f"{x:.3g}" for x in keys),
        )
        check(
            (a["method"], a["prewarp"]) == (ordered[0]["method"], ordered[0]["prewarp"]),
            "and the first is taken",
        )
        for c in ordered:
            alone = run(
                zeros,
                poles,
                k,
                8000.0,
                method=c["method"],
                prewarp=c["prewarp"],
                hz=c["prewarp_hz"],
                infinity=c["infinity"],
            )["candidates"][0]
            if (alone["db"], alone["deg"]) != (c["db"], c["deg"]):
                check(
                    False,
                    f"{name}, {c['method']}: the named transform has the same figures",
                    f"{alone} {c}",
                )
        first = run(
            zeros,
            poles,
            k,
            8000.0,
            method=ordered[0]["method"],
            prewarp=ordered[0]["prewarp"],
            hz=ordered[0]["prewarp_hz"],
            infinity=ordered[0]["infinity"],
        )
        check(
            (first["poles"], first["zeros"], first["factor"])
            == (a["poles"], a["zeros"], a["factor"]),
            "its roots and factor are those of the named transform",
        )
    a = run([w * 1000j], [complex(-w * 20, w * 1000)], 1.0, 8000.0, method="best")
    check(
        [c["possible"] for c in a["candidates"] if c["method"] == "impulse-invariant"] == [False],
        "impulse-invariant is told as not possible with as many zeros as poles",
    )
    # All-pass: the bilinear forms differ in phase alone.
    for f in (100, 300, 700, 1100, 1900, 2700):
        a = run([complex(w * 300, w * f)], [complex(-w * 300, w * f)], 1.0, 8000.0, method="best")
        degs = [c["deg"] for c in a["candidates"] if c["possible"] and c["db"] < 1e-9]
        check(
            len(degs) >= 2
            and all(x <= y + 1e-6 for x, y in zip(degs, degs[1:]))
            and a["candidates"][0]["db"] < 1e-9,
            "equal magnitude errors: the phase decides",
            str(degs),
        )


def messages():
    lag = dict(zeros=[], poles=[-50.0], factor=50.0, rate=1000.0)

    def told(place, *words, status=2, **kwargs):
        a = run(**{**lag, **kwargs})
        text = a["messages"]
        good = (
            a["status"] == status
            and text.startswith(f"probe:{place}: ")
            and all(x in text for x in words)
        )
        check(good, f"message: {words[0]}", repr(text) + f" status {a['status']}")

    told(
        "4:1",
        "prewarp 500 Hz is not below half the rate, 500 Hz",
        "above 1 kHz",
        prewarp="at",
        hz=500,
    )
    told("4:1", "prewarp 700 Hz", "a rate above 1.4 kHz would do", prewarp="at", hz=700)
    told("5:1", "match-gain 600 Hz", "1.2 kHz", method="matched-z", match=600)
    told("6:9", "the band's upper end 650 Hz", "1.3 kHz", band=(1, 650))
    told("6:1", "the band's lower end 550 Hz", "1.1 kHz", band=(550, 650))
    a = run(**{**lag, "prewarp": "at", "hz": 700, "match": 600, "band": (550, 650)})
    check(a["messages"].count("\n") == 4, "four mistakes, four messages", a["messages"])
    told(
        "3:1",
        "as many zeros as poles (1) has no impulse-invariant form",
        "step-invariant would do",
        zeros=[-5.0],
        method="impulse-invariant",
    )
    told("5:1", "the gain cannot be matched at 0 Hz", zeros=[0], match=0)
    told("5:1", "the gain cannot be matched at 0 Hz", poles=[0], match=0, method="step-invariant")
    told("5:1", "the gain cannot be matched at 0 Hz", poles=[0], match=0, method="best")
    told("5:1", "matched at 50 Hz", zeros=[100j * np.pi], poles=[complex(-9, 314)], match=50)
    told("2:1", "cannot be told from one that does not", poles=[-1e-14], rate=1e6)
    fast = complex(-2 * np.pi * 300, 2 * np.pi * 800)
    told(
        "1:1",
        "warning: a pole at 854.4 Hz lies above half the rate, 500 Hz: bilinear bends it down to",
        "a rate above 1.709 kHz would hold it",
        poles=[fast],
        status=0,
    )
    told("1:1", "matched-z folds it to 200 Hz", poles=[fast], method="matched-z", status=0)
    told(
        "1:1",
        "impulse-invariant folds it to 200 Hz",
        poles=[fast],
        method="impulse-invariant",
        status=0,
    )
    told(
        "1:1", "step-invariant keeps its decay", poles=[-9000.0], method="step-invariant", status=0
    )
    told(
        "1:1",
        "warning: a zero at 1.432 kHz",
        "step-invariant finds zeros of its own",
        zeros=[-9000.0],
        method="step-invariant",
        status=0,
    )
    a = run(**{**lag, "prewarp": "at", "hz": 499.9})
    check(a["status"] == 0 and a["messages"] == "", "a prewarp just below half the rate is taken")


peaks()
choice()
messages()
done()
