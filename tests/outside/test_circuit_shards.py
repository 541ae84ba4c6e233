# SPDX-License-Identifier: GPL-3.0-or-later
"""A study of tolerances in shards: joined, it is the whole study, and what does not fit is refused."""
import json
import os
import sys
import tempfile

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
import circuits  # noqa: E402, F401
import tap  # noqa: E402

STAGE = tap.ROOT + "/examples/rudder-loop/stage.yaml"
DRAWS = ["--set", "spread.draws=3001"]


def twin(*args):
    return tap.polewright("twin", STAGE, *DRAWS, *args)


def main():
    with tempfile.TemporaryDirectory() as folder:
        for i in (1, 2, 3):
            ran = twin("--shard", f"{i}/3", "-o", f"{folder}/{i}.spread", "--quiet")
            tap.check(ran.returncode == 0 and ran.stdout == "", f"shard {i} of 3 is written", ran.stderr)
        whole = json.loads(tap.polewright("check", STAGE, *DRAWS, "--json").stdout)["spread"]
        ran = twin("--merge", folder, "--json")
        tap.check(ran.returncode == 0 and json.loads(ran.stdout) == whole, "three shards are the whole study",
                  ran.stderr)
        ran = twin("--merge", f"{folder}/3.spread,{folder}/1.spread", "-o", f"{folder}/some.joined")
        tap.check(ran.returncode == 1 and "1000 of 3001 draws are missing" in ran.stdout,
                  "missing draws are told", ran.stdout + ran.stderr)
        ran = twin("--merge", f"{folder}/2.spread,{folder}/some.joined", "--json")
        tap.check(ran.returncode == 0 and json.loads(ran.stdout) == whole, "a joined file joins again", ran.stderr)
        ran = twin("--merge", f"{folder}/2.spread,{folder}/some.joined,{folder}/1.spread")
        tap.check(ran.returncode == 2 and "1.spread: has draws that are in already" in ran.stderr,
                  "a shard twice is refused", ran.stderr)
        ran = twin("--merge", folder, "--set", "analog.circuit.parts.R1.tolerance=2%")
        tap.check(ran.returncode == 2 and "the shards are of another stage" in ran.stderr,
                  "shards of other part values are refused", ran.stderr)
        with open(f"{folder}/2.spread", "a", encoding="utf-8") as file:
            file.write("more\n")
        ran = twin("--merge", folder)
        tap.check(ran.returncode == 2 and "2.spread: is no whole shard" in ran.stderr, "a damaged shard is refused",
                  ran.stderr)
        ran = twin("--shard", "4/3")
        tap.check(ran.returncode == 2 and "--shard 4/3 is no share; expected I/N" in ran.stderr, "a wrong share is refused",
                  ran.stderr)
        ran = tap.polewright("twin", tap.ROOT + "/examples/winch-current/stage.yaml", "--shard", "1/2")
        tap.check(ran.returncode == 2 and "no part has a tolerance" in ran.stderr, "a stage without parts is refused",
                  ran.stderr)
        ran = twin("--merge", folder + "/nowhere")
        tap.check(ran.returncode == 2 and "nowhere" in ran.stderr, "a missing file is told", ran.stderr)
        ran = twin("--shard", "1/3", "-o", folder + "/no/such/folder/x.spread")
        tap.check(ran.returncode == 3, "a file that cannot be written is status 3", ran.stderr)
    tap.done()


main()
