/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A plot in braille characters, each 2 dots wide and 4 high. */
#include "report/show.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "report/figures.h"

#define COLUMNS 64
#define ROWS 10
#define ACROSS (2 * COLUMNS)
#define UP (4 * ROWS)
#define LABEL 8               /* columns of the level at the left */
#define FINE 8                /* steps within a column of dots */
#define DEEPEST 100.0         /* dB below the top: what lies lower is cut */

typedef struct canvas { unsigned char cell[ROWS][COLUMNS]; } canvas;

static void set_dot(canvas *to, int x, int y)
{
    static const unsigned char bit[4][2] = {{0x01, 0x08}, {0x02, 0x10}, {0x04, 0x20}, {0x40, 0x80}};
    if (x < 0 || x >= ACROSS || y < 0 || y >= UP) return;
    to->cell[y / 4][x / 2] |= bit[y % 4][x % 2];
}

/* The lowest and highest level within a column of dots. */
typedef struct reach { double low, high; } reach;

static void add_level(const pw_roots *analog, double hz, reach *to)
{
    double db = pw_show_at(analog, hz).db;
    if (isnan(db)) return;
    to->low = fmin(to->low, db);
    to->high = fmax(to->high, db);
}

static void add_roots(const pw_roots *analog, const double complex *root, int n,
                      const double span[2], reach *column)
{
    for (int i = 0; i < n; i++) {
        double hz = cabs(root[i]) / (2 * M_PI), at = log(hz / span[0]) / log(span[1] / span[0]);
        int x = hz > 0 ? (int)floor(at * ACROSS) : -1;
        if (x >= 0 && x < ACROSS) add_level(analog, hz, &column[x]);
    }
}

/* Fine steps through each column, its edges shared with its neighbours so that a steep curve stays
 * whole, and every root's own frequency, so that a narrow peak or notch is not stepped over. */
static void measure(const pw_roots *analog, const double span[2], reach *column)
{
    for (int x = 0; x < ACROSS; x++) {
        column[x] = (reach){INFINITY, -INFINITY};
        for (int k = 0; k <= FINE; k++) {
            double at = (x + k / (double)FINE) / ACROSS;
            add_level(analog, span[0] * pow(span[1] / span[0], at), &column[x]);
        }
    }
    add_roots(analog, analog->pole, analog->poles, span, column);
    add_roots(analog, analog->zero, analog->zeros, span, column);
}

/* Ends of the axis, so that ROWS lines take whole steps of dB. */
static void choose_axis(const reach *column, double *top, double *step)
{
    static const double steps[] = {1, 2, 5, 10, 20, 50};
    double least = INFINITY, most = -INFINITY;
    for (int x = 0; x < ACROSS; x++) {
        if (isfinite(column[x].high)) most = fmax(most, column[x].high);
        least = fmin(least, column[x].low);
    }
    if (!isfinite(most)) most = 0;
    least = fmax(least, most - DEEPEST);
    size_t k = 0;
    do {
        *step = steps[k];
        *top = ceil(most / *step - 0.05) * *step + 0.0;   /* + 0.0: no -0 */
    } while (*top - ROWS * *step > least && ++k < sizeof steps / sizeof *steps);
}

static int row_of(double db, double top, double step)
{
    double y = (top - db) / step * 4;
    return y < UP ? (int)lrint(y) : UP;
}

static void put_row(const canvas *from, int row, pw_text *out)
{
    for (int c = 0; c < COLUMNS; c++) {
        unsigned code = 0x2800u + from->cell[row][c];
        if (code == 0x2800u) pw_text_add(out, " ");
        else pw_text_print(out, "%c%c%c", 0xe0 | (int)(code >> 12), 0x80 | (int)(code >> 6 & 63),
                           0x80 | (int)(code & 63));
    }
    while (out->size && out->data[out->size - 1] == ' ') out->data[--out->size] = 0;
    pw_text_add(out, "\n");
}

/* The decades under the axis. */
static void put_scale(const double span[2], pw_text *out)
{
    char line[LABEL + COLUMNS + PW_FIGURE_ROOM], tick[4 * (LABEL + COLUMNS)] = "";
    char figure[PW_FIGURE_ROOM];
    int free_from = 0, decades = (int)ceil(log10(span[1] / span[0]));
    memset(line, ' ', sizeof line);
    line[sizeof line - 1] = 0;
    for (int c = 0; c < COLUMNS; c++) {
        double from = log10(span[0]) + (c - 0.5) / (COLUMNS - 1) * log10(span[1] / span[0]);
        double to = log10(span[0]) + (c + 0.5) / (COLUMNS - 1) * log10(span[1] / span[0]);
        bool decade = floor(to) > floor(from) && ((int)floor(to) % (1 + decades / 8)) == 0;
        strcat(tick, decade ? "\342\224\264" : "\342\224\200");
        if (!decade) continue;
        pw_figure(figure, pow(10, floor(to)), "Hz");
        int at = LABEL + 1 + c - (int)strlen(figure) / 2;
        if (at < free_from || at + (int)strlen(figure) > LABEL + 1 + COLUMNS) continue;
        memcpy(line + at, figure, strlen(figure));
        free_from = at + (int)strlen(figure) + 1;
    }
    line[free_from ? free_from - 1 : 0] = 0;
    pw_text_print(out, "%*s\342\224\224%s\n%s\n", LABEL, "", tick, line);
}

void pw_show_plot(const pw_roots *analog, const double span_hz[2], pw_text *out)
{
    canvas dots = {0};
    reach column[ACROSS];
    double top, step;
    measure(analog, span_hz, column);
    choose_axis(column, &top, &step);
    for (int x = 0; x < ACROSS; x++)
        for (int y = row_of(column[x].high, top, step); y <= row_of(column[x].low, top, step); y++)
            set_dot(&dots, x, y);
    for (int row = 0; row < ROWS; row++) {
        if (row % 2) pw_text_print(out, "%*s\342\224\202", LABEL, "");
        else pw_text_print(out, "%*.0f dB\342\224\244", LABEL - 3, top - row * step + 0.0);
        put_row(&dots, row, out);
    }
    put_scale(span_hz, out);
}
