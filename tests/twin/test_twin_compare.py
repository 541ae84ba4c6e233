#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Comparison of records and responses: what was put into a made-up board is what comes out."""
import os
import sys
import tempfile
import warnings

from scipy.io import wavfile

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
from boards import (CHAIN, NOMINAL, band_limited, chain_response, drawn, np, signal, stage_file, tap, through, twin,
                    write_record, write_response)

RATE, N = 20e3, 40000


def shifted(response, delay, gain):
    return lambda hz: gain * response(hz) * np.exp(-2j * np.pi * hz * delay / RATE)


def twin_output(folder, path, x):
    """The twin's own output, by --play."""
    np.savetxt(f"{folder}/in.csv", x, header="input", comments="", fmt="%.17g")
    tap.polewright("twin", path, "--play", f"{folder}/in.csv", "-o", f"{folder}/out.csv")
    return np.genfromtxt(f"{folder}/out.csv", delimiter=",", skip_header=2)[:, 1]


def test_same(folder, path):
    """A record of the twin itself: nothing is left."""
    x = band_limited(np.random.default_rng(1), N, RATE, 8000)
    x[:10] = 0
    write_record(f"{folder}/same.csv", x, twin_output(folder, path, x))
    record = twin(path, "--record", f"{folder}/same.csv")["record"]
    tap.check(record["residual"]["rms_v"] < 1e-11 and abs(record["delay_samples"]) < 1e-9 and abs(record["gain"] - 1) < 1e-10
              and record["skipped"] == 0, "a record of the twin itself leaves nothing", str(record))


def test_delay(folder, path):
    """The twin's output, delayed by parts of a sample, scaled, lifted, with noise of a known size."""
    rng = np.random.default_rng(2)
    x = band_limited(rng, N, RATE, 6000, 0.9)
    r = twin_output(folder, path, x)
    for delay, gain, offset, noise in ((0.25, 1.02, 0.003, 1e-4), (-3.4, 0.97, -0.2, 1e-4), (1234.56, -1.1, 0.05, 1e-3), (7, 1, 0, 0)):
        y = through(r, RATE, lambda hz: gain * np.exp(-2j * np.pi * hz * delay / RATE)) + offset + noise * rng.standard_normal(N)
        cut = slice(4000, None)
        write_record(f"{folder}/delay.csv", x[cut], y[cut])
        record = twin(path, "--record", f"{folder}/delay.csv")["record"]
        name = f"delay {delay}, gain {gain}, offset {offset}, noise {noise}"
        tap.check(abs(record["delay_samples"] - delay) < 1e-5 + noise / 5, f"{name}: delay", f"{record['delay_samples']:.7f}")
        tap.check(abs(record["gain"] - gain) < 1e-5 + noise / 10, f"{name}: gain", f"{record['gain']:.7f}")
        tap.check(abs(record["offset_v"] - offset) < 1e-6 + noise / 20, f"{name}: offset", f"{record['offset_v']:.8f}")
        left = record["residual"]["rms_v"]
        tap.check(abs(left - noise) < 0.02 * noise + 2e-6, f"{name}: what is left is the noise", f"{left:.3e}")
        tap.check(abs(record["normalised_error"] - left / y[cut].std()) < 0.01 * left, f"{name}: normalised")
        tap.check(abs(record["residual"]["rms_lsb"] - left / (5 / 65536)) < 1e-9 * left / (5 / 65536), f"{name}: in LSB")


def test_response_of_record(folder, path):
    """The estimated response of another board, its band, and the verdict."""
    rng = np.random.default_rng(3)
    x = band_limited(rng, N, RATE, 8000)
    board = drawn(rng)
    covered = total = 0
    for seed in range(4):
        y = through(x, RATE, lambda hz: chain_response(board, hz)) + 3e-3 * np.random.default_rng(100 + seed).standard_normal(N)
        write_record(f"{folder}/board.csv", x, y)
        found = twin(path, "--record", f"{folder}/board.csv")
        delay = found["record"]["delay_s"]
        points = [p for p in found["points"] if p["excited"]]
        hz = np.array([p["hz"] for p in points])
        truth = chain_response(board, hz) * np.exp(2j * np.pi * hz * delay)
        db = np.array([p["db"] for p in points]) - 20 * np.log10(abs(truth))
        deg = np.array([p["deg"] for p in points]) - np.degrees(np.angle(truth))
        deg -= 360 * np.round(deg / 360)
        covered += sum(abs(db) < [p["band_db"] for p in points]) + sum(abs(deg) < [p["band_deg"] for p in points])
        total += 2 * len(points)
    tap.check(total > 300 and 0.90 < covered / total <= 0.99, "95 % bands hold the true response", f"{covered / total:.3f} of {total}")
    tap.check(found["verdict"] == "agrees" and found["envelope"]["share"] > 0.95, "a board inside its tolerances agrees")
    far = dict(NOMINAL, C1=22e-9 * 1.2)
    write_record(f"{folder}/board.csv", x, through(x, RATE, lambda hz: chain_response(far, hz)))
    ran = tap.polewright("twin", path, "--record", f"{folder}/board.csv")
    tap.check(ran.returncode == 1 and "DOES NOT agree" in ran.stdout, "a board with a wrong capacitor does not; exit status 1")
    worst = twin(path, "--record", f"{folder}/board.csv")["worst"]
    error = 20 * np.log10(abs(chain_response(far, worst["hz"])))
    tap.check(worst["hz"] > 4000 or abs(error) > 0.5, "the worst frequency is named", str(worst))


