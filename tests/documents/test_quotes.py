#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""The README's table of costs is the one that `make bench-write` made and test_counts.py pins.
test_quotes.py --write puts today's in."""
import os
import re
import sys

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
import tap

HEAD = "| part | format | | instructions a sample and section | the loop by hand | floor |\n| --- | --- | --- | --- | --- | --- |\n"


def quoted():
    rows = ""
    with open(tap.ROOT + "/tests/bench/table.md") as f:
        for line in [x for x in f if x.startswith("|")][2:]:
            part, name, kind, counts, _, yardstick, floor, _ = [c.strip() for c in line.strip().strip("|").split("|")]
            rows += f"| {part} | {name} | {kind} | {counts.split(' / ')[2]} | {yardstick} | {floor} |\n"
    return HEAD + rows


with open(tap.ROOT + "/README.md") as f:
    readme = f.read()
if "--write" in sys.argv:
    start = readme.index(HEAD)
    end = re.compile(r"^(?!\|)", re.M).search(readme, start).start()
    with open(tap.ROOT + "/README.md", "w") as f:
        f.write(readme[:start] + quoted() + readme[end:])
else:
    tap.check(quoted() in readme, "the README quotes the pinned counts")
    tap.done()
