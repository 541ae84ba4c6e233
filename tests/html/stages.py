# SPDX-License-Identifier: GPL-3.0-or-later
"""Stages whose reports differ as much as reports can: invented, no stage of anyone's."""

STAGES = {
    # A limit that is met, one that is not, nodes that clip, words of two structures.
    "clipping": {
        "stage": "buoy_heave", "about": "Heave filter of a weather buoy", "rate": "2 kHz",
        "analog": {"roots": {"zeros": ["0"], "poles": [{"frequency": "1 Hz", "q": 0.7}, "-2 krad/s"],
                             "gain": {"at": "20 Hz", "is": "0 dB"}}},
        "arithmetic": {"sample": "q15", "coefficient": "32 bits", "scaling": "none", "structure": "direct-1"},
        "limits": {"band": ["2 Hz", "200 Hz"], "magnitude": "0.000001 dB", "phase": "40 deg",
                   "overflow": "forbidden"},
        "target": "cortex-m4f",
    },
    # An integrator; text that wants to be markup.
    "integrator": {
        "stage": "anchor_pull", "about": "Pull <script>document.title='taken'</script> & \"strain\" at the anchor",
        "rate": "10 kHz",
        "analog": {"roots": {"zeros": ["-200 Hz"], "poles": ["0", "-3 kHz"], "gain": {"at": "1 kHz", "is": "-6 dB"}}},
        "arithmetic": {"sample": "q31"},
    },
    # Floats, many poles, no limit.
    "floats": {
        "stage": "sonar_band", "about": "Band of a depth sounder", "rate": "192 kHz",
        "analog": {"family": {"approximation": "elliptic", "shape": "bandpass", "order": 5, "ripple": "0.5 dB",
                              "stopband": "70 dB", "corners": ["18 kHz", "22 kHz"]}},
    },
    # A circuit with tolerances: the envelope.
    "circuit": {
        "stage": "sluice_level", "about": "Level filter of a sluice gate", "rate": "20 kHz",
        "analog": {"circuit": {"input": {"voltage": "in"}, "output": "out", "parts": {
            "R1": {"resistor": "22k", "between": ["in", "a"], "tolerance": "5 %"},
            "R2": {"resistor": "22k", "between": ["a", "b"], "tolerance": "5 %"},
            "C1": {"capacitor": "22 nF", "between": ["a", "out"], "tolerance": "10 %"},
            "C2": {"capacitor": "10 nF", "between": ["b", "ground"], "tolerance": "10 %"},
            "U1": {"op-amp": "ideal", "plus": "b", "minus": "out", "out": "out"}}}},
        "arithmetic": {"sample": "q15"},
        "signal": {"input": {"high": "3.3 V", "bits": 12, "zero": "1.65 V", "peak": "1 V"},
                   "output": {"high": "5 V", "bits": 10, "zero": "2.5 V"}},
        "limits": {"band": ["10 Hz", "2 kHz"], "magnitude": "0.5 dB"},
    },
    # A notch in coupled form with double roots near the circle.
    "notch": {
        "stage": "mast_hum", "about": "Hum notch of a mast microphone", "rate": "48 kHz",
        "analog": {"roots": {"zeros": [{"frequency": "50 Hz", "q": "infinite"}],
                             "poles": [{"frequency": "50 Hz", "q": 30}], "gain": {"at": "1 kHz", "is": 1}}},
        "arithmetic": {"sample": "q31", "structure": "coupled"},
        "limits": {"noise": "100 dB"},
    },
}
