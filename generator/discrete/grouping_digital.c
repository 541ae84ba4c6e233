/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Digital sections.
 * Real poles: the error of a root of 1 + a1/z + a2/z^2 from an error of a word grows with
 * 1/|p1 - p2| (J. F. Kaiser, 1966), so the sorted real poles are paired half a list apart. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "discrete/grouping.h"
#include "discrete/grouping_parts.h"

/* Sorts indices of real roots, largest first; ties keep the given order. */
static void sort_reals(const double complex *root, int *list, int n)
{
    for (int i = 1; i < n; i++)
        for (int k = i; k > 0 && creal(root[list[k]]) > creal(root[list[k - 1]]); k--) {
            int swap = list[k];
            list[k] = list[k - 1];
            list[k - 1] = swap;
        }
}

static void add_group(pw_groups *groups, int first, int second)
{
    groups->list[groups->count++] =
        (pw_group){.pole = {first, second}, .poles = second < 0 ? 1 : 2};
}

static void group_poles(const pw_roots *z, pw_groups *out)
{
    pw_root_units poles;
    pw_root_list(z->pole, z->poles, &poles);
    for (int i = 0; i < poles.pairs; i++) add_group(out, poles.pair[i], poles.pair[i] + 1);
    sort_reals(z->pole, poles.real, poles.reals);
    int *real = poles.real, n = poles.reals;
    if (n >= 2 && creal(z->pole[real[0]]) == 1 && creal(z->pole[real[1]]) == 1) {
        add_group(out, real[0], real[1]);
        real += 2;
        n -= 2;
    }
    if (n % 2) {
        add_group(out, real[0], -1);
        real++;
        n--;
    }
    for (int i = 0; i < n / 2; i++) add_group(out, real[i], real[i + n / 2]);
}

/* Whether what is left still fits: see grouping.c. */
static bool fits(int pairs, int reals, int twos, int ones)
{
    return pairs >= 0 && reals >= 0 && pairs <= twos && reals <= 2 * (twos - pairs) + ones;
}

/* The zero of the list nearest to (or farthest from) the pole. */
static int pick(const pw_roots *z, const int *list, int n, double complex pole, bool farthest)
{
    int best = -1;
    double best_far = 0;
    for (int i = 0; i < n; i++) {
        double far = cabs(z->zero[list[i]] - pole);
        if (best < 0 || (farthest ? far > best_far : far < best_far)) {
            best = i;
            best_far = far;
        }
    }
    return best;
}

static void take_real(const pw_roots *z, pw_group *group, pw_root_units *zeros, bool farthest)
{
    int i = pick(z, zeros->real, zeros->reals, z->pole[group->pole[0]], farthest);
    group->zero[group->zeros++] = zeros->real[i];
    pw_units_drop(zeros->real, &zeros->reals, i);
}

/* twos and ones: the groups that are still to choose, without this one. */
static void choose(const pw_roots *z, pw_group *group, pw_root_units *zeros, int twos, int ones,
                   pw_zero_choice choice)
{
    double complex pole = z->pole[group->pole[0]];
    int pair = pick(z, zeros->pair, zeros->pairs, pole, false);
    int real = pick(z, zeros->real, zeros->reals, pole, false);
    int most = group->poles < zeros->reals ? group->poles : zeros->reals;
    bool pair_fits = group->poles == 2 && fits(zeros->pairs - 1, zeros->reals, twos, ones);
    bool real_fits = most > 0 && fits(zeros->pairs, zeros->reals - most, twos, ones);
    bool nearer = pair >= 0 && (real < 0 || cabs(z->zero[zeros->pair[pair]] - pole) <=
                                                cabs(z->zero[zeros->real[real]] - pole));
    if (pair_fits && (nearer || !real_fits)) {
        group->zero[0] = zeros->pair[pair];
        group->zero[1] = zeros->pair[pair] + 1;
        group->zeros = 2;
        pw_units_drop(zeros->pair, &zeros->pairs, pair);
    } else if (real_fits) {
        for (int k = 0; k < most; k++)
            take_real(z, group, zeros, k == 1 && choice == PW_ZEROS_MIXED);
    }
}

void pw_group_digital(const pw_roots *z, pw_zero_choice choice, pw_groups *out)
{
    pw_root_units zeros;
    bool chosen[PW_MAX_ROOTS] = {false};
    int twos = 0, ones = 0;
    memset(out, 0, sizeof *out);
    group_poles(z, out);
    pw_root_list(z->zero, z->zeros, &zeros);
    for (int g = 0; g < out->count; g++) *(out->list[g].poles == 2 ? &twos : &ones) += 1;
    for (int n = 0; n < out->count; n++) {
        int next = -1;                       /* the pole nearest to the unit circle */
        for (int g = 0; g < out->count; g++)
            if (!chosen[g] && (next < 0 || cabs(z->pole[out->list[g].pole[0]]) >
                                               cabs(z->pole[out->list[next].pole[0]])))
                next = g;
        chosen[next] = true;
        *(out->list[next].poles == 2 ? &twos : &ones) -= 1;
        choose(z, &out->list[next], &zeros, twos, ones, choice);
    }
}
