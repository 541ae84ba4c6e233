# SPDX-License-Identifier: GPL-3.0-or-later
"""The envelope of tolerances against brute force: numpy's own random boards, solved one by one."""
import os
import subprocess
import sys

import numpy as np

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
import circuits  # noqa: E402
import tap  # noqa: E402

PROBE = tap.ROOT + "/build/release/outside/probe_circuit_spread"
TOLERANCE = {"R1": 0.01, "R2": 0.01, "C1": 0.05, "C2": 0.05, "RA": 0.02, "RB": 0.02, "U1": 0.3}
NOMINAL = {"R1": 15.8e3, "R2": 15.8e3, "C1": 10e-9, "C2": 10e-9, "RA": 10e3, "RB": 8.2e3, "U1": 1e6}

STAGE = """stage: anchor_alias
rate: 48 kHz
limits: {{band: [50 Hz, 20 kHz]}}
analog:
  circuit:
    input: {{voltage: in}}
    output: out
    parts:
      R1: {{resistor: 15.8k, between: [in, a], tolerance: 1 %}}
      R2: {{resistor: 15.8k, between: [a, b], tolerance: 1 %}}
      C1: {{capacitor: 10n, between: [a, out], tolerance: 5 %}}
      C2: {{capacitor: 10n, between: [b, ground], tolerance: 5 %}}
      RA: {{resistor: 10k, between: [m, ground], tolerance: 2 %}}
      RB: {{resistor: 8.2k, between: [m, out], tolerance: 2 %}}
      U1: {{op-amp: {{gain-bandwidth: 1 MHz, dc-gain: 100 dB, output-resistance: 75}}, plus: b, minus: m, out: out{amp}}}
"""


def lines(value):
    return ["V in", f"R R1 in a {value['R1']!r}", f"R R2 a b {value['R2']!r}", f"C C1 a out {value['C1']!r}",
            f"C C2 b ground {value['C2']!r}", f"R RA m ground {value['RA']!r}", f"R RB m out {value['RB']!r}",
            f"U U1 b m out {value['U1']!r} 1e5 75", "O out"]


def envelope(text):
    ran = subprocess.run([PROBE, "4000", "2"], input=text, capture_output=True, text=True)
    if ran.returncode:
        raise RuntimeError(ran.stderr)
    body = ran.stdout[ran.stdout.index("# hz"):].splitlines()[1:-1]
    return np.array([[float(x) for x in row.split()] for row in body])


def main():
    rows = envelope(STAGE.format(amp=""))[::10]
    parts = [p for p in TOLERANCE if p != "U1"]
    rng = np.random.default_rng(7)
    draws = 3000 if tap.FULL else 300
    reach, outside = np.zeros(len(rows)), 0.0
    nominal = np.array([circuits.nodal(lines(NOMINAL), 2j * np.pi * hz) for hz in rows[:, 0]])
    db0 = 20 * np.log10(np.abs(nominal))
    tap.check(np.abs(db0 - rows[:, 1]).max() < 1e-9, "the nominal response is the nodal solve's")
    low, high = np.minimum(rows[:, 2], rows[:, 4]), np.maximum(rows[:, 3], rows[:, 5])
    for _ in range(draws):
        value = dict(NOMINAL)
        for p in parts:
            value[p] *= 1 + TOLERANCE[p] * rng.uniform(-1, 1)
        h = np.array([circuits.nodal(lines(value), 2j * np.pi * hz) for hz in rows[:, 0]])
        db, deg = 20 * np.log10(np.abs(h)), np.degrees(np.angle(h / nominal))
        outside = max(outside, (low - db).max(), (db - high).max(),
                      (np.minimum(rows[:, 7], rows[:, 9]) - rows[:, 6] - deg).max(),
                      (deg + rows[:, 6] - np.maximum(rows[:, 8], rows[:, 10])).max())
        reach = np.maximum(reach, np.maximum((db - db0) / (high - db0), (db0 - db) / (db0 - low)))
    tap.check(outside < 1e-9, f"none of {draws} boards leaves the envelope", f"{outside:.2e}")
    tap.check(reach.min() > 0.55, "and boards come near it", f"{reach}")

    corner = dict(NOMINAL)                              # the published signs of Q, Franco ch. 3
    for p, sign in {"R1": 1, "R2": -1, "C1": 1, "C2": -1, "RA": -1, "RB": 1}.items():
        corner[p] *= 1 + sign * TOLERANCE[p]
    i = int(np.argmax(rows[:, 5] - rows[:, 1]))
    db = 20 * np.log10(abs(circuits.nodal(lines(corner), 2j * np.pi * rows[i, 0])))
    tap.check(db <= rows[i, 5] + 1e-9 and db > rows[i, 1], "no corner beats the worst corner at its frequency",
              f"{db} {rows[i, 5]}")

    wide = envelope(STAGE.format(amp=", tolerance: 30 %"))
    tap.check((wide[:, 5] - wide[:, 4] >= envelope(STAGE.format(amp=""))[:, 5] - envelope(STAGE.format(amp=""))[:, 4]).all(),
              "a tolerance of the gain-bandwidth widens the corners")
    tap.done()


main()
