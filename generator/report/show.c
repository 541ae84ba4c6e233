/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/show.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "report/figures.h"
#include "report/rootgroups.h"
#include "report/style.h"
#include "report/table.h"

#define SCREEN 24             /* lines */
#define WIDTH 100             /* columns */
#define MOST_POLES 6          /* rows of them; half as many beside a plot */
#define MOST_ZEROS 4
#define MOST_ROWS 13          /* of the response */
#define LEAST_ROWS 5

void pw_show_span(const pw_stage *stage, const pw_roots *analog, double span_hz[2])
{
    double low = INFINITY, high = 0;
    const double complex *const list[] = {analog->pole, analog->zero};
    const int n[] = {analog->poles, analog->zeros};
    for (int k = 0; k < 2; k++)
        for (int i = 0; i < n[k]; i++) {
            double f = cabs(list[k][i]) / (2 * M_PI);
            if (f == 0) continue;
            low = fmin(low, f);
            high = fmax(high, f);
        }
    if (!high) low = high = stage->rate_hz / 10;
    span_hz[0] = low / 10;
    span_hz[1] = high * 10;
    if (span_hz[1] < 1000 * span_hz[0]) span_hz[0] = span_hz[1] / 1000;
}

pw_show_point pw_show_at(const pw_roots *analog, double hz)
{
    double log_magnitude, phase;
    pw_roots_log_at(analog, 2 * M_PI * hz * I, &log_magnitude, &phase);
    return (pw_show_point){log_magnitude * 20 / M_LN10, phase * 180 / M_PI};
}

int pw_show_frequencies(const double span_hz[2], double *hz, int room)
{
    static const double fine[] = {1, 2, 5}, coarse[] = {1, 3}, whole[] = {1};
    static const double *const set[] = {fine, coarse, whole};
    static const int size[] = {3, 2, 1};
    int least = (int)floor(log10(span_hz[0])), most = (int)ceil(log10(span_hz[1]));
    for (int k = 0, step = 1; ; step += k == 2, k += k < 2) {
        int n = 0;
        for (int d = least; d <= most; d += step)
            for (int i = 0; i < size[k]; i++) {
                double f = set[k][i] * pow(10, d);
                if (f < span_hz[0] * 0.999 || f > span_hz[1] * 1.001) continue;
                if (n < room) hz[n] = f;
                n++;
            }
        if (n <= room) return n;
    }
}

/* ---- roots ---- */

static void add_root(const char *kind, double complex s, int count, pw_table *table)
{
    char figure[PW_FIGURE_ROOM];
    double w = cabs(s);
    pw_table_cell(table, "%s", kind);
    if (cimag(s) == 0) pw_table_cell(table, "%.6g rad/s", creal(s));
    else pw_table_cell(table, "%.6g \302\261 %.6gj rad/s", creal(s), cimag(s));
    pw_table_cell(table, count > 1 ? "%d times" : "", count);
    pw_table_cell(table, "%s", pw_figure(figure, w / (2 * M_PI), "Hz"));
    if (cimag(s) == 0) pw_table_cell(table, "%s", "");
    else if (creal(s) == 0) pw_table_cell(table, "infinite");
    else pw_table_cell(table, "%.4g", w / (2 * fabs(creal(s))));
    if (creal(s) == 0) pw_table_cell(table, "%s", "");
    else pw_table_cell(table, "%s", pw_figure(figure, 1 / fabs(creal(s)), "s"));
}

/* Returns how many distinct ones there was no room for. */
static int add_roots(const char *kind, const double complex *root, int n, int most, pw_table *table)
{
    pw_root_group group[PW_MAX_ROOTS];
    int groups = pw_group_roots(root, n, group), shown = groups > most ? most : groups;
    for (int i = 0; i < shown; i++) add_root(kind, group[i].root, group[i].count, table);
    return groups - shown;
}