def test_excitation(folder, path):
    """Two tones say something about two frequencies, and nothing about others."""
    n = np.arange(N)
    x = 0.4 * np.sin(2 * np.pi * 500 / RATE * n) + 0.4 * np.sin(2 * np.pi * 2500 / RATE * n)
    y = through(x, RATE, lambda hz: chain_response(NOMINAL, hz)) + 1e-5 * np.random.default_rng(1).standard_normal(N)
    write_record(f"{folder}/tones.csv", x, y)
    points = twin(path, "--record", f"{folder}/tones.csv")["points"]
    said = [p["hz"] for p in points if p["excited"]]
    near = [min(abs(hz / 500 - 1), abs(hz / 2500 - 1)) for hz in said]
    tap.check(said and max(near) < 0.08, "only frequencies that were excited are spoken of", str(said))
    tap.check(all(p["db"] is None and p["band_db"] is None for p in points if not p["excited"]), "others have no figures")
    tap.check(any(abs(hz / 500 - 1) < 0.05 for hz in said) and any(abs(hz / 2500 - 1) < 0.05 for hz in said), "both tones are there")
    text = tap.polewright("twin", path, "--record", f"{folder}/tones.csv").stdout
    tap.check("too little excitation" in text, "and the text says so")


def test_response(folder, path):
    """A response file: errors, envelope, share."""
    hz = np.geomspace(20, 30e3, 50)
    board = dict(NOMINAL, R1=8200 * 1.009, C2=10e-9 * 0.991)
    write_response(f"{folder}/r.csv", hz, chain_response(board, hz))
    found = twin(path, "--response", f"{folder}/r.csv")
    analog = np.array([p["analog_db"] for p in found["points"]])
    tap.check(abs(analog - 20 * np.log10(abs(chain_response(NOMINAL, hz)))).max() < 1e-9, "the analog side is the closed form")
    tap.check(found["envelope"]["share"] == 1 and found["verdict"] == "agrees", "a board inside lies inside everywhere")
    tap.check([p["twin_db"] is None for p in found["points"]] == list(hz >= RATE / 2), "no twin beyond half the rate")
    corner = {k: v * (1.01 if k[0] == "C" else 0.99) for k, v in NOMINAL.items()}
    rng = np.random.default_rng(8)
    boards = [drawn(rng) for _ in range(20)] + [corner]
    inside = []
    for board in boards:
        write_response(f"{folder}/r.csv", hz, chain_response(board, hz))
        inside.append(twin(path, "--response", f"{folder}/r.csv")["envelope"]["share"])
    tap.check(min(inside) == 1, "so do boards drawn inside, and one in a corner", str(min(inside)))
    far = dict(NOMINAL, R2=8200 * 1.08)
    write_response(f"{folder}/r.csv", hz, chain_response(far, hz))
    found = twin(path, "--response", f"{folder}/r.csv")
    share = sum(p["inside"] for p in found["points"]) / len(hz)
    tap.check(found["verdict"] == "differs" and found["envelope"]["share"] == share < 1, "a board outside lies outside somewhere", str(share))
    np.savetxt(f"{folder}/r.csv", np.c_[hz, 20 * np.log10(abs(chain_response(NOMINAL, hz)))], delimiter=";", header="hz;db", comments="")
    tap.check(twin(path, "--response", f"{folder}/r.csv")["verdict"] == "agrees", "deg may be missing; semicolons do")


def test_limits(folder, path):
    """Without tolerances the limits of the stage file are the measure; without either nothing is judged."""
    roots = CHAIN[:CHAIN.index("analog:")] + "analog: {roots: {poles: [-6283], gain: {at: 0 Hz, is: 1}}}\n" + CHAIN[CHAIN.index("transform"):]
    hz = np.geomspace(20, 5e3, 30)
    for error, verdict in ((0.9, "agrees"), (1.1, "differs")):
        write_response(f"{folder}/r.csv", hz, 6283 / (2j * np.pi * hz + 6283) * 10 ** (error / 20))
        tap.check(twin(stage_file(folder, roots, "l.yaml"), "--response", f"{folder}/r.csv")["verdict"] == verdict, f"{error} dB off: {verdict}")
    none = stage_file(folder, roots.replace(", magnitude: 1 dB", ""), "n.yaml")
    ran = tap.polewright("twin", none, "--response", f"{folder}/r.csv")
    tap.check(ran.returncode == 0 and "Not judged" in ran.stdout, "nothing to judge by: not judged")


