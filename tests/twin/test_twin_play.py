#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""--play: bit for bit in all four formats, CSV and WAV, many channels; an interrupted run leaves nothing."""
import os
import signal as system_signal
import struct
import subprocess
import sys
import tempfile
import time
import wave

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
from boards import CHAIN, np, stage_file, tap
from scipy.io import wavfile

STAGE = tap.ROOT + "/examples/hull-strain/stage.yaml"
FORMATS = {"q15": "int16", "q31": "int32", "float32": "float32", "float64": "float64"}


def read_csv(path):
    return np.genfromtxt(path, delimiter=",", names=True, dtype=None, comments="#", encoding="ascii")


def columns(path, names, kind=float):
    lines = [line.strip() for line in open(path) if not line.startswith("#")]
    head = lines[0].split(",")
    index = [head.index(name) for name in names]
    return [[kind(line.split(",")[i]) for line in lines[1:]] for i in index]


def test_vectors(folder, sample):
    """The emitted vectors come from another path through the program, and the emitted C meets them."""
    out = f"{folder}/{sample}"
    ran = tap.polewright("build", STAGE, "-o", out, "--quiet", "--no-plots", "--set", f"arithmetic.sample={sample}")
    tap.check(ran.returncode in (0, 1), f"{sample}: a stage is built", ran.stderr.strip())
    for name in ("noise", "full-scale-square", "overflow-probe", "impulse"):
        vector = f"{out}/vectors/{name}.csv"
        tap.polewright("twin", STAGE, "--set", f"arithmetic.sample={sample}", "--samples", "--play", vector, "-o", f"{out}/played.csv")
        played, = columns(f"{out}/played.csv", ["output"])
        expected, = columns(vector, ["expected"])
        tap.check(played == expected and len(played) > 100, f"{sample}: {name} as its vectors say")


def test_wav(folder, sample):
    """WAV in and out carry the very words; two channels are two runs."""
    rng = np.random.default_rng(3)
    kind = FORMATS[sample]
    if kind.startswith("int"):
        x = rng.integers(np.iinfo(kind).min, np.iinfo(kind).max, (3000, 2), dtype=kind, endpoint=True)
    else:
        x = rng.uniform(-1, 1, (3000, 2)).astype(kind)
    wavfile.write(f"{folder}/in.wav", 8000, x)
    sets = ["--set", f"arithmetic.sample={sample}", "--set", "rate=8 kHz"]
    ran = tap.polewright("twin", STAGE, *sets, "--play", f"{folder}/in.wav", "-o", f"{folder}/out.wav")
    tap.check(ran.returncode == 0, f"{sample}: a WAV file plays", ran.stderr.strip())
    rate, y = wavfile.read(f"{folder}/out.wav")
    tap.check(rate == 8000 and y.dtype == kind and y.shape == x.shape, f"{sample}: WAV of the same form comes out", str(y.dtype))
    for channel in range(2):
        digits = "%d" if kind.startswith("int") else "%.17g"
        np.savetxt(f"{folder}/one.csv", x[:, channel], fmt=digits, header="input", comments="")
        tap.polewright("twin", STAGE, *sets, "--samples", "--play", f"{folder}/one.csv", "-o", f"{folder}/one-out.csv")
        played, = columns(f"{folder}/one-out.csv", ["output"])
        tap.check(np.array_equal(np.array(played).astype(kind), y[:, channel]), f"{sample}: channel {channel + 1} is as alone, from CSV")


def test_24_bits(folder):
    """24-bit PCM goes into q31 with 8 zero bits below."""
    words = np.random.default_rng(5).integers(-2**23, 2**23, 500)
    with wave.open(f"{folder}/in24.wav", "wb") as w:
        w.setparams((1, 3, 8000, 0, "NONE", ""))
        w.writeframes(b"".join(struct.pack("<i", v)[:3] for v in map(int, words)))
    np.savetxt(f"{folder}/in24.csv", words * 256, fmt="%d", header="input", comments="")
    sets = ["--set", "arithmetic.sample=q31", "--set", "rate=8 kHz"]
    tap.polewright("twin", STAGE, *sets, "--play", f"{folder}/in24.wav", "-o", f"{folder}/a.wav")
    tap.polewright("twin", STAGE, *sets, "--samples", "--play", f"{folder}/in24.csv", "-o", f"{folder}/b.csv")
    from_csv, = columns(f"{folder}/b.csv", ["output"])
    tap.check(np.array_equal(wavfile.read(f"{folder}/a.wav")[1], np.array(from_csv).astype("int32")), "24-bit PCM is exact in q31")


def test_volts(folder):
    """Volts are samples through the signal's span, to the nearest word."""
    path = stage_file(folder, CHAIN.replace("float64", "q15"))
    with open(f"{folder}/v.csv", "w") as f:
        f.write("# volts\ntime;input left;input right\n0;0.1;-2.6\n5e-05;0.1;2.6\n")
    ran = tap.polewright("twin", path, "--play", f"{folder}/v.csv", "-o", f"{folder}/vo.csv")
    tap.check(ran.returncode == 0 and "2 inputs lay beyond full scale" in ran.stdout, "inputs beyond full scale are counted", (ran.stdout + ran.stderr).strip())
    head = [line for line in open(f"{folder}/vo.csv") if line[0] != "#"][0].strip()
    tap.check(head == "input left,input right,output left,output right", "each input gets its output", head)
    left, = columns(f"{folder}/vo.csv", ["output left"])
    lsb = 2.5 / 32768
    tap.check(all(abs(v / lsb - round(v / lsb)) < 1e-9 for v in left), "outputs are whole words")


def test_interrupt(folder):
    path = stage_file(folder, CHAIN)
    with open(f"{folder}/long.csv", "w") as f:
        f.write("input\n" + "0.125\n0.5\n-0.25\n" * 1_000_000)
    target = f"{folder}/interrupted.csv"
    before = sorted(os.listdir(folder))
    process = subprocess.Popen([tap.PROGRAM, "twin", path, "--play", f"{folder}/long.csv", "-o", target], stderr=subprocess.PIPE)
    deadline = time.monotonic() + 20
    while time.monotonic() < deadline and sorted(os.listdir(folder)) == before:
        time.sleep(0.002)
    grew = sorted(os.listdir(folder)) != before
    process.send_signal(system_signal.SIGINT)
    process.wait()
    tap.check(grew and process.returncode == -system_signal.SIGINT, "an interrupt ends the run", str(process.returncode))
    tap.check(sorted(os.listdir(folder)) == before, "and leaves no file, whole or half", str(os.listdir(folder)))


with tempfile.TemporaryDirectory() as scratch:
    for name in FORMATS:
        test_vectors(scratch, name)
        test_wav(scratch, name)
    test_24_bits(scratch)
    test_volts(scratch)
    test_interrupt(scratch)
tap.done()
