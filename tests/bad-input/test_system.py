#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""What the system refuses: a full disk, a place that cannot be written, a closed standard output.

Exit status 3, a line that says which file, and what stood there before is untouched.
The write limit (RLIMIT_FSIZE) stands for the full disk: it needs no mount and holds for root too.
"""
import hashlib
import os
import resource
import signal
import subprocess
import sys
import tempfile

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
import tap

STAGE = tap.ROOT + "/examples/tide-coupling/stage.yaml"


def tree(path):
    """Every file below path with its content's digest."""
    found = {}
    for folder, _, names in os.walk(path):
        for name in names:
            full = os.path.join(folder, name)
            with open(full, "rb") as f:
                found[os.path.relpath(full, path)] = hashlib.sha256(f.read()).hexdigest()
    return found


def small_files():
    signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
    resource.setrlimit(resource.RLIMIT_FSIZE, (4096, 4096))


def build(out, *args, **kwargs):
    return subprocess.run([tap.SANITISED, "build", STAGE, "-o", out, "--quiet", "--no-plots", *args],
                          capture_output=True, text=True, **kwargs)


def test_full_disk(folder):
    out = folder + "/out"
    ran = build(out)
    tap.check(ran.returncode == 0 and os.path.exists(out + "/report.json"), "a first build stands", ran.stderr)
    before = tree(out)
    ran = build(out, "--set", "rate=2 kHz", preexec_fn=small_files)
    tap.check(ran.returncode == 3, "a full disk ends with status 3", str(ran.returncode))
    tap.check("cannot write" in ran.stderr and out in ran.stderr, "and says which file", ran.stderr)
    tap.check(tree(out) == before, "and the old output is untouched")
    tap.check(sorted(os.listdir(folder)) == ["out"], "and nothing is left beside it", str(os.listdir(folder)))


def test_unwritable(folder):
    with open(folder + "/plain", "w") as f:
        f.write("mine\n")
    ran = build(folder + "/plain/out")
    tap.check(ran.returncode == 3 and "plain" in ran.stderr, "a place that cannot be made ends with 3", ran.stderr)
    ran = build(folder + "/plain")
    with open(folder + "/plain") as f:
        tap.check(ran.returncode == 3 and f.read() == "mine\n", "a file in the way is not overwritten", ran.stderr)
    ran = build("/proc/nowhere")
    tap.check(ran.returncode == 3 and "/proc/nowhere" in ran.stderr, "an unwritable folder ends with 3", ran.stderr)
    os.makedirs(folder + "/odd/report.json")
    ran = build(folder + "/odd")
    tap.check(ran.returncode == 3 and os.listdir(folder + "/odd") == ["report.json"],
              "a folder where a file belongs: nothing is half written", ran.stderr)


def test_standard_output():
    for verb in ("check", "show", "targets", "schema"):
        args = [tap.SANITISED, verb] + ([STAGE] if verb in ("check", "show") else [])
        with open("/dev/full", "w") as full:
            ran = subprocess.run(args, stdout=full, stderr=subprocess.PIPE, text=True)
        tap.check(ran.returncode == 3 and "standard output" in ran.stderr, f"{verb}: a full standard output", ran.stderr)
        ran = subprocess.run(["bash", "-c", '"$@" | exec true; exit ${PIPESTATUS[0]}', "bash", *args], capture_output=True, text=True)
        tap.check(ran.returncode in (0, 3) and not ran.stderr, f"{verb}: a reader that went away is no fault to tell", ran.stderr)
        ran = subprocess.run(["sh", "-c", '"$@" >&-', "sh", *args], capture_output=True, text=True)
        tap.check(ran.returncode == 3 and "standard output" in ran.stderr, f"{verb}: a closed standard output", ran.stderr)


def test_stage_file(folder):
    ran = tap.polewright("check", folder + "/missing.yaml", program=tap.SANITISED)
    tap.check(ran.returncode == 2 and "missing.yaml" in ran.stderr, "a stage file that is not there: 2", ran.stderr)
    ran = tap.polewright("check", folder, program=tap.SANITISED)
    tap.check(ran.returncode == 3 and folder in ran.stderr, "a folder as stage file: 3", ran.stderr)


with tempfile.TemporaryDirectory() as scratch:
    test_full_disk(scratch)
    test_unwritable(scratch)
    test_standard_output()
    test_stage_file(scratch)
tap.done()
