/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sections with real coefficients.
 * Method: both groupings of the zeros (grouping.h) are ordered, and the one of less round-off noise
 * stays. The gain is spread so that the peak of the running product moves from 1 to that of the
 * whole in even steps (in decibels); the last section takes what is left, so that the
 * product is exact.
 * Accuracy: each coefficient from the roots in long double and rounded once; a complex zero pair on
 * the unit circle to rounding has b2 = b0 exactly, since its analog zeros stand on the axis. */
#include <float.h>
#include <math.h>
#include <string.h>

#include "discrete/grouping.h"
#include "discrete/ordering.h"

static void copy_roots(const double complex *from, const int *index, int n, double complex *to)
{
    for (int k = 0; k < n; k++) to[k] = from[index[k]];
}

static void sections_of(const pw_roots *z, const pw_groups *groups, pw_sections *out)
{
    memset(out, 0, sizeof *out);
    out->count = groups->count;
    for (int g = 0; g < groups->count; g++) {
        const pw_group *group = &groups->list[g];
        pw_section *section = &out->list[g];
        section->order = section->poles = group->poles;
        section->zeros = group->zeros;
        section->gain = 1;
        copy_roots(z->pole, group->pole, group->poles, section->pole);
        copy_roots(z->zero, group->zero, group->zeros, section->zero);
    }
}

/* Sections in the order in which their first poles stand in the model. */
static void order_listed(const pw_groups *groups, int *order)
{
    int first[PW_MAX_ROOTS];
    for (int g = 0; g < groups->count; g++) {
        const pw_group *group = &groups->list[g];
        first[g] = group->pole[0];
        if (group->poles == 2 && group->pole[1] < first[g]) first[g] = group->pole[1];
        int k = g;
        for (; k > 0 && first[order[k - 1]] > first[g]; k--) order[k] = order[k - 1];
        order[k] = g;
    }
}

static void spread_gain(const pw_roots *z, const pw_shapes *shapes, const int *order,
                        pw_sections *out)
{
    double peak[PW_MAX_SECTIONS];
    int n = out->count;
    pw_running_peaks(shapes, order, peak);
    double whole = peak[n - 1] + (double)logl(fabsl(z->factor)), before = 0;
    long double left = z->factor;
    for (int k = 0; k + 1 < n; k++) {
        double log_gain = whole * (k + 1) / n - peak[k];     /* of the first k + 1 together */
        out->list[k].gain = exp(log_gain - before);
        left /= out->list[k].gain;
        before = log_gain;
    }
    out->list[n - 1].gain = (double)left;
}

/* One grouping, ordered and with its gain; its noise. */
static double arrange(const pw_roots *z, pw_zero_choice choice, bool as_listed, pw_sections *out)
{
    pw_groups groups;
    pw_sections found;
    pw_shapes shapes;
    int order[PW_MAX_SECTIONS];
    double noise;
    pw_group_digital(z, choice, &groups);
    sections_of(z, &groups, &found);
    pw_shapes_make(z, &found, &shapes);
    if (as_listed) {
        order_listed(&groups, order);
        noise = pw_order_cost(&shapes, order);
    } else noise = pw_order_best(&shapes, order);
    *out = found;
    for (int k = 0; k < found.count; k++) out->list[k] = found.list[order[k]];
    if (z->factor != 0) spread_gain(z, &shapes, order, out);
    else out->list[0].gain = 0;
    pw_shapes_free(&shapes);
    return noise;
}

void pw_sections_make(const pw_roots *z, bool as_listed, pw_sections *out)
{
    if (z->poles == 0) {
        memset(out, 0, sizeof *out);
        out->count = 1;
        out->list[0].gain = (double)z->factor;
        pw_section_expand(&out->list[0]);
        return;
    }
    pw_sections mixed;
    double noise = arrange(z, PW_ZEROS_NEAREST, as_listed, out);
    double noise_mixed = arrange(z, PW_ZEROS_MIXED, as_listed, &mixed);
    if (noise_mixed < noise - 1e-3) *out = mixed;
    for (int k = 0; k < out->count; k++) pw_section_expand(&out->list[k]);
}

/* The monic polynomial of n roots, highest power first: c[0..n], scaled by gain. */
static void expand(const double complex *root, int n, bool snap, long double gain, double *c)
{
    long double x = n > 0 ? creall(root[0]) : 0, y = n > 0 ? cimagl(root[0]) : 0;
    long double x2 = n > 1 ? creall(root[1]) : 0, product = y != 0 ? x * x + y * y : x * x2;
    if (snap && y != 0 && fabsl(product - 1) <= 4 * DBL_EPSILON) product = 1;
    c[0] = (double)gain;
    if (n > 0) c[1] = (double)(-(x + x2) * gain);
    if (n > 1) c[2] = (double)(product * gain);
}

void pw_section_expand(pw_section *section)
{
    memset(section->b, 0, sizeof section->b);
    memset(section->a, 0, sizeof section->a);
    expand(section->zero, section->zeros, true, section->gain,
           section->b + (section->poles - section->zeros));
    expand(section->pole, section->poles, false, 1, section->a);
}
