# SPDX-License-Identifier: GPL-3.0-or-later
"""What the Python tests share: TAP lines, and running the program."""
import json
import os
import subprocess
import sys

ROOT = os.path.dirname(os.path.dirname(os.path.abspath(__file__)))
PROGRAM = ROOT + "/build/polewright"
SANITISED = ROOT + "/build/san/polewright"
FULL = os.environ.get("PW_FULL") == "1"
_count = _bad = 0


def check(condition, name, detail=""):
    """One TAP line; returns the condition."""
    global _count, _bad
    _count += 1
    print(f"{'ok' if condition else 'not ok'} {_count} - {name}" + (f" ({detail})" if detail else ""), flush=True)
    if not condition:
        _bad += 1
    return bool(condition)


def skip(name, why):
    """Says that a check was not made, and why; where CI is set it counts as failed."""
    global _count
    if os.environ.get("CI") == "true":
        return check(False, name, why)
    _count += 1
    print(f"ok {_count} - {name} # SKIP {why}", flush=True)
    return True


def done():
    print(f"1..{_count}")
    sys.exit(1 if _bad or not _count else 0)


def polewright(*args, stdin=None, program=PROGRAM, cwd=None, env=None):
    """Runs the program; a CompletedProcess with text output."""
    return subprocess.run([program, *map(str, args)], input=stdin, capture_output=True, text=True, cwd=cwd,
                          env=dict(os.environ, **(env or {})))


def report(stage, *args, verb="check"):
    """report.json as a dict for a stage given as YAML text or a dict (JSON is YAML)."""
    text = stage if isinstance(stage, str) else json.dumps(stage)
    ran = polewright(verb, "-", "--json", *args, stdin=text)
    if ran.returncode not in (0, 1):
        raise RuntimeError(ran.stderr)
    return json.loads(ran.stdout)
