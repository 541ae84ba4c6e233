/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Steady states: what settle does.
 *
 * Method: for a constant x a direct-1 section rests at y where
 *     y 2^f <= p - (a1 + a2) y + half < (y + 1) 2^f,
 * that is, D y - half <= p < D y - half + 2^f with D = 2^f + a1 + a2. With half = 2^(f-1) and
 * D <= 2^f the nearest y to p / D (half up) satisfies it, with half = 0 the floor of p / D does.
 * D > 2^f (poles on the negative real side) may leave no y. */
#include "simulate/inner.h"

__extension__ typedef __int128 pw_wide;

static int64_t floor_divide(int64_t p, int64_t d) /* d > 0 */
{
    int64_t q = p / d;
    return p % d < 0 ? q - 1 : q;
}

static pw_wide floor_divide_wide(pw_wide p, pw_wide d)
{
    pw_wide q = p / d;
    return p % d < 0 ? q - 1 : q;
}

static int32_t clamp(int64_t v, const pw_word_rules *rules)
{
    return (int32_t)(v < rules->low ? rules->low : v > rules->high ? rules->high : v);
}

static int64_t denominator(const pw_words *w)
{
    return (INT64_C(1) << w->a_fraction) + w->a[1] + w->a[2];
}

bool pw_section_integrates(const pw_words *w, bool fixed)
{
    if (w->order == 0) return false;
    if (!fixed) return 1 + w->fa[1] + w->fa[2] == 0;
    if (w->structure != PW_COUPLED) return denominator(w) <= 0;
    return w->omega == 0 && w->sigma == INT64_C(1) << w->a_fraction;
}

void pw_coupled_steady(const pw_words *w, int64_t gain[2], int *fraction)
{
    pw_wide near = (INT64_C(1) << w->a_fraction) - w->sigma;
    pw_wide d = near * near + (pw_wide)w->omega * w->omega;
    pw_wide above[2] = {near * w->g, (pw_wide)w->omega * w->g};
    const pw_wide most = (pw_wide)1 << 61;
    for (*fraction = 61;; --*fraction) {
        bool fits = true;
        for (int i = 0; i < 2; i++) {
            pw_wide q = floor_divide_wide(above[i] * ((pw_wide)1 << *fraction) + d / 2, d);
            fits = fits && q >= -most && q <= most;
            gain[i] = (int64_t)(q > most ? most : q < -most ? -most : q);
        }
        if (fits || *fraction == 32) return;
    }
}

static int32_t coupled_settle(const pw_words *w, const pw_word_rules *rules, int64_t *u, int32_t x)
{
    int64_t gain[2];
    int fraction;
    pw_coupled_steady(w, gain, &fraction);
    for (int i = 0; i < 2; i++) {
        pw_wide v = ((pw_wide)gain[i] * x + ((pw_wide)1 << (fraction - 1))) >> fraction;
        u[i] = clamp((int64_t)v, rules);
    }
    int64_t acc = w->c1 * u[0] + w->c2 * u[1] + (int64_t)w->d * x;
    return clamp((acc + pw_half(w->c_fraction, rules)) >> w->c_fraction, rules);
}

int32_t pw_fixed_settle(const pw_words *w, const pw_word_rules *rules, int64_t state[6], int32_t x)
{
    if (w->structure == PW_COUPLED) return coupled_settle(w, rules, state, x);
    int64_t p = pw_align(w, ((int64_t)w->b[0] + w->b[1] + w->b[2]) * x);
    int64_t d = denominator(w);
    int32_t y = clamp(floor_divide(rules->truncate ? p : p + (d >> 1), d), rules);
    state[0] = state[1] = x;
    state[2] = state[3] = y;
    state[4] = state[5] = 0;
    return y;
}
