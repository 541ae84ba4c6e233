/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Order of sections by round-off noise.
 * Method: scale every section output to a peak gain of 1; then the rounding at the end of the first
 * k sections S reaches the output with power
 *     w(S) = max |H_S|^2 * mean |H_rest|^2,
 * and the noise of an order is the sum over its prefixes. A prefix counts only as a set, so the
 * least sum is found by dynamic programming over subsets up to FEW sections, and by taking the next
 * best section above that. Sections with a pole at 1 come last: what stands
 * before them stays bounded.
 * Source: L. B. Jackson, Bell System Technical Journal 49 (1970), 159-184, for w. */
#include "discrete/ordering.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/arena.h"
#include "discrete/errors.h"

#define FEW 10

static void circle_grid(const pw_roots *z, pw_grid *grid)
{
    *grid = (pw_grid){.low = 0.5e-4, .high = 0.5};           /* of the rate */
    for (int i = 0; i < 80; i++) pw_grid_put(grid, 0.5 * pow(10, -i / 20.0));
    for (int i = 1; i < 200; i++) pw_grid_put(grid, 0.5 * i / 200);
    pw_roots poles = *z;
    poles.zeros = 0;
    pw_grid_add_digital(grid, &poles, 1);
    pw_grid_sort(grid);
    if (grid->count > PW_ORDER_POINTS) grid->count = PW_ORDER_POINTS;
}

static void trapezoid(const pw_grid *grid, double *weight)
{
    double sum = 0;
    for (int k = 0; k < grid->count; k++) {
        double before = k ? grid->hz[k - 1] : 0;
        double after = k + 1 < grid->count ? grid->hz[k + 1] : 0.5;
        weight[k] = (after - before) / 2;
        sum += weight[k];
    }
    for (int k = 0; k < grid->count; k++) weight[k] /= sum;
}

static pw_roots section_roots(const pw_section *section)
{
    pw_roots z = {.poles = section->poles, .zeros = section->zeros, .factor = 1};
    memcpy(z.pole, section->pole, sizeof section->pole);
    memcpy(z.zero, section->zero, sizeof section->zero);
    return z;
}

static bool has_one(const double complex *root, int n)
{
    for (int i = 0; i < n; i++)
        if (root[i] == 1) return true;
    return false;
}

void pw_shapes_make(const pw_roots *z, const pw_sections *sections, pw_shapes *out)
{
    pw_grid grid;
    circle_grid(z, &grid);
    memset(out, 0, sizeof *out);
    out->points = grid.count;
    out->count = sections->count;
    trapezoid(&grid, out->weight);
    for (int i = 0; i < sections->count; i++) {
        const pw_section *section = &sections->list[i];
        pw_roots alone = section_roots(section);
        double top = 0, *square = pw_take((size_t)grid.count * sizeof *square);
        for (int k = 0; k < grid.count; k++) {
            double size = cabs(pw_digital_at(&alone, 1, grid.hz[k]));
            square[k] = size * size;
            top = fmax(top, square[k]);
        }
        if (!(top > 0)) top = 1;
        for (int k = 0; k < grid.count; k++) square[k] /= top;
        out->square[i] = square;
        out->log_peak[i] = log(top) / 2;
        out->integrates[i] = has_one(section->pole, section->poles) &&
                             !has_one(section->zero, section->zeros);
    }
    pw_grid_free(&grid);
}

void pw_shapes_free(pw_shapes *shapes)
{
    for (int i = 0; i < shapes->count; i++) free(shapes->square[i]);
}

static double peak_of(const pw_shapes *shapes, const double *square)
{
    double top = 0;
    for (int k = 0; k < shapes->points; k++) top = fmax(top, square[k]);
    return top;
}

static double mean_of(const pw_shapes *shapes, const double *square)
{
    double sum = 0;
    for (int k = 0; k < shapes->points; k++) sum += shapes->weight[k] * square[k];
    return sum;
}

static void multiply(const pw_shapes *shapes, const double *by, const double *from, double *to)
{
    for (int k = 0; k < shapes->points; k++) to[k] = from[k] * by[k];
}

/* ---- few sections: every subset ---- */

typedef struct subsets {
    const pw_shapes *shapes;
    double peak[1 << FEW], mean[1 << FEW], least[1 << FEW];
    int last[1 << FEW];
    double product[FEW + 1][PW_ORDER_POINTS];
} subsets;

