# SPDX-License-Identifier: GPL-3.0-or-later
"""Builds C for a target and runs it: on the host itself, or under the target's emulator.

    for target in harness.targets(): built = target.build(folder, sources, "-O2"); ran = target.run(built)

What is missing on this machine (a compiler, an emulator) is told by target.missing(): the names of
the Debian packages. With CI=true in the environment nothing may be missing.
"""
import glob
import os
import shlex
import shutil
import subprocess
import sys

import yaml

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
import tap  # noqa: E402

TARGETS = tap.ROOT + "/targets"
STRICT = ["-std=c99", "-Wall", "-Wextra", "-Wconversion", "-pedantic", "-Werror", "-ffp-contract=off"]
RUNNER = tap.ROOT + "/build/parts/avr_runner"


class Target:
    def __init__(self, name, root=TARGETS):
        self.name, self.root = name, root
        with open(f"{root}/{name}/settings.yaml", encoding="utf-8") as file:
            self.settings = yaml.safe_load(file)

    def has(self, ability):
        return ability in self.settings["has"]

    def missing(self):
        """The Debian packages that this target still needs here; an empty list: none."""
        packages = []
        if not shutil.which(self.settings["compiler"]):
            packages += self.settings["package"].split()
        emulator = self.settings.get("emulator", "")
        program = shlex.split(emulator)[0] if emulator else ""
        if program == "{avr-runner}":
            if not avr_runner():
                packages += self.settings["emulator-package"].split()
        elif program and not shutil.which(program):
            packages += self.settings["emulator-package"].split()
        return packages

    def _words(self, key):
        text = str(self.settings.get(key, "") or "")
        return shlex.split(text.replace("{targets}", self.root))

    def compiler(self, optimise="-O2"):
        words = [self.settings["compiler"], *self._words("flags"), optimise, f"-I{self.root}/shared"]
        if "tick" in self.settings:
            words.append(f"-DPART_TICK_PS={self.settings['tick']}")
        return words + [w for w in self._words("build") if not w.startswith("-Wl") and w != "-T"]

    def compile(self, source, out, optimise="-O2", flags=()):
        """One object file; the strict flags are for emitted code."""
        done = subprocess.run([*self.compiler(optimise), *flags, "-c", "-o", out, source],
                              capture_output=True, text=True)
        if done.returncode:
            raise RuntimeError(f"{self.name}: {source} does not compile\n{done.stderr[:3000]}")
        return out

    def build(self, out, sources, optimise="-O2", flags=(), strict=True, objects=()):
        """Links the sources with the target's start-up into the program `out`."""
        os.makedirs(os.path.dirname(out), exist_ok=True)
        objects = list(objects)
        for k, source in enumerate(sources):
            objects.append(self.compile(source, f"{out}.{k}.o", optimise, [*(STRICT if strict else []), *flags]))
        for k, source in enumerate(self._words("sources")):
            objects.append(self.compile(f"{self.root}/{source}", f"{out}.s{k}.o", "-O2"))
        done = subprocess.run([self.settings["compiler"], *self._words("flags"), *self._words("build"), "-o", out,
                               *objects, *self._words("libraries")], capture_output=True, text=True)
        if done.returncode:
            raise RuntimeError(f"{self.name}: does not link\n{done.stderr[:3000]}")
        return out

    def run(self, program, seconds=120):
        """A CompletedProcess with what the program wrote and its exit status."""
        emulator = self.settings.get("emulator", "")
        words = [w.replace("{program}", program).replace("{avr-runner}", RUNNER)
                 for w in shlex.split(emulator)] or [program]
        return subprocess.run(words, capture_output=True, text=True, timeout=seconds, stdin=subprocess.DEVNULL)


def avr_runner():
    """Builds the AVR runner once; false where libsimavr is not installed."""
    source = os.path.join(os.path.dirname(os.path.abspath(__file__)), "avr_runner.c")
    if os.path.exists(RUNNER) and os.path.getmtime(RUNNER) >= os.path.getmtime(source):
        return True
    os.makedirs(os.path.dirname(RUNNER), exist_ok=True)
    own = f"{RUNNER}.{os.getpid()}"                  # -l:libelf.so.1: only the library itself is needed
    done = subprocess.run(["gcc", "-O2", "-o", own, source, "-lsimavr", "-l:libelf.so.1"], capture_output=True)
    if done.returncode:
        return False
    os.replace(own, RUNNER)
    return True


def names(root=TARGETS):
    return sorted(os.path.basename(os.path.dirname(p)) for p in glob.glob(root + "/*/settings.yaml"))


def present(wanted=None):
    """The targets that can be built and run here. The missing ones are told, and with CI=true they fail."""
    found = []
    for name in names():
        if wanted and name not in wanted:
            continue
        target = Target(name)
        missing = target.missing()
        if not missing:
            found.append(target)
        elif os.environ.get("CI") == "true":
            tap.check(False, f"{name} can be built and run", "install " + " ".join(missing))
        else:
            print(f"ok - {name} # SKIP install {' '.join(missing)}", flush=True)
    return found
