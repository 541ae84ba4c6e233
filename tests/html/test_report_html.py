# SPDX-License-Identifier: GPL-3.0-or-later
"""report.html as a file: what stands in it, that the same bytes come out again, and how it does
without gnuplot. How it looks and behaves is in test_report_browser.py."""
import html
import html.parser
import json
import os
import re
import shutil
import subprocess
import sys
import tempfile

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
from stages import STAGES
from tap import SANITISED, check, done, polewright, skip

SECTIONS = ["stage", "response", "delay", "step", "roots", "range", "noise", "words", "cost", "use", "cautions",
            "again"]
VOID = {"meta", "link", "input", "br", "circle", "path", "polygon"}


class Reader(html.parser.HTMLParser):
    """Checks nesting, and collects ids, headings, attributes that could fetch, and visible text."""

    def __init__(self):
        super().__init__()
        self.open, self.faults, self.ids, self.headings, self.fetch, self.text = [], [], [], [], [], []

    def handle_starttag(self, tag, attributes):
        named = dict(attributes)
        if "id" in named:
            self.ids.append(named["id"])
        self.fetch += [v for k, v in attributes if k in ("src", "href", "xlink:href", "action", "data", "srcset")]
        if re.fullmatch("h[1-6]", tag):
            self.headings.append(int(tag[1]))
        if tag not in VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag, attributes):
        self.handle_starttag(tag, attributes)
        if tag not in VOID:
            self.open.pop()

    def handle_endtag(self, tag):
        if tag in VOID or not self.open or self.open.pop() != tag:
            self.faults.append((tag, self.getpos()))

    def handle_data(self, data):
        if not self.open or self.open[-1] not in ("style", "script"):
            self.text.append(data)


def build(stage, folder, *options, **how):
    ran = polewright("build", "-", "-o", folder, *options, stdin=json.dumps(stage), **how)
    path = os.path.join(folder, "report.html")
    return ran, open(path, encoding="utf-8").read() if os.path.exists(path) else ""


def check_page(name, stage, page, report):
    reader = Reader()
    reader.feed(page)
    text = " ".join(" ".join(reader.text).split())
    check(not reader.faults and not reader.open, f"{name}: tags nest", str(reader.faults[:3]))
    check(len(set(reader.ids)) == len(reader.ids), f"{name}: ids are unique")
    places = [page.find(f'id="h-{s}"') for s in SECTIONS]
    check(all(p > 0 for p in places) and places == sorted(places), f"{name}: every section, in order", str(places))
    check(reader.headings[0] == 1 and all(b <= a + 1 for a, b in zip(reader.headings, reader.headings[1:])),
          f"{name}: headings go down one level at a time")
    check(reader.fetch == ["data:,"] and "url(" not in page and "@import" not in page and "://" not in page,
          f"{name}: nothing to fetch", str(reader.fetch))
    check(stage["about"] in text, f"{name}: the stage in its own words")
    for limit in report["limits"]:
        word = "met" if limit["met"] else "not met"
        check(f">{word}</span></td>" in page, f"{name}: says {word} of {limit['name']}")
    words = [w for s in report["sections"] for w in (s["realised"]["b_words"] or []) if w]
    check(all(str(w) in text for w in words), f"{name}: every word", str(words))
    check(all(n["name"] in text for n in report["nodes"]), f"{name}: every node")
    check("anti-alias" in text and "licensed or qualified" in text, f"{name}: the cautions")
    check(report["stage_file_sha256"] in text and report["version"] in text, f"{name}: how to make it again")


