# SPDX-License-Identifier: GPL-3.0-or-later
"""report.html in headless Chromium: no error on the console, no request leaves the file, axe-core finds
no fault, it fits a telephone and a wide screen in both colour schemes, and the crosshair reads what
report.json says. PW_PICTURES=FOLDER keeps the screenshots."""
import json
import math
import os
import re
import shutil
import sys
import tempfile

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
import browser
from stages import STAGES
from tap import FULL, ROOT, check, done, polewright, skip

AXE = ROOT + "/build/node/node_modules/axe-core/axe.min.js"
RUN_AXE = """
var done = arguments[0];
axe.run(document).then(function (r) {
  done({passes: r.passes.length, faults: r.violations.map(function (v) {
    return v.impact + ' ' + v.id + ': ' + v.nodes.map(function (n) { return n.html.slice(0, 90); }).join(' | ');
  })});
}, function (e) { done({passes: 0, faults: [String(e)]}); });
"""
ARROW_RIGHT = "\ue014"


def check_axe(page, axe, name):
    page.run(axe + "; window.axe = axe;")
    found = page.run_async(RUN_AXE)
    check(found["passes"] > 20 and not found["faults"], f"{name}: axe finds nothing", "; ".join(found["faults"]))


def check_sizes(page, path, name, axe, pictures):
    for width in (390, 1440):
        for dark in (False, True):
            page.look(width, dark)
            page.open(path)
            which = f"{name} at {width} px, {'dark' if dark else 'light'}"
            wide = page.run("return document.documentElement.scrollWidth")
            check(wide <= width, f"{which}: nothing sticks out", f"{wide} px")
            ground = page.run("return getComputedStyle(document.documentElement).backgroundColor")
            check((sum(map(int, ground[4:-1].split(","))) < 384) == dark, f"{which}: the scheme is followed", ground)
            if axe and (FULL or dark == (width > 600)):
                check_axe(page, axe, which)
            if pictures:
                page.picture(f"{pictures}/{name}-{width}-{'dark' if dark else 'light'}.png")


def check_text_size(page, path, name):
    """The smallest letters in the plots, as shown."""
    for width in (390, 1440):
        page.look(width, False)
        page.open(path)
        least = page.run("""
            return Math.min.apply(null, Array.from(document.querySelectorAll('svg')).map(function (s) {
              return parseFloat(getComputedStyle(s.querySelector('text')).fontSize)
                * s.getBoundingClientRect().width / s.viewBox.baseVal.width; }))""")
        check(least >= 10, f"{name} at {width} px: letters in plots are readable", f"{least:.1f} px")


def near(text, value, decimals):
    """Whether the reading shows this value, however it rounds."""
    shown = [f"{value + d:.{decimals}f}" for d in (0, 0.1 ** decimals, -0.1 ** decimals)]
    return any((s.replace("-", "\u2212") if float(s) else s.lstrip("-")) in text for s in shown)


def check_reading(page, row, how):
    text = page.run("return document.getElementById('reading').innerText")
    good = all([near(text, row["analog_db"], 3), near(text, row["digital_db"], 3), near(text, row["analog_deg"], 2),
                near(text, row["digital_deg"], 2)])
    error = float(re.search("error (\\S+) dB", text).group(1).replace("\u2212", "-"))
    good = good and math.isclose(error, row["digital_db"] - row["analog_db"], rel_tol=0.006, abs_tol=1e-6)
    check(good, f"crosshair by {how} reads what report.json says", text.replace("\n", " "))


def check_crosshair(page, path, report):
    rows = report["response"]["table"]
    page.look(1440, False)
    page.open(path)
    page.run("document.getElementById('cursor').focus()")
    at = int(page.run("return document.getElementById('cursor').value"))
    page.key(ARROW_RIGHT)
    page.key(ARROW_RIGHT)
    check_reading(page, rows[at + 2], "keyboard")
    box = page.run("""
        var svg = document.getElementById('p-response');
        svg.scrollIntoView();
        var b = svg.getBoundingClientRect();
        return [b.left, b.top, b.width, JSON.parse(document.getElementById('rows').textContent).left,
                JSON.parse(document.getElementById('rows').textContent).right];""")
    wanted = 37
    hz = [row["hz"] for row in rows]
    x = box[3] + (box[4] - box[3]) * math.log(hz[wanted] / hz[0]) / math.log(hz[-1] / hz[0])
    page.point(box[0] + x * box[2] / 480, box[1] + 100)
    check_reading(page, rows[int(page.run("return document.getElementById('cursor').value"))], "pointer")
    moved = int(page.run("return document.getElementById('cursor').value"))
    check(abs(moved - wanted) <= 1, "the pointer stands at its frequency", f"row {moved}")


def check_quiet(page, path, name):
    page.log("browser")
    page.log("performance")
    page.open(path)
    noise = [entry["message"] for entry in page.log("browser")]
    check(not noise, f"{name}: the console is silent", "; ".join(noise))
    sent = [json.loads(e["message"])["message"] for e in page.log("performance")]
    asked = [m["params"]["request"]["url"] for m in sent if m["method"] == "Network.requestWillBeSent"
             and m["params"]["documentURL"] == "file://" + path]   # the browser's own start page aside
    beyond = [u for u in asked if u != "file://" + path and not u.startswith("data:")]
    check("file://" + path in asked and not beyond, f"{name}: nothing but the file is asked for", str(beyond))


def check_print(page, path, name):
    page.open(path)
    sheets = page.pdf().count(b"/Type /Page\n") + page.pdf().count(b"/Type /Page ")
    check(2 <= sheets <= 14, f"{name}: prints on a few sheets", f"{sheets}")


def main():
    absent = browser.missing()
    if absent:
        skip("report.html in a browser", "not installed: " + ", ".join(absent))
        done()
    axe = open(AXE, encoding="utf-8").read() if os.path.exists(AXE) else ""
    if not axe:
        skip("report.html under axe-core", "axe-core is not installed: make deps")
    folder = tempfile.mkdtemp(prefix="pw-browser-")
    with browser.Browser() as page:
        for name, stage in STAGES.items():
            ran = polewright("build", "-", "-o", f"{folder}/{name}", stdin=json.dumps(stage))
            check(ran.returncode in (0, 1), f"{name}: builds", ran.stderr.strip())
            path = f"{folder}/{name}/report.html"
            with open(f"{folder}/{name}/report.json", encoding="utf-8") as f:
                report = json.load(f)
            check_quiet(page, path, name)
            check(page.run("return document.title") == f"{stage['stage']}: stage report", f"{name}: text stays text")
            check_sizes(page, path, name, axe, os.environ.get("PW_PICTURES"))
            check_text_size(page, path, name)
            check_print(page, path, name)
            if name == "floats":
                check_crosshair(page, path, report)
    shutil.rmtree(folder)
    done()


if __name__ == "__main__":
    main()
