# SPDX-License-Identifier: GPL-3.0-or-later
"""The emitted files: the same bytes from anywhere, two stages in one program, the build line in
the header, checks that name their remedy, text that tries to break out of a comment."""
import os
import re
import subprocess
import tempfile

from built import build, compiled, read_all, small_program, stage_of, text_of
from emitted import compile_strictly, run, sources, tap


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
            ran = tap.polewright(
                "build",
                path if where == "one" else "stage_file.yaml",
                "-o",
                f"{folder}/out",
                "--no-plots",
                "--quiet",
                cwd=folder,
                env={"LC_ALL": "C" if where == "one" else "C.UTF-8"},
            )
            if ran.returncode not in (0, 1):
                raise RuntimeError(ran.stderr)
            texts.append(read_all(f"{folder}/out"))
        tap.check(
            len(texts[0]) > 10 and texts[0] == texts[1], f"{code}: the same bytes from two folders"
        )
        copied = sorted(name for name in texts[0] if name.startswith("pw_"))
        expected = (
            [] if code == "standalone" else ["pw_fixed.h", "pw_q15.c", "pw_q15.h", "pw_runtime.h"]
        )
        tap.check(copied == expected, f"{code}: the runtime files are {expected}", str(copied))


def strict_sums_modulo(top):
    """Sums modulo 2^32 with error feedback, where a short constant once made gcc warn."""
    stage = {
        "stage": "bandstop",
        "rate": "16 kHz",
        "analog": {
            "family": {
                "approximation": "butterworth",
                "shape": "bandstop",
                "order": 3,
                "corners": ["380 Hz", "420 Hz"],
            }
        },
        "arithmetic": {"sample": "q15", "code": "standalone", "structure": "direct-1-shaped"},
    }
    built = build(stage, f"{top}/bandstop")
    for compiler in ("gcc", "clang"):
        message = compile_strictly(built, compiler)
        tap.check(
            "modulo 2^32" in text_of(f"{built['dir']}/bandstop.c") and not message,
            f"{compiler}: sums modulo 2^32 compile without a warning",
            message[:500],
        )


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


def header(top):
    built = build(stage_of("lined"), f"{top}/lined")
    text = text_of(f"{built['dir']}/lined.h")
    comment = (
        re.search(r"/\*(.*?)\*/", text[text.index("*/") + 2 :], re.S).group(1).replace("\n * ", " ")
    )
    line = re.search(r"Build: (.*?) The analog|Build: (.*?)\s+\n", comment, re.S)
    words = (line.group(1) or line.group(2)).split()
    words = words[: words.index("*")] if "*" in words else words
    ran = subprocess.run(
        [*words, "-Wall", "-Wextra", "-Wconversion", "-pedantic", "-Werror"],
        cwd=built["dir"],
        capture_output=True,
        text=True,
    )
    tap.check(
        ran.returncode == 0
        and os.path.exists(f"{built['dir']}/lined.o")
        and "-ffp-contract=off" in words,
        "the header's build line builds",
        " ".join(words) + ran.stderr[:300],
    )
    for phrase in (
        "polewright 0.",
        "SHA-256",
        "8 kHz",
        "bilinear",
        "Full scale",
        "dB of room",
        "anti-alias filter",
        "closed loop",
        "Nothing here is certified",
        "multiplies a sample",
        "pole -",
        "magnitude:",
    ):
        tap.check(phrase in comment, f"the header tells: {phrase}")
    declared = [
        f"void lined_reset(lined_state *s);",
        "int16_t lined_step(lined_state *s, int16_t x);",
        "void lined_block(lined_state *s, const int16_t *in, int16_t *out, size_t n);",
        "void lined_settle(lined_state *s, int16_t x);",
        "uint32_t lined_clipped(const lined_state *s);",
    ]
    tap.check(all(d in text for d in declared), "the header declares the interface of the contract")
    tap.check(
        "lined_clipped"
        not in text_of(f"{build(stage_of('lined', 'float64'), top + '/lined64')['dir']}/lined.h"),
        "floats have no count of clips",
    )


def remedies(top):
    built = build(stage_of("older"), f"{top}/older")
    path = f"{built['dir']}/pw_runtime.h"
    text = text_of(path).replace("#define PW_RUNTIME_FORMAT 1", "#define PW_RUNTIME_FORMAT 2")
    with open(path, "w", encoding="utf-8") as file:
        file.write(text)
    ran = subprocess.run(
        ["gcc", "-std=c99", "-c", "older.c", "-o", "older.o"],
        cwd=built["dir"],
        capture_output=True,
        text=True,
    )
    tap.check(
        ran.returncode != 0 and "build it again" in ran.stderr,
        "another format of the runtime is refused with the remedy",
        ran.stderr[:200],
    )
    for code in ("runtime", "standalone"):
        stage = stage_of("narrow", "float64")
        stage["arithmetic"]["code"] = code
        built = build(stage, f"{top}/narrow_{code}")
        with open(f"{built['dir']}/short.h", "w", encoding="utf-8") as file:
            file.write("#include <float.h>\n#undef DBL_MANT_DIG\n#define DBL_MANT_DIG 24\n")
        ran = subprocess.run(
            ["gcc", "-std=c99", "-include", "short.h", "-c", "narrow.c", "-o", "narrow.o"],
            cwd=built["dir"],
            capture_output=True,
            text=True,
        )
        tap.check(
            ran.returncode != 0 and "needs_a_double_of_64_bits_use" in ran.stderr,
            f"{code}: a short double is refused by name",
            ran.stderr[:200],
        )


def breaking_out(top):
    about = "ends */ int x; /* opens, ??/ trigraph, back\\ slash \\\nnew line, "
    about += "\u202e turned, µ and % and $ and @ and # and `"
    for code in ("runtime", "standalone"):
        stage = stage_of("odd", about=about)
        stage["arithmetic"]["code"] = code
        built = build(stage, f"{top}/odd_{code}")
        message = "".join(
            compile_strictly(
                built, compiler, ("-O1", "-Wbidi-chars=any") if compiler == "gcc" else ("-O1",)
            )
            for compiler in ("gcc", "clang")
        )
        tap.check(not message, f"{code}: a description cannot leave its comment", message[:300])
    long = "a" * 48
    built = compiled(stage_of(long), f"{top}/long")
    tap.check(run(built, [0, 1])[0] == 0, "a name of 48 letters")
    lines = [
        line
        for kind in "hc"
        for line in text_of(f"{built['dir']}/{long}.{kind}").split("\n")
        if line[:1] != "#"
    ]
    longest = max(lines, key=len)
    tap.check(len(longest) <= 120, "its lines are broken", longest)


with tempfile.TemporaryDirectory() as folder:
    same_bytes(folder)
    together(folder)
    header(folder)
    strict_sums_modulo(folder)
    remedies(folder)
    breaking_out(folder)
tap.done()
