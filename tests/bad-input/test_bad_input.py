#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Stage files that are wrong, one behaviour each: cases/NAME.yaml, the arguments in NAME.args (one
a line) where there are any, and what must stand on standard error in NAME.expected.

Each is checked and built with the sanitised program: exit status 2, exactly these messages, nothing
on standard output and nothing written. `build` must say the same as `check`.
"""
import concurrent.futures
import difflib
import glob
import os
import subprocess
import sys
import tempfile

HERE = os.path.dirname(os.path.abspath(__file__))
sys.path.insert(0, os.path.join(HERE, ".."))
import tap

CASES = HERE + "/cases/"


def run(verb, name, content, args, folder):
    with open(f"{folder}/{name}.yaml", "wb") as f:
        f.write(content)
    return subprocess.run([tap.SANITISED, verb, name + ".yaml", *args], cwd=folder, capture_output=True, timeout=60)


def judge(name, verb):
    """None, or what differs."""
    with open(CASES + name + ".yaml", "rb") as f:
        content = f.read()
    with open(CASES + name + ".expected", encoding="utf-8") as f:
        expected = f.read()
    args = []
    if os.path.exists(CASES + name + ".args"):
        with open(CASES + name + ".args", encoding="utf-8") as f:
            args = f.read().splitlines()
    with tempfile.TemporaryDirectory() as folder:
        ran = run(verb, name, content, args, folder)
        left = sorted(os.listdir(folder))
    said = ran.stderr.decode("utf-8", "replace")
    if ran.returncode != 2:
        return f"exit status {ran.returncode}: {said[-2000:]}"
    if said != expected:
        return "\n# " + "\n# ".join(difflib.unified_diff(expected.splitlines(), said.splitlines(), "expected", "said",
                                                         lineterm=""))
    if ran.stdout:
        return f"standard output holds {ran.stdout[:200]!r}"
    return None if left == [name + ".yaml"] else f"written: {left}"


def judge_all(names):
    with concurrent.futures.ThreadPoolExecutor(2) as pool:
        jobs = {(name, verb): pool.submit(judge, name, verb) for name in names for verb in ("check", "build")}
    for name in names:
        faults = {verb: jobs[name, verb].result() for verb in ("check", "build")}
        told = "; ".join(f"{verb}: {fault}" for verb, fault in faults.items() if fault)
        tap.check(not told, name, told)


def judge_large():
    """One byte more than 1 MiB is refused, 1 MiB is read (and then lacks its keys)."""
    for more, words in ((0, "rate is missing"), (1, "larger than 1048576 bytes")):
        text = b"stage: quay_hum\n"
        content = text + b"#" * ((1 << 20) + more - len(text) - 1) + b"\n"
        with tempfile.TemporaryDirectory() as folder:
            ran = run("check", "large", content, [], folder)
        said = ran.stderr.decode()
        tap.check(ran.returncode == 2 and words in said, f"1 MiB and {more} bytes")


def judge_standard_input():
    ran = tap.polewright("check", "-", stdin="stage: int\n", program=tap.SANITISED)
    tap.check(ran.returncode == 2 and "\nstdin:1:8: stage: 'int' is" in ran.stderr,
              "standard input is called stdin")


def judge_accepted():
    """What looks odd and is well: the same stage in other clothes."""
    plain = "stage: quay_hum\nrate: 8 kHz\nanalog:\n  roots:\n    poles: [-1 krad/s]\n    gain: {at: 0 Hz, is: 0 dB}\n"
    clothes = {
        "a byte order mark": "\ufeff" + plain,
        "carriage returns": plain.replace("\n", "\r\n"),
        "document marks": "---\n" + plain + "...\n",
        "a directive": "%YAML 1.1\n---\n" + plain,
        "quotes everywhere": plain.replace("quay_hum", '"quay_hum"').replace("8 kHz", "'8 kHz'"),
        "an anchor and its alias": plain.replace("-1 krad/s", "&p -1 krad/s, *p"),
        "standard tags": plain.replace("8 kHz", "!!str 8 kHz"),
        "JSON": '{"stage": "quay_hum", "rate": 8000, "analog": {"roots": {"poles": [-1000], "gain": {"at": 0, "is": 1}}}}',
        "no line end": plain.rstrip("\n"),
    }
    for what, text in clothes.items():
        ran = subprocess.run([tap.SANITISED, "check", "-", "--quiet"], input=text.encode(), capture_output=True)
        tap.check(ran.returncode == 0 and not ran.stderr, what, ran.stderr.decode("utf-8", "replace")[:500])


if __name__ == "__main__":
    found = sorted(os.path.basename(path)[:-5] for path in glob.glob(CASES + "*.yaml"))
    tap.check(len(found) >= 60, "there are enough cases", str(len(found)))
    judge_all(found)
    judge_large()
    judge_standard_input()
    judge_accepted()
    tap.done()
