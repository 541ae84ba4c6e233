# SPDX-License-Identifier: GPL-3.0-or-later
"""Hard cases of the trade in fixed point, each with the figure it must reach. Corner frequencies and
levels are our own; scipy gives the roots."""
import itertools
import time

import numpy as np
from scipy import signal

import words_probe as wp
from tap import check, done, report


def response(answer, hz, rate):
    """The realised response at frequencies, from the words, in long double about z = 1."""
    theta = 2 * np.pi * np.asarray(hz, dtype=np.longdouble) / rate
    t = 1 - np.exp(-1j * theta.astype(np.clongdouble))
    t = 2 * np.sin(theta / 2) * (np.sin(theta / 2) + 1j * np.cos(theta / 2))
    h = np.ones(len(theta), dtype=np.clongdouble)
    for s in answer["sections"]:
        for c, sign in ((s["b"], 1), (s["a"], -1)):
            c = np.array(c, dtype=np.longdouble)
            value = (c[0] + c[1] + c[2]) - (c[1] + 2 * c[2]) * t + c[2] * t * t
            h = h * value if sign > 0 else h / value
    return h


def low_pass_10_hz():
    """Second order, 10 Hz at 48 kHz, 32-bit words."""
    z, p, k = signal.butter(2, 10, fs=48000, output="zpk")
    q31, = wp.ask([wp.question([-1, -1], p, k, sample="q31")])
    check(q31["magnitude_db"] < 0.001, "10 Hz low-pass, q31: deviation under 0.001 dB", str(q31["magnitude_db"]))
    fed = wp.one([-1, -1], p, k, sample="q31", structure="direct-1-shaped")
    check(fed["magnitude_db"] < 0.001 and fed["sections"][0]["structure"] == wp.SHAPED,
          "in direct form as well, by the words next to the rounded ones", str(fed["magnitude_db"]))
    check(fed["sections"][0]["bw"][1] == 2 * fed["sections"][0]["bw"][0] == 2 * fed["sections"][0]["bw"][2],
          "whose double zero at -1 is exact", str(fed["sections"][0]["bw"]))
    hz = np.geomspace(4.8, 300, 40)
    ideal = signal.freqz_zpk([-1, -1], p, k, worN=hz, fs=48000)[1]
    worst = np.max(np.abs(20 * np.log10(np.abs(response(q31, hz, 48000) / ideal))))
    check(worst < 0.001, "the same, from the words by another path", str(float(worst)))
    plain, fed = wp.ask([wp.question([-1, -1], p, k, sample="q15", bits=32, structure=s, random=200000, level=0.9)
                         for s in ("direct-1", "direct-1-shaped")])
    gained = plain["noise"]["snr_db"] - fed["noise"]["snr_db"]
    check(-gained >= 30, "10 Hz low-pass, q15: error feedback is 30 dB quieter", f"{-gained:.1f} dB")
    seen = 20 * np.log10(plain["random"]["rms"] / fed["random"]["rms"])
    check(seen >= 30, "the same in bit-true runs", f"{seen:.1f} dB")
    short = wp.one([-1, -1], p, k, sample="q15", structure="direct-1")
    check(short["status"] == 2 and "bits would do" in short["stderr"], "16-bit words: an error that says how many would do",
          short["stderr"].strip())
    bits = int(short["stderr"].split("(")[1].split()[0])
    check(17 <= bits <= 32, "a sensible number of bits", str(bits))


def notch():
    """50 Hz, Q 30, at 48 kHz, q31, 32-bit words."""
    w = 2 * np.pi * 50 / 48000
    zeros = [np.exp(1j * w), np.exp(-1j * w)]
    b, a = signal.iirnotch(50, 30, fs=48000)
    for structure in ("auto", "direct-1-shaped", "coupled"):
        answer = wp.one(zeros, np.roots(a), b[0], sample="q31", structure=structure)
        hz = 50 * (1 + np.linspace(-3e-4, 3e-4, 6001))
        size = np.abs(response(answer, hz, 48000)) if structure != "coupled" else coupled_size(answer, hz, 48000)
        at = float(hz[np.argmin(size)])
        check(abs(at / 50 - 1) < 1e-4, f"notch, {structure}: at 50 Hz within 0.01 %", f"{at}")
        if structure != "coupled":
            b0, b1, _ = answer["sections"][0]["bw"]
            off = float(np.arccos(-np.longdouble(b1) / 2 / b0) / w - 1)
            check(abs(off) < 3e-7, f"notch, {structure}: a fiftieth of where one step of a word would put it", f"{off:.1e}")
        check(size.min() < 1e-3, f"notch, {structure}: deeper than 60 dB", f"{20 * np.log10(float(size.min())):.1f} dB")