def test_reference(folder, path):
    """The exact stage: zero against a record made by scipy.signal.lsim, in both holds."""
    x = band_limited(np.random.default_rng(9), 8000, RATE, 2000)
    x[:20] = 0
    a, b = NOMINAL["R1"] * NOMINAL["R2"] * NOMINAL["C1"] * NOMINAL["C2"], (NOMINAL["R1"] + NOMINAL["R2"]) * NOMINAL["C2"]
    system = signal.TransferFunction([1], [a, b, 1]).to_ss()
    for hold in ("zero", "linear"):
        _, y, _ = signal.lsim(system, x, np.arange(len(x)) / RATE, interp=hold == "linear")
        write_record(f"{folder}/ref.csv", x, y)
        found = twin(path, "--record", f"{folder}/ref.csv", "--reference", "--hold", hold)["reference"]
        tap.check(found["board_error"]["rms_v"] < 1e-10, f"{hold} hold: a board that is the stage is the reference", str(found["board_error"]))
        direct = np.sqrt(np.mean((twin_output(folder, path, x) - y) ** 2))
        tap.check(abs(found["twin_error"]["rms_v"] / direct - 1) < 1e-6, f"{hold} hold: the twin's error is the plain difference")
        bare = np.pi * 5000 / RATE
        droop = 20 * np.log10(np.sin(bare) / bare) * (2 if hold == "linear" else 1)
        tap.check(abs(found["edge_droop_db"] - droop) < 1e-12, f"{hold} hold: its own droop")
    zero = twin(path, "--record", f"{folder}/ref.csv", "--reference")["reference"]
    tap.check(zero["twin_error_without_hold"]["rms_v"] < 0.3 * zero["twin_error"]["rms_v"], "without the hold's delay the twin is nearer")


def test_flat(folder, path):
    x = 1.5 * np.sin(2 * np.pi * 100 / RATE * np.arange(4000))
    y = np.clip(through(x, RATE, lambda hz: chain_response(NOMINAL, hz)), -1.2, 1.2)
    write_record(f"{folder}/flat.csv", x, y)
    ran = tap.polewright("twin", path, "--record", f"{folder}/flat.csv")
    record = twin(path, "--record", f"{folder}/flat.csv")["record"]
    tops = int(np.sum(abs(y) == 1.2))
    tap.check(record["flat_output"]["samples"] == tops and record["flat_output"]["runs"] == 40 and "flat tops" in ran.stdout,
              "flat tops are counted and told", str(record["flat_output"]))
    tap.check(record["flat_input"]["samples"] == 0, "the input has none")


def test_long(folder, path):
    """More frames than are kept in memory: every pass reads the record again, and finds the same."""
    n = 4_500_000
    rng = np.random.default_rng(10)
    x = np.round(8000 * rng.standard_normal(n)).clip(-32000, 32000)
    b, a = signal.butter(2, 0.3)
    x = np.round(signal.lfilter(b, a, x))
    x[:20] = x[-20:] = 0
    wavfile.write(f"{folder}/in.wav", int(RATE), x.astype("int16"))
    tap.polewright("twin", path, "--play", f"{folder}/in.wav", "-o", f"{folder}/out.wav")
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")      # a chunk that scipy does not know
        y = 0.9 * np.roll(wavfile.read(f"{folder}/out.wav")[1], 5)
    wavfile.write(f"{folder}/long.wav", int(RATE), np.c_[x, np.round(y * 32768)].astype("int16"))
    record = twin(path, "--record", f"{folder}/long.wav")["record"]
    tap.check(record["frames"] == n and abs(record["delay_samples"] - 5) < 1e-4 and abs(record["gain"] - 0.9) < 1e-5,
              "a record longer than memory keeps is compared alike", f"{record['delay_samples']:.6f} {record['gain']:.7f}")
    lsb = 2.5 / 32768
    tap.check(abs(record["residual"]["rms_v"] / (lsb / np.sqrt(12)) - 1) < 0.02, "what is left is the rounding of its samples",
              f"{record['residual']['rms_v'] / lsb:.4f} LSB")


with tempfile.TemporaryDirectory() as scratch:
    stage = stage_file(scratch, CHAIN)
    for test in (test_same, test_delay, test_response_of_record, test_excitation, test_response, test_limits, test_reference, test_flat,
                 *([test_long] if tap.FULL else [])):
        test(scratch, stage)
tap.done()
