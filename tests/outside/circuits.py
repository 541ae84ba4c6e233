# SPDX-License-Identifier: GPL-3.0-or-later
"""Circuits for the Python tests: the probe, and a nodal solve of our own in numpy."""
import json
import os
import subprocess
import sys

import mpmath
import numpy as np

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
import tap  # noqa: E402

PROBE = tap.ROOT + "/build/release/outside/probe_circuit"


def probe(circuits):
    """Answers for a list of circuits, each a list of lines of the probe's language."""
    text = "".join("\n".join(lines) + "\nend\n" for lines in circuits)
    ran = subprocess.run([PROBE], input=text, capture_output=True, text=True)
    if ran.returncode:
        raise RuntimeError(f"probe_circuit: {ran.returncode} {ran.stderr}")
    return [json.loads(line) for line in ran.stdout.splitlines()]


def roots_response(answer, s):
    """H from an answer's roots at complex s (an array), in logarithms so that nothing overflows."""
    h = np.full(s.shape, np.log(complex(answer["factor"] or 1e-300)))
    for re, im in answer["zeros"]:
        h = h + np.log(np.where(s == complex(re, im), 1e-300, s - complex(re, im)))
    for re, im in answer["poles"]:
        h = h - np.log(s - complex(re, im))
    return np.exp(h)


def nodal(lines, s, exact=False):
    """H at complex s by modified nodal analysis with numpy: a path that shares nothing with the
    program's (dense complex solve at each frequency, op-amps with their poles written out).
    exact: the same equations solved by mpmath with 40 digits, where double precision will not do."""
    mpmath.mp.dps = 40
    number = mpmath.mpf if exact else float
    s = mpmath.mpc(s) if exact else s
    index, branch, work = {}, [], [line.split() for line in lines]
    for w in work:
        ends = {"R": (2, 3), "C": (2, 3), "L": (2, 3), "U": (2, 3, 4), "E": (2, 3, 4, 5), "G": (2, 3, 4, 5)}
        for k in ends.get(w[0], ()):
            if w[k] != "ground":
                index.setdefault(w[k], len(index))
        if w[0] in "LUEV":
            branch.append(id(w))
    n = len(index)
    branch = {b: n + i for i, b in enumerate(branch)}
    size = n + len(branch)
    a = mpmath.zeros(size) if exact else np.zeros((size, size), complex)
    rhs = mpmath.zeros(size, 1) if exact else np.zeros(size, complex)

    def put(row, column, value):
        if row is not None and column is not None:
            a[row, column] += value

    def node(name):
        return None if name == "ground" else index[name]

    def admittance(p, q, y):
        put(p, p, y), put(q, q, y), put(p, q, -y), put(q, p, -y)

    inductors = {w[1]: (branch[id(w)], number(w[4])) for w in work if w[0] == "L"}
    output = None
    for w in work:
        if w[0] == "R":
            admittance(node(w[2]), node(w[3]), 1 / number(w[4]))
        elif w[0] == "C":
            admittance(node(w[2]), node(w[3]), s * number(w[4]))
        elif w[0] == "L":
            p, q, i = node(w[2]), node(w[3]), branch[id(w)]
            put(p, i, 1), put(q, i, -1), put(i, p, 1), put(i, q, -1), put(i, i, -s * number(w[4]))
        elif w[0] == "K":
            (i, l1), (j, l2) = inductors[w[2]], inductors[w[3]]
            m = number(w[4]) * (l1 * l2) ** number("0.5")
            put(i, j, -s * m), put(j, i, -s * m)
        elif w[0] == "U":
            plus, minus, out, i = node(w[2]), node(w[3]), node(w[4]), branch[id(w)]
            put(out, i, 1)
            if len(w) == 5:
                put(i, plus, 1), put(i, minus, -1)
            else:                                       # v(out) = A (plus - minus) - Rout * (current out)
                gbw, a0, rout = map(number, w[5:8])
                gain = 1 / (1 / a0 + s / (2 * (mpmath.pi if exact else np.pi) * gbw))
                put(i, out, 1 / gain), put(i, plus, -1), put(i, minus, 1), put(i, i, -rout / gain)
        elif w[0] == "E":
            sp, sm, dp, dm, i = node(w[2]), node(w[3]), node(w[4]), node(w[5]), branch[id(w)]
            put(dp, i, 1), put(dm, i, -1), put(i, dp, 1), put(i, dm, -1)
            put(i, sp, -number(w[6])), put(i, sm, number(w[6]))
        elif w[0] == "G":
            sp, sm, dp, dm, g = node(w[2]), node(w[3]), node(w[4]), node(w[5]), number(w[6])
            put(dp, sp, -g), put(dp, sm, g), put(dm, sp, g), put(dm, sm, -g)
        elif w[0] == "V":
            i = branch[id(w)]
            put(node(w[1]), i, 1), put(i, node(w[1]), 1)
            if len(w) > 2:
                put(i, i, -number(w[2]))
            rhs[i] = 1
        elif w[0] == "I":
            rhs[node(w[1])] = 1
            if len(w) > 2:
                admittance(node(w[1]), None, 1 / number(w[2]))
        elif w[0] == "O":
            output = w[1:]
        elif w[0] == "Z":
            load = number(w[1])
    for w in work:
        if w[0] == "Z":
            admittance(node(output[0]), node(output[1]) if len(output) > 1 else None, 1 / load)
    if exact:
        x = mpmath.lu_solve(a, rhs)
        h = x[index[output[0]]] if output[0] != "ground" else 0
        return complex(h - (x[index[output[1]]] if len(output) > 1 and output[1] != "ground" else 0))
    scale = 1 / np.maximum(np.abs(a).max(axis=1), 1e-300)
    x = np.linalg.solve(a * scale[:, None], rhs * scale)
    h = x[index[output[0]]] if output[0] != "ground" else 0
    return h - (x[index[output[1]]] if len(output) > 1 and output[1] != "ground" else 0)
