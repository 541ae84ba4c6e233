#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""A signal that was really recorded: the electrocardiogram that ships with scipy (scipy.misc.electrocardiogram,
five minutes at 360 Hz, excerpt of record 208 of the MIT-BIH Arrhythmia Database, Moody and Mark, IEEE Eng. in
Med. and Biol. 20, 2001). Only its shape matters here: baseline wander, noise, no two periods alike."""
import os
import sys
import tempfile
import warnings

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
from boards import np, signal, stage_file, tap, twin, write_record

STAGE = """stage: drift_band
rate: 360 Hz
analog: {family: {approximation: butterworth, shape: bandpass, order: 2, corners: [0.5 Hz, 40 Hz]}}
transform: {method: bilinear}
arithmetic: {sample: float64}
signal: {input: {low: -8 V, high: 8 V}, output: {low: -8 V, high: 8 V}}
limits: {band: [1 Hz, 60 Hz], magnitude: 0.5 dB}
"""


def recorded():
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        from scipy import misc
        return misc.electrocardiogram()


def sections(path, sample):
    report = tap.report(open(path).read(), "--set", f"arithmetic.sample={sample}")
    return np.array([[*s["realised"]["b"], *s["realised"]["a"]] for s in report["sections"]])


with tempfile.TemporaryDirectory() as folder:
    stage, x = stage_file(folder, STAGE), recorded()
    np.savetxt(f"{folder}/x.csv", x, fmt="%.17g", header="input", comments="")
    # float32: what its own rounding does with poles near z = 1
    for sample, limit in (("float64", 1e-12), ("float32", 1e-3), ("q31", 1e-5), ("q15", 2e-2)):
        ran = tap.polewright("twin", stage, "--set", f"arithmetic.sample={sample}", "--play", f"{folder}/x.csv", "-o", f"{folder}/y.csv")
        y = np.genfromtxt(f"{folder}/y.csv", delimiter=",", skip_header=2)[:, 1]
        want = signal.sosfilt(sections(stage, sample), x)
        tap.check(len(y) == len(x) and abs(y - want).max() < limit, f"{sample}: as scipy.signal.sosfilt on a recorded signal",
                  f"{abs(y - want).max():.1e}")
    board = signal.sosfilt(sections(stage, "float64"), x)
    rng = np.random.default_rng(1)
    write_record(f"{folder}/r.csv", x, 1.01 * np.roll(board, 3) + 1e-3 * rng.standard_normal(len(x)))
    record = twin(stage, "--record", f"{folder}/r.csv")["record"]
    tap.check(abs(record["delay_samples"] - 3) < 0.01 and abs(record["gain"] - 1.01) < 1e-3, "its delay and gain are found",
              f"{record['delay_samples']:.5f} {record['gain']:.5f}")
    tap.check(abs(record["residual"]["rms_v"] / 1e-3 - 1) < 0.05, "and the noise that was put in", f"{record['residual']['rms_v']:.3e}")
tap.done()
