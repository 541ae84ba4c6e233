# SPDX-License-Identifier: GPL-3.0-or-later
"""Every target builds and runs a small program: text, exit status, and a counter that counts."""
import os
import sys

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
import harness  # noqa: E402
from tap import check, done, ROOT  # noqa: E402

PROGRAM = r"""
#include "part.h"
static int32_t initialised = 41;
static int32_t cleared;
static volatile uint16_t turns = 1000;
int main(void)
{
    uint32_t began = part_count();
    for (uint16_t i = turns; i; i--) __asm__ volatile("nop");
    uint32_t took = part_count() - began;
    part_write("alive\n");
    return initialised + 1 + cleared == 42 && (took == 0 || (took >= 2000 && took <= 9000)) ? 42 : 1;
}
"""

out = ROOT + "/build/parts/parts"
os.makedirs(out, exist_ok=True)
with open(out + "/alive.c", "w", encoding="utf-8") as file:
    file.write(PROGRAM)
for target in harness.present():
    ran = target.run(target.build(f"{out}/{target.name}", [out + "/alive.c"], flags=["-Wno-pedantic", "-std=gnu99"]))
    check(ran.stdout.replace("\r", "") == "alive\n" and ran.returncode == 42, f"{target.name} runs a program",
          f"{ran.returncode} {ran.stdout!r} {ran.stderr[:200]!r}")
done()
