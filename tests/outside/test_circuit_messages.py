# SPDX-License-Identifier: GPL-3.0-or-later
"""What a designer is told about a schematic that cannot work, at its line."""
import os
import sys

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
import circuits  # noqa: E402, F401
import tap  # noqa: E402

HEAD = """stage: test
rate: 48 kHz
analog:
  circuit:
    input: {voltage: in}
    output: out
    parts:
"""
FIRST = HEAD.count("\n") + 1                            # the line of the first part

RC = ["R1: {resistor: 10k, between: [in, out]}", "C1: {capacitor: 10n, between: [out, ground]}"]


def show(parts, head=HEAD):
    return tap.polewright("show", "-", stdin=head + "".join(f"      {p}\n" for p in parts))


def refused(name, parts, line, words, head=HEAD, status=2):
    ran = show(parts, head)
    found = [m for m in ran.stderr.splitlines() if m.startswith(f"stdin:{line}:") and words in m]
    tap.check(ran.returncode == status and found, name, "" if found else f"{ran.returncode}: {ran.stderr}")


def warned(name, parts, line, words, head=HEAD):
    ran = show(parts, head)
    found = [m for m in ran.stderr.splitlines()
             if m.startswith(f"stdin:{line}:") and "warning: " in m and words in m]
    tap.check(ran.returncode == 0 and found, name, "" if found else f"{ran.returncode}: {ran.stderr}")


def quiet(name, parts, head=HEAD):
    ran = show(parts, head)
    tap.check(ran.returncode == 0 and "latch" not in ran.stderr and "feedback" not in ran.stderr, name, ran.stderr)


def nodes():
    refused("a node with one connection", RC + ["R2: {resistor: 1k, between: [out, outt]}"], FIRST + 2,
            "node 'outt' has one connection only; expected two or more, or did you mean 'out'")
    refused("a name for ground that is not ground", RC + ["R2: {resistor: 1k, between: [out, gnd]}"], FIRST + 2,
            "or did you mean 'ground'")
    refused("one floating node", RC + ["C2: {capacitor: 1n, between: [x, x2]}", "C3: {capacitor: 1n, between: [x, x2]}"],
            FIRST + 2, "nodes 'x', 'x2' float: no part ties them to ground or to the input")
    refused("an input on no part", RC, 5, "no part is at the input's node 'inn'; expected a node of the circuit, such as 'in'",
            HEAD.replace("voltage: in", "voltage: inn"))
    refused("an output on no part", RC, 6, "no part is at the output's node 'oout'", HEAD.replace("output: out", "output: oout"))
    refused("an output that is ground", RC, 6, "the output is shorted", HEAD.replace("output: out", "output: ground"))
    refused("an output between one node", RC, 6, "the output is shorted", HEAD.replace("output: out", "output: [out, out]"))
    refused("an input that is ground", RC, 5, "the input is 'ground'", HEAD.replace("voltage: in", "voltage: ground"))
    refused("an output held at ground", ["R1: {resistor: 10k, between: [in, out]}", "R2: {resistor: 10k, between: [out, y]}",
                                         "U1: {op-amp: ideal, plus: ground, minus: out, out: y}"], 6,
            "the output is 0 whatever the input")
    warned("a part shorted by its own nodes", RC + ["R2: {resistor: 1k, between: [out, out]}"], FIRST + 2,
           "both ends of part 'R2' are at node 'out'")


def paths():
    refused("no path from input to output", RC[:0] + [
        "R1: {resistor: 10k, between: [in, a]}", "C1: {capacitor: 10n, between: [a, ground]}",
        "R2: {resistor: 10k, between: [out, ground]}", "C2: {capacitor: 10n, between: [out, ground]}"], 6,
        "no path leads from the input 'in' to the output 'out'")
    refused("an op-amp looks one way", [
        "R1: {resistor: 1k, between: [out, a]}", "C1: {capacitor: 1n, between: [a, ground]}",
        "U1: {op-amp: ideal, plus: a, minus: b, out: b}", "R2: {resistor: 1k, between: [b, in]}",
        "R3: {resistor: 1k, between: [out, ground]}"], 6, "no path leads from the input")
    refused("a loop of ideal sources", RC + ["E1: {amplifier: 2, sense: [out, ground], drive: [in, ground]}"],
            FIRST + 2, "the output of part 'E1' closes a loop of ideal sources")
    refused("two op-amps on one node", [
        "U1: {op-amp: ideal, plus: in, minus: out, out: out}", "U2: {op-amp: ideal, plus: in, minus: out, out: out}",
        "R1: {resistor: 1k, between: [in, ground]}"], FIRST + 1, "the output of part 'U2' closes a loop")