def coupled_size(answer, hz, rate):
    """From the words of one coupled section themselves."""
    sigma, omega, g, c1, c2, d, cf = answer["sections"][0]["coupled"]
    a, c = np.longdouble(2) ** -answer["sections"][0]["af"], np.longdouble(2) ** -cf
    z = np.exp(2j * np.pi * np.asarray(hz, dtype=np.clongdouble) / rate)
    below = (z - sigma * a) ** 2 + (omega * a) ** 2
    return np.abs(d * c + g * a * (c1 * c * (z - sigma * a) + c2 * c * omega * a) / below)


def elliptic():
    z, p, k = signal.ellip(4, 0.5, 60, [1000, 3000], "band", fs=48000, output="zpk")
    answer = wp.one(z, p, k, sample="q15", magnitude_limit=0.5, band=[1000, 3000])
    met, bits = answer["magnitude_db"] <= 0.5, answer["enough_bits"]
    check((met and bits == 16) or (not met and bits > 16), "elliptic band-pass of order 8, q15: 0.5 dB, or the words that would do",
          f"{answer['magnitude_db']:.3f} dB, {bits} bits")
    tight = wp.one(z, p, k, sample="q15", magnitude_limit=0.002, structure="direct-1", band=[1000, 3000])
    bits = tight["enough_bits"]
    check(16 < bits <= 32, "a limit that 16 bits miss names the words that would do", f"{bits} bits")
    just, short = (wp.one(z, p, k, sample="q15", bits=b, magnitude_limit=0.002, structure="direct-1", band=[1000, 3000])
                   for b in (bits, bits - 2))
    check(just["magnitude_db"] <= 0.002 < short["magnitude_db"], "words of that length do, two bits less do not",
          f"{just['magnitude_db']:.5f} and {short['magnitude_db']:.5f} dB")


def ac_coupling():
    """0.05 Hz at 1 kHz, q31: exact zero at DC, settles, no dead band above 1 LSB."""
    z, p, k = signal.butter(1, 0.05, "high", fs=1000, output="zpk")
    n = 60000
    answer = wp.one([1], p, k, sample="q31", rate=1000, input=[2 ** 30] * n)
    s = answer["sections"][0]
    check(sum(s["bw"]) == 0, "AC coupling: the words sum to zero", str(s["bw"]))
    check(answer["cycle"]["bound_lsb"] <= 1 and answer["cycle"]["found_lsb"] <= 1, "no dead band above 1 LSB",
          f"{answer['cycle']}")
    late, expected = answer["output"][-1], 2 ** 30 * (-s["a"][1]) ** (n - 1) * s["b"][0]
    check(abs(late - expected) <= 2, "it settles as the exponential does", f"{late} for {expected:.1f}")
    plain = wp.one([1], p, k, sample="q31", rate=1000, structure="direct-1")
    check(plain["cycle"]["found_lsb"] > 1000, "plain rounding has a dead band that the search finds", str(plain["cycle"]))


def integrator():
    """Poles at 1 and 0.5, zeros at 0.99 and -1: an integrator with a lead zero."""
    for sample, full in (("q31", 2 ** 31 - 1), ("q15", 2 ** 15 - 1)):
        n = 4000
        drive = [full] * n + [-full] * 3
        answer = wp.one([0.99, -1], [1, 0.5], 0.01, sample=sample, input=drive)
        last, node = answer["sections"][-1], wp.outputs(answer)[-1]
        check(last["aw"][0] == -(1 << last["af"]) and node["integrates"] and node["bound"] is None and node["can_clip"],
              f"{sample}: the pole at 1 is exact and marked")
        out = answer["output"]
        reached = out.index(full) + 1
        check(abs(reached - node["samples_to_clip"]) <= 3, f"{sample}: samples to the clamp",
              f"{reached} in a run, {node['samples_to_clip']} said")
        check(out[n - 1] == full and out[n] < full, f"{sample}: leaves the clamp with the first sample of the other sign")
        check(answer["noise"]["growth"] < 1e-6, f"{sample}: noise grows by less than 1e-6 LSB^2 a sample",
              str(answer["noise"]["growth"]))
        code = wp.one([0.99, -1], [1, 0.5], 0.01, sample=sample, input=[1] * 200000)
        # what the alignment of b may add: half a unit of the accumulator a sample
        align = 200000 * 2.0 ** -(last["af"] + 1) if last["bf"] > last["af"] else 0
        check(abs(code["output"][-1] - 200000 * 4e-4) <= 2 + align, f"{sample}: one code of offset adds up, nothing is lost",
              str(code["output"][-1]))
        plain = wp.one([0.99, -1], [1, 0.5], 0.01, sample=sample, structure="direct-1")
        check(wp.outputs(plain)[-1]["samples_to_clip_code"] is None, f"{sample}: plain rounding loses it, and the report says so")
        said, exact = node["samples_to_clip_code"], full / 4e-4
        check(abs(said / exact - 1) < 0.01, f"{sample}: samples to the clamp for one code", f"{said}")


