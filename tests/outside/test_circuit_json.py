# SPDX-License-Identifier: GPL-3.0-or-later
"""What show --json and check --json say of circuits, against numpy and against each other."""
import json
import os
import sys

import numpy as np

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
import circuits  # noqa: E402, F401
import tap  # noqa: E402

STAGE = """stage: buoy_tone
rate: 48 kHz
limits: {band: [100 Hz, 10 kHz]}
transform: {method: bilinear}
analog:
  cascade:
    - cell: {kind: sallen-key-lowpass, R1: {value: 12k, tolerance: 1 %}, R2: 8k2, C1: {value: 22n, tolerance: 5 %}, C2: 10n}
    - roots: {poles: [-1 kHz], gain: {at: 0 Hz, is: 1}}
    - cell: {kind: rc-highpass, C1: 100n, R1: 10k}
"""


def main():
    shown = json.loads(tap.polewright("show", "-", "--json", stdin=STAGE).stdout)
    first, second = shown["circuits"]
    r1, r2, c1, c2 = 12e3, 8.2e3, 22e-9, 10e-9
    w0 = 1 / np.sqrt(r1 * r2 * c1 * c2)
    q = 1 / (w0 * (r1 * c2 + r2 * c2))
    (mode,) = first["modes"]
    tap.check(mode["kind"] == "pole" and mode["roots"] == 2 and abs(mode["f0_hz"] * 2 * np.pi / w0 - 1) < 1e-12
              and abs(mode["q"] / q - 1) < 1e-12 and abs(mode["time_constant_s"] * w0 / (2 * q) - 1) < 1e-12,
              "the pair's f0, Q and time constant", str(mode))
    part = {p["name"]: p for p in first["parts"]}
    tap.check(list(part) == ["R1", "C1", "R2", "C2"] and part["R1"]["value"] == 12e3
              and part["C1"]["tolerance"] == 0.05 and part["R2"]["tolerance"] == 0, "the parts", str(list(part)))
    tap.check(abs(part["R1"]["f0_percent_per_percent"][0] + 0.5) < 1e-6
              and abs(part["R1"]["q_percent_per_percent"][0] - (-0.5 + q * w0 * r2 * c2)) < 1e-6,
              "and their sensitivities", str(part["R1"]))
    tap.check(first["gain"]["dc"] == 1 and first["gain"]["infinity"] == 0 and second["gain"]["dc"] == 0
              and abs(second["gain"]["infinity"] - 1) < 1e-15, "the gains", str(second["gain"]))
    none = tap.polewright("show", tap.ROOT + "/examples/winch-current/stage.yaml", "--json").stdout
    tap.check(json.loads(none)["circuits"] == [], "a stage without circuits has none")

    report = tap.report(STAGE)
    spread, error = report["spread"], report["response"]["total_error"]
    tap.check(spread["parts"] == 2 and spread["draws"] == 2000 and spread["seed"] == 1
              and spread["unstable_draws"] == 0 and len(spread["table"]) == 121, "the spread of the parts")
    reach = [max(max(row["db"]["high"], row["db"]["corner_high"]) - row["db"]["nominal"],
                 row["db"]["nominal"] - min(row["db"]["low"], row["db"]["corner_low"])) for row in spread["table"]]
    k = int(np.argmax(reach))
    tap.check(spread["magnitude_db"] == {"max": reach[k], "at_hz": spread["table"][k]["hz"]},
              "its worst magnitude is that of its table", str(spread["magnitude_db"]))
    tap.check(abs(spread["error_share"]["magnitude"] / (error["magnitude_db"]["max"] / reach[k]) - 1) < 1e-12
              and abs(spread["error_share"]["phase"] * spread["phase_deg"]["max"] / error["phase_deg"]["max"] - 1) < 1e-12,
              "the share of the replacement's error", str(spread["error_share"]))
    text = tap.polewright("check", "-", stdin=STAGE).stdout
    share = f"{100 * spread['error_share']['magnitude']:.3g}"
    flat = " ".join(text.split())
    tap.check("tolerances of 2 parts move the stage itself by up to" in flat and f"own error is {share} %" in flat,
              "the text report says the same", text)
    exact = tap.report(STAGE.replace("tolerance: 1 %", "tolerance: 0 %").replace("tolerance: 5 %", "tolerance: 0 %"))
    tap.check(exact["spread"] is None, "no spread without tolerances")
    tap.done()


main()
