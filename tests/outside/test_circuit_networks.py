# SPDX-License-Identifier: GPL-3.0-or-later
"""Random networks: the roots found against an independent nodal solve in numpy."""
import os
import random
import sys

import numpy as np

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
import circuits  # noqa: E402
import tap  # noqa: E402

random.seed(4)
E12 = [10, 12, 15, 18, 22, 27, 33, 39, 47, 56, 68, 82]


def value(low, high):
    return f"{random.choice(E12) / 10}e{random.randint(low, high - 1)}"


def network(nodes):
    """A connected network of random parts; node 'n0' is the input, the last node the output."""
    names = [f"n{i}" for i in range(nodes)]
    lines, count = ["V n0" + random.choice(["", f" {value(1, 3)}"])], 0

    def part(letter, a, b):
        nonlocal count
        count += 1
        span = {"R": (2, 6), "C": (-11, -6), "L": (-6, -2)}[letter]
        lines.append(f"{letter} P{count} {a} {b} {value(*span)}")

    for i in range(1, nodes):                          # a tree, so that nothing floats
        part(random.choice("RRRCCL"), names[i], random.choice(names[:i]))
    for name in names[1:]:                             # and a way to ground for most
        if random.random() < 0.6:
            part(random.choice("RRC"), name, "ground")
    part("R", names[-1], "ground")
    for _ in range(random.randint(1, nodes)):
        a, b = random.sample(names, 2)
        part(random.choice("RRCCL"), a, b)
    if nodes >= 4 and random.random() < 0.5:           # an op-amp with feedback, real or ideal
        minus, out = random.sample(names[2:], 2)
        real = random.choice(["", f" {value(5, 7)} {value(4, 6)} {value(0, 3)}"])
        part("R", minus, out)
        lines.append(f"U U1 ground {minus} {out}{real}")
    if nodes >= 3 and random.random() < 0.3:
        a, b = random.sample(names[1:], 2)
        lines.append(f"G G1 {a} ground {b} ground {value(-5, -3)}")
    inductors = [w.split()[1] for w in lines if w[0] == "L"]
    if len(inductors) >= 2 and random.random() < 0.7:
        lines.append(f"K K1 {inductors[0]} {inductors[1]} {random.choice([0.98, 0.5, -0.3])}")
    lines.append(f"O {names[-1]}")
    return lines


def compare(lines, answer):
    """The worst relative difference over ten decades; mpmath decides where numpy differs."""
    roots = [abs(complex(*r)) for r in answer["poles"] + answer["zeros"] if any(r)]
    middle = np.exp(np.mean(np.log(roots))) if roots else 1e4
    w = 1.0123 * middle * np.logspace(-5, 5, 41)
    direct = np.array([circuits.nodal(lines, 1j * x) for x in w])
    found = circuits.roots_response(answer, 1j * w)
    error = np.abs(found - direct) / np.maximum(np.abs(direct), 1e-300)
    for i in np.flatnonzero(error > 1e-10):
        if abs(direct[i]) + abs(found[i]) < 1e-60:     # the output does not move at all
            error[i] = 0
            continue
        exact = circuits.nodal(lines, 1j * w[i], exact=True)
        error[i] = abs(found[i] - exact) / max(abs(exact), 1e-60)
    return error.max()


def main():
    count = 3000 if tap.FULL else 300
    nets = [network(random.randint(2, 12)) for _ in range(count)]
    answers = circuits.probe(nets)
    tap.check(len(answers) == count, "every network is answered")
    solved = 0
    worst, where = 0, None
    for lines, answer in zip(nets, answers):
        if answer["status"]:
            if not any("zeros and" in m or "no path" in m or "output is 0" in m or "one connection" in m
                       or "positive" in m for m in answer["messages"]):
                print("# not solved:", answer["messages"], lines)
            continue
        solved += 1
        error = compare(lines, answer)
        if error > worst:
            worst, where = error, lines
    tap.check(solved >= 0.6 * count, "most networks have a proper response", f"{solved} of {count}")
    tap.check(worst < 1e-10, "roots reproduce an independent nodal solve", f"worst {worst:.2e}: {where}")
    tap.done()


main()
