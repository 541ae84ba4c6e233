#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Prototypes and weightings against published tables. Each check names its source; where a row of
tests/outside/published is computed and not seen, the check says so."""
import math

from mpmath import mp, mpf

from analog_probe import ask, family, match, published, roots, tap

ONE = 1 / (2 * math.pi)                     # a corner of 1 rad/s in Hz
prototypes = published("prototypes")


def upper(answer):
    return [p for p in answer["poles"] if p.imag >= 0]


def table(name, kind, rows, most, **options):
    """rows: order -> upper poles in rad/s for a corner of 1 rad/s."""
    orders = sorted(rows, key=int)
    answers = ask([family(kind, "lowpass", int(n), ONE, **options) for n in orders])
    worst = max(match(upper(a), rows[n], lambda w: 1) for n, a in zip(orders, answers))
    tap.check(worst < most, f"{name}: {len(orders)} orders", f"off by {worst:.1e}, table's rounding {most:.0e}")


def poles(pairs):
    return [complex(-abs(re), im) for re, im in pairs]


# S. Winder, "Analog and Digital Filter Design", Butterworth pole table: four decimals.
table("Winder, Butterworth poles", "butterworth",
      {n: poles(v) for n, v in prototypes["butterworth_sigma_omega"].items()}, 5.1e-5)
# C. R. Bond, "Bessel Filters Polynomials, Poles and Circuit Elements" (2003): ten decimals.
table("Bond, Bessel poles, delay 1 s", "bessel",
      {n: poles(v) for n, v in prototypes["bessel_delay"].items()}, 7e-11, normalise="delay")
table("Bond, Bessel poles, -3.01 dB at 1 rad/s", "bessel",
      {n: poles(v) for n, v in prototypes["bessel_mag"].items()}, 7e-11, normalise="magnitude")
# Winder, Chebyshev pole tables 0.01 to 0.5 dB, normalised to the ripple edge: five decimals.
for ripple, rows in prototypes["chebyshev_poles_sigma_omega_seen"].items():
    listed = {n: poles(zip(r["re"], r["im"])) for n, r in rows.items()}
    table(f"Winder, Chebyshev poles {ripple} dB", "chebyshev", listed, 7e-6, ripple=float(ripple))

# Butterworth polynomials (Winder), six decimals, from the poles multiplied out.
worst = 0.0
for n, wanted in prototypes["butterworth_coeffs_a1_up"].items():
    c = [1.0]
    for p in ask([family("butterworth", "lowpass", int(n), ONE)])[0]["poles"]:
        c = [a - p * b for a, b in zip(c + [0], [0] + c)]
    worst = max(worst, max(abs(x - y) for x, y in zip(c[1:], wanted)))
tap.check(worst < 5.1e-7, "Winder, Butterworth polynomials, orders 2 to 8", f"off by {worst:.1e}")


def f0_and_q(pole, corner):
    return abs(pole) / (2 * math.pi * corner), (abs(pole) / (-2 * pole.real) if pole.imag else None)


# Computed, not seen (as the published file says): Chebyshev f0 and Q for 0.5, 1 and 3 dB.
worst = 0.0
for ripple, rows in prototypes["chebyshev_f0_Q_computed"].items():
    for n, wanted in rows.items():
        a = ask([family("chebyshev", "lowpass", int(n), 1000.0, ripple=float(ripple))])[0]
        got = sorted((f0_and_q(p, 1000) for p in upper(a)), key=lambda x: x[1] or 0)
        for (f, q), (wf, wq) in zip(got, sorted(wanted, key=lambda x: x[1] or 0)):
            worst = max(worst, abs(f - wf), abs(q - wq) if wq else 0)
tap.check(worst < 5.1e-5, "Chebyshev f0 and Q tables (computed, not seen)", f"off by {worst:.1e}")

# S. Franco, "Design with Operational Amplifiers and Analog Integrated Circuits", example 4.2:
# Chebyshev of order 6, 1 dB; three digits.
f = prototypes["franco_ex4_2"]
got = sorted(f0_and_q(p, 1) for p in upper(ask([family("chebyshev", "lowpass", 6, 1.0, ripple=1.0)])[0]))
off = max(max(abs(g[0] - w), abs(g[1] / q - 1))
          for g, w, q in zip(got, sorted(f["f0_over_fc"]), sorted(f["Q"])))
tap.check(off < 2.5e-3, "Franco 4.2, Chebyshev order 6 of 1 dB", f"off by {off:.1e}")

# Franco, example 4.5: Butterworth band-pass of six poles, 1 kHz, 100 Hz wide.
f = prototypes["franco_ex4_5_butter_bp"]
edges = [-50 + math.sqrt(50 ** 2 + 1e6), 50 + math.sqrt(50 ** 2 + 1e6)]
got = sorted(f0_and_q(p, 1) for p in upper(ask([family("butterworth", "bandpass", 3, edges)])[0]))
off = max(max(abs(g[0] / w - 1), abs(g[1] / q - 1))
          for g, (w, q) in zip(got, sorted(zip(f["f0"], f["Q"]))))
tap.check(off < 5e-4, "Franco 4.5, Butterworth band-pass", f"off by {off:.1e}")

# Proakis and Manolakis, "Digital Signal Processing", example 8.3.6: order 7, 500 Hz.
got = upper(ask([family("butterworth", "lowpass", 7, 500.0)])[0])
off = match(got, poles(prototypes["proakis_ex8_3_6"]["poles_upper"]))
tap.check(off < 2e-8, "Proakis 8.3.6, Butterworth order 7", f"off by {off:.1e}")

# J. M. Fiore, "Operational Amplifiers and Linear Integrated Circuits", Bessel stage factors: damping
# 1/Q, and natural frequencies. For order 5 all of these are 3.6 % above those of a corner at
# -3.01 dB, so that there the ratios to the real pole are compared.
f = prototypes["fiore_bessel"]
five, two = (upper(ask([family("bessel", "lowpass", n, 1.0)])[0]) for n in (5, 2))
rows = [(two[0], f["n2"]), (five[1], f["n5"]["stage2"]), (five[2], f["n5"]["stage3"])]
off = max(abs(1 / f0_and_q(p, 1)[1] - r["alpha"]) for p, r in rows)
tap.check(off < 6e-4, "Fiore, Bessel orders 2 and 5, damping", f"off by {off:.1e}")
off = max(abs(abs(p / five[0]) / (r["kf"] / f["n5"]["real_kf"]) - 1) for p, r in rows[1:])
off = max(off, abs(abs(two[0]) / (2 * math.pi) / f["n2"]["kf"] - 1))
tap.check(off < 2e-3, "Fiore, Bessel orders 2 and 5, frequencies", f"off by {off:.1e}")


def stopband_of(ripple, n, ratio):
    """The stop-band depth that goes with an order and a ratio of edges, by the nome."""
    mp.dps = 30
    m1 = mp.mfrom(q=mp.qfrom(k=1 / mpf(ratio)) ** n)
    e2 = mpf(10) ** (mpf(ripple) / 10) - 1
    return float(10 * mp.log10(1 + e2 / m1)), float(m1)


# Winder, Cauer tables 3.25 and 3.30 (normalised to the ripple edge), seven digits. The zeros agree
# to all digits. The poles of 3.25 agree to 5e-7 with a design that takes the elliptic integral of
# the pass-band depth as asinh(1/e), that is the parameter m1 = (e/e_stop)^2 as 0; so they may be
# off by a few m1 from the exact design here. Two zeros of 3.30 stand as Table 3.26 prints them.
for name, t in prototypes["winder_cauer"].items():
    zero = pole = 0.0
    for row in t["rows"]:
        stop, m1 = stopband_of(t["ripple_dB"], row["n"], row["fs_ratio"])
        a = ask([family("elliptic", "lowpass", row["n"], ONE, ripple=t["ripple_dB"], stopband=stop)])[0]
        zero = max(zero, match([z for z in a["zeros"] if z.imag > 0], [1j * z for z in row["zeros"]], lambda w: 1))
        pole = max(pole, match(upper(a), poles(row["poles_sigma_omega"]), lambda w: 6e-7 + 4 * m1))
        pole = max(pole, 9.0 if math.floor(stop) != row["As_dB"] else 0)
    tap.check(zero < 1e-6 and pole < 1, f"Winder, Cauer table {name}: {len(t['rows'])} rows",
              f"zeros off by {zero:.1e}, poles {pole:.2f} of their bound")


def level(h):
    return 20 * math.log10(abs(h))


# IEC 61672-1, A and C weighting at the exact third-octave frequencies, within the table's rounding.
iec = published("weighting-a-c")
pole_hz = iec["poles_Hz_exact"]
single = {k: f"{-v!r} Hz" for k, v in pole_hz.items()}
for letter, names, zeros in (("A", ["f1", "f1", "f2", "f3", "f4", "f4"], 4), ("C", ["f1", "f1", "f4", "f4"], 2)):
    gain = {"at": "1 kHz", "is": "0 dB"}
    a = ask([roots([0] * zeros, [single[n] for n in names], gain)], iec["exact_Hz"])[0]
    off = max(abs(level(h) - w) for h, w in zip(a["response"], iec[letter + "_dB"]))
    tap.check(off <= 0.05, f"IEC 61672-1, {letter} weighting, {len(a['response'])} rows", f"off by {off:.3f} dB")
    unit = ask([roots([0] * zeros, [single[n] for n in names], {"factor": 1.0})], [1000.0])[0]["response"][0]
    fast = (2 * math.pi * pole_hz["f4"]) ** 2
    off = abs(level(unit * fast) - iec["residual"][letter + "1000_dB"])
    tap.check(off < 1e-9, f"IEC 61672-1, level of {letter} at 1 kHz before normalising", f"off by {off:.1e} dB")
at_nominal = ask([roots([0] * 4, [single[n] for n in ["f1", "f1", "f2", "f3", "f4", "f4"]], gain)],
                 iec["nominal_Hz"])[0]
off = max(abs(level(h) - w) for h, w in zip(at_nominal["response"], iec["A_dB"]))
tap.check(abs(off - 0.278) < 1e-3, "at the nominal frequencies A is off by 0.28 dB, so the check is sharp")

# IEC 60098 / RIAA: 3180, 318 and 75 us.
riaa = published("phono-equaliser")
t = riaa["time_constants_s"]
hz = [float(f) for f in riaa["table_dB"]]
a = ask([roots([-1 / t["T2_zero"]], [-1 / t["T1_pole"], -1 / t["T3_pole"]], {"at": "1 kHz", "is": "0 dB"})], hz)[0]
off = max(abs(level(h) - w) for h, w in zip(a["response"], riaa["table_dB"].values()))
tap.check(off < 0.0066, f"IEC 60098 replay equaliser, {len(hz)} rows", f"off by {off:.4f} dB, rounding 0.005")
a = ask([roots([-1 / t["T2_zero"]], [-1 / t["T1_pole"], -1 / t["T3_pole"]], {"at": 0, "is": 1.0})], [1000.0])[0]
off = abs(level(a["response"][0]) - riaa["residual"]["gain_1kHz_dB"])
tap.check(off < 1e-10, "IEC 60098 gain at 1 kHz over that at 0 Hz", f"off by {off:.1e} dB")

# ISO 8041 parameters of Wk and Wh, against the factors of ISO 2631-1 and ISO 5349-1.
vibration = published("vibration-wk-wh")


def pair(f, q, **more):
    return dict(frequency=f"{f!r} Hz", q=q, **more)


def weighting(p):
    """high pass, low pass, transition, and step where it is there; each a stage of a cascade."""
    whole = [roots([0, 0], [pair(p["f1"], p["Q1"])], {"factor": 1.0}),
             roots([], [pair(p["f2"], p["Q2"])], {"at": 0, "is": 1.0}),
             roots([f"{-p['f3']!r} Hz"], [pair(p["f4"], p["Q4"])], {"at": 0, "is": 1.0})]
    if p["f5"] != "inf":       # the numerator has 1 at 0 Hz, and the factor (f5/f6)^2 is apart
        step = {"at": 0, "is": (p["f5"] / p["f6"]) ** 2}
        whole.append(roots([pair(p["f5"], p["Q5"])], [pair(p["f6"], p["Q6"])], step))
    return {"cascade": whole}


def third_octave(f):
    return 10 ** (round(10 * math.log10(f)) / 10)


for name, rows, digits in (("Wk", vibration["wk_wd_table_Hz_Wk_Wd"], 3), ("Wh", vibration["wh_table"], 3)):
    a = ask([weighting(vibration["parameters"][name])], [third_octave(r["f"]) for r in rows])[0]
    off = max(abs(abs(h) / r[name] - 1) for h, r in zip(a["response"], rows))
    inside = all(abs(abs(h) - r[name]) <= 0.51 * 10 ** (math.floor(math.log10(r[name])) - digits + 1)
                 for h, r in zip(a["response"], rows))
    tap.check(inside, f"ISO 8041 {name} against its factors, {len(rows)} rows, each within its rounding",
              f"relative {off:.1e}")

# SAE J211: the analog side of the channel-class filter is a Butterworth pair at 2.0775 CFC, run
# forward and backward: -3.01 dB in all where the class says (1000: 1650 Hz).
j211 = published("channel-class-filter")
for c in j211["classes"]:
    a = ask([family("butterworth", "lowpass", 2, c["CFC"] * 2.0775)], [c["f3dB"]])[0]
    off = abs(2 * level(a["response"][0]) - j211["residual"]["analog_4pole_dB_at_FN_SAE"][str(c["CFC"])])
    tap.check(off < 1e-4, f"SAE J211, CFC {c['CFC']} at {c['f3dB']} Hz, both ways", f"off by {off:.1e} dB")
tap.done()
