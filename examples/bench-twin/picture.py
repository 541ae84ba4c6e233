#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Draws board7.svg with gnuplot: the response that the record shows, its 95 % band, what the tolerances allow,
and the model before and after the fit. Usage: picture.py BEFORE.json AFTER.json > board7.svg"""
import json
import subprocess
import sys

SCRIPT = """set terminal svg size 800,520 font 'sans-serif,13' background '#ffffff' name 'board7'
set logscale x
set xrange [200:5000]
set xlabel 'Hz'
set ylabel 'dB against the nominal stage'
set xtics (200, 500, 1000, 2000, 5000)
set grid lc rgb '#dddddd'
set key top right
plot $points using 1:2:3 with filledcurves lc rgb '#dde7f0' title 'what the tolerances allow', \\
     $points using 1:($4-$5):($4+$5) with filledcurves lc rgb '#9fb4c7' title 'measured, 95 % band', \\
     $points using 1:4 with lines lc rgb '#1f4e79' lw 1.5 title 'measured, board 7', \\
     $points using 1:6 with lines lc rgb '#b3541e' lw 2 dt 2 title 'the model with fitted parts', \\
     0 with lines lc rgb '#444444' title 'nominal'
"""


def main():
    before, after = (json.load(open(path))["points"] for path in sys.argv[1:3])
    rows = [f"{p['hz']:.2f} {p['low_db'] - n:.4f} {p['high_db'] - n:.4f} {p['db'] - n:.4f} {p['band_db']:.4f} {q['analog_db'] - n:.4f}"
            for p, q in zip(before, after) if p["excited"] for n in [p["analog_db"]]]
    script = "$points << END\n" + "\n".join(rows) + "\nEND\n" + SCRIPT
    drawn = subprocess.run(["gnuplot"], input=script, capture_output=True, text=True, check=True).stdout
    sys.stdout.write("\n".join(line.rstrip() for line in drawn.splitlines() if "Produced by" not in line) + "\n")


if __name__ == "__main__":
    main()
