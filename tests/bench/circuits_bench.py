# SPDX-License-Identifier: GPL-3.0-or-later
"""The part of `make bench` for circuits: a network of 40 nodes and 30 reactive parts to its roots, its
sensitivities, and 100,000 draws of a six-part stage. Best of several runs, in seconds of wall clock and
(other work on the machine does not show there) of processor."""
import os
import resource
import subprocess
import sys
import time

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
from tap import PROGRAM, ROOT  # noqa: E402

PROBE = ROOT + "/build/release/outside/probe_circuit"
SPREAD = ROOT + "/build/release/outside/probe_circuit_spread"
R = [10, 22, 33, 47, 68]
C = [1.0, 2.2, 3.3, 4.7]
SIX = """stage: six
rate: 48 kHz
analog:
  circuit:
    input: {voltage: in}
    output: out
    parts:
      R1: {resistor: 15.92k, between: [in, a], tolerance: 1 %}
      R2: {resistor: 15.92k, between: [a, b], tolerance: 1 %}
      C1: {capacitor: 10n, between: [a, out], tolerance: 5 %}
      C2: {capacitor: 10n, between: [b, ground], tolerance: 5 %}
      RA: {resistor: 10k, between: [m, ground], tolerance: 1 %}
      RB: {resistor: 17.8k, between: [m, out], tolerance: 1 %}
      U1: {op-amp: OPAMP, plus: b, minus: m, out: out}
"""


def ladder():
    """40 nodes: 30 of an RC ladder whose capacitors also lead back, and five amplifiers along it."""
    lines = ["V n0"]
    for i in range(1, 31):
        back = "ground" if i % 3 or i < 3 else f"n{i - 2}"
        lines.append(f"R R{i} n{i - 1} n{i} {R[i % 5]}e{2 + i % 3}")
        lines.append(f"C C{i} n{i} {back} {C[i % 4]}e-{8 + i % 3}")
    for j in range(5):
        lines += [f"U U{j} n{6 * j + 4} m{j} o{j}", f"R A{j} m{j} o{j} 10000", f"R B{j} m{j} ground 22000",
                  f"R D{j} o{j} n{6 * j + 5} 33000"]
    return "\n".join(lines + ["O n30", "end"]) + "\n"


def processor():
    used = resource.getrusage(resource.RUSAGE_CHILDREN)
    return used.ru_utime + used.ru_stime


def tell(what, command, text, times=5):
    wall, cpu = best(command, text, times)
    print(f"  {what:58} {wall:7.3f} s {cpu:7.3f} s", flush=True)


def best(command, text, times=5):
    least = [1e9, 1e9]
    for _ in range(times):
        began, used = time.perf_counter(), processor()
        subprocess.run(command, input=text, capture_output=True, text=True, check=True)
        least = [min(least[0], time.perf_counter() - began), min(least[1], processor() - used)]
    return least


def main():
    print("\nCircuits:" + "wall processor".rjust(67))
    tell("40 nodes, 30 capacitors, 5 op-amps to roots", [PROBE], ladder())
    cell = "stage: t\nrate: 48 kHz\nanalog: {cell: {kind: rc-ladder, R1: 10k, C1: 10n, stages: 30}}\n"
    tell("show of 30 RC stages, 60 parts' sensitivities", [PROGRAM, "show", "-"], cell)
    for what, op_amp in (("ideal op-amp", "ideal"), ("real op-amp", "{gain-bandwidth: 3 MHz, dc-gain: 110 dB}")):
        for threads in ("1", "2"):
            tell(f"100,000 draws, six parts and one {what}, threads: {threads}", [SPREAD, "100000", threads],
                 SIX.replace("OPAMP", op_amp), 2)


if __name__ == "__main__":
    main()
