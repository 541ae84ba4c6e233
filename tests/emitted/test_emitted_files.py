# SPDX-License-Identifier: GPL-3.0-or-later
"""The emitted files: the same bytes from anywhere, two stages in one program, the build line in the
header, converter codes, checks that name their remedy, text that tries to break out of a comment."""
import fractions
import os
import re
import shutil
import subprocess
import tempfile

from built import build, compiled, read_all, small_program
from emitted import STRICT, compile_strictly, run, sources, tap

LOWPASS = {"family": {"approximation": "butterworth", "shape": "lowpass", "order": 3, "corner": "200 Hz"}}


def stage_of(name, sample="q15", **more):
    return {"stage": name, "rate": "8 kHz", "analog": LOWPASS, "transform": {"method": "bilinear"},
            "arithmetic": {"sample": sample, "coefficient": "32 bits"} if sample[0] == "q" else {"sample": sample},
            "vectors": {"length": 200}, **more}


def same_bytes(top):
    for code in ("runtime", "standalone"):
        texts = []
        for where in ("one", "two/deeper"):
            folder = f"{top}/{code}/{where}"
            os.makedirs(folder)
            stage = stage_of("twice")
            stage["arithmetic"]["code"] = code
            path = f"{folder}/stage_file.yaml"
            with open(path, "w", encoding="utf-8") as file:
                file.write(str(stage).replace("'", '"'))
            ran = tap.polewright("build", path if where == "one" else "stage_file.yaml", "-o", f"{folder}/out", "--no-plots",
                                 "--quiet", cwd=folder, env={"LC_ALL": "C" if where == "one" else "C.UTF-8"})
            if ran.returncode not in (0, 1):
                raise RuntimeError(ran.stderr)
            texts.append(read_all(f"{folder}/out"))
        tap.check(len(texts[0]) > 10 and texts[0] == texts[1], f"{code}: the same bytes from two folders")
        copied = sorted(name for name in texts[0] if name.startswith("pw_"))
        expected = [] if code == "standalone" else ["pw_fixed.h", "pw_q15.c", "pw_q15.h", "pw_runtime.h"]
        tap.check(copied == expected, f"{code}: the runtime files are {expected}", str(copied))


TWO = """
#include <stdio.h>
#include "left_selftest.h"
#include "left.h"
#include "right_selftest.h"
#include "right.h"
int main(void)
{
    left_state l;
    right_state r;
    left_reset(&l);
    right_settle(&r, 1.0f);
    printf("%ld %ld %d %d\\n", left_selftest(), right_selftest(), (int)left_step(&l, 0),
           right_step(&r, 1.0f) > 0.999f && right_step(&r, 1.0f) < 1.001f);
    return 0;
}
"""


def together(top):
    for code in ("runtime", "standalone"):
        folder = f"{top}/both_{code}"
        for name, sample in (("left", "q15"), ("right", "float32")):
            stage = stage_of(name, sample)
            stage["arithmetic"]["code"] = code
            build(stage, folder)
        ran = small_program(folder, TWO, sources(folder), ["-ffp-contract=off"])
        tap.check(ran.stdout == "0 0 0 1\n", f"{code}: two stages in one program", ran.stdout)


def text_of(path):
    with open(path, encoding="utf-8") as file:
        return file.read()


def header(top):
    built = build(stage_of("lined"), f"{top}/lined")
    text = text_of(f"{built['dir']}/lined.h")
    comment = re.search(r"/\*(.*?)\*/", text[text.index("*/") + 2:], re.S).group(1).replace("\n * ", " ")
    line = re.search(r"Build: (.*?) The analog|Build: (.*?)\s+\n", comment, re.S)
    words = (line.group(1) or line.group(2)).split()
    words = words[:words.index("*")] if "*" in words else words
    ran = subprocess.run([*words, "-Wall", "-Wextra", "-Wconversion", "-pedantic", "-Werror"], cwd=built["dir"], capture_output=True, text=True)
    tap.check(ran.returncode == 0 and os.path.exists(f"{built['dir']}/lined.o") and "-ffp-contract=off" in words,
              "the header's build line builds", " ".join(words) + ran.stderr[:300])
    for phrase in ("polewright 0.", "SHA-256", "8 kHz", "bilinear", "Full scale", "dB of room", "anti-alias filter",
                   "closed loop", "Nothing here is certified", "multiplies a sample", "pole -", "magnitude:"):
        tap.check(phrase in comment, f"the header tells: {phrase}")
    declared = [f"void lined_reset(lined_state *s);", "int16_t lined_step(lined_state *s, int16_t x);",
                "void lined_block(lined_state *s, const int16_t *in, int16_t *out, size_t n);",
                "void lined_settle(lined_state *s, int16_t x);", "uint32_t lined_clipped(const lined_state *s);"]
    tap.check(all(d in text for d in declared), "the header declares the interface of the contract")
    tap.check("lined_clipped" not in text_of(f"{build(stage_of('lined', 'float64'), top + '/lined64')['dir']}/lined.h"),
              "floats have no count of clips")


