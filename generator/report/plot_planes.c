/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Roots in the s plane and in the z plane. */
#include "report/plot_script.h"

#include <math.h>

#include "report/rootgroups.h"

#define APART 12.0            /* largest over smallest root: from here on axes are compressed */
#define TOP 26
#define BOTTOM 432

/* How far out a root is drawn: s over 2 pi in Hz, or its asinh over the smallest root. */
typedef struct axis { double scale; bool compressed; } axis;

static double place(const axis *a, double hz)
{
    return a->compressed ? asinh(hz / a->scale) : hz / a->scale;
}

static void add_block(const char *name, const double complex *root, int n, const axis *a,
                      pw_text *script)
{
    pw_root_group group[PW_MAX_ROOTS];
    int groups = pw_group_roots(root, n, group);
    pw_text_print(script, "$%s << EOD\n", name);
    for (int i = 0; i < groups; i++)
        for (int sign = 1; sign >= (cimag(group[i].root) > 0 ? -1 : 1); sign -= 2) {
            pw_script_number(place(a, creal(group[i].root)), script);
            pw_script_number(place(a, sign * cimag(group[i].root)), script);
            if (group[i].count > 1) pw_text_print(script, " %d\303\227", group[i].count);
            else pw_text_add(script, " \"\"");
            pw_text_add(script, "\n");
        }
    pw_text_add(script, "EOD\n");
}

/* Nothing where there is none: gnuplot 5.4 crashes on labels without a single point. */
static void add_marks(const char *name, int n, pw_role role, pw_text *script)
{
    if (!n) return;
    pw_text_print(script, ", $%s using 1:2 with points pt 2 ps 1 lc", name);
    pw_script_color(role, script);
    pw_text_print(script, " notitle, $%s using 1:2:3 with labels offset 1.1,0.6 left tc", name);
    pw_script_color(PW_ROLE_TEXT, script);
    pw_text_add(script, " notitle");
}

/* block: what is drawn under the marks. */
static void add_plot(const char *block, const pw_roots *model, pw_text *script)
{
    pw_text_print(script, "plot $%s", block);
    pw_script_line("1:2", PW_ROLE_EDGE, script);
    add_marks("poles", model->poles, PW_ROLE_DIGITAL, script);
    add_marks("zeros", model->zeros, PW_ROLE_ZERO, script);
    pw_text_add(script, "\n");
    pw_script_close(script);
}

static void add_axes(const char *x, const char *y, pw_text *script)
{
    pw_text_print(script, "set xlabel '%s' offset 0,0.4 tc", x);
    pw_script_color(PW_ROLE_TEXT, script);
    pw_text_print(script, "\nset label 9 '%s' at graph 0, graph 1 offset 0,0.6 left front tc",
                  y);
    pw_script_color(PW_ROLE_TEXT, script);
    pw_text_add(script, "\nset arrow 1 from graph 0, first 0 to graph 1, first 0 nohead lc");
    pw_script_color(PW_ROLE_EDGE, script);
    pw_text_add(script, "\nset arrow 2 from first 0, graph 0 to first 0, graph 1 nohead lc");
    pw_script_color(PW_ROLE_EDGE, script);
    pw_text_add(script, "\n");
}

/* ---- s plane ---- */

static void extent(const pw_roots *model, double *least, double *most)
{
    const double complex *const list[] = {model->pole, model->zero};
    const int n[] = {model->poles, model->zeros};
    *least = INFINITY;
    *most = 0;
    for (int k = 0; k < 2; k++)
        for (int i = 0; i < n[k]; i++) {
            double far = cabs(list[k][i]) / (2 * M_PI);
            if (far == 0) continue;
            *least = fmin(*least, far);
            *most = fmax(*most, far);
        }
    if (*most == 0) *least = *most = 1;
}

static void add_tick(const axis *a, double hz, bool first, pw_text *script)
{
    static const char *const prefix[] = {"", "k", "M", "G"};
    int group = fabs(hz) < 1000 ? 0 : (int)floor(log10(fabs(hz)) / 3 + 1e-9);
    if (group > 3) group = 3;
    pw_text_print(script, "%s'%g%s' %.9g", first ? "" : ", ", hz / pow(1000, group), prefix[group],
                  place(a, hz));
}

