# SPDX-License-Identifier: GPL-3.0-or-later
"""What holds for any linear time-invariant stage, of the compiled C: its response against scipy's
bilinear transform of the same roots, superposition, time shift, and the rest state of settle."""
import random
import tempfile

import numpy
import scipy.signal

from built import compiled
from emitted import run, tap

random.seed(11)
RATE = 48000.0
LENGTH = 1 << 14


def drawn_roots():
    """Poles and zeros whose impulse response is over well within LENGTH samples."""
    poles, zeros = [], []
    for _ in range(random.randint(1, 3)):
        natural, q = 10 ** random.uniform(2.6, 4.0) * 2 * numpy.pi, random.uniform(0.52, 4)
        real, imag = -natural / (2 * q), natural * numpy.sqrt(1 - 1 / (4 * q * q))
        poles += [complex(real, imag), complex(real, -imag)]
        if random.random() < 0.6:
            zeros += [complex(0, 0.7 * natural), complex(0, -0.7 * natural)]
    if random.random() < 0.5:
        poles.append(complex(-(10 ** random.uniform(3.5, 4.5))))
        if random.random() < 0.5:
            zeros.append(complex(-(10 ** random.uniform(3.5, 5))))
    return zeros, poles


def as_stage(name, zeros, poles, factor, **arithmetic):
    pair = lambda r: {"real": r.real, "imag": r.imag}
    half = lambda roots: [r.real if r.imag == 0 else pair(r) for r in roots if r.imag >= 0]
    return {
        "stage": name,
        "rate": "48 kHz",
        "transform": {"method": "bilinear"},
        "arithmetic": arithmetic,
        "analog": {
            "roots": {"zeros": half(zeros), "poles": half(poles), "gain": {"factor": factor}}
        },
    }


def response(top):
    """max |dB difference| between the compiled float64 impulse response and scipy's path."""
    worst = 0.0
    for i in range(40 if tap.FULL else 8):
        zeros, poles = drawn_roots()
        factor = abs(numpy.prod(poles)) / max(1.0, abs(numpy.prod([z for z in zeros if z])))
        structure = "direct-1" if i % 4 == 3 else "transposed-2"
        stage = as_stage(
            f"resp_{i}",
            zeros,
            poles,
            factor,
            sample="float64",
            structure=structure,
            code="standalone" if i % 2 else "runtime",
        )
        built = compiled(stage, f"{top}/r{i}")
        selftest, h, _, status, errors = run(built, [1.0] + [0.0] * (LENGTH - 1), repeats=2)
        if selftest or status or errors:
            return tap.check(False, f"resp_{i} runs", f"{selftest} {status} {errors[:200]}")
        z, p, k = scipy.signal.bilinear_zpk(zeros, poles, factor, RATE)
        w = numpy.linspace(0.002, 0.8, 400) * numpy.pi
        _, expected = scipy.signal.freqz_zpk(z, p, k, worN=w)
        got = numpy.exp(-1j * numpy.outer(w, numpy.arange(LENGTH))) @ numpy.array(h)
        floor = abs(expected) > 1e-3 * max(abs(expected))
        db = 20 * numpy.log10(abs(got[floor]) / abs(expected[floor]))
        worst = max(worst, float(numpy.max(abs(db))))
    return tap.check(
        worst < 1e-9,
        "the float64 C has the response of scipy.signal.bilinear_zpk",
        f"{worst:.2e} dB",
    )


LOWPASS = {
    "family": {"approximation": "butterworth", "shape": "lowpass", "order": 4, "corner": "1 kHz"}
}


def stage_of(name, sample, **more):
    return {
        "stage": name,
        "rate": "48 kHz",
        "analog": LOWPASS,
        "transform": {"method": "bilinear"},
        "arithmetic": {"sample": sample, **more},
    }


