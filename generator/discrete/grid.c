/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Frequencies that miss no peak, and the search for the largest one. */
#include <math.h>
#include <stdlib.h>

#include "base/arena.h"
#include "discrete/errors.h"
#include "discrete/longs.h"

#define LOG_POINTS 300
#define EVEN_POINTS 200
#define FOLLOWED 10              /* local peaks that are followed */
#define GOLDEN 0.6180339887498949

void pw_grid_put(pw_grid *grid, double hz)
{
    if (!(hz >= grid->low && hz <= grid->high)) return;
    if (grid->count == grid->room) {
        grid->room = grid->room ? 2 * grid->room : 1024;
        grid->hz = pw_retake(grid->hz, (size_t)grid->room * sizeof *grid->hz);
    }
    grid->hz[grid->count++] = hz;
}

void pw_grid_make(pw_grid *grid, double low, double high)
{
    *grid = (pw_grid){.low = low, .high = high};
    double start = low > 0 ? low : high * 1e-6;
    for (int i = 0; i < LOG_POINTS; i++)
        pw_grid_put(grid, start * pow(high / start, (double)i / LOG_POINTS));
    for (int i = 0; i < EVEN_POINTS; i++) pw_grid_put(grid, low + (high - low) * i / EVEN_POINTS);
    pw_grid_put(grid, high);
}

void pw_grid_add(pw_grid *grid, double hz, double half_width)
{
    static const double step[] = {0, 0.05, 0.2, 0.5, 1, 2, 4, 10};
    double width = fmax(half_width, hz * 1e-5);
    for (size_t i = 0; i < sizeof step / sizeof step[0]; i++) {
        pw_grid_put(grid, hz - step[i] * width);
        pw_grid_put(grid, hz + step[i] * width);
    }
}

void pw_grid_add_analog(pw_grid *grid, const pw_roots *analog)
{
    for (int i = 0; i < analog->poles + analog->zeros; i++) {
        double complex s = i < analog->poles ? analog->pole[i] : analog->zero[i - analog->poles];
        if (s == 0 || cimag(s) < 0) continue;
        pw_grid_add(grid, cimag(s) / (2 * M_PI), fabs(creal(s)) / (2 * M_PI));
        pw_grid_add(grid, cabs(s) / (2 * M_PI), fabs(creal(s)) / (2 * M_PI));
    }
}

void pw_grid_add_digital(pw_grid *grid, const pw_roots *z, double rate_hz)
{
    for (int i = 0; i < z->poles + z->zeros; i++) {
        double complex r = i < z->poles ? z->pole[i] : z->zero[i - z->poles];
        if (cabs(r) < 1e-6 || cimag(r) < 0) continue;
        double hz = rate_hz / (2 * M_PI);    /* of one radian a sample */
        pw_grid_add(grid, carg(r) * hz, fabs(log(cabs(r))) * hz);
    }
}

static int ascending(const void *a, const void *b)
{
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

void pw_grid_sort(pw_grid *grid)
{
    qsort(grid->hz, (size_t)grid->count, sizeof *grid->hz, ascending);
    int kept = 0;
    for (int i = 0; i < grid->count; i++)
        if (kept == 0 || grid->hz[i] > grid->hz[kept - 1]) grid->hz[kept++] = grid->hz[i];
    grid->count = kept;
}

void pw_grid_free(pw_grid *grid)
{
    free(grid->hz);
    *grid = (pw_grid){0};
}

static void raise_to(pw_error_peak *peak, double value, double hz)
{
    if (value > peak->max) *peak = (pw_error_peak){value, hz};
}

/* Golden section between two neighbours of a local peak. */
static void climb(pw_level level, const void *context, double low, double high, pw_error_peak *peak)
{
    double left = high - GOLDEN * (high - low), right = low + GOLDEN * (high - low);
    double at_left = level(context, left), at_right = level(context, right);
    for (int i = 0; i < 26 && right > left; i++) {
        if (at_left >= at_right) {
            high = right;
            right = left;
            at_right = at_left;
            left = high - GOLDEN * (high - low);
            at_left = level(context, left);
        } else {
            low = left;
            left = right;
            at_left = at_right;
            right = low + GOLDEN * (high - low);
            at_right = level(context, right);
        }
    }
    raise_to(peak, at_left, left);
    raise_to(peak, at_right, right);
}

/* The last place between inside (value >= 0) and outside (value < 0) that is still inside. */
static void edge(pw_level level, const void *context, double inside, double outside,
                 pw_error_peak *peak)
{
    double value = -1;
    for (int i = 0; i < 50; i++) {
        double middle = (inside + outside) / 2, there = level(context, middle);
        if (there >= 0) {
            inside = middle;
            value = there;
        } else outside = middle;
    }
    raise_to(peak, value, inside);
}

/* The FOLLOWED-th largest local maximum's value, so that only the largest are climbed. */
static double follow_from(const pw_grid *grid, const double *value)
{
    double top[FOLLOWED] = {0};
    for (int i = 0; i < grid->count; i++) {
        bool local = value[i] >= 0 && (i == 0 || value[i] >= value[i - 1]) &&
                     (i + 1 == grid->count || value[i] >= value[i + 1]);
        if (!local || value[i] <= top[FOLLOWED - 1]) continue;
        int k = FOLLOWED - 1;
        for (; k > 0 && top[k - 1] < value[i]; k--) top[k] = top[k - 1];
        top[k] = value[i];
    }
    return top[FOLLOWED - 1];
}

pw_error_peak pw_grid_follow(const pw_grid *grid, const double *value, pw_level level,
                             const void *context)
{
    pw_error_peak peak = {0, grid->low};
    double least = follow_from(grid, value);
    for (int i = 0; i < grid->count; i++) raise_to(&peak, value[i], grid->hz[i]);
    for (int i = 0; i < grid->count; i++) {
        if (value[i] < 0) continue;
        bool first = i == 0, last = i + 1 == grid->count;
        if (!first && value[i - 1] < 0) edge(level, context, grid->hz[i], grid->hz[i - 1], &peak);
        if (!last && value[i + 1] < 0) edge(level, context, grid->hz[i], grid->hz[i + 1], &peak);
        bool local = (first || value[i] >= value[i - 1]) && (last || value[i] >= value[i + 1]);
        if (!local || value[i] < least || value[i] < peak.max / 4) continue;
        climb(level, context, grid->hz[first ? i : i - 1], grid->hz[last ? i : i + 1], &peak);
    }
    return peak;
}

pw_error_peak pw_grid_peak(const pw_grid *grid, pw_level level, const void *context)
{
    double *value = pw_take((size_t)grid->count * sizeof *value);
    for (int i = 0; i < grid->count; i++) value[i] = level(context, grid->hz[i]);
    pw_error_peak peak = pw_grid_follow(grid, value, level, context);
    free(value);
    return peak;
}
