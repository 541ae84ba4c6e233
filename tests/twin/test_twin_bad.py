#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Bad records under the sanitised build: a clear message with file and line, or a correct result."""
import os
import random
import resource
import struct
import subprocess
import sys
import tempfile
import time

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
from boards import CHAIN, np, stage_file, tap

ROWS = "".join(f"{0.1 * (i % 7) - 0.3:.3f},{0.05 * (i % 5):.3f}\n" for i in range(64))

# name, text, what the message must hold
CASES = [
    ("empty", "", "is empty; expected a line that names"),
    ("comments only", "# one\n\n# two\n", "is empty"),
    ("names only", "input,output\n", "holds 0 samples; expected at least 16"),
    ("one sample", "input,output\n1,2\n", "holds 1 sample; expected at least 16"),
    ("missing column", "input,other\n" + ROWS, ":1: no column is named 'output'"),
    ("mistyped column", "input,outptu\n" + ROWS, "('outptu' is near)"),
    ("no names", ROWS, ":1: the first line holds numbers; expected the names"),
    ("twice", "input,output,input\n1,2,3\n", ":1: two columns are named 'input'"),
    ("short line", "# c\ninput,output\n" + ROWS + "0.5\n", ":67: has 1 field where 2 columns are named"),
    ("long line", "input,output\n" + ROWS + "1,2,3\n", ":66: has more than 2 fields where 2 columns are named"),
    ("nan", "input,output\n0,nan\n", ":2: the output 'nan' is no finite number"),
    ("infinite", "input,output\n1e999,0\n", ":2: the input '1e999' is no finite number"),
    ("text", "input,output\n1,ready\n", ":2: the output 'ready' is no finite number"),
    ("missing value", "input,output\n1,\n", ":2: the output is missing"),
    ("decimal comma", "input;output\n0,5;0,25\n", ":2: the input '0,5' has a decimal comma; expected a decimal point"),
    ("decimal comma and commas", "input,output\n0,5,0,25\n", "with a decimal point: a comma divides columns"),
    ("wrong rate", "time,input,output\n0,1,2\n1e-3,1,2\n", ":3: the time steps by 0.001 s"),
    ("uneven time", "time,input,output\n0,1,2\n5e-5,1,2\n1.5e-4,1,2\n", ":4: the time steps by 0.0001 s"),
    ("binary", b"input,output\n1,2\n\0\0\0\0", ":3: holds bytes that are no text"),
    ("endless line", "input,output\n" + "1" * 70000, ":2: is longer than 65536 bytes"),
    ("many columns", ",".join(f"c{i}" for i in range(300)) + "\n", ":1: names more than 256 columns"),
    ("broken WAV", b"RIFF\x24\0\0\0WAVEfmt ", "no sound file that can be read"),
]


def run(folder, name, content, *args):
    path = f"{folder}/{name.replace(' ', '-')}"
    with open(path, "wb") as f:
        f.write(content if isinstance(content, bytes) else content.encode())
    return path, tap.polewright("twin", STAGE, "--record", path, *args, program=tap.SANITISED)


def test_messages(folder):
    for name, content, part in CASES:
        path, ran = run(folder, name, content)
        good = ran.returncode == 2 and part in ran.stderr and ran.stderr.startswith(path) and ran.stderr.count("\n") == 1
        tap.check(good, f"{name}: {part}", ran.stderr.strip()[:300] * (not good))


def test_paths(folder):
    for path, part in ((folder + "/none.csv", "No such file"), (folder, "Is a directory")):
        ran = tap.polewright("twin", STAGE, "--record", path, program=tap.SANITISED)
        tap.check(ran.returncode == 2 and part in ran.stderr, f"{part}", ran.stderr.strip())


def test_command_line(folder):
    path, _ = run(folder, "rows", "input,output\n" + ROWS)
    for args, part in (([], "exactly one of"), (["--record", path, "--play", path], "exactly one of"),
                       (["--play", path], "--play needs -o FILE"), (["--record", path, "--hold", "zero"], "--hold goes with --reference"),
                       (["--record", path, "--reference", "--hold", "cubic"], "--hold knows zero and linear"),
                       (["--response", path, "--reference"], "--reference goes with --record"),
                       (["--play", path, "-o", folder + "/o.csv", "--calibrate"], "--calibrate goes with"),
                       (["--response", path, "--samples"], "--samples goes with"), (["--record", path, "--draws", "0"], "spread.draws"),
                       (["--recrod", path], "did you mean '--record'"), (["--record", path, "more"], "only one stage file")):
        ran = tap.polewright("twin", STAGE, *args, program=tap.SANITISED)
        tap.check(ran.returncode == 2 and part in ran.stderr, f"{' '.join(args[-2:])[-40:]}: {part}", ran.stderr.strip()[:200])
    with open(folder + "/half.csv", "w") as f:
        f.write("input\n1\n0.5\n")
    ran = tap.polewright("twin", STAGE, "--samples", "--play", folder + "/half.csv", "-o", folder + "/o.csv", "--set", "arithmetic.sample=q15",
                         program=tap.SANITISED)
    tap.check(ran.returncode == 2 and "whole numbers" in ran.stderr and not os.path.exists(folder + "/o.csv"),
              "half a word is refused and nothing written", ran.stderr.strip())


