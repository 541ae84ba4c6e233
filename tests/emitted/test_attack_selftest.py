# SPDX-License-Identifier: GPL-3.0-or-later
"""What the vectors and the self-test can see: the last bit of every coefficient word in the emitted C
is turned in its turn, and the self-test must fail; each vector holds what its name says."""
import json
import os
import re
import shutil
import subprocess
import sys
import tempfile

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
import built
import emitted
from emitted import tap
from tap import check, done

BAND = {
    "family": {
        "approximation": "elliptic",
        "shape": "bandpass",
        "order": 2,
        "corners": ["900 Hz", "2 kHz"],
        "ripple": "0.5 dB",
        "stopband": "40 dB",
    }
}
FORMS = {
    "q15 runtime": ("q15", "auto", "runtime"),
    "q31 runtime": ("q31", "coupled", "runtime"),
    "q15 standalone": ("q15", "direct-1", "standalone"),
    "q31 standalone": ("q31", "direct-1-shaped", "standalone"),
}
WORD = re.compile(
    r"^((?:\s+|static const int\d+_t \w+ = )-?(?:INT32_C\()?)(\d+)(.*/\* (?:[abcdg][012]?|sigma|omega) = .*)$"
)


def stage(sample, structure, code):
    return {
        "stage": "watched",
        "rate": "48 kHz",
        "analog": BAND,
        "vectors": {"length": 1024},
        "arithmetic": {"sample": sample, "structure": structure, "code": code},
    }


def mutants(text):
    """The text with one word's last bit turned, and the line; words that are 0 stand for no part of the filter."""
    lines = text.split("\n")
    for i, line in enumerate(lines):
        found = WORD.match(line)
        if found and int(found[2]):
            turned = f"{found[1]}{int(found[2]) ^ 1}{found[3]}"
            yield line.strip(), "\n".join(lines[:i] + [turned] + lines[i + 1 :])


def selftest(folder, name, text):
    """Result of the self-test with this text for the stage's C."""
    with open(f"{folder}/{name}.c", "w", encoding="utf-8") as file:
        file.write(text)
    with open(f"{folder}/only.c", "w", encoding="utf-8") as file:
        file.write(
            f'#include "{name}_selftest.h"\nint main(void) {{ return {name}_selftest() != 0; }}\n'
        )
    sources = [f for f in emitted.sources(folder)]
    subprocess.run(
        ["gcc", "-std=c99", "-O0", f"-I{folder}", *sources, "-o", f"{folder}/only"], check=True
    )
    os.remove(f"{folder}/only.c")
    return subprocess.run([f"{folder}/only"]).returncode


def words_are_watched(folder):
    for form, how in FORMS.items():
        where = f"{folder}/{form.replace(' ', '_')}"
        built.build(stage(*how), where)
        text = open(f"{where}/watched.c", encoding="utf-8").read()
        check(selftest(where, "watched", text) == 0, f"{form}: the self-test passes as emitted")
        turned = list(mutants(text))
        missed = [
            line
            for line, mutant in (turned if tap.FULL else turned[::3])
            if selftest(where, "watched", mutant) == 0
        ]
        check(
            len(turned) >= 10 and not missed,
            f"{form}: one bit of any coefficient word fails the self-test",
            f"{len(turned)} words, missed {missed}",
        )


def rows(path):
    with open(path, encoding="utf-8") as file:
        return [tuple(map(int, line.split(","))) for line in file if line[0].isdigit()]


def vectors_hold_their_names(folder):
    where = f"{folder}/named"
    peak = 0.25
    span = {"low": "-1 V", "high": "1 V", "peak": f"{peak} V"}
    built.build(dict(stage("q15", "direct-1", "runtime"), signal={"input": span}), where)
    report = json.load(open(f"{where}/report.json", encoding="utf-8"))
    seen = {name[:-4]: rows(f"{where}/vectors/{name}") for name in os.listdir(f"{where}/vectors")}
    x = {name: [r[1] for r in table] for name, table in seen.items()}
    y = {name: [r[2] for r in table] for name, table in seen.items()}
    top = int(peak * 32768)
    check(x["impulse"] == [top] + [0] * 1023, "impulse: one sample at the peak")
    check(x["step"] == [top] * 1024, "step: the peak throughout")
    check(max(x["sine"]) == top and min(x["sine"]) == -top, "sine: from peak to peak")
    check(
        len(set(x["noise"])) > 900 and max(map(abs, x["noise"])) <= top,
        "noise: spread within the peak",
    )
    check(
        {abs(v) for v in x["full-scale-square"]} == {32767, 32768},
        "full-scale square: rail to rail",
    )
    check(
        set(x["silence"]) == {0}
        and max(map(abs, y["silence"])) == report["limit_cycle"]["found_lsb"] > 0,
        "silence: no input, and the cycle that was found",
        f"{report['limit_cycle']}",
    )
    check(set(map(abs, x["overflow-probe"])) <= {top, 0}, "overflow probe: at the peak throughout")
    crossings = [
        sum(a * b < 0 for a, b in zip(part, part[1:]))
        for part in (x["sweep"][:256], x["sweep"][-256:])
    ]
    check(crossings[1] > 10 * max(crossings[0], 1), "sweep: the pitch rises", str(crossings))


def probe_attains_its_bound(folder):
    low = {
        "family": {
            "approximation": "butterworth",
            "shape": "lowpass",
            "order": 2,
            "corner": "500 Hz",
        }
    }
    for sample, structure in (("q15", "direct-1-shaped"), ("q31", "direct-1"), ("q31", "coupled")):
        where, full = f"{folder}/probe_{sample}_{structure}", 32768 if sample == "q15" else 2**31
        built.build(
            dict(
                stage(sample, structure, "runtime"),
                analog=low,
                signal={"input": {"low": "-1 V", "high": "1 V", "peak": "0.5 V"}},
            ),
            where,
        )
        report = json.load(open(f"{where}/report.json", encoding="utf-8"))
        worst = max(
            (n for n in report["nodes"] if not n["name"].endswith("accumulator")),
            key=lambda n: n["bound"],
        )
        y = [r[2] for r in rows(f"{where}/vectors/overflow-probe.csv")]
        reached = max(map(abs, y)) / full
        output = next(n for n in report["nodes"] if n["name"] == "section 1 output")
        check(
            reached <= output["bound"]
            and (worst is not output or reached >= 0.99 * output["bound"]),
            f"{sample} {structure}: the probe attains the bound of the worst node to 1 %, and does not pass it",
            f"{reached} of {output['bound']}; worst is {worst['name']}",
        )


def main():
    folder = tempfile.mkdtemp()
    words_are_watched(folder)
    vectors_hold_their_names(folder)
    probe_attains_its_bound(folder)
    shutil.rmtree(folder)
    done()


main()