/* Measures every subset that holds `mask` and any of the sections from `next` on. */
static void measure(subsets *all, int next, int mask, int depth)
{
    if (next == all->shapes->count) {
        all->peak[mask] = peak_of(all->shapes, all->product[depth]);
        all->mean[mask] = mean_of(all->shapes, all->product[depth]);
        return;
    }
    measure(all, next + 1, mask, depth);
    multiply(all->shapes, all->shapes->square[next], all->product[depth], all->product[depth + 1]);
    measure(all, next + 1, mask | 1 << next, depth + 1);
}

static bool allowed_last(const pw_shapes *shapes, int mask, int i)
{
    if (shapes->integrates[i]) return true;
    for (int k = 0; k < shapes->count; k++)
        if (mask >> k & 1 && shapes->integrates[k]) return false;
    return true;
}

static void least_noise(subsets *all)
{
    int n = all->shapes->count, full = (1 << n) - 1;
    all->least[0] = 0;
    for (int mask = 1; mask <= full; mask++) {
        double here = mask == full ? all->peak[full] : all->peak[mask] * all->mean[full & ~mask];
        all->least[mask] = INFINITY;
        for (int i = 0; i < n; i++) {
            if (!(mask >> i & 1) || !allowed_last(all->shapes, mask, i)) continue;
            double total = all->least[mask & ~(1 << i)] + here;
            if (total < all->least[mask]) {
                all->least[mask] = total;
                all->last[mask] = i;
            }
        }
    }
}

static void order_few(const pw_shapes *shapes, int *order)
{
    subsets *all = pw_take(sizeof *all);
    int n = shapes->count;
    all->shapes = shapes;
    for (int k = 0; k < shapes->points; k++) all->product[0][k] = 1;
    measure(all, 0, 0, 0);
    least_noise(all);
    for (int mask = (1 << n) - 1, k = n - 1; k >= 0; k--) {
        order[k] = all->last[mask];
        mask &= ~(1 << order[k]);
    }
    free(all);
}

/* ---- many sections: the next best one ---- */

/* Power that the rounding after `done` would reach the output with. */
static double noise_after(const pw_shapes *shapes, const double *done, const bool *used, int with)
{
    double product[PW_ORDER_POINTS], rest[PW_ORDER_POINTS];
    multiply(shapes, shapes->square[with], done, product);
    for (int k = 0; k < shapes->points; k++) rest[k] = 1;
    for (int i = 0; i < shapes->count; i++)
        if (!used[i] && i != with) multiply(shapes, shapes->square[i], rest, rest);
    return peak_of(shapes, product) * mean_of(shapes, rest);
}

static void order_many(const pw_shapes *shapes, int *order)
{
    bool used[PW_MAX_SECTIONS] = {false};
    double done[PW_ORDER_POINTS];
    int plain = 0;
    for (int k = 0; k < shapes->points; k++) done[k] = 1;
    for (int i = 0; i < shapes->count; i++) plain += !shapes->integrates[i];
    for (int n = 0; n < shapes->count; n++) {
        double least = INFINITY;
        int next = -1;
        for (int i = 0; i < shapes->count; i++) {
            if (used[i] || shapes->integrates[i] != (n >= plain)) continue;
            double noise = noise_after(shapes, done, used, i);
            if (next < 0 || noise < least) {
                least = noise;
                next = i;
            }
        }
        used[next] = true;
        multiply(shapes, shapes->square[next], done, done);
        order[n] = next;
    }
}

double pw_order_cost(const pw_shapes *shapes, const int *order)
{
    double done[PW_ORDER_POINTS], sum = 0;
    bool used[PW_MAX_SECTIONS] = {false};
    for (int k = 0; k < shapes->points; k++) done[k] = 1;
    for (int n = 0; n < shapes->count; n++) {
        sum += noise_after(shapes, done, used, order[n]);
        used[order[n]] = true;
        multiply(shapes, shapes->square[order[n]], done, done);
    }
    double scale = 0;            /* back from "each against its own largest" */
    for (int i = 0; i < shapes->count; i++) scale += shapes->log_peak[i];
    return log(sum) + 2 * scale;
}

double pw_order_best(const pw_shapes *shapes, int *order)
{
    if (shapes->count <= FEW) order_few(shapes, order);
    else order_many(shapes, order);
    return pw_order_cost(shapes, order);
}

void pw_running_peaks(const pw_shapes *shapes, const int *order, double *log_peak)
{
    double done[PW_ORDER_POINTS], scale = 0;
    for (int k = 0; k < shapes->points; k++) done[k] = 1;
    for (int n = 0; n < shapes->count; n++) {
        multiply(shapes, shapes->square[order[n]], done, done);
        scale += shapes->log_peak[order[n]];
        double top = peak_of(shapes, done);
        log_peak[n] = scale + log(top > 0 ? top : 1e-300) / 2;
    }
}
