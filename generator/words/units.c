/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "words/units.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#define NEAR 64                  /* steps of a word: DC gain to 0.1 dB before the words are refined */

static void add_pole(pw_units *u, double complex p, double complex q, int size)
{
    u->pole[u->poles++] = (pw_pole_unit){size, {p, q}, p == 1 || (size == 2 && q == 1)};
}

static void add_zero(pw_units *u, double complex zero, bool infinite)
{
    for (int g = 0; g < u->zeros; g++)
        if (u->zero[g].infinite == infinite && (infinite || u->zero[g].zero == zero)) {
            u->zero[g].count++;
            return;
        }
    int size = cimag(zero) != 0 ? 2 : 1;
    u->zero[u->zeros++] = (pw_zero_group){size, 1, infinite, zero};
}

static int falling(const void *a, const void *b)
{
    double x = *(const double *)a, y = *(const double *)b;
    return (x < y) - (x > y);
}

/* Takes pairs at 1 out of both lists; how many. */
static int cancelled(const pw_roots *z)
{
    int poles = 0, zeros = 0;
    for (int k = 0; k < z->poles; k++)
        poles += z->pole[k] == 1;
    for (int k = 0; k < z->zeros; k++)
        zeros += z->zero[k] == 1;
    return poles < zeros ? poles : zeros;
}

/* Two real poles: one section, or two where they stand so near to 1 that the words of one, which sum to
 * (1 - p)(1 - q), could not tell them from it; a first-order section holds 1 - p itself. */
static void add_reals(pw_units *u, double p, double q, double step, int *room)
{
    if (*room > 0 && p > 0 && q > 0 && (1 - p) * (1 - q) < NEAR * step) {
        add_pole(u, p, 0, 1);
        add_pole(u, q, 0, 1);
        --*room;
    } else {
        add_pole(u, p, q, 2);
    }
}

static void take_poles(const pw_roots *z, bool as_listed, double step, int cancel, pw_units *u)
{
    double real[PW_MAX_ROOTS];
    int reals = 0, ones = 0, room = PW_MAX_SECTIONS - 2 - (z->poles + 1) / 2;
    for (int k = 0; k < z->poles; k++) {
        if (cimag(z->pole[k]) > 0)
            add_pole(u, z->pole[k], conj(z->pole[k]), 2);
        else if (z->pole[k] == 1)
            ones++;
        else if (cimag(z->pole[k]) == 0)
            real[reals++] = creal(z->pole[k]);
        if (as_listed && reals == 2) {
            add_reals(u, real[0], real[1], step, &room);
            reals = 0;
        }
    }
    qsort(real, (size_t)reals, sizeof *real, falling);
    for (int k = 0; k + 1 < reals; k += 2)
        add_reals(u, real[k], real[k + 1], step, &room);
    if (reals % 2)
        add_pole(u, real[reals - 1], 0, 1);
    for (ones -= cancel; ones > 0; ones--)
        add_pole(u, 1, 0, 1);
}

static void take_zeros(const pw_roots *z, int cancel, pw_units *u)
{
    int left = cancel;
    for (int k = 0; k < z->zeros; k++) {
        if (cimag(z->zero[k]) < 0 || (z->zero[k] == 1 && left-- > 0))
            continue;
        add_zero(u, z->zero[k], false);
    }
    for (int k = z->zeros; k < z->poles; k++)
        add_zero(u, 0, true);
}

static int count_units(const pw_units *u, int size)
{
    int n = 0;
    for (int k = 0; k < u->poles; k++)
        n += u->pole[k].size == size;
    return n;
}

/* A complex pair of zeros needs a second-order section: where they are too many, single poles (an
 * integrator and another) join. */
static void join_singles(pw_units *u)
{
    int pairs = 0;
    for (int g = 0; g < u->zeros; g++)
        pairs += u->zero[g].size == 2 ? u->zero[g].count : 0;
    while (pairs > count_units(u, 2) && u->poles >= 2) {
        pw_pole_unit *last = &u->pole[u->poles - 1], *before = last - 1;
        if (last->size != 1 || before->size != 1)
            return;
        double complex p = last->pole[0], q = before->pole[0];
        u->poles -= 2;
        add_pole(u, p, q, 2);
    }
}

void pw_units_make(const pw_roots *z, bool as_listed, double step, pw_units *out)
{
    memset(out, 0, sizeof *out);
    int cancel = cancelled(z);
    take_poles(z, as_listed, step, cancel, out);
    take_zeros(z, cancel, out);
    join_singles(out);
}

pw_section pw_units_section(const pw_units *units, int pole, int zero0, int zero1)
{
    const pw_pole_unit *unit = &units->pole[pole];
    pw_section s = {.order = unit->size, .poles = unit->size, .gain = 1};
    for (int k = 0; k < unit->size; k++)
        s.pole[k] = unit->pole[k];
    const int group[2] = {zero0, zero1};
    for (int k = 0; k < 2; k++) {
        if (group[k] < 0 || units->zero[group[k]].infinite)
            continue;
        double complex zero = units->zero[group[k]].zero;
        s.zero[s.zeros++] = zero;
        if (cimag(zero) != 0)
            s.zero[s.zeros++] = conj(zero);
    }
    pw_section_expand(&s);
    return s;
}
