#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Runs every test program and counts.

A test program prints TAP lines ("ok N - name", "not ok N - name"; "# SKIP" after an ok skips) and
exits 0 when all is well. Programs: build/release/unit/test_* (cmocka), and tests/*/test_*.py.
A .py test that takes more than a quick check looks at the environment variable PW_FULL (1 or 0).
Usage: run.py [--jobs N] [--full] [NAME ...]   (NAME: part of a program's path)
The last line is "N passed, N failed"; the exit status is 1 when anything failed.
"""
import argparse
import concurrent.futures
import glob
import os
import re
import subprocess
import sys
import time

ROOT = os.path.dirname(os.path.dirname(os.path.abspath(__file__)))


def run(path, full):
    env = dict(os.environ, CMOCKA_MESSAGE_OUTPUT="TAP", PW_FULL="1" if full else "0",
               PYTHONDONTWRITEBYTECODE="1", LC_ALL="C.UTF-8")
    command = ["/usr/bin/python3", path] if path.endswith(".py") else [path]
    began = time.monotonic()
    done = subprocess.run(command, cwd=ROOT, env=env, stdout=subprocess.PIPE,
                          stderr=subprocess.STDOUT, text=True, errors="replace")
    bad = re.findall(r"^not ok\b.*", done.stdout, re.M)
    good = re.findall(r"^ok\b.*", done.stdout, re.M)
    skipped = [g for g in good if "# SKIP" in g]
    failed = len(bad)
    if failed == 0 and (done.returncode != 0 or not good):
        failed = 1
    return path, len(good) - len(skipped), failed, len(skipped), done, time.monotonic() - began


def main():
    parser = argparse.ArgumentParser()
    parser.add_argument("--jobs", type=int, default=2)
    parser.add_argument("--full", action="store_true")
    parser.add_argument("name", nargs="*")
    args = parser.parse_args()
    programs = [p for p in sorted(glob.glob(ROOT + "/build/release/unit/test_*"))
                if os.access(p, os.X_OK) and not p.endswith(".d")]
    programs += sorted(glob.glob(ROOT + "/tests/*/test_*.py"))
    programs = [p for p in programs if not args.name or any(n in p for n in args.name)]
    passed = failed = skipped = 0
    with concurrent.futures.ThreadPoolExecutor(args.jobs) as pool:
        jobs = [pool.submit(run, p, args.full) for p in programs]
        for job in concurrent.futures.as_completed(jobs):
            path, good, bad, skip, done, seconds = job.result()
            passed, failed, skipped = passed + good, failed + bad, skipped + skip
            print(f"{'ok  ' if not bad else 'FAIL'} {os.path.relpath(path, ROOT)}: {good} passed, "
                  f"{bad} failed, {skip} skipped, {seconds:.1f} s", flush=True)
            if bad:
                print(done.stdout[-6000:], f"(exit status {done.returncode})", flush=True)
    print(f"{passed} passed, {failed} failed, {skipped} skipped")
    return 1 if failed or not passed else 0


if __name__ == "__main__":
    sys.exit(main())
