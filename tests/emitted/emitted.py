# SPDX-License-Identifier: GPL-3.0-or-later
"""What the tests of emitted C share: emitting from words, compiling strictly, running."""
import json
import os
import subprocess
import sys

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
import tap

PROBE = tap.ROOT + "/build/release/outside/probe_emit"
DRIVER = tap.ROOT + "/tests/emitted/driver.c"
TYPES = {"q15": "int16_t", "q31": "int32_t", "float32": "float", "float64": "double"}
STRICT = ["-Wall", "-Wextra", "-Wconversion", "-pedantic", "-Werror", "-ffp-contract=off"]
UBSAN = ["-fsanitize=undefined", "-fno-sanitize-recover=all"]


def emit(stages):
    """Emits every stage of the list (dicts as probe_emit reads them); its replies."""
    lines = "".join(json.dumps(s) + "\n" for s in stages)
    ran = subprocess.run([PROBE], input=lines, capture_output=True, text=True)
    replies = [json.loads(line) for line in ran.stdout.splitlines()]
    if len(replies) != len(stages):
        raise RuntimeError(f"probe_emit stopped after {len(replies)}: {ran.stderr}")
    return replies


def sources(folder):
    return sorted(os.path.join(folder, f) for f in os.listdir(folder) if f.endswith(".c"))


def compile_strictly(
    stage, compiler="gcc", flags=("-O2",), out="run", driver=DRIVER, language=("-std=c99",)
):
    """Compiles the folder with the driver; the messages of the compiler, "" where it is clean."""
    folder, name = stage["dir"], stage["name"]
    defines = [
        f"-DSTAGE={name}",
        f"-DSAMPLE={TYPES[stage['sample']]}",
        f'-DHEADER="{name}.h"',
        f'-DSELFTEST="{name}_selftest.h"',
    ] + (["-DCOUNTS"] if stage["sample"][0] == "q" else [])
    command = [
        compiler,
        *language,
        *STRICT,
        *flags,
        *defines,
        f"-I{folder}",
        *sources(folder),
        driver,
        "-o",
        os.path.join(folder, out),
    ]
    ran = subprocess.run(command, capture_output=True, text=True)
    return ran.stderr if ran.returncode or ran.stderr else ""


def run(stage, samples, start="rest", repeats=4, out="run"):
    """(self-test result, outputs, clips, exit status, messages) of a compiled stage."""
    text = "\n".join(repr(x) for x in samples)
    ran = subprocess.run(
        [os.path.join(stage["dir"], out), str(repeats), str(start)],
        input=text,
        capture_output=True,
        text=True,
    )
    lines = ran.stdout.split("\n")
    selftest = next((int(line.split()[1]) for line in lines if line.startswith("selftest")), None)
    clips = next((int(line.split()[1]) for line in lines if line.startswith("clipped")), None)
    values = [float(line) for line in lines if line and line[0] not in "sc"]
    return selftest, values, clips, ran.returncode, ran.stderr
