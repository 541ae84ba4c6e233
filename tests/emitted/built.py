# SPDX-License-Identifier: GPL-3.0-or-later
"""Stages built by the program itself, for the tests of emitted C."""
import json
import os
import subprocess

from emitted import compile_strictly, tap


def build(stage, folder, *args):
    """Builds a stage given as a dict into the folder; what compile_strictly and run take."""
    ran = tap.polewright(
        "build", "-", "-o", folder, "--no-plots", "--quiet", *args, stdin=json.dumps(stage)
    )
    if ran.returncode not in (0, 1):
        raise RuntimeError(f"{stage['stage']}: {ran.stderr}")
    sample = stage.get("arithmetic", {}).get("sample", "float32")
    return {"dir": folder, "name": stage["stage"], "sample": sample}


def compiled(stage, folder, *args, flags=("-O1",), compiler="gcc"):
    built = build(stage, folder, *args)
    message = compile_strictly(built, compiler, flags)
    if message:
        raise RuntimeError(f"{stage['stage']} does not compile: {message[:2000]}")
    return built


def read_all(folder):
    """Every file below the folder, by name."""
    found = {}
    for where, _, names in os.walk(folder):
        for name in names:
            with open(os.path.join(where, name), "rb") as file:
                found[os.path.relpath(os.path.join(where, name), folder)] = file.read()
    return found


def small_program(folder, text, sources, flags=()):
    """Compiles and runs a program given as C text with these sources; the finished process."""
    with open(f"{folder}/small.c", "w", encoding="utf-8") as file:
        file.write(text)
    command = [
        "gcc",
        "-std=c99",
        "-Wall",
        "-Wextra",
        "-Werror",
        "-O1",
        *flags,
        f"-I{folder}",
        f"{folder}/small.c",
        *sources,
        "-o",
        f"{folder}/small",
    ]
    done = subprocess.run(command, capture_output=True, text=True)
    if done.returncode:
        raise RuntimeError(done.stderr[:3000])
    return subprocess.run([f"{folder}/small"], capture_output=True, text=True)


def text_of(path):
    with open(path, encoding="utf-8") as file:
        return file.read()


LOWPASS = {
    "family": {"approximation": "butterworth", "shape": "lowpass", "order": 3, "corner": "200 Hz"}
}


def stage_of(name, sample="q15", **more):
    return {
        "stage": name,
        "rate": "8 kHz",
        "analog": LOWPASS,
        "transform": {"method": "bilinear"},
        "arithmetic": {"sample": sample, "coefficient": "32 bits"}
        if sample[0] == "q"
        else {"sample": sample},
        "vectors": {"length": 200},
        **more,
    }
