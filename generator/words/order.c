/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "words/units.h"

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

void pw_order_sections(const pw_roots *z, bool as_listed, pw_sections *out, const char **why)
{
    pw_units u;
    int left[PW_MAX_ROOTS], singles = 0;
    bool served[PW_MAX_SECTIONS] = {false};
    pw_units_make(z, as_listed, &u);
    if (u.poles == 0) {
        out->count = 1;
        out->list[0] = (pw_section){.gain = 1};
        pw_section_expand(&out->list[0]);
        *why = "a plain gain";
        return;
    }
    for (int g = 0; g < u.zeros; g++) {
        left[g] = u.zero[g].count;
        singles += u.zero[g].size == 1 ? u.zero[g].count : 0;
    }
    out->count = u.poles;
    for (int k = 0; k < u.poles; k++) {
        int pole = sharpest(&u, served), first, second = -1;
        served[pole] = true;
        first = nearest(&u, left, pole, u.pole[pole].size, singles);
        left[first]--;
        if (u.zero[first].size == 1) {
            singles--;
            if (u.pole[pole].size == 2) {
                second = nearest(&u, left, pole, 1, singles);
                left[second]--, singles--;
            }
        }
        out->list[pole] = pw_units_section(&u, pole, first, second);
    }
    *why = as_listed ? "as listed" : "poles with the nearest zeros";
}
