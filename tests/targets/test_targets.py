# SPDX-License-Identifier: GPL-3.0-or-later
"""Emitted stages on every target, -O2 and -Os: the self-test (every sample of every signal as the
host's simulation has it), step against block however the input is cut, the count of clips. Fixed
point may differ nowhere; for floats the largest difference to the host in ulp is told and bounded.
PW_FULL=1: every format and structure with 1 to 8 sections; otherwise a quick set. Names of targets
may follow on the command line."""
import json
import os
import struct
import subprocess
import sys

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
import harness  # noqa: E402
import stages  # noqa: E402
from tap import FULL, ROOT, check, done  # noqa: E402

HERE = os.path.dirname(os.path.abspath(__file__))
PROBE = ROOT + "/build/release/outside/probe_emit"
TYPES = {"q15": "int16_t", "q31": "int32_t", "float32": "float", "float64": "double"}
ULPS = 0          # unfused, each operation rounded on its own: the same bits everywhere


def emit(target, stage_list, folder, length):
    """Emits every stage for the target."""
    lines = ""
    for stage in stage_list:
        lines += json.dumps(dict(stage, dir=f"{folder}/{stage['name']}", target=target.name, length=length)) + "\n"
    os.makedirs(folder, exist_ok=True)
    ran = subprocess.run([PROBE], input=lines, capture_output=True, text=True)
    if ran.returncode or len(ran.stdout.splitlines()) != len(stage_list):
        raise RuntimeError(f"probe_emit: {ran.stderr}")


def compile_stage(target, stage, folder, optimise):
    """Object files of a stage and of its driver."""
    name, here = stage["name"], f"{folder}/{stage['name']}"
    flags = [f"-I{here}", f"-DSTAGE={name}", f"-DSAMPLE={TYPES[stage['sample']]}", f'-DHEADER="{name}.h"',
             f'-DSELFTEST="{name}_selftest.h"', f"-DFLOATS={int(stage['sample'][0] == 'f')}"]
    objects = []
    sources = sorted(f for f in os.listdir(here) if f.endswith(".c") and not f.startswith("pw_"))
    for source in [f"{here}/{f}" for f in sources] + [HERE + "/stage_main.c"]:
        objects.append(target.compile(source, f"{here}/{os.path.basename(source)}{optimise}.o", optimise,
                                      [*harness.STRICT, *flags]))
    return objects


def runtime_objects(target, stage_list, folder, optimise):
    """The runtime files, once for all stages of a program."""
    sources = {}
    for stage in stage_list:
        here = f"{folder}/{stage['name']}"
        sources.update({f: f"{here}/{f}" for f in os.listdir(here) if f.startswith("pw_") and f.endswith(".c")})
    return [target.compile(path, f"{folder}/{f}{optimise}.o", optimise, [*harness.STRICT, f"-I{os.path.dirname(path)}"])
            for f, path in sorted(sources.items())]


def run_program(target, stage_list, folder, optimise):
    """{stage name: lines it wrote}."""
    objects = [o for stage in stage_list for o in compile_stage(target, stage, folder, optimise)]
    objects += runtime_objects(target, stage_list, folder, optimise)
    main = "#include \"part.h\"\n" + "".join(f"void {s['name']}_run(void);\n" for s in stage_list) + "int main(void)\n{\n"
    main += "".join(f"    part_write(\"= {s['name']}\\n\");\n    {s['name']}_run();\n" for s in stage_list) + "    return 0;\n}\n"
    with open(folder + "/main.c", "w", encoding="utf-8") as file:
        file.write(main)
    program = target.build(f"{folder}/program{optimise}", [folder + "/main.c"], optimise, objects=objects)
    ran = target.run(program)
    lines, current = {}, None
    for line in ran.stdout.replace("\r", "").splitlines():
        if line.startswith("= "):
            current = lines.setdefault(line[2:], [])
        elif current is not None:
            current.append(line)
    return lines


def order(hexadecimal):
    """Floats as integers that count ulps: 8 or 16 hexadecimal digits."""
    bits = 4 * len(hexadecimal)
    value = int(hexadecimal, 16)
    return value if value < 1 << (bits - 1) else (1 << (bits - 1)) - value


def ulps(mine, host):
    return max(abs(order(a) - order(b)) for a, b in zip(mine, host))


def can_run(target, stage):
    """On AVR a double has 32 bits, and the emitted code says so when it is compiled."""
    return not (target.name == "avr" and stage["sample"] == "float64")


def judge(target, optimise, stage_list, lines, host):
    bad, worst = [], 0
    for stage in stage_list:
        got, want = lines.get(stage["name"], []), host.get(stage["name"])
        same = got[:2] == ["selftest same", "split same"] and "clips differ" not in got
        if stage["sample"][0] == "f":
            same = same and len(got) == len(want or got) and len(got) > 50
            worst = max(worst, ulps(got[2:], want[2:]) if same and want else 0)
        else:
            same = same and (want is None or got == want)
        if not same:
            bad.append(f"{stage['name']}: {got[:4]}")
    check(not bad and lines, f"{target.name} {optimise}: {len(stage_list)} stages as on the host", "; ".join(bad)[:500])
    if any(s["sample"][0] == "f" for s in stage_list):
        check(worst <= ULPS, f"{target.name} {optimise}: floats within {ULPS} ulp of the host", f"largest difference {worst} ulp")


def check_target(target, optimise, host):
    wanted = [s for s in stages.every(FULL) if can_run(target, s)]
    small = target.settings["word"] == 8
    room = 3 if small else 10 if target.name == "cortex-m0" else 30       # constants of an AVR live in its RAM
    folder = f"{ROOT}/build/parts/stages/{target.name}"
    emit(target, wanted, folder, 24 if small else 64)
    lines = {}
    for at in range(0, len(wanted), room):
        lines.update(run_program(target, wanted[at:at + room], folder, optimise))
    judge(target, optimise, wanted, lines, host)
    return lines


found = harness.present(sys.argv[1:] or None)
host = check_target(harness.Target("host"), "-O2", {})
for target in found:
    for optimise in ("-O2", "-Os") if FULL else ("-O2",):
        if (target.name, optimise) != ("host", "-O2"):
            check_target(target, optimise, host)
done()
