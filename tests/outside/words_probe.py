# SPDX-License-Identifier: GPL-3.0-or-later
"""Asks the words station, through its probe, for realisations of digital models."""
import json
import os
import subprocess
import sys

import numpy as np

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
import tap

PROBE = tap.ROOT + "/build/release/outside/probe_words"
PUBLISHED = tap.ROOT + "/tests/outside/published/"
DIRECT, SHAPED, COUPLED = 1, 2, 4


def ask(questions):
    """A list of answers to a list of questions, in one run of the probe."""
    text = "".join(json.dumps(q) + "\n" for q in questions)
    ran = subprocess.run([PROBE], input=text, capture_output=True, text=True)
    answers = [json.loads(line) for line in ran.stdout.splitlines()]
    if ran.returncode != 0 or len(answers) != len(questions):
        raise RuntimeError(f"probe: status {ran.returncode}, {len(answers)} answers\n{ran.stderr}")
    if answers:
        answers[0]["stderr"] = ran.stderr
    return answers


def tidy(roots, snap=0):
    """Roots of a real filter as exact conjugate pairs and exact reals; near 1 and -1 made exact."""
    out = []
    for r in sorted(map(complex, roots), key=lambda v: (v.real, abs(v.imag), v.imag)):
        if abs(r.imag) < 1e-9:
            near = round(r.real)
            out.append(complex(near if abs(r.real - near) < snap and abs(near) == 1 else r.real, 0))
        elif r.imag > 0:
            out += [r, r.conjugate()]
    return [[r.real, r.imag] for r in out]


def question(zeros, poles, factor, **more):
    q = {"zeros": tidy(zeros, 1e-5), "poles": tidy(poles), "factor": float(np.real(factor))}
    q.update({k.replace("_", "-"): v for k, v in more.items()})
    return q


def one(zeros, poles, factor, **more):
    return ask([question(zeros, poles, factor, **more)])[0]


def outputs(answer):
    """The nodes of the section outputs, in order."""
    return answer["nodes"][:len(answer["sections"])]
