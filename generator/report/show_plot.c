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
#define DEEPEST 100.0         /* dB below the top: what lies lower is cut */

typedef struct canvas { unsigned char cell[ROWS][COLUMNS]; } canvas;

static void set_dot(canvas *to, int x, int y)
{
    static const unsigned char bit[4][2] = {{0x01, 0x08}, {0x02, 0x10}, {0x04, 0x20}, {0x40, 0x80}};
    if (x < 0 || x >= ACROSS || y < 0 || y >= UP) return;
    to->cell[y / 4][x / 2] |= bit[y % 4][x % 2];
}

/* From the last point to this one, upright, so that a steep curve stays whole. */
static void join(canvas *to, int x, int last, int y)
{
    int step = y > last ? 1 : -1;
    set_dot(to, x, y);
    if (last < 0 || last == y) return;
    for (int i = last + step; i != y && i >= 0 && i < UP; i += step) set_dot(to, x, i);
}

static double level(const pw_roots *analog, const double span[2], int x)
{
    double hz = span[0] * pow(span[1] / span[0], x / (double)(ACROSS - 1)), log_magnitude, phase;
    pw_roots_log_at(analog, 2 * M_PI * hz * I, &log_magnitude, &phase);
    return log_magnitude * 20 / M_LN10;
}

/* Ends of the axis, so that ROWS lines take whole steps of dB. */
static void choose_axis(const double *db, double *top, double *step)
{
    static const double steps[] = {1, 2, 5, 10, 20, 50};
    double least = INFINITY, most = -INFINITY;
    for (int x = 0; x < ACROSS; x++) {
        if (!isfinite(db[x])) continue;
        most = fmax(most, db[x]);
        least = fmin(least, db[x]);
    }
    least = fmax(least, most - DEEPEST);
    size_t k = 0;
    do {
        *step = steps[k];
        *top = ceil(most / *step - 0.05) * *step + 0.0;   /* + 0.0: no -0 */
    } while (*top - ROWS * *step > least && ++k < sizeof steps / sizeof *steps);
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
    line[free_from] = 0;
    pw_text_print(out, "%*s\342\224\224%s\n%s\n", LABEL, "", tick, line);
}

void pw_show_plot(const pw_roots *analog, const double span_hz[2], pw_text *out)
{
    canvas dots = {0};
    double db[ACROSS], top, step;
    int last = -1;
    for (int x = 0; x < ACROSS; x++) db[x] = level(analog, span_hz, x);
    choose_axis(db, &top, &step);
    for (int x = 0; x < ACROSS; x++) {
        int y = isfinite(db[x]) ? (int)lrint((top - db[x]) / step * 4) : UP;
        if (y > UP) y = UP;
        join(&dots, x, last, y);
        last = y;
    }
    for (int row = 0; row < ROWS; row++) {
        if (row % 2) pw_text_print(out, "%*s\342\224\202", LABEL, "");
        else pw_text_print(out, "%*.0f dB\342\224\244", LABEL - 3, top - row * step + 0.0);
        put_row(&dots, row, out);
    }
    put_scale(span_hz, out);
}