def two_integrators():
    """Behind a clamp the bounds start from full scale: the second of two integrators, and a section
    behind one that clips."""
    answer = wp.one([0.9, 0.95], [1, 1], 0.001, sample="q31")
    nodes = wp.outputs(answer)
    check(len(nodes) == 2 and all(n["integrates"] for n in nodes), "two integrators stand alone")
    check(all(sum(s["aw"]) == -(1 << s["af"]) for s in answer["sections"]), "both poles at 1 are exact")
    acc = next(n for n in answer["nodes"] if n["name"] == "section 2 accumulator")
    s = answer["sections"][1]
    reach = sum(map(abs, s["b"])) + sum(map(abs, s["a"][1:]))
    check(reach <= acc["bound"] <= reach * 1.001, "the second one's accumulator: any state, input of full scale",
          f"{acc['bound']} for {reach}")
    z, p, k = signal.butter(4, 1000, fs=48000, output="zpk")
    loud = wp.one(z, p, k * 40, sample="q31", scaling="none")
    first, second = wp.outputs(loud)
    s = loud["sections"][1]
    h = signal.lfilter(s["b"], s["a"], np.eye(1, 4000)[0])
    check(first["can_clip"] and np.sum(abs(h)) <= second["bound"] <= 1.01 * np.sum(abs(h)),
          "behind a section that clips the input is full scale", f"{second['bound']} for {np.sum(abs(h))}")


def sixty_decibels():
    """60 dB of gain and a peak input of a thousandth of full scale."""
    z, p, k = signal.butter(2, 1000, fs=48000, output="zpk")
    low = wp.one(z, p, k * 900, sample="q15", bits=32, peak=0.001, random=200000, level=0.001)
    check(not any(n["can_clip"] for n in low["nodes"]), "60 dB, 1 mV: nothing can clip", str(low["first_clip_input"]))
    check(low["random"]["clipped"] == 0, "nothing does")
    own, given = low["noise"]["rms_lsb"], low["noise"]["input_rms_lsb"]
    check(own < given / 10, "its own noise is far below what the input's rounding becomes", f"{own:.2f} of {given:.1f} LSB")
    z, p, k = signal.butter(2, 1000, "high", fs=48000, output="zpk")
    high = wp.one([1, 1], p, k * 400, sample="q31", peak=0.001)
    check(high["status"] == 0 and not any(n["can_clip"] for n in high["nodes"] if "output" in n["name"]),
          "the same as a high-pass, whose b would not fit beside a", str([s["order"] for s in high["sections"]]))
    check([s["order"] for s in high["sections"]] == [0, 2], "its gain stands in front, where the small input leaves room")
    check(high["magnitude_db"] < 1e-4, "its words", str(high["magnitude_db"]))


def ten_sections():
    z, p, k = signal.ellip(10, 0.5, 60, [1000, 3000], "band", fs=48000, output="zpk")
    began = time.monotonic()
    answer = wp.one(z, p, k, sample="q31", scaling="l1")
    took = time.monotonic() - began
    check(answer["status"] == 0 and len(answer["sections"]) == 10, "ten sections", f"{took:.2f} s")
    check(not any(n["can_clip"] for n in wp.outputs(answer)[:-1]), "no section before the last can clip")
    listed = wp.one(z, p, k, sample="q31", as_listed=1)
    check(answer["noise"]["rms_lsb"] < listed["noise"]["rms_lsb"], "the order found is quieter than the order listed",
          f"{answer['noise']['rms_lsb']:.2f} against {listed['noise']['rms_lsb']:.2f} LSB")


