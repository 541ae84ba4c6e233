#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Makes up board 7 of the hull vibration pick-up, and what was measured on it: bench.csv, a record of noise
through the board at 32 kHz, and analyser.csv, its response as a network analyser shows it.

The parts are drawn inside their tolerances, seed 2207. The noise repeats every 12288 samples and lies between
100 Hz and 6 kHz, so that its way through the board is exact: every line of its spectrum times the response.
The converter has 14 bits and adds 0.4 mV of noise; the board is 1.7 samples late (the converter's pipeline)
and stands 3 mV too high."""
import os

import numpy as np

HERE = os.path.dirname(os.path.abspath(__file__))
RATE, N, LSB = 32e3, 12288, 4.096 / 2**14
NOMINAL = {"R1": (15e3, 0.01), "R2": (1.1e3, 0.01), "R3": (62e3, 0.01), "C1": (20e-9, 0.05), "C2": (20e-9, 0.05)}


def response(p, hz):
    """Multiple-feedback band-pass: -s R3 C1 (Rp / R1) / (1 + s Rp (C1 + C2) + s^2 Rp R3 C1 C2), Rp = R1 || R2
    (Franco, Design with Operational Amplifiers and Analog Integrated Circuits, ch. 3)."""
    s = 2j * np.pi * hz
    rp = p["R1"] * p["R2"] / (p["R1"] + p["R2"])
    return -s * p["R3"] * p["C1"] * rp / p["R1"] / (1 + s * rp * (p["C1"] + p["C2"]) + s * s * rp * p["R3"] * p["C1"] * p["C2"])


def main():
    rng = np.random.default_rng(2207)
    board = {name: value * (1 + tolerance * rng.uniform(-1, 1)) for name, (value, tolerance) in NOMINAL.items()}
    for name, value in board.items():
        print(f"{name} {value:.6g} ({100 * (value / NOMINAL[name][0] - 1):+.3f} %)")
    hz = np.fft.rfftfreq(N, 1 / RATE)
    lines = np.exp(2j * np.pi * rng.uniform(size=len(hz))) * ((hz > 100) & (hz < 6000))
    x = np.fft.irfft(lines, N)
    lines *= 0.9 / abs(x).max()
    x = np.fft.irfft(lines, N)
    y = np.fft.irfft(lines * response(board, hz) * np.exp(-2j * np.pi * hz * 1.7 / RATE), N)
    codes = [np.round(v / LSB) * LSB for v in (x, y + 0.003 + 4e-4 * rng.standard_normal(N))]
    np.savetxt(HERE + "/bench.csv", np.c_[tuple(codes)], delimiter=",", fmt="%.5f", comments="",
               header="# board 7, noise 100 Hz to 6 kHz, at 32 kHz, volts\ninput,output")
    points = np.geomspace(200, 5000, 41)
    h = response(board, points)
    db = 20 * np.log10(abs(h)) + 0.01 * rng.standard_normal(len(points))
    deg = np.degrees(np.angle(h)) + 0.1 * rng.standard_normal(len(points))
    np.savetxt(HERE + "/analyser.csv", np.c_[points, db, deg], delimiter=";", fmt=["%.2f", "%.3f", "%.2f"], comments="",
               header="# board 7\nhz;db;deg")


if __name__ == "__main__":
    main()