static void put_roots(const pw_roots *analog, bool plot, const pw_style *style, pw_text *out)
{
    pw_table table = {.align = "lllrrr"};
    const char *const head[] = {"", "", "", "natural frequency", "Q", "time constant"};
    char poles[PW_FIGURE_ROOM], zeros[PW_FIGURE_ROOM];
    pw_text_print(out, "%s%s and %s%s\n", style->strong, pw_count(poles, analog->poles, "pole"),
                  pw_count(zeros, analog->zeros, "zero"), style->plain);
    for (int i = 0; i < 6; i++) pw_table_cell(&table, "%s", head[i]);
    int more = add_roots("pole", analog->pole, analog->poles, MOST_POLES >> plot, &table);
    more += add_roots("zero", analog->zero, analog->zeros, MOST_ZEROS >> plot, &table);
    if (analog->poles + analog->zeros) pw_table_print(&table, 2, out);
    else pw_text_free(&table.cells);
    if (more) pw_text_print(out, "  and %d more (--json lists all)\n", more);
}

/* ---- gain ---- */

/* So that a small negative value does not print as -0. */
static double tidy(double value, int decimals)
{
    return fabs(value) < 0.5 * pow(10, -decimals) ? 0 : value;
}

static int zeros_at_origin(const pw_roots *analog)
{
    int n = 0;
    for (int i = 0; i < analog->zeros; i++) n += analog->zero[i] == 0;
    return n;
}

static void add_slope(const char *where, int per_decade, pw_text *out)
{
    if (per_decade) pw_text_print(out, "%s %+d dB a decade", where, per_decade);
    else pw_text_print(out, "%s level", where);
}

static void put_gain(const pw_roots *analog, const pw_style *style, pw_text *out)
{
    int low = 20 * (zeros_at_origin(analog) - pw_analog_integrators(analog));
    int high = 20 * (analog->zeros - analog->poles);
    pw_text body = {0};
    pw_text_print(out, "%sGain%s\n  ", style->strong, style->plain);
    if (!low) {
        double complex dc = pw_roots_at(analog, 0);
        pw_text_print(&body, "%.6g (%.3f dB) at 0 Hz", creal(dc), tidy(pw_show_at(analog, 0).db, 3));
    } else pw_text_add(&body, low < 0 ? "without end at 0 Hz" : "none at 0 Hz");
    add_slope("; towards 0 Hz", low, &body);
    add_slope("; towards infinity", high, &body);
    pw_text_print(&body, "; factor %.9Lg", analog->factor);
    pw_text_wrap(pw_text_string(&body), 2, WIDTH, out);
    pw_text_free(&body);
}

/* ---- response ---- */

static void put_table(const pw_roots *analog, const double span[2], const pw_style *style,
                      pw_text *out)
{
    double hz[MOST_ROWS];
    char figure[PW_FIGURE_ROOM];
    int room = SCREEN - 2 - pw_text_lines(out);
    if (room > MOST_ROWS) room = MOST_ROWS;
    int n = pw_show_frequencies(span, hz, room > LEAST_ROWS ? room : LEAST_ROWS);
    pw_table table = {.align = "rrrr"};
    const char *const head[] = {"frequency", "magnitude", "phase", "group delay"};
    pw_text_print(out, "%sResponse%s\n", style->strong, style->plain);
    for (int i = 0; i < 4; i++) pw_table_cell(&table, "%s", head[i]);
    for (int i = 0; i < n; i++) {
        pw_show_point point = pw_show_at(analog, hz[i]);
        pw_table_cell(&table, "%s", pw_figure(figure, hz[i], "Hz"));
        pw_table_cell(&table, isfinite(point.db) ? "%.3f dB" : "none", tidy(point.db, 3));
        pw_table_cell(&table, "%.2f deg", tidy(point.deg, 2));
        pw_table_cell(&table, "%s", pw_figure(figure, pw_analog_group_delay(analog, hz[i]), "s"));
    }
    pw_table_print(&table, 2, out);
}

void pw_show_text(const pw_stage *stage, const pw_roots *analog, bool plot, bool color,
                  pw_text *out)
{
    const pw_style *style = pw_style_of(color);
    double span[2];
    pw_show_span(stage, analog, span);
    pw_text_print(out, "%s%s%s%s%s\n", style->strong, stage->name, style->plain,
                  stage->about && *stage->about ? ": " : "", stage->about ? stage->about : "");
    put_roots(analog, plot, style, out);
    put_gain(analog, style, out);
    if (plot) pw_show_plot(analog, span, out);
    else put_table(analog, span, style, out);
}