def linear(top):
    for sample, full, slack in (
        ("q15", 16000, 8),
        ("q31", 1 << 30, 40),
        ("float32", 0.5, 1e-5),
        ("float64", 0.5, 1e-13),
    ):
        built = compiled(
            stage_of(f"lin_{sample}", sample, code="standalone"), f"{top}/lin_{sample}"
        )
        draw = (
            (lambda: random.randint(-full, full))
            if isinstance(full, int)
            else (lambda: random.uniform(-full, full))
        )
        a = [draw() for _ in range(600)]
        b = [draw() for _ in range(600)]
        if sample == "float32":
            a, b = [float(numpy.float32(v)) for v in a], [float(numpy.float32(v)) for v in b]
        _, ya, clips, _, _ = run(built, a, repeats=1)
        _, yb, _, _, _ = run(built, b, repeats=1)
        _, both, _, _, _ = run(built, [p + q for p, q in zip(a, b)], repeats=1)
        error = max(abs(s - (p + q)) for s, p, q in zip(both, ya, yb))
        moving = max(map(abs, ya)) > full / 100
        tap.check(
            error <= slack and moving and not clips, f"{sample}: superposition", f"off by {error:g}"
        )
        _, late, _, _, _ = run(built, [0] * 57 + a, repeats=1)
        tap.check(
            late[57:] == ya and not any(late[:57]),
            f"{sample}: a later input gives the same output, later",
        )


def settled(top):
    # Floats wander by a few roundings over 1 + a1 + a2, here about (2 pi 1000 / 48000)^2.
    wander = 4 / (2 * numpy.pi * 1000 / RATE) ** 2
    for sample, x, slack in (
        ("q15", 12345, 0),
        ("q31", -123456789, 0),
        ("float32", 0.25, wander * 2.0**-24),
        ("float64", -0.75, wander * 2.0**-53),
    ):
        built = compiled(
            stage_of(
                f"set_{sample}",
                sample,
                structure="direct-1" if sample[0] == "q" else "auto",
                **({"coefficient": "32 bits"} if sample == "q15" else {}),
            ),
            f"{top}/set_{sample}",
        )
        _, y, clips, _, _ = run(built, [x] * 500, start=x, repeats=1)
        drift = max(abs(v - y[0]) for v in y)
        close = abs(y[0] - x) <= max(abs(x) * 1e-3, slack)
        tap.check(
            drift <= slack and close and not clips,
            f"{sample}: settled at {x}, it stays at {y[0]:.9g}",
            f"drift {drift:g}",
        )
        _, rest, _, _, _ = run(built, [x] * 500, repeats=1)
        tap.check(abs(rest[0] - y[0]) > abs(x) / 2, f"{sample}: which from rest it would not")


def settled_other_forms(top):
    """Fed-back errors move the output by a unit or so; a rotation stays in its dead band."""
    for structure, slack in (("direct-1-shaped", 2), ("coupled", 2)):
        for sample, x in (("q15", 12345), ("q15", -777), ("q31", 123456789)):
            more = {"structure": structure, "coefficient": "32 bits"}
            name = f"form_{structure.replace('-', '_')}_{sample}"
            built = compiled(stage_of(name, sample, **more), f"{top}/{name}")
            _, y, clips, _, _ = run(built, [x] * 3000, start=x, repeats=1)
            drift = max(abs(v - y[0]) for v in y)
            close = abs(y[0] - x) <= max(3, abs(x) * 1e-6)
            what = f"{structure} {sample}: settled at {x}, it stays within {slack} of {y[0]:.9g}"
            tap.check(drift <= slack and close and not clips, what, f"drift {drift:g}")


def integrator(top):
    stage = {
        "stage": "integ",
        "rate": "48 kHz",
        "transform": {"method": "bilinear"},
        "arithmetic": {"sample": "q31", "structure": "direct-1"},
        "analog": {
            "roots": {"poles": [0, "-3 krad/s"], "zeros": ["-500 rad/s"], "gain": {"factor": 40}}
        },
    }
    built = compiled(stage, f"{top}/integ")
    x = [random.randint(-(1 << 30), 1 << 30) for _ in range(300)] + [1 << 30] * 40000
    _, rest, clips, status, _ = run(built, x, repeats=2)
    _, after, _, _, _ = run(built, x, start=1 << 29, repeats=1)
    tap.check(rest == after and status == 0, "settling an integrator is resetting it")
    tap.check(
        clips > 0 and max(rest) == 2**31 - 1, f"an integrator runs into its clamp ({clips} clips)"
    )
    with open(f"{top}/integ/integ.h", encoding="utf-8") as file:
        tap.check(
            "settle does what reset does" in file.read().replace("\n * ", " "),
            "and its header says so",
        )


with tempfile.TemporaryDirectory() as folder:
    response(folder)
    linear(folder)
    settled(folder)
    settled_other_forms(folder)
    integrator(folder)
tap.done()
