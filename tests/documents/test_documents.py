#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Runs what the documents show and compares with what they say comes out.

In every README below the top, a fenced block marked `console` holds commands ("$ command") and the
output that follows them. The blocks of one document run in order, in one scratch folder that holds
a copy of examples/, runtime/, include/ and targets/, with the built program first in the path. A
line "..." stands for any lines. A fenced `yaml` block whose first line is "# file: NAME" is written to NAME first.
A command followed by "# exit N" must end with N; without it, with 0.
test_documents.py --write puts the real output in.
"""
import glob
import os
import re
import shutil
import subprocess
import sys
import tempfile

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
import tap

BLOCK = re.compile(r"^```(console|yaml)\n(.*?)^```$", re.M | re.S)


def documents():
    found = [tap.ROOT + "/README.md", tap.ROOT + "/examples/README.md"]
    return [p for p in found + sorted(glob.glob(tap.ROOT + "/examples/*/README.md")) if os.path.exists(p)]


def scratch():
    folder = tempfile.mkdtemp()
    for name in ("examples", "runtime", "include", "targets"):
        shutil.copytree(f"{tap.ROOT}/{name}", f"{folder}/{name}", ignore=shutil.ignore_patterns("*.out"))
    os.mkdir(folder + "/bin")
    os.symlink(tap.PROGRAM, folder + "/bin/polewright")
    return folder


def commands(block):
    """[(command, [lines of output])]"""
    found = []
    for line in block.splitlines():
        if line.startswith("$ "):
            found.append((line[2:], []))
        elif found:
            found[-1][1].append(line)
    return found


def run(command, folder):
    bare, _, wanted = command.partition("# exit ")
    env = dict(os.environ, PATH=folder + "/bin:" + os.environ["PATH"], POLEWRIGHT_DATA=tap.ROOT, LC_ALL="C.UTF-8")
    ran = subprocess.run(["bash", "-c", bare], cwd=folder, env=env, stdout=subprocess.PIPE,
                         stderr=subprocess.STDOUT, text=True, stdin=subprocess.DEVNULL)
    return [line.rstrip() for line in ran.stdout.splitlines()], ran.returncode, int(wanted or 0)


def alike(shown, real):
    """Whether the lines shown are the real ones, "..." standing for any."""
    if not shown:
        return not real
    if shown[0] == "...":
        return any(alike(shown[1:], real[i:]) for i in range(len(real) + 1))
    return bool(real) and shown[0] == real[0] and alike(shown[1:], real[1:])


def refreshed(command, shown, real):
    if "..." in shown or not shown and real:
        return shown if alike(shown, real) else real
    return real


def do_document(path, write):
    with open(path) as f:
        text = f.read()
    folder = scratch()
    label = os.path.relpath(path, tap.ROOT)

    def do_block(match):
        kind, body = match.groups()
        if kind == "yaml":
            name = re.match(r"# file: (\S+)\n", body)
            if name:
                with open(f"{folder}/{name.group(1)}", "w") as f:
                    f.write(body[name.end():])
            return match.group(0)
        out = []
        for command, shown in commands(body):
            real, status, wanted = run(command, folder)
            if not write:
                tap.check(status == wanted, f"{label}: {command} ends with {wanted}", f"{status}: {real[-5:]}" * (status != wanted))
                same = alike([s.rstrip() for s in shown], real)
                tap.check(same, f"{label}: {command} prints what is shown")
                if not same:
                    print("# shown:", *shown, "# real:", *real, sep="\n# ")
            out += ["$ " + command] + refreshed(command, shown, real)
        return "```console\n" + "".join(line + "\n" for line in out) + "```"

    new = BLOCK.sub(do_block, text)
    shutil.rmtree(folder)
    if write and new != text:
        with open(path, "w") as f:
            f.write(new)


for document in documents():
    do_document(document, "--write" in sys.argv)
if "--write" not in sys.argv:
    tap.done()
