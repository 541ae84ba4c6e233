/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "words/arrange.h"

#include <math.h>

static double distance(const pw_units *u, int pole, int group)
{
    const pw_zero_group *zero = &u->zero[group];
    return zero->infinite ? 1e3 : cabs(u->pole[pole].pole[0] - zero->zero);
}

static int nearest(const pw_units *u, const int left[], int pole, int most, int singles)
{
    int best = -1;
    for (int g = 0; g < u->zeros; g++) {
        int size = u->zero[g].size;
        if (left[g] == 0 || size > most || (size == 1 && most == 2 && singles < 2))
            continue;
        if (best < 0 || distance(u, pole, g) < distance(u, pole, best))
            best = g;
    }
    return best;
}

/* The pole unit nearest to the circle that is not yet served. */
static int sharpest(const pw_units *u, const bool served[])
{
    int best = -1;
    for (int k = 0; k < u->poles; k++)
        if (!served[k] && (best < 0 || cabs(u->pole[k].pole[0]) > cabs(u->pole[best].pole[0])))
            best = k;
    return best;
}

/* The nearest zeros for each pole unit, those nearest to the circle first; order[k].pole = k. */
static void pair_nearest(const pw_units *u, const int start[], int poles, pw_arranged *order)
{
    int left[PW_MAX_ROOTS], singles = 0;
    bool served[PW_MAX_SECTIONS] = {false};
    for (int g = 0; g < u->zeros; g++) {
        left[g] = start[g];
        singles += u->zero[g].size == 1 ? left[g] : 0;
    }
    for (int k = poles; k < u->poles; k++)
        served[k] = true;
    for (int k = 0; k < poles; k++) {
        int pole = sharpest(u, served), second = -1;
        int first = nearest(u, left, pole, u->pole[pole].size, singles);
        served[pole] = true;
        left[first]--;
        if (u->zero[first].size == 1) {
            singles--;
            if (u->pole[pole].size == 2) {
                second = nearest(u, left, pole, 1, singles);
                left[second]--, singles--;
            }
        }
        order[pole] = (pw_arranged){pole, {first, second}};
    }
}

/* Integrators are last and take the zeros nearest to 1: what comes before them is then free of the
 * zero that makes their output jump. Returns how many pole units come before; counts what is
 * left. */
static int serve_integrators(pw_units *u, pw_arranged *order)
{
    int before = 0;
    while (before < u->poles && !u->pole[before].integrates)
        before++;
    for (int k = before; k < u->poles; k++) {
        int left[PW_MAX_ROOTS], singles = 0, second = -1;
        for (int g = 0; g < u->zeros; g++) {
            left[g] = u->zero[g].count;
            singles += u->zero[g].size == 1 ? left[g] : 0;
        }
        int first = nearest(u, left, k, u->pole[k].size, singles);
        u->zero[first].count--;
        if (u->zero[first].size == 1 && u->pole[k].size == 2) {
            left[first]--;
            second = nearest(u, left, k, 1, singles - 1);
            u->zero[second].count--;
        }
        order[k] = (pw_arranged){k, {first, second}};
    }
    return before;
}

static const char *arrange(const pw_units *u, int poles, bool as_listed,
                           const pw_arrange_context *context, pw_arranged *order)
{
    int count[PW_MAX_ROOTS];
    for (int g = 0; g < u->zeros; g++)
        count[g] = u->zero[g].count;
    if (!as_listed && poles >= 1 && poles <= 6 && pw_arrange_all(u, poles, context, order))
        return "of all pairings and orders the one of least round-off noise";
    pair_nearest(u, count, poles, order);
    if (as_listed)
        return "as listed; each pole has the nearest zeros";
    if (pw_arrange_order(u, poles, context, order))
        return "each pole has the nearest zeros; of all orders the one of least round-off noise";
    return "each pole has the nearest zeros; the order comes from a local search that moves one "
           "section at a time while round-off noise falls";
}

void pw_order_sections(const pw_roots *z, bool as_listed, const pw_arrange_context *context,
                       pw_sections *out, const char **why)
{
    pw_units u;
    pw_arranged order[PW_MAX_SECTIONS];
    pw_units_make(z, as_listed, context->step, &u);
    out->count = u.poles;
    if (u.poles == 0) {
        out->count = 1;
        out->list[0] = (pw_section){.gain = 1};
        pw_section_expand(&out->list[0]);
        *why = "a plain gain";
        return;
    }
    int before = serve_integrators(&u, order);
    *why = before ? arrange(&u, before, as_listed, context, order) : "integrators";
    for (int k = 0; k < u.poles; k++)
        out->list[k] = pw_units_section(&u, order[k].pole, order[k].zero[0], order[k].zero[1]);
}
