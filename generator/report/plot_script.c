/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/plot_script.h"

#include <math.h>
#include <string.h>

#include "report/figures.h"

int pw_plot_height(pw_plot plot)
{
    switch (plot) {
    case PW_PLOT_RESPONSE: return 590;
    case PW_PLOT_S_PLANE: case PW_PLOT_Z_PLANE: return 472;
    default: return 308;
    }
}

void pw_script_color(pw_role role, pw_text *script)
{
    pw_text_print(script, " rgb '#0000%02x'", role);
}

void pw_script_number(double value, pw_text *script)
{
    if (isfinite(value)) pw_text_print(script, " %.9g", value);
    else pw_text_add(script, " NaN");
}

void pw_script_open(pw_plot plot, pw_text *script)
{
    pw_text_print(script, "reset\nset terminal svg size %d,%d noenhanced font 'sans-serif,13'\n"
                  "set output\nset encoding utf8\nset samples 2\nset tics nomirror in\n"
                  "set border 3 lw 1 lc", PW_PLOT_WIDTH, pw_plot_height(plot));
    pw_script_color(PW_ROLE_FRAME, script);
    pw_text_add(script, "\nset grid noxtics nomxtics ytics lt 1 lw 1 lc");
    pw_script_color(PW_ROLE_GRID, script);
    pw_text_add(script, ", lt 1 lw 1 lc");
    pw_script_color(PW_ROLE_FAINT, script);
    pw_text_add(script, "\n");
}

void pw_script_close(pw_text *script)
{
    pw_text_add(script, "set output\n");
}

void pw_script_frame(pw_plot plot, double top, double bottom, pw_text *script)
{
    double height = pw_plot_height(plot);
    pw_text_print(script, "set lmargin at screen %.6f\nset rmargin at screen %.6f\n"
                  "set tmargin at screen %.6f\nset bmargin at screen %.6f\n",
                  (double)PW_PLOT_LEFT / PW_PLOT_WIDTH, (double)PW_PLOT_RIGHT / PW_PLOT_WIDTH,
                  1 - top / height, 1 - bottom / height);
}

/* "10", "1k", "0.1" for a power of ten; "100m" on an axis that goes far below 1. */
static void add_decade(int power, int lowest, pw_text *script)
{
    static const char *const prefix[] = {"p", "n", "\302\265", "m", "", "k", "M", "G", "T"};
    int group = (int)floor(power / 3.0), rest = power - 3 * group;
    if (power < 0 && lowest >= -3) pw_text_print(script, "%.*f", -power, pow(10, power));
    else if (group < -4 || group > 4) pw_text_print(script, "1e%d", power);
    else pw_text_print(script, "%.0f%s", pow(10, rest), prefix[group + 4]);
}

void pw_script_log_x(double low, double high, bool labels, const char *unit, pw_text *script)
{
    int from = (int)floor(log10(low)), to = (int)ceil(log10(high)), every = 1 + (to - from) / 9;
    pw_text_print(script, "set logscale x\nset xrange [%.9g:%.9g]\nset xtics scale 0.6,0.3 tc", low,
                  high);
    pw_script_color(PW_ROLE_TEXT, script);
    pw_text_add(script, " (");
    for (int d = from; d <= to; d++) {
        pw_text_add(script, d == from ? "'" : ", '");
        if (labels && (d - from) % every == 0) add_decade(d, from, script);
        pw_text_print(script, "' 1e%d", d);
        for (int k = 2; k < 10 && every == 1; k++) pw_text_print(script, ", '' %de%d 1", k, d);
    }
    pw_text_print(script, ")\nset grid xtics\nset xlabel '%s' offset 0,0.5 tc", labels ? unit : "");
    pw_script_color(PW_ROLE_TEXT, script);
    pw_text_add(script, "\n");
}

void pw_script_y(const char *title, double low, double high, pw_text *script)
{
    if (low < high) pw_text_print(script, "set yrange [%.9g:%.9g]\n", low, high);
    else pw_text_add(script, "set yrange [*:*]\n");
    pw_text_add(script, "set ytics autofreq scale 0.6 tc");
    pw_script_color(PW_ROLE_TEXT, script);
    pw_text_print(script, "\nset label 9 '%s' at graph 0, graph 1 offset 0,0.6 left front tc",
                  title);
    pw_script_color(PW_ROLE_TEXT, script);
    pw_text_add(script, "\n");
}

void pw_script_line(const char *using, pw_role role, pw_text *script)
{
    pw_text_print(script, " using %s with lines lw 1 lc", using);
    pw_script_color(role, script);
    pw_text_add(script, " notitle");
}
