/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What both groupings share: the lists of pairs and reals, and the analog one.
 * Feasibility: with n2 groups of two poles and n1 of one, m complex zero pairs and r real zeros fit
 * where m <= n2 and r <= 2 (n2 - m) + n1. A choice that breaks this is not taken. */
#include "discrete/grouping.h"

#include <math.h>
#include <string.h>

#include "discrete/grouping_parts.h"

void pw_root_list(const double complex *root, int n, pw_root_units *out)
{
    memset(out, 0, sizeof *out);
    for (int i = 0; i < n; i++) {
        if (cimag(root[i]) > 0 && i + 1 < n) out->pair[out->pairs++] = i++;
        else out->real[out->reals++] = i;
    }
}

void pw_units_drop(int *list, int *count, int index)
{
    memmove(list + index, list + index + 1, (size_t)(*count - index - 1) * sizeof *list);
    --*count;
}

static void add_group(pw_groups *groups, int first, int second)
{
    groups->list[groups->count++] =
        (pw_group){.pole = {first, second}, .poles = second < 0 ? 1 : 2};
}

double pw_group_natural_hz(const pw_roots *analog, const pw_group *group)
{
    double size = cabs(analog->pole[group->pole[0]]);
    if (group->poles == 2) size = sqrt(size) * sqrt(cabs(analog->pole[group->pole[1]]));
    return size / (2 * M_PI);
}

/* How far a frequency (a root's distance from 0) is from another, in octaves or so; a root at 0 is
 * nearest to a group at 0 and then to the lowest one. */
static double apart(double size, double group_size)
{
    const double least = 1e-300;
    return fabs(log(fmax(size, least)) - log(fmax(group_size, least)));
}

/* The two real poles whose geometric mean is nearest to size. */
static void nearest_reals(const pw_roots *analog, const pw_root_units *poles, double size,
                          int *first, int *second)
{
    double best = INFINITY;
    for (int i = 0; i < poles->reals; i++)
        for (int j = i + 1; j < poles->reals; j++) {
            double mean = sqrt(cabs(analog->pole[poles->real[i]])) *
                          sqrt(cabs(analog->pole[poles->real[j]]));
            if (apart(size, mean) < best) {
                best = apart(size, mean);
                *first = i;
                *second = j;
            }
        }
}

/* The zero pair farthest from every complex pole pair: the one that real poles should take. */
static int stranded_pair(const pw_roots *analog, const pw_root_units *zeros,
                         const pw_root_units *poles)
{
    int chosen = 0;
    double worst = -1;
    for (int i = 0; i < zeros->pairs; i++) {
        double size = cabs(analog->zero[zeros->pair[i]]), nearest = INFINITY;
        for (int k = 0; k < poles->pairs; k++)
            nearest = fmin(nearest, apart(size, cabs(analog->pole[poles->pair[k]])));
        if (nearest > worst) {
            worst = nearest;
            chosen = i;
        }
    }
    return chosen;
}

static void analog_poles(const pw_roots *analog, pw_groups *out)
{
    pw_root_units poles, zeros;
    pw_root_list(analog->pole, analog->poles, &poles);
    pw_root_list(analog->zero, analog->zeros, &zeros);
    for (int i = 0; i < poles.pairs; i++) add_group(out, poles.pair[i], poles.pair[i] + 1);
    int wanted = zeros.pairs - poles.pairs;
    for (int n = 0; n < wanted && poles.reals >= 2; n++) {
        int first = 0, second = 1, k = stranded_pair(analog, &zeros, &poles);
        nearest_reals(analog, &poles, cabs(analog->zero[zeros.pair[k]]), &first, &second);
        add_group(out, poles.real[first], poles.real[second]);
        pw_units_drop(poles.real, &poles.reals, second);
        pw_units_drop(poles.real, &poles.reals, first);
        pw_units_drop(zeros.pair, &zeros.pairs, k);
    }
    for (int i = 0; i < poles.reals; i++) add_group(out, poles.real[i], -1);
}

/* Gives the nearest (zero, group with room) pairs away one after another. */
static void analog_zeros(const pw_roots *analog, int *zero, int zeros, int width, pw_groups *groups)
{
    while (zeros > 0) {
        double best = INFINITY;
        int best_zero = -1, best_group = -1;
        for (int g = 0; g < groups->count; g++) {
            const pw_group *group = &groups->list[g];
            if (group->poles - group->zeros < width) continue;
            double size = 2 * M_PI * pw_group_natural_hz(analog, group);
            for (int i = 0; i < zeros; i++) {
                double far = apart(cabs(analog->zero[zero[i]]), size);
                if (far < best) {
                    best = far;
                    best_zero = i;
                    best_group = g;
                }
            }
        }
        if (best_group < 0) return;          /* cannot be: zeros <= poles */
        pw_group *group = &groups->list[best_group];
        for (int k = 0; k < width; k++) group->zero[group->zeros++] = zero[best_zero] + k;
        pw_units_drop(zero, &zeros, best_zero);
    }
}

void pw_group_analog(const pw_roots *analog, pw_groups *out)
{
    pw_root_units zeros;
    memset(out, 0, sizeof *out);
    analog_poles(analog, out);
    pw_root_list(analog->zero, analog->zeros, &zeros);
    analog_zeros(analog, zeros.pair, zeros.pairs, 2, out);
    analog_zeros(analog, zeros.real, zeros.reals, 1, out);
}
