# SPDX-License-Identifier: GPL-3.0-or-later
"""Every kernel of runtime/kernels/ beside the arithmetic of words/realisation.h, written out once
more in kernel_main.c, on its part: random signals and states, corners (most negative samples, words
and states), random block lengths, in place and not, with clips counted. Quick: some thousand samples
a kernel; PW_FULL=1: a million; PW_LONG=1: ten million (an hour, most of it for AVR)."""
import os
import random
import sys

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
import harness  # noqa: E402
from kernel_rig import Section, random_section, run  # noqa: E402
from tap import FULL, check, done  # noqa: E402

SAMPLES_A_ROUND = 80
LONG = os.environ.get("PW_LONG") == "1"
# (sample, bits of words, shift of b, wrap, truncate, order)
SHAPES = [("q15", 16, 0, 0, 0, 2), ("q15", 16, 3, 0, 0, 2), ("q15", 16, 2, 0, 1, 2), ("q15", 16, 0, 1, 0, 2),
          ("q15", 32, 0, 0, 0, 2), ("q15", 32, 5, 1, 1, 1), ("q15", 16, 0, 0, 0, 1),
          ("q31", 32, 0, 0, 0, 2), ("q31", 32, 4, 0, 0, 2), ("q31", 32, 40, 0, 0, 2), ("q31", 32, -2, 0, 1, 2),
          ("q31", 32, 0, 1, 0, 2), ("q31", 32, 3, 1, 1, 1), ("q31", 16, 0, 0, 0, 2), ("q31", 32, 0, 0, 1, 1)]


def corner(bits):
    """Words at the ends of their range, alternating signs; sums still inside 64 bits."""
    low, high, fa = -(1 << (bits - 1)), (1 << (bits - 1)) - 1, bits - 2
    return Section([low, high, low], [high, -high], fa, fa)


def rounds(target, shape):
    want = 10_000_000 if LONG else 1_000_000 if FULL else 6_000
    if target.name == "avr" and not LONG:
        want //= 10
    return max(want // SAMPLES_A_ROUND // len([s for s in SHAPES if s[0] == shape[0]]), 12)


def sections(rng, shape):
    sample, bits, shift, _, _, order = shape
    loud = 0.45 if shift >= 0 else 1.5
    list_ = [random_section(rng, bits, order, loud, shift, bits - 2) for _ in range(2)]
    if order == 2 and shift == 0 and sample == "q31" and bits == 32:
        list_.append(corner(bits))
    return list_


def quiet_sections(rng, shape):
    """Proved not to clip: small gains, and the signals of the rig are quiet."""
    list_ = [random_section(rng, shape[1], shape[5], 0.2, shape[2], shape[1] - 2) for _ in range(2)]
    for one in list_:
        one.cannot_clip = True
    return list_


QUICK_SHAPES = [s for i, s in enumerate(SHAPES) if i in (0, 1, 3, 4, 7, 8, 9, 11)]


def check_target(target):
    rng = random.Random(3)
    clips = 0
    for shape in SHAPES if FULL else QUICK_SHAPES:
        sample, bits, shift, wrap, truncate, order = shape
        name = f"{target.name} {sample} words of {bits} bits, b shifted {shift}, order {order}" \
            + (", wraps" if wrap else "") + (", truncates" if truncate else "")
        same, clipped, _, told = run(target, sample, sections(rng, shape), tag="k", wrap=wrap, truncate=truncate,
                                     rounds=rounds(target, shape))
        check(same, name, told.strip() or f"{clipped} clips")
        clips += clipped
        if not wrap and (FULL or (shift == 0 and sample[1:] == str(bits - 1))):
            same, clipped, _, told = run(target, sample, quiet_sections(rng, shape), tag="k", truncate=truncate,
                                         rounds=rounds(target, shape), quiet=True)
            check(same and clipped == 0, name + ", proved not to clip", told.strip())
    check(clips > 1000, f"{target.name}: the signals do clip", f"{clips} times")


QUICK = ("cortex-m4f", "cortex-m3", "cortex-m0", "cortex-m55", "rv32imac", "avr")   # one of each set of kernels
for target in harness.present(sys.argv[1:] or QUICK):
    check_target(target)
done()