def test_responses(folder):
    for name, content, part in (("r1", "hz,db\n0,1\n", "expected frequencies above 0"), ("r2", "hz,db\n", "holds no points"),
                                ("r3", "freq,db\n1,1\n", "no column is named 'hz'"), ("r4", "hz,db,deg\n1,2\n", "2 fields where 3 columns")):
        path = f"{folder}/{name}.csv"
        with open(path, "w") as f:
            f.write(content)
        ran = tap.polewright("twin", STAGE, "--response", path, program=tap.SANITISED)
        tap.check(ran.returncode == 2 and part in ran.stderr, f"response: {part}", ran.stderr.strip())


def test_oddities(folder):
    """What is odd but right gives a result."""
    short = "".join(f"{v},{v}\r\n" for v in range(-8, 9))
    for name, content, part in (("short", "\ufeffinput,output\r\n" + short, "too short"), ("silence", "input,output\n" + "0,0\n" * 2000, "not known"),
                                ("one level", "input,output\n" + "1,0.5\n" * 600, "not known"),
                                ("tabs", "n\tinput\toutput\n" + "".join(f"{i}\t{i % 3}\t{i % 5}\n" for i in range(600)), "normalised"),
                                ("quoted", '"Input" , "Output"\n' + ROWS, "record"), ("no newline at the end", "input,output\n" + ROWS + "1,2", "65 samples")):
        _, ran = run(folder, name, content)
        good = ran.returncode in (0, 1) and part in ran.stdout
        tap.check(good, f"{name} gives a result", (ran.stderr + ran.stdout)[:300] * (not good))
        _, ran = run(folder, name, content, "--json", "--reference")
        tap.check(ran.returncode in (0, 1) and ran.stdout.startswith("{"), f"{name}: and JSON", ran.stderr[:300])


def test_fuzz(folder):
    """Bytes changed, cut and put in: never a crash, and never silence with a failure."""
    rng = random.Random(1)
    good = ("# c\ntime,input,output\n" + "".join(f"{i / 20000:.6f},{0.3 * (i % 11) - 1:.4f},{i % 4 / 8}\n" for i in range(40))).encode()
    bad = []
    for i in range(120 if tap.FULL else 25):
        content = bytearray(good)
        for _ in range(rng.randint(1, 4)):
            at = rng.randrange(len(content))
            if rng.random() < 0.4:
                content[at] = rng.choice(b",;.\n-eE#\t\r\0\xff019\"")
            elif rng.random() < 0.5:
                del content[at:at + rng.randint(1, 30)]
            else:
                content[at:at] = bytes(rng.choices(b",;.\n-e\"'\xc3\xa9 1", k=rng.randint(1, 5)))
        _, ran = run(folder, "fuzz", bytes(content))
        if ran.returncode not in (0, 1, 2) or (ran.returncode == 2 and not ran.stderr) or "Sanitizer" in ran.stderr or "runtime error" in ran.stderr:
            bad.append((ran.returncode, ran.stderr[-300:]))
    tap.check(not bad, "changed records never crash", str(bad[:2]))


def test_huge(folder):
    """2 GB that are not there: text with a hole at once, a WAV file of silence in constant memory."""
    path = f"{folder}/hole.csv"
    with open(path, "w") as f:
        f.write("input,output\n" + ROWS)
        f.truncate(2 << 30)
    began = time.monotonic()
    ran = tap.polewright("twin", STAGE, "--record", path, program=tap.SANITISED)
    tap.check(ran.returncode == 2 and ":66: holds bytes that are no text" in ran.stderr and time.monotonic() - began < 10,
              "2 GB of text with a hole: told at its line, at once", ran.stderr.strip())
    code = ("import resource, subprocess, sys; r = subprocess.run(sys.argv[1:]); "
            "print(resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss); sys.exit(r.returncode)")
    play = ["--play", f"{folder}/hole.wav", "-o", f"{folder}/played.wav", "--set", "arithmetic.sample=q15"]
    for size, args in (((2 << 30) - 4096 if tap.FULL else 64 << 20, play), (48 << 20, ["--record", f"{folder}/hole.wav"])):
        with open(f"{folder}/hole.wav", "wb") as f:
            f.write(b"RIFF" + struct.pack("<I", size + 36) + b"WAVEfmt " + struct.pack("<IHHIIHH", 16, 1, 2, 20000, 80000, 4, 16)
                    + b"data" + struct.pack("<I", size))
            f.truncate(size + 44)
        ran = subprocess.run([sys.executable, "-c", code, tap.PROGRAM, "twin", STAGE, *args, "--quiet"], capture_output=True, text=True)
        kilobytes = int(ran.stdout.split()[-1])
        tap.check(ran.returncode == 0 and kilobytes < 150_000, f"{size >> 20} MB of silence, {args[0]}: in constant memory",
                  f"{ran.stderr.strip()} {kilobytes} KB")
    tap.check(os.path.getsize(f"{folder}/played.wav") > (1 << 30 if tap.FULL else 32 << 20), "and all of it came out")


with tempfile.TemporaryDirectory() as scratch:
    STAGE = stage_file(scratch, CHAIN)
    for test in (test_messages, test_paths, test_command_line, test_responses, test_oddities, test_fuzz, test_huge):
        test(scratch)
tap.done()