static void add_ticks(char which, const axis *a, double most, pw_text *script)
{
    pw_text_print(script, "set %ctics scale 0.6 tc", which);
    pw_script_color(PW_ROLE_TEXT, script);
    pw_text_add(script, " (");
    add_tick(a, 0, true, script);
    if (a->compressed) {
        int from = (int)ceil(log10(a->scale)), to = (int)floor(log10(most));
        int every = 1 + (to - from) / 3;
        for (int d = to; d >= from; d -= every) {
            add_tick(a, pow(10, d), false, script);
            add_tick(a, -pow(10, d), false, script);
        }
    } else {
        double step = pow(10, floor(log10(most)));
        if (most / step < 2) step /= 2;
        else if (most / step >= 5) step *= 2.5;
        for (double f = step; f <= most * 1.1; f += step) {
            add_tick(a, f, false, script);
            add_tick(a, -f, false, script);
        }
    }
    pw_text_add(script, ")\n");
}

void pw_script_s_plane(const pw_results *results, bool *compressed, pw_text *script)
{
    double least, most, scale;
    axis hz = {.compressed = false};
    extent(&results->analog, &least, &most);
    *compressed = hz.compressed = most > APART * least;
    hz.scale = hz.compressed ? least : most;
    scale = place(&hz, most) * 1.15;
    /* Blocks hold rad/s; places are in Hz. */
    axis rad = {hz.scale * 2 * M_PI, hz.compressed};
    pw_script_open(PW_PLOT_S_PLANE, script);
    pw_script_frame(PW_PLOT_S_PLANE, TOP, BOTTOM, script);
    add_block("poles", results->analog.pole, results->analog.poles, &rad, script);
    add_block("zeros", results->analog.zero, results->analog.zeros, &rad, script);
    pw_text_print(script, "set xrange [%.9g:%.9g]\nset yrange [%.9g:%.9g]\n", -scale, scale, -scale,
                  scale);
    add_ticks('x', &hz, most, script);
    add_ticks('y', &hz, most, script);
    add_axes("real part / 2\317\200, Hz", "imaginary part / 2\317\200, Hz", script);
    pw_text_add(script, "$origin << EOD\n0 0\nEOD\n");
    add_plot("origin", &results->analog, script);
}

/* ---- z plane ---- */

static double reach(const pw_roots *z)
{
    double most = 1;
    for (int i = 0; i < z->zeros; i++) most = fmax(most, cabs(z->zero[i]));
    for (int i = 0; i < z->poles; i++) most = fmax(most, cabs(z->pole[i]));
    return most * 1.15;
}

void pw_script_z_plane(const pw_results *results, pw_text *script)
{
    const pw_roots *z = &results->digital.z;
    const axis plain = {1, false};
    double far = reach(z);
    pw_script_open(PW_PLOT_Z_PLANE, script);
    pw_script_frame(PW_PLOT_Z_PLANE, TOP, BOTTOM, script);
    pw_text_add(script, "$circle << EOD\n");
    for (int i = 0; i <= 120; i++)
        pw_text_print(script, "%.6f %.6f\n", cos(M_PI * i / 60), sin(M_PI * i / 60));
    pw_text_add(script, "EOD\n");
    add_block("poles", z->pole, z->poles, &plain, script);
    add_block("zeros", z->zero, z->zeros, &plain, script);
    pw_text_print(script, "set xrange [%.9g:%.9g]\nset yrange [%.9g:%.9g]\nset xtics scale 0.6 tc",
                  -far, far, -far, far);
    pw_script_color(PW_ROLE_TEXT, script);
    pw_text_add(script, "\nset ytics scale 0.6 tc");
    pw_script_color(PW_ROLE_TEXT, script);
    pw_text_add(script, "\n");
    add_axes("real part", "imaginary part", script);
    add_plot("circle", z, script);
}
