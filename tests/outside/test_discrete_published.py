#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Published digital coefficients, from their analog descriptions. The files in published/ name the
sources and say how each value was seen; what is from memory is not used as a check."""
import json
import math
import os
import sys

sys.path[:0] = [os.path.join(os.path.dirname(__file__), ".."), os.path.dirname(__file__)]
import mpmath as mp
import numpy as np
from tap import check, done

from discrete_probe import on_circle, run, value_of

HERE = os.path.dirname(os.path.abspath(__file__)) + "/published/"


def published(name):
    with open(HERE + name, encoding="utf-8") as f:
        return json.load(f)["data"]


def coefficients(answer):
    """b and a of the whole model, in powers of 1/z, from its sections."""
    b, a = np.array([1.0]), np.array([1.0])
    for s in answer["sections"]:
        n = s["order"] + 1
        b, a = np.convolve(b, s["b"][:n]), np.convolve(a, s["a"][:n])
    return b, a


def from_polynomials(num, den, rate, **kwargs):
    """Degrees of two at most, so that the roots are a formula and lose nothing."""
    return run(np.roots(num), np.roots(den), num[0] / den[0], rate, **kwargs)


def gap(ours, theirs):
    theirs = np.array(theirs, float)
    return float(np.max(abs(ours - np.pad(theirs, (0, len(ours) - len(theirs))))))


def bilinear_examples():
    for e in published("discretisation-examples.json")["bilinear"]:
        if e["num_s"][0] == 0:
            continue
        b, a = coefficients(from_polynomials(e["num_s"], e["den_s"], 1 / e["T"]))
        check(
            max(gap(b, e["recomputed_b"]), gap(a, e["recomputed_a"])) < 1e-12,
            f"bilinear: {e['name']}: computed from the definition",
        )
        if e["status"] == "seen" and e["published_b"]:
            scale = 1 / e["published_a"][0]
            shown = 5e-8 if "Proakis" in e["name"] else 5.1e-5  # digits that the source prints
            worst = max(
                gap(b, np.array(e["published_b"]) * scale),
                gap(a, np.array(e["published_a"]) * scale),
            )
            check(worst < shown, f"bilinear: {e['name']}: as printed", f"{worst:.1e}")


def matched_examples():
    """Jobling, EGLM03 6.4: both conventions for zeros at infinity."""
    lead, low = published("discretisation-examples.json")["matched_z"][:2]
    b, a = coefficients(run([-1.0], [-6.0], 16.0, 10.0, method="matched-z", match=0))
    want = lead["recomputed"]
    check(
        gap(b, [want["k"], want["b1"]]) < 1e-12 and gap(a, [1, -want["pole"]]) < 1e-15,
        "matched-z: " + lead["name"],
    )
    check(gap(b, [12.64, -11.44]) < 5e-3 and gap(a, [1, -0.5488]) < 5e-5, "the same, as printed")
    b, a = coefficients(run([], [-5.0], 5.0, 5.0, method="matched-z", infinity=2, match=0))
    check(
        gap(b, low["recomputed"]["b"]) < 1e-15
        and gap(b, low["published"]["b"]) < 5e-5
        and gap(a, low["published"]["a"]) < 5e-5,
        "matched-z: 5/(s + 5), the infinite zero kept",
    )
    kept_one = coefficients(run([], [-5.0], 5.0, 5.0, method="matched-z", infinity=1, match=0))
    check(
        gap(kept_one[0], low["recomputed"]["b"]) < 1e-15,
        "keep-one is the same for one infinite zero",
    )
    b, a = coefficients(run([], [-5.0], 5.0, 5.0, method="matched-z", infinity=0, match=0))
    check(
        gap(b, low["with_zero_at_minus_1"]["b"]) < 1e-15,
        "matched-z: 5/(s + 5), the infinite zero at -1",
    )
    for zero, pole, rate in ((3.0, 40.0, 100.0), (900.0, 20.0, 8000.0)):
        k = zero and pole / zero
        b, a = coefficients(run([-zero], [-pole], 1.0, rate, method="matched-z", match=0))
        want = (zero / pole) * (1 - math.exp(-pole / rate)) / (1 - math.exp(-zero / rate))
        check(
            abs(b[0] - want) < 1e-13 * want and k,
            "matched-z: (s + a)/(s + b), the symbolic form, EGLM03 6.3",
        )


def weighting_k():
    """ITU-R BS.1770 at 48 kHz, from the back-calculated analog parameters."""
    data = published("weighting-k.json")
    one, two = data["analog_stage1"], data["analog_stage2"]
    w = 2 * math.pi * one["f0_Hz"]
    num = [one["Vh"], one["Vb"] * w / one["Q"], w * w]
    answer = from_polynomials(num, [1, w / one["Q"], w * w], 48000.0, prewarp="at", hz=one["f0_Hz"])
    b, a = coefficients(answer)
    worst = max(gap(b, data["stage1"]["b"]), gap(a, data["stage1"]["a"]))
    check(worst < 2e-14, "K weighting, first stage, every printed digit", f"{worst:.1e}")
    each = coefficients(
        from_polynomials(num, [1, w / one["Q"], w * w], 48000.0, prewarp="each-section")
    )
    check(
        max(gap(each[0], b), gap(each[1], a)) < 1e-14,
        "each-section does the same for a single section",
    )
    w = 2 * math.pi * two["f0_Hz"]
    b, a = coefficients(
        from_polynomials(
            [1, 0, 0], [1, w / two["Q"], w * w], 48000.0, prewarp="at", hz=two["f0_Hz"]
        )
    )
    check(
        gap(a, data["stage2"]["a"]) < 2e-14,
        "K weighting, second stage, denominator",
        f"{gap(a, data['stage2']['a']):.1e}",
    )
    check(
        gap(b * two["a0"], data["stage2"]["b"]) < 2e-14,
        "its numerator times a0: the Recommendation leaves out the division",
        f"{gap(b * two['a0'], data['stage2']['b']):.1e}",
    )
    check(b[0] == b[2] and b[1] == -2 * b[0], "a double zero at 1 has the words g (1, -2, 1)")


def channel_classes():
    """SAE J211-1 and ISO 6487: a Butterworth pair prewarped at its own corner. The formula was
    seen; its b1 and b2 carry the opposite sign."""
    data = published("channel-class-filter.json")
    for name, want in data["computed_coefficients"].items():
        cfc, period = int(name.split("_")[0][3:]), float(name.split("_")[1][1:])
        factor = 2.0775 if "SAE" in name else 1.25 * 5 / 3
        w = 2 * math.pi * cfc * factor
        answer = run(
            [],
            [complex(-w / math.sqrt(2), w / math.sqrt(2))],
            w * w,
            1 / period,
            prewarp="at",
            hz=w / (2 * math.pi),
        )
        b, a = coefficients(answer)
        wa = math.tan(w * period / 2)
        a0 = wa * wa / (1 + math.sqrt(2) * wa + wa * wa)
        worst = max(
            gap(b, [want["a0"], want["a1"], want["a2"]]),
            gap(a, [1, -want["b1"], -want["b2"]]),
            abs(b[0] - a0),
        )
        check(worst < 1e-14, f"channel class filter {name}", f"{worst:.1e}")
        check(
            abs(abs(value_of(answer, on_circle(w / (2 * math.pi), 1 / period))) - 1 / mp.sqrt(2))
            < 1e-13,
            f"{name}: -3.01 dB at the design frequency",
        )


bilinear_examples()
matched_examples()
weighting_k()
channel_classes()
done()