def op_amps():
    refused("no feedback path", ["R1: {resistor: 10k, between: [in, m]}", "R2: {resistor: 10k, between: [m, ground]}",
                                 "U1: {op-amp: ideal, plus: ground, minus: m, out: out}",
                                 "R3: {resistor: 10k, between: [out, ground]}"], FIRST + 2,
            "op-amp 'U1' has no feedback path from its output to its inputs")
    warned("no feedback path of a real one", [
        "R1: {resistor: 10k, between: [in, m]}", "R2: {resistor: 10k, between: [m, ground]}",
        "U1: {op-amp: {gain-bandwidth: 1 MHz, dc-gain: 100 dB}, plus: ground, minus: m, out: out}",
        "R3: {resistor: 10k, between: [out, ground]}"], FIRST + 2, "runs at its full gain")
    warned("inputs exchanged", ["R1: {resistor: 10k, between: [in, p]}", "R2: {resistor: 22k, between: [p, out]}",
                                "C1: {capacitor: 1n, between: [p, out]}",
                                "U1: {op-amp: ideal, plus: p, minus: ground, out: out}"], FIRST + 3,
           "the feedback of op-amp 'U1' is positive at DC")
    quiet("an integrator has no positive feedback", [
        "R1: {resistor: 10k, between: [in, m]}", "C1: {capacitor: 1n, between: [m, out]}",
        "U1: {op-amp: ideal, plus: ground, minus: m, out: out}"])
    quiet("nor has a Sallen-Key section", [
        "R1: {resistor: 10k, between: [in, a]}", "R2: {resistor: 10k, between: [a, b]}", "C1: {capacitor: 10n, between: [a, out]}",
        "C2: {capacitor: 10n, between: [b, ground]}", "R3: {resistor: 10k, between: [m, ground]}",
        "R4: {resistor: 15k, between: [m, out]}", "U1: {op-amp: ideal, plus: b, minus: m, out: out}"])
    quiet("nor a loop of two integrators and an inverter", [
        "R1: {resistor: 10k, between: [in, m]}", "C1: {capacitor: 1n, between: [m, b]}", "R2: {resistor: 10k, between: [m, b]}",
        "U1: {op-amp: ideal, plus: ground, minus: m, out: b}", "R3: {resistor: 10k, between: [b, x]}",
        "C2: {capacitor: 1n, between: [x, out]}", "U2: {op-amp: ideal, plus: ground, minus: x, out: out}",
        "R4: {resistor: 10k, between: [out, y]}", "R5: {resistor: 10k, between: [y, i]}",
        "U3: {op-amp: ideal, plus: ground, minus: y, out: i}", "R6: {resistor: 10k, between: [i, m]}"])
    refused("inputs that are one node", RC + ["U1: {op-amp: ideal, plus: out, minus: out, out: x}",
                                              "R2: {resistor: 1k, between: [x, out]}"], FIRST + 2,
            "the input of part 'U1' is node 'out' twice")
    warned("a tolerance of nothing", [
        "R1: {resistor: 10k, between: [in, m]}", "C1: {capacitor: 1n, between: [m, out]}",
        "U1: {op-amp: ideal, plus: ground, minus: m, out: out, tolerance: 5 %}"], FIRST + 2,
        "the tolerance of op-amp 'U1' does nothing")
    refused("an amplifier that contradicts itself", RC + [
        "E1: {amplifier: 1, sense: [x, ground], drive: [x, ground]}", "R2: {resistor: 1k, between: [x, out]}"],
        FIRST + 2, "the voltage of node 'x' is not determined")


def values():
    refused("a missing value", ["R1: {between: [in, out]}", RC[1]], FIRST, "a key is missing; expected exactly one of resistor")
    refused("a negative resistor", ["R1: {resistor: -10k, between: [in, out]}", RC[1]], FIRST, "-10")
    refused("two parts of one name", RC + ["R1: {resistor: 1k, between: [out, ground]}"], FIRST + 2, "R1")
    refused("a coupling of what is not there", RC + ["K1: {coupling: 0.5, between: [L1, L2]}"], FIRST + 2,
            "there is no inductor 'L1' to couple")
    refused("couplings that cannot hold together", [
        "L1: {inductor: 1m, between: [in, a]}", "L2: {inductor: 1m, between: [a, out]}", "L3: {inductor: 1m, between: [out, ground]}",
        "K1: {coupling: 0.9, between: [L1, L2]}", "K2: {coupling: 0.9, between: [L2, L3]}",
        "K3: {coupling: -0.9, between: [L1, L3]}", "R1: {resistor: 1k, between: [out, ground]}"], FIRST + 5,
        "these couplings cannot hold together")
    refused("a gain that grows without end", ["C1: {capacitor: 10n, between: [in, m]}", "R1: {resistor: 10k, between: [m, out]}",
                                              "U1: {op-amp: ideal, plus: ground, minus: m, out: out}"], 4, "zero")
    refused("poles in the right half plane", [
        "R1: {resistor: 10k, between: [in, a]}", "R2: {resistor: 10k, between: [a, b]}", "C1: {capacitor: 10n, between: [a, out]}",
        "C2: {capacitor: 10n, between: [b, ground]}", "E1: {amplifier: 3.5, sense: [b, ground], drive: [out, ground]}"], 4,
        "right half plane")
    many = [f"R{i}: {{resistor: 1k, between: [in, out]}}" for i in range(2, 130)]
    refused("more parts than one stage has", RC + many, 5, "the circuit has 130 parts; expected at most 120")


def several():
    ran = show(["R1: {resistor: 10k, between: [in, lonely]}", "C1: {capacitor: 10n, between: [out, ground]}",
                "U1: {op-amp: ideal, plus: in, minus: nowhere, out: out}"])
    lines = [int(m.split(":")[1]) for m in ran.stderr.splitlines()]
    tap.check(ran.returncode == 2 and lines == sorted(lines) and len(lines) >= 3,
              "every independent mistake is told in one run", ran.stderr)
    ran = show(RC + ["C0: {capacitor: 1n, between: [in, a]}", "R0: {resistor: 1k, between: [a, ground]}"])
    tap.check(ran.returncode == 0 and "warning: a pole at 159.2 kHz cancels a zero exactly" in ran.stderr,
              "a part that the output does not see is reported", ran.stderr)


nodes()
paths()
op_amps()
values()
several()
tap.done()