def check_code(name, page, folder):
    """The lines that the page gives to copy compile, and link with the emitted files."""
    code = re.search(r'<pre id="code"[^>]*><code>(.*?)</code></pre>', page, re.S).group(1)
    with open(folder + "/use.c", "w", encoding="utf-8") as f:
        f.write(html.unescape(code))
    ran = subprocess.run("gcc -std=c99 -Wall -Wextra -Wconversion "
                         "-pedantic -Werror -O0 -shared -fPIC -Wl,-z,defs -o use.so *.c", cwd=folder, shell=True,
                         capture_output=True, text=True)
    lines = html.unescape(code).strip().count("\n") + 1
    check(ran.returncode == 0 and lines <= 15, f"{name}: the C to copy compiles and links", ran.stderr[:300])


def check_again(stage, page, other):
    ran, again = build(stage, os.path.join(other, "elsewhere", "out"))
    check(again == page, "the same bytes from another folder")
    plots = page[page.find("<svg"):page.rfind("</svg>")]
    check(not re.search(r"20\d\d-|gnuplot|rgb\(|font-family", plots, re.I) and other not in page,
          "no date, path, program or look in the plots")


def check_sanitised(name, stage, page, folder):
    if not os.path.exists(SANITISED):
        return skip(f"{name}: the sanitised program writes the same page", "it is not built: make check")
    ran, again = build(stage, f"{folder}/{name}-sanitised", program=SANITISED)
    return check(ran.returncode in (0, 1) and again == page, f"{name}: the sanitised program writes the same page",
                 ran.stderr[:500])


def without_gnuplot(stage, folder):
    """A PATH with everything but gnuplot is not needed: the program runs nothing else."""
    os.makedirs(folder + "/empty", exist_ok=True)
    ran, page = build(stage, folder + "/bare", env={"PATH": folder + "/empty"})
    check(ran.returncode in (0, 1) and "<svg" not in page, "without gnuplot the build goes on", ran.stderr)
    check(page.count("gnuplot-nox") >= 4, "and the page says so where the plots would be")
    check(all(f'id="h-{s}"' in page for s in SECTIONS), "and has everything else")
    ran, page = build(stage, folder + "/plain", "--no-plots")
    check("<svg" not in page and page.count("made without plots") >= 4, "--no-plots leaves them out")


def broken_gnuplot(stage, folder):
    os.makedirs(folder + "/broken", exist_ok=True)
    with open(folder + "/broken/gnuplot", "w", encoding="utf-8") as f:
        f.write("#!/bin/sh\necho '<svg></defs>'\nexit 1\n")
    os.chmod(folder + "/broken/gnuplot", 0o755)
    ran, page = build(stage, folder + "/half", env={"PATH": folder + "/broken:" + os.environ["PATH"]})
    check(ran.returncode in (0, 1) and "<svg" not in page and "gnuplot-nox" in page,
          "a gnuplot that fails counts as none")


def main():
    folder = tempfile.mkdtemp(prefix="pw-html-")
    pages = {}
    for name, stage in STAGES.items():
        ran, pages[name] = build(stage, f"{folder}/{name}")
        check(ran.returncode in (0, 1), f"{name}: builds", ran.stderr.strip())
        with open(f"{folder}/{name}/report.json", encoding="utf-8") as f:
            check_page(name, stage, pages[name], json.load(f))
        check_code(name, pages[name], f"{folder}/{name}")
        check_sanitised(name, stage, pages[name], folder)
        fixed = stage.get("arithmetic", {}).get("sample", "float32").startswith("q")
        check(pages[name].count("<svg") == (6 if fixed else 5), f"{name}: every plot")
    check("class=\"a r5\"" in pages["circuit"] and "class=\"a r5\"" not in pages["clipping"]
          and "tolerances of 4 parts" in pages["circuit"].lower(), "the tolerance envelope, where there is one")
    check("class=\"a r4\"" in pages["circuit"] and "class=\"a r4\"" not in pages["floats"],
          "the limit is shaded, where there is one")
    check_again(STAGES["clipping"], pages["clipping"], folder)
    without_gnuplot(STAGES["clipping"], folder)
    broken_gnuplot(STAGES["clipping"], folder)
    shutil.rmtree(folder)
    done()


if __name__ == "__main__":
    main()
