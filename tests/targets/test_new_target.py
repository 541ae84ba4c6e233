# SPDX-License-Identifier: GPL-3.0-or-later
"""A user's own target: one folder copied, one file edited; then it is listed, built for, and runs."""
import os
import shutil
import sys
import tempfile

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
import harness  # noqa: E402
from tap import ROOT, check, done, polewright  # noqa: E402

STAGE = """stage: rudder_feel
rate: 8 kHz
analog: {family: {approximation: butterworth, shape: lowpass, order: 4, corner: 900 Hz}}
arithmetic: {sample: q15, code: standalone}
vectors: {signals: [impulse, noise, full-scale-square], length: 200}
target: rudder-board
"""
MAIN = '#include "part.h"\n#include "rudder_feel_selftest.h"\nint main(void) { return rudder_feel_selftest() ? 1 : 0; }\n'

with tempfile.TemporaryDirectory() as data:
    for name in ("targets", "runtime", "include"):
        shutil.copytree(f"{ROOT}/{name}", f"{data}/{name}")
    # What the user does: copy one folder, edit one file.
    shutil.copytree(f"{data}/targets/cortex-m4f", f"{data}/targets/rudder-board")
    path = f"{data}/targets/rudder-board/settings.yaml"
    with open(path, encoding="utf-8") as file:
        text = file.read()
    text = text.replace("about: Arm Cortex-M4F", "about: Rudder board, a Cortex-M4 without floating point", 1)
    text = text.replace("has: [float, ", "has: [", 1).replace("-mfpu=fpv4-sp-d16 -mfloat-abi=hard", "-mfloat-abi=soft")
    text = text.replace("flash: 4 MiB", "flash: 512 KiB").replace("ram: 4 MiB", "ram: 128 KiB")
    with open(path, "w", encoding="utf-8") as file:
        file.write(text)
    env = {"POLEWRIGHT_DATA": data}
    listed = polewright("targets", env=env)
    check("rudder-board Rudder board" in listed.stdout and "512 KiB flash" in listed.stdout, "it is listed", listed.stdout[-600:])
    out = f"{data}/out"
    built = polewright("build", "-", "-o", out, "--no-plots", stdin=STAGE, env=env)
    check(built.returncode == 0, "a stage is built for it", built.stderr[:300])
    with open(f"{out}/rudder_feel.c", encoding="utf-8") as file:
        check("smlad" in file.read(), "with the kernels of its instructions")
    target = harness.Target("rudder-board", f"{data}/targets")
    missing = target.missing()
    if missing:
        print(f"ok - it runs # SKIP install {' '.join(missing)}")
    else:
        with open(f"{out}/main.c", "w", encoding="utf-8") as file:
            file.write(MAIN)
        sources = [f"{out}/{f}" for f in ("rudder_feel.c", "rudder_feel_selftest.c", "main.c")]
        ran = target.run(target.build(f"{data}/program", sources, flags=[f"-I{out}"]))
        check(ran.returncode == 0, "and its self-test passes under the emulator", f"{ran.returncode} {ran.stderr[:200]}")
    def refused(old, new, words):
        """The same folder with one line changed: the build is refused at the stage's target."""
        with open(path, encoding="utf-8") as file:
            before = file.read()
        with open(path, "w", encoding="utf-8") as file:
            file.write(before.replace(old, new, 1))
        ran = polewright("build", "-", "-o", f"{data}/none", "--no-plots", stdin=STAGE, env=env)
        with open(path, "w", encoding="utf-8") as file:
            file.write(before)
        check(ran.returncode == 2 and "stdin:6:9: " in ran.stderr and words in ran.stderr and not os.path.exists(f"{data}/none"),
              f"refused: {words}", ran.stderr[-300:])

    refused("flash: 512 KiB", "flash: 300", "bytes of flash and rudder-board has 300")
    refused("ram: 128 KiB", "ram: 32", "bytes of RAM and rudder-board has 32")
    refused("has: [multiply, ", "has: [", "no multiply instruction")
    with open(path, "a", encoding="utf-8") as file:
        file.write("flahs: 12\n")
    wrong = polewright("targets", env=env)
    check(wrong.returncode == 3 and "settings.yaml:" in wrong.stderr and "flash" in wrong.stderr,
          "a mistake in the file is told at its line", wrong.stderr[-300:])
done()