def remedies(top):
    built = build(stage_of("older"), f"{top}/older")
    path = f"{built['dir']}/pw_runtime.h"
    text = text_of(path).replace("#define PW_RUNTIME_FORMAT 1", "#define PW_RUNTIME_FORMAT 2")
    with open(path, "w", encoding="utf-8") as file:
        file.write(text)
    ran = subprocess.run(["gcc", "-std=c99", "-c", "older.c", "-o", "older.o"], cwd=built["dir"], capture_output=True, text=True)
    tap.check(ran.returncode != 0 and "build it again" in ran.stderr, "another format of the runtime is refused with the remedy",
              ran.stderr[:200])
    for code in ("runtime", "standalone"):
        stage = stage_of("narrow", "float64")
        stage["arithmetic"]["code"] = code
        built = build(stage, f"{top}/narrow_{code}")
        with open(f"{built['dir']}/short.h", "w", encoding="utf-8") as file:
            file.write("#include <float.h>\n#undef DBL_MANT_DIG\n#define DBL_MANT_DIG 24\n")
        ran = subprocess.run(["gcc", "-std=c99", "-include", "short.h", "-c", "narrow.c", "-o", "narrow.o"], cwd=built["dir"],
                             capture_output=True, text=True)
        tap.check(ran.returncode != 0 and "needs_a_double_of_64_bits_use" in ran.stderr,
                  f"{code}: a short double is refused by name", ran.stderr[:200])


def breaking_out(top):
    about = 'ends */ int x; /* opens, ??/ trigraph, back\\ slash \\\nnew line, \u202e turned, µ and % and $ and @ and #'
    for code in ("runtime", "standalone"):
        stage = stage_of("odd", about=about)
        stage["arithmetic"]["code"] = code
        built = build(stage, f"{top}/odd_{code}")
        message = "".join(compile_strictly(built, compiler, ("-O1", "-Wbidi-chars=any") if compiler == "gcc" else ("-O1",))
                          for compiler in ("gcc", "clang"))
        tap.check(not message, f"{code}: a description cannot leave its comment", message[:300])
    long = "a" * 48
    built = compiled(stage_of(long), f"{top}/long")
    tap.check(run(built, [0, 1])[0] == 0, "a name of 48 letters")
    lines = [line for kind in "hc" for line in text_of(f"{built['dir']}/{long}.{kind}").split("\n") if line[:1] != "#"]
    longest = max(lines, key=len)
    tap.check(len(longest) <= 120, "its lines are broken", longest)


