#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""The emitted folder in projects of other people: plain make, CMake, a sketch folder; and the
installed program with its pkg-config and CMake files, manual pages and completion."""
import glob
import os
import shutil
import subprocess
import sys
import tempfile

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
import tap

EXAMPLES = tap.ROOT + "/examples"


def sh(command, cwd, **env):
    return subprocess.run(["bash", "-c", command], cwd=cwd, capture_output=True, text=True,
                          env=dict(os.environ, **env))


def test_projects(scratch):
    shutil.copytree(EXAMPLES + "/using-the-c", scratch + "/use", ignore=shutil.ignore_patterns("hull_strain", "bridges"))
    for project in ("plain-make/hull_strain", "cmake/hull_strain"):
        tap.polewright("build", EXAMPLES + "/hull-strain/stage.yaml", "-o", f"{scratch}/use/{project}", "--no-plots", "--quiet")
    ran = sh("make -s && ./bridges", scratch + "/use/plain-make")
    rows = ran.stdout.splitlines()
    tap.check(ran.returncode == 0 and len(rows) == 4, "a plain Makefile builds and runs it", ran.stderr)
    # The ripple is at half the rate, where a low-pass of four poles at 120 Hz passes nothing; the
    # level passes at 0 dB: code 2048 + 100 c, within a code of rounding.
    codes = [int(r.split("code ")[1].split(",")[0]) for r in rows]
    tap.check(all(abs(code - 2048 - 100 * c) <= 1 for c, code in enumerate(codes)), "and filters four channels", str(codes))
    ran = sh("cmake -S . -B out >log && cmake --build out >>log && out/bridges", scratch + "/use/cmake")
    tap.check(ran.returncode == 0 and ran.stdout.splitlines() == rows, "CMake builds the same", ran.stderr)
    sketch = scratch + "/use/sketch/bridge_logger"
    tap.polewright("build", EXAMPLES + "/hull-strain/stage.yaml", "-o", sketch, "--target", "avr", "--no-plots", "--quiet")
    flags = "-mmcu=atmega1284p -Os -Wall -Wextra -Werror"
    ran = sh(f"avr-g++ {flags} -std=gnu++11 -I. -I{tap.ROOT}/tests/packaging/arduino -include Arduino.h -x c++ -c bridge_logger.ino -o ino.o && "
             f"avr-gcc {flags} -std=c99 -c hull_strain.c pw_*.c && ls *.o", sketch)
    tap.check(ran.returncode == 0 and "hull_strain.o" in ran.stdout, "a sketch folder compiles for an 8-bit part", ran.stderr)


def test_installed(scratch):
    ran = sh(f"make -s install PREFIX=/usr DESTDIR={scratch}/root", tap.ROOT)
    root = scratch + "/root/usr"
    tap.check(ran.returncode == 0 and os.path.exists(root + "/bin/polewright"), "make install", ran.stderr[-500:])
    ran = subprocess.run([root + "/bin/polewright", "build", EXAMPLES + "/tide-coupling/stage.yaml", "-o", scratch + "/tide", "--no-plots",
                          "--target", "cortex-m4f"], capture_output=True, text=True, cwd=scratch, env={"PATH": os.environ["PATH"]})
    tap.check(ran.returncode == 0 and os.path.exists(scratch + "/tide/pw_q31.c"), "the installed program finds its runtime and targets", ran.stderr)
    with open(scratch + "/use.c", "w") as f:
        f.write('#include "tide_coupling.h"\nint main(void) { tide_coupling_state s; tide_coupling_reset(&s);\n'
                "return tide_coupling_step(&s, 0) != 0; }\n")
    ran = sh(f"cc -Itide use.c tide/tide_coupling.c $(pkg-config --define-variable=prefix={root} --cflags --libs polewright-runtime) "
             "-o used && ./used", scratch, PKG_CONFIG_PATH=root + "/lib/pkgconfig")
    tap.check(ran.returncode == 0, "pkg-config finds the runtime", ran.stderr)
    os.makedirs(scratch + "/cm")
    with open(scratch + "/cm/CMakeLists.txt", "w") as f:
        f.write("cmake_minimum_required(VERSION 3.16)\nproject(use C)\nfind_package(polewright-runtime REQUIRED)\n"
                "add_executable(use ../use.c ../tide/tide_coupling.c)\ntarget_include_directories(use PRIVATE ../tide)\n"
                "target_link_libraries(use polewright::runtime)\n")
    ran = sh(f"cmake -S . -B out -DCMAKE_PREFIX_PATH={root} >log && cmake --build out >>log && out/use", scratch + "/cm")
    tap.check(ran.returncode == 0, "and so does CMake", ran.stderr)
    pages = glob.glob(root + "/share/man/man*/*")
    ran = sh("mandoc -T lint -W warning " + " ".join(pages), scratch)
    tap.check(len(pages) == 2 and ran.returncode == 0, "the manual pages pass mandoc -T lint", ran.stdout[-800:])
    return root


def test_completion(root):
    def complete(line):
        words = line.split(" ")
        script = (f"PATH={root}/bin:$PATH; source {root}/share/bash-completion/completions/polewright; "
                  f"COMP_WORDS=({' '.join(repr(w) for w in words)}); COMP_CWORD={len(words) - 1}; _polewright 2>/dev/null; "
                  'printf "%s\\n" "${COMPREPLY[@]}"')
        return set(subprocess.run(["bash", "-c", script], cwd=EXAMPLES + "/tide-coupling", capture_output=True, text=True).stdout.split())

    tap.check({"build", "build"} <= complete("polewright b"), "bash completes a verb")
    tap.check(complete("polewright build stage.yaml --no-p") == {"--no-plots"}, "an option of the verb",
              str(complete("polewright build stage.yaml --no-p")))
    tap.check("--no-plots" not in complete("polewright check stage.yaml --"), "and no option of another")
    tap.check("stage.yaml" in complete("polewright build s"), "a stage file")
    tap.check("cortex-m4f" in complete("polewright build stage.yaml --target cortex-m"), "a target")
    names = {os.path.basename(os.path.dirname(f)) for f in glob.glob(tap.ROOT + "/targets/*/settings.yaml")}
    tap.check(complete("polewright build stage.yaml --target ") == names, "and nothing but targets",
              str(complete("polewright build stage.yaml --target ") ^ names))
    if shutil.which("zsh"):
        ran = sh(f"zsh -n {root}/share/zsh/site-functions/_polewright", tap.ROOT)
        tap.check(ran.returncode == 0, "zsh reads its completion", ran.stderr)
    else:
        print("ok 99 - zsh reads its completion # SKIP zsh is not installed")


with tempfile.TemporaryDirectory() as scratch_folder:
    test_projects(scratch_folder)
    test_completion(test_installed(scratch_folder))
tap.done()
