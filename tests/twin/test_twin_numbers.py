#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""The twin's numerics against scipy: averaged spectra, the exact response, the matrix exponential, decimals;
and a second-order step against its textbook figures."""
import os
import random
import subprocess
import sys
import tempfile

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
from boards import PROBE, np, signal, stage_file, tap
from scipy import linalg

STAGES = {   # description, zeros, poles in rad/s, factor
    "one pole": ("{poles: [-1000], gain: {factor: 1000}}", [], [-1000], 1000),
    "lead": ("{poles: [-9000], zeros: [-500], gain: {factor: 3}}", [-500], [-9000], 3),
    "pair": ("{poles: ['-222 ± 3333j'], gain: {factor: 1.1e7}}", [], [-222 + 3333j, -222 - 3333j], 1.1e7),
    "notch and real ones": ("{zeros: ['0 ± 2000j', -40], poles: [-700, '-300 ± 2100j', -9e4], gain: {factor: -8e4}}",
                            [2000j, -2000j, -40], [-700, -300 + 2100j, -300 - 2100j, -9e4], -8e4),
    "double pole, zeros at the right": ("{zeros: ['300 ± 500j'], poles: [-800, -800], gain: {factor: 1}}",
                                        [300 + 500j, 300 - 500j], [-800, -800], 1),
    "integrator": ("{poles: [0, -5000], zeros: [-100], gain: {factor: 2e3}}", [-100], [0, -5000], 2e3),
}


def run(*args, text=""):
    ran = subprocess.run([PROBE, *map(str, args)], input=text, capture_output=True, text=True)
    if ran.returncode:
        raise RuntimeError(ran.stderr)
    return ran.stdout


def exact(folder, roots, rate, hold, u):
    path = stage_file(folder, f"stage: x\nrate: {rate}\nanalog: {{roots: {roots}}}\n")
    return np.array(list(map(float, run("exact", path, hold, text="\n".join(map(repr, u.tolist()))).split())))


def test_exact(folder):
    rate = 4000.0
    u = np.cumsum(np.random.default_rng(1).standard_normal(400)) / 10
    u[0] = 0
    t = np.arange(len(u)) / rate
    for name, (roots, zeros, poles, factor) in STAGES.items():
        system = signal.ZerosPolesGain(zeros, poles, factor).to_ss()
        for hold in ("zero", "linear"):
            _, y, _ = signal.lsim(system, u, t, interp=hold == "linear")
            mine = exact(folder, roots, rate, hold, u)
            error = abs(mine - y).max() / abs(y).max()
            tap.check(error < 1e-9, f"{name}, {hold} hold: as scipy.signal.lsim", f"{error:.1e}")


def test_step(folder):
    """Overshoot exp(-pi zeta / sqrt(1 - zeta^2)) at t = pi / (wn sqrt(1 - zeta^2)): Ogata, Modern Control
    Engineering, ch. 5, transient response of second-order systems; Franklin et al., ch. 3."""
    for zeta in (0.1, 0.3, 0.5, 0.7):
        wn, rate = 1000.0, 1e5
        roots = f"{{poles: [{{frequency: {wn} rad/s, damping: {zeta}}}], gain: {{at: 0 Hz, is: 1}}}}"
        u = np.ones(2000)
        u[0] = 0
        y = exact(folder, roots, rate, "zero", u)
        peak = y.argmax()
        a, b, c = y[peak - 1:peak + 2]
        part = 0.5 * (a - c) / (a - 2 * b + c)
        overshoot, time = b - 0.25 * (a - c) * part - 1, (peak + part - 1) / rate   # the step is at sample 1
        root = np.sqrt(1 - zeta * zeta)
        tap.check(abs(overshoot - np.exp(-np.pi * zeta / root)) < 1e-7, f"damping {zeta}: overshoot", f"{overshoot:.9f}")
        tap.check(abs(time - np.pi / (wn * root)) < 1e-4 / wn, f"damping {zeta}: peak time", f"{time:.9f}")


def test_exponential():
    rng = np.random.default_rng(2)
    worst = 0
    for n in (1, 2, 5, 12):
        for size in (1e-3, 1, 30):
            a = rng.standard_normal((n, n)) * size / n
            mine = np.array(list(map(float, run("exponential", n, text=" ".join(map(repr, a.ravel().tolist()))).split())))
            true = linalg.expm(a)
            worst = max(worst, linalg.norm(mine.reshape(n, n) - true) / linalg.norm(true))
    tap.check(worst < 1e-12, "matrix exponentials as scipy.linalg.expm", f"{worst:.1e}")


def test_welch():
    rng = np.random.default_rng(4)
    n, length = 256, 5000
    x = rng.standard_normal(length) + 3
    y = signal.lfilter([0.2, 0.3], [1, -0.7], x) + 0.3 * rng.standard_normal(length)
    r = signal.lfilter([0.25, 0.3], [1, -0.68], x)
    text = "\n".join(" ".join(map(repr, row)) for row in np.c_[x, y, r].tolist())
    lines = run("welch", n, text=text).splitlines()
    got = np.array([list(map(float, line.split())) for line in lines[1:]])
    options = dict(nperseg=n, window="hann", noverlap=n // 2, scaling="spectrum", detrend="constant")
    window = signal.get_window("hann", n)
    scale = int(lines[0]) * window.sum() ** 2
    once = np.ones(n // 2 + 1)
    once[1:-1] = 2
    for name, column, a, b in (("x", got[:, 0], x, x), ("y", got[:, 1], y, y), ("r", got[:, 2], r, r),
                               ("x, y", got[:, 3] + 1j * got[:, 4], x, y), ("r, y", got[:, 5] + 1j * got[:, 6], r, y)):
        _, want = signal.csd(a, b, **options)
        error = abs(column * once / scale - want).max() / abs(want).max()
        tap.check(error < 1e-12, f"spectrum of {name}: as scipy.signal.csd", f"{error:.1e}")
    _, want = signal.coherence(x, y, nperseg=n, window="hann", noverlap=n // 2, detrend="constant")
    mine = (got[:, 3] ** 2 + got[:, 4] ** 2) / (got[:, 0] * got[:, 1])
    tap.check(abs(mine - want)[1:].max() < 1e-9, "coherence as scipy.signal.coherence", f"{abs(mine - want)[1:].max():.1e}")


def test_leakage():
    """A tone in the worst place, half a bin off: no bin three or more away holds more than the bound."""
    n = 256
    x = np.cos(2 * np.pi * 40.5 / n * np.arange(4 * n))
    text = "\n".join(f"{v!r} {v!r} {v!r}" for v in x.tolist())
    got = np.array([list(map(float, line.split())) for line in run("welch", n, text=text).splitlines()[1:]])
    far = np.r_[8:36, 46:120]
    ratio = got[far, 0] / got[far, 7]
    tap.check(ratio.max() < 4, "leakage never reads as excitation", f"{ratio.max():.2f}")


def test_decimals():
    rng = random.Random(6)
    cases = ["0", "-0", "1.", ".5", "+3", "1e5", "-1.5E-3", "123456789012345678", "0.1", "1e-320", "9007199254740993",
             "0.000000000000000000000000123", "1.7976931348623157e308", "  2.5"]
    for _ in range(3000):
        cases.append(rng.choice([f"{rng.uniform(-1, 1) * 10 ** rng.randint(-12, 12):.{rng.randint(0, 17)}g}",
                                 f"{rng.uniform(-5, 5):.{rng.randint(0, 20)}f}", repr(rng.gauss(0, 1))]))
    got = run("decimal", text="\n".join(cases) + "\n").splitlines()
    wrong = [c for c, line in zip(cases, got) if float(line.split()[0]) != float(c) or int(line.split()[1]) != len(c)]
    tap.check(len(got) == len(cases) and not wrong, "decimals read exactly, as Python reads them", str(wrong[:3]) * bool(wrong))


with tempfile.TemporaryDirectory() as scratch:
    test_exact(scratch)
    test_step(scratch)
test_exponential()
test_welch()
test_leakage()
test_decimals()
tap.done()