def codes(top):
    """Every code of a 12-bit converter both ways, against exact fractions."""
    ports = [({"low": 0, "high": 3.3, "bits": 12, "zero": 1.65}, {"low": 0, "high": 3.3, "bits": 12, "zero": 1.65, "rails": [0.1, 3.2]}),
             ({"low": -1, "high": 2.3, "bits": 11, "zero": 0.4}, {"low": 0.2, "high": 5, "bits": 9, "zero": 1.7}),
             ({"low": -10, "high": 10, "bits": 16, "zero": 0}, {"low": -5, "high": 5, "bits": 16, "zero": 0.3, "rails": [-4, 4.4]})]
    for number, (inside, outside) in enumerate(ports):
        for sample in ("q15", "q31", "float32", "float64"):
            name = f"codes_{number}_{sample}"
            volts = lambda port: {k: (v if k == "bits" else [f"{w} V" for w in v] if k == "rails" else f"{v} V") for k, v in port.items()}
            stage = stage_of(name, sample, signal={"input": volts(inside), "output": volts(outside)})
            stage["arithmetic"]["code"] = "standalone" if number % 2 else "runtime"
            built = build(stage, f"{top}/{name}")
            last = 2 ** inside["bits"] - 1
            ctype = {"q15": "int16_t", "q31": "int32_t", "float32": "float", "float64": "double"}[sample]
            step = {"q15": 3, "q31": 77771}.get(sample)
            unit = {"q15": 32768, "q31": 2**31}.get(sample, 1)
            loop = (f"for (long long y = -{unit}LL; y < {unit}LL; y += {step if sample == 'q15' else step * 131}LL) "
                    f"printf(\"t %.17g %lu\\n\", (double)y, (unsigned long){name}_to_code(({ctype})y));" if step else
                    f"for (int i = -3000; i <= 3000; i++) printf(\"t %.17g %lu\\n\", (double)({ctype})(i / 2500.0), "
                    f"(unsigned long){name}_to_code(({ctype})(i / 2500.0)));")
            text = (f"#include <stdio.h>\n#include \"{name}.h\"\nint main(void)\n{{\nfor (unsigned long c = 0; c <= {last}; c++) "
                    f"printf(\"f %lu %.17g\\n\", c, (double){name}_from_code((uint16_t)c));\n{loop}\nreturn 0;\n}}\n")
            lines = small_program(built["dir"], text, [f for f in sources(built["dir"]) if "small" not in f],
                                  ["-ffp-contract=off", "-fsanitize=undefined", "-fno-sanitize-recover=all"]).stdout.split("\n")
            exact = lambda v: fractions.Fraction(str(v))
            full = lambda p: max(exact(p["high"]) - exact(p["zero"]), exact(p["zero"]) - exact(p["low"]))
            slack = {"float32": fractions.Fraction(1, 2**22), "float64": fractions.Fraction(1, 2**50)}.get(sample)
            bad, ends = [], set()
            for line in lines:
                kind, *rest = line.split() or [""]
                if kind == "f":
                    code, got = int(rest[0]), fractions.Fraction(float(rest[1]))
                    v = exact(inside["low"]) + code * (exact(inside["high"]) - exact(inside["low"])) / 2 ** inside["bits"]
                    want = (v - exact(inside["zero"])) / full(inside) * unit
                    want = min(max(want, -unit), unit - 1) if step else want
                    if abs(got - want) > (slack if slack else fractions.Fraction(501, 1000)):
                        bad.append(line)
                if kind == "t":
                    y, got = fractions.Fraction(float(rest[0])), int(rest[1])
                    v = exact(outside["zero"]) + y * full(outside) / unit
                    lsb = (exact(outside["high"]) - exact(outside["low"])) / 2 ** outside["bits"]
                    rails = outside.get("rails", [outside["low"], outside["high"]])
                    want = (min(max(v, exact(rails[0])), exact(rails[1])) - exact(outside["low"])) / lsb
                    want = min(want, 2 ** outside["bits"] - 1)
                    ends.add(got)
                    if abs(got - want) > fractions.Fraction(1, 2) + fractions.Fraction(1, 100 if slack else 10000):
                        bad.append(line)
            counted = len([line for line in lines if line])
            tap.check(not bad and counted > 2000 and len(ends) > 300, f"codes of {sample}, converter pair {number}: nearest, {counted} of them",
                      "; ".join(bad[:3]))


def contraction(top):
    if shutil.which("gcc") is None or "fma" not in text_of("/proc/cpuinfo"):
        return tap.check(True, "contraction # SKIP no fused multiply-add here")
    moved = 0
    for sample in ("float32", "float64"):
        stage = stage_of(f"fused_{sample}", sample)
        built = build(stage, f"{top}/fused_{sample}")
        for compiler in ("gcc", "clang"):
            flags = ("-O2", "-mfma", "-ffp-contract=fast")
            results = []
            for extra in ((), (f"-D{built['name'].upper()}_TOLERANCE=0",)):
                message = compile_strictly(built, compiler, (*flags, *extra))
                results.append(None if message else run(built, [0.0], repeats=0)[0])
            moved += results[1] != 0
            tap.check(results[0] == 0, f"{sample} by {compiler}, contracted, is within the stated tolerance", str(results))
        message = compile_strictly(built, "gcc", ("-O2", "-mfma", f"-D{built['name'].upper()}_TOLERANCE=0"))
        tap.check(not message and run(built, [0.0], repeats=0)[0] == 0, f"{sample} uncontracted is bit for bit")
    tap.check(moved > 0, f"contraction does move samples ({moved} of 4 builds)")


def caught(top):
    """A wrong expected sample is found at its index."""
    built = compiled(stage_of("caught"), f"{top}/caught")
    path = f"{built['dir']}/caught_selftest.c"
    text = text_of(path)
    at = text.index("caught_noise_expected[200] = {")
    values = re.findall(r"-?\d+", text[at + 30:text.index("};", at)])
    head, tail = text[:at + 30], text[text.index("};", at):]
    values[123] = str(int(values[123]) + 1)
    with open(path, "w", encoding="utf-8") as file:
        file.write(head + ", ".join(values) + tail)
    message = compile_strictly(built)
    tap.check(not message and run(built, [0], repeats=0)[0] == 1 + 4 * 200 + 123, "the self-test names the sample that differs",
              message[:200])


with tempfile.TemporaryDirectory() as folder:
    same_bytes(folder)
    together(folder)
    header(folder)
    remedies(folder)
    breaking_out(folder)
    codes(folder)
    contraction(folder)
    caught(folder)
tap.done()
