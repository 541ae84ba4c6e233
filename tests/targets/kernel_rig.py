# SPDX-License-Identifier: GPL-3.0-or-later
"""Cascades given by their words, their kernels from the program's own emitter, run on a part."""
import os
import random
import subprocess

import harness
from tap import ROOT

HERE = os.path.dirname(os.path.abspath(__file__))
PROBE = ROOT + "/build/release/outside/probe_kernels"


class Section:
    def __init__(self, b, a, b_fraction, a_fraction, cannot_clip=False, fits_32=False):
        self.b, self.a = list(b) + [0] * (3 - len(b)), list(a) + [0] * (2 - len(a))
        self.order = 2 if len(b) == 3 else 1
        self.b_fraction, self.a_fraction, self.cannot_clip, self.fits_32 = b_fraction, a_fraction, cannot_clip, fits_32

    def line(self):
        return " ".join(map(str, [self.order, *self.b, *self.a, self.b_fraction, self.a_fraction,
                                  int(self.cannot_clip), int(self.fits_32)]))

    def fits(self, bits, full):
        """The precondition on words: they fit, and no sum leaves 64 bits."""
        limit = 1 << (bits - 1)
        shift = self.b_fraction - self.a_fraction
        p = sum(abs(b) for b in self.b) * full
        p = p << -shift if shift < 0 else p + (1 << max(shift - 1, 0))
        acc = (p >> max(shift, 0)) + sum(abs(a) for a in self.a) * full + (1 << self.a_fraction)
        return all(-limit <= w < limit for w in self.b + self.a) and max(p, acc) < 1 << 63


def random_section(rng, bits, order=2, loud=0.5, shift=None, a_fraction=None):
    """Stable poles, numerator of any size; words of so many bits."""
    fa = a_fraction if a_fraction is not None else rng.choice([bits - 2, bits - 2, bits - 3, bits - 5])
    fb = fa + (shift if shift is not None else rng.choice([0, 0, 1, 3, 7, -1, bits // 2]))
    while True:
        radius, cosine = rng.uniform(0.2, 0.98), rng.uniform(-1, 1)
        a = [-2 * radius * cosine, radius * radius] if order == 2 else [-radius]
        b = [rng.uniform(-1, 1) * loud for _ in range(order + 1)]
        one = Section([round(v * 2 ** fb) for v in b], [round(v * 2 ** fa) for v in a], fb, fa)
        if one.fits(bits, 1 << 31 if bits == 32 else 1 << 15):
            return one
        loud *= 0.7


def kernels(target, sample, sections, wrap=False, truncate=False):
    text = "\n".join(s.line() for s in sections) + "\n"
    done = subprocess.run([PROBE, target, sample, str(int(wrap)), str(int(truncate))], input=text, capture_output=True,
                          text=True)
    if done.returncode:
        raise RuntimeError(f"no kernels: {done.returncode} {done.stderr}")
    return done.stdout


def program(folder, target, sample, sections, wrap=False, truncate=False, rounds=200, quiet=False):
    """Writes main.c and kernels.h; returns the path of main.c."""
    os.makedirs(folder, exist_ok=True)
    with open(folder + "/kernels.h", "w", encoding="utf-8") as file:
        file.write(kernels(target, sample, sections, wrap, truncate))
    rows = "".join("    {%s},\n" % ", ".join(str(v) for v in [*s.b, *s.a, s.b_fraction, s.a_fraction])
                   for s in sections).replace("-2147483648", "INT32_MIN")
    bits = 16 if sample == "q15" else 32
    with open(folder + "/main.c", "w", encoding="utf-8") as file:
        file.write(f"#include <stdint.h>\n#define SAMPLE int{bits}_t\n#define LOW INT{bits}_MIN\n"
                   f"#define HIGH INT{bits}_MAX\n#define SECTIONS {len(sections)}\n#define WRAP {int(wrap)}\n"
                   f"#define TRUNCATE {int(truncate)}\n#define ROUNDS {rounds}u\n#define QUIET {int(quiet)}\n"
                   "typedef struct { int32_t b0, b1, b2, a1, a2; int bf, af; } ref_words;\n"
                   f"static const ref_words ref[SECTIONS] = {{\n{rows}}};\n"
                   f"#include \"{HERE}/kernel_main.c\"\n")
    return folder + "/main.c"


def run(target, sample, sections, optimise="-O2", tag="", **how):
    """(same, clips, instructions of one block of 64); raises where it does not build."""
    folder = f"{ROOT}/build/parts/kernels/{target.name}{optimise}{tag}"
    source = program(folder, target.name, sample, sections, **how)
    ran = target.run(target.build(folder + "/program", [source], optimise, strict=False,
                                  flags=["-std=c99", "-Wall", "-Wextra", "-Werror", f"-I{folder}"]))
    words = ran.stdout.split()
    if ran.returncode or len(words) != 2:
        return False, 0, 0, ran.stdout + ran.stderr
    return True, int(words[0]), int(words[1]), ""