def every_order():
    """Three sections: no order of the same pairs is quieter than the one that was found."""
    z, p, k = signal.butter(6, 500, fs=48000, output="zpk")
    pairs = [x for x in p if x.imag > 0]
    found = wp.one(z, p, k, sample="q31", structure="direct-1")["noise"]["rms_lsb"]
    questions = []
    for order in ((0, 1, 2), (0, 2, 1), (1, 0, 2), (1, 2, 0), (2, 0, 1), (2, 1, 0)):
        q = wp.question(z, p, k, sample="q31", structure="direct-1", as_listed=1)
        q["poles"] = [[c.real, c.imag] for i in order for c in (pairs[i], pairs[i].conjugate())]
        questions.append(q)
    others = [a["noise"]["rms_lsb"] for a in wp.ask(questions)]
    check(found <= min(others) * 1.005, "the order found is the quietest of all six", f"{found:.3f}, {sorted(others)}")


def reference_noise(pairs, factor):
    """Output noise in LSB of direct-1 sections (poles, zeros) in this order, each but the last scaled by
    the L1 norm up to it: 1/12 from each section through 1/A and what follows."""
    n, chain = 4000, [(np.real(np.poly(z)), np.real(np.poly(p))) for p, z in pairs]
    into, size = np.eye(1, n)[0], []
    for b, a in chain:
        into = signal.lfilter(b, a, into)
        size.append(np.sum(np.abs(into)))
    total = 0
    for j, (_, a) in enumerate(chain):
        way = signal.lfilter([1], a, np.eye(1, n)[0])
        for b2, a2 in chain[j + 1:]:
            way = signal.lfilter(b2, a2, way)
        gain = size[j] * factor if j + 1 < len(chain) else 1
        total += np.sum(way ** 2) * gain ** 2 / 12
    return np.sqrt(total)


def every_pairing():
    """All 36 pairings and orders of a band-pass and a low-pass of three sections, worked out in Python."""
    for name, (z, p, k) in (("band-pass", signal.ellip(3, 0.5, 50, [1500, 3500], "band", fs=48000, output="zpk")),
                            ("low-pass", signal.ellip(6, 0.5, 50, 3000, fs=48000, output="zpk"))):
        poles = [[x, x.conjugate()] for x in p if x.imag > 1e-9]
        zeros = [[x, x.conjugate()] for x in z if x.imag > 1e-9]
        zeros += [[1.0, -1.0]] * (3 - len(zeros))
        found = wp.one(z, p, k, sample="q31", structure="direct-1")["noise"]["rms_lsb"]
        all_of_them = [reference_noise(list(zip([poles[i] for i in po], [zeros[i] for i in zo])), abs(k))
                       for po in itertools.permutations(range(3)) for zo in itertools.permutations(range(3))]
        check(found <= 1.02 * min(all_of_them), f"{name}: no pairing or order of 36 is quieter",
              f"{found:.3f}; {min(all_of_them):.3f} to {max(all_of_them):.3f}")


def short_words_keep_the_scale():
    """16-bit words move the poles of a narrow band-stop by so much that a node scaled to just below
    its word would clip, and every bound behind it would start from full scale. The last bound must
    stay near the sum of |h| of the ideal filter (scipy), 3.31."""
    found = report({"stage": "narrow", "rate": "16 kHz", "arithmetic": {"sample": "q15"}, "analog": {"family": {
        "approximation": "butterworth", "shape": "bandstop", "order": 3, "corners": ["380 Hz", "420 Hz"]}}})
    outputs = [n for n in found["nodes"] if n["name"].endswith("output")]
    check(not any(n["can_clip"] for n in outputs[:-1]), "no output before the last can clip", str(outputs))
    z, p, k = signal.butter(3, [2 * np.pi * 380, 2 * np.pi * 420], "bandstop", analog=True, output="zpk")
    sos = signal.zpk2sos(*signal.bilinear_zpk(z, p, k, 16000))
    h = np.abs(signal.sosfilt(sos, np.r_[1, np.zeros(200000)])).sum()
    check(abs(outputs[-1]["bound"] / h - 1) < 0.02, "and the last bound is near the sum of |h|", f"{outputs[-1]['bound']:.4f}, {h:.4f}")


for case in (short_words_keep_the_scale, low_pass_10_hz, notch, elliptic, ac_coupling, integrator, two_integrators, sixty_decibels, ten_sections, every_order, every_pairing):
    case()
done()
