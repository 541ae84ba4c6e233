# SPDX-License-Identifier: GPL-3.0-or-later
"""What the tests of the twin share: made-up boards and records."""
import json
import os
import sys

import numpy as np
from scipy import signal

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
import tap  # noqa: E402

PROBE = tap.ROOT + "/build/release/outside/probe_twin"

# A Sallen-Key low-pass as an anti-alias stage: values in four notations, comments, odd layout.
CHAIN = """# the board's own comment
stage: chain_tension
about: Tension of an anchor chain   # after a value
rate: 20 kHz
analog:
  cell:
    kind: sallen-key-lowpass
    R1: {value: 8k2, tolerance: 1 %}   # keep this
    R2: {value:   8.2k, tolerance: 1 %}
    C1: {value: 22 nF, tolerance: 1 %}
    C2: {value: "10n", tolerance: 1 %}
transform: {method: bilinear, prewarp: 1 kHz}
arithmetic: {sample: float64}
signal:
  input:  {low: -2.5 V, high: 2.5 V, bits: 16}
  output: {low: -2.5 V, high: 2.5 V, bits: 16}
limits: {band: [20 Hz, 5 kHz], magnitude: 1 dB}
"""
NOMINAL = {"R1": 8200.0, "R2": 8200.0, "C1": 22e-9, "C2": 10e-9}


def chain_response(parts, hz):
    """Sallen-Key with unity gain: 1 / (1 + s (R1 + R2) C2 + s^2 R1 R2 C1 C2) (Franco, Design with
    Operational Amplifiers, ch. 3)."""
    s = 2j * np.pi * np.asarray(hz)
    r1, r2, c1, c2 = parts["R1"], parts["R2"], parts["C1"], parts["C2"]
    return 1 / (1 + s * (r1 + r2) * c2 + s * s * r1 * r2 * c1 * c2)


def drawn(rng, tolerance=0.01):
    return {name: value * (1 + tolerance * rng.uniform(-1, 1)) for name, value in NOMINAL.items()}


def band_limited(rng, n, rate, edge, peak=1.0):
    """Periodic noise up to edge Hz: its response is exact through the transform."""
    x = np.fft.rfft(rng.standard_normal(n))
    x[np.fft.rfftfreq(n, 1 / rate) > edge] = 0
    x[0] = 0
    x = np.fft.irfft(x, n)
    return x * peak / abs(x).max()


def through(x, rate, response):
    """x through a response given over Hz, as if it had gone on for ever."""
    return np.fft.irfft(np.fft.rfft(x) * response(np.fft.rfftfreq(len(x), 1 / rate)), len(x))


def write_record(path, x, y, head="input,output"):
    np.savetxt(path, np.c_[x, y], delimiter=",", header=head, comments="", fmt="%.12g")


def write_response(path, hz, h):
    np.savetxt(path, np.c_[hz, 20 * np.log10(abs(h)), np.degrees(np.angle(h))], delimiter=",", header="hz,db,deg",
               comments="", fmt="%.12g")


def stage_file(folder, text, name="stage.yaml"):
    path = f"{folder}/{name}"
    with open(path, "w") as f:
        f.write(text)
    return path


def twin(*args, program=tap.PROGRAM, wanted=(0, 1)):
    """The JSON report of a run."""
    ran = tap.polewright("twin", *args, "--json", program=program)
    if ran.returncode not in wanted:
        raise RuntimeError(f"exit status {ran.returncode}: {ran.stderr}")
    return json.loads(ran.stdout)


