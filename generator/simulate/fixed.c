/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Fixed-point sections, one sample at a time.
 *
 * Precondition: the words satisfy the last paragraph of words/realisation.h, so that no sum leaves
 * int64_t. Shifts of negative values are arithmetic (gcc and clang define them so); left shifts are
 * multiplications. */
#include "simulate/inner.h"

_Static_assert((INT64_C(-3) >> 1) == -2, "the simulation needs an arithmetic right shift");

enum { X1, X2, Y1, Y2, E1, E2 };
enum { U1, U2 };

pw_word_rules pw_word_rules_of(const pw_realisation *realisation)
{
    bool wide = realisation->sample == PW_Q31;
    return (pw_word_rules){
        .low = wide ? INT32_MIN : INT16_MIN,
        .high = wide ? INT32_MAX : INT16_MAX,
        .wrap = realisation->wrap,
        .truncate = realisation->truncate,
    };
}

int64_t pw_half(int fraction, const pw_word_rules *rules)
{
    return rules->truncate || fraction == 0 ? 0 : INT64_C(1) << (fraction - 1);
}

int64_t pw_align(const pw_words *words, int64_t p)
{
    int right = words->b_fraction - words->a_fraction;
    if (right > 0) return (p + (INT64_C(1) << (right - 1))) >> right;
    return p * (INT64_C(1) << -right);
}

/* The word that v becomes; counts where v lies outside. */
static int32_t into_word(int64_t v, const pw_word_rules *rules, uint64_t *clipped)
{
    if (v >= rules->low && v <= rules->high) return (int32_t)v;
    ++*clipped;
    if (!rules->wrap) return (int32_t)(v < rules->low ? rules->low : rules->high);
    int64_t span = rules->high - rules->low + 1;
    int64_t rest = (v - rules->low) % span;
    return (int32_t)(rules->low + (rest < 0 ? rest + span : rest));
}

static int32_t direct_step(const pw_words *w, const pw_word_rules *rules, int64_t *state, int32_t x,
                           uint64_t *clipped, pw_fixed_trace *trace)
{
    int64_t p = (int64_t)w->b[0] * x + w->b[1] * state[X1] + w->b[2] * state[X2];
    int64_t acc = pw_align(w, p) - w->a[1] * state[Y1] - w->a[2] * state[Y2];
    if (w->structure == PW_DIRECT_1_SHAPED) acc += w->k1 * state[E1] + w->k2 * state[E2];
    int64_t v = (acc + pw_half(w->a_fraction, rules)) >> w->a_fraction;
    int32_t y = into_word(v, rules, clipped);
    bool outside = v < rules->low || v > rules->high;
    state[X2] = state[X1];
    state[X1] = x;
    state[Y2] = state[Y1];
    state[Y1] = y;
    if (w->structure == PW_DIRECT_1_SHAPED) {
        state[E2] = state[E1];
        state[E1] = outside ? 0 : acc - v * (INT64_C(1) << w->a_fraction);
    }
    if (trace) {
        trace->acc[0] = acc;
        trace->fraction[0] = w->a_fraction;
    }
    return y;
}

static int32_t coupled_step(const pw_words *w, const pw_word_rules *rules, int64_t *state,
                            int32_t x, uint64_t *clipped, pw_fixed_trace *trace)
{
    int64_t u1 = state[U1], u2 = state[U2];
    int64_t acc[3] = {
        w->c1 * u1 + w->c2 * u2 + (int64_t)w->d * x,
        w->sigma * u1 - w->omega * u2 + (int64_t)w->g * x,
        w->omega * u1 + w->sigma * u2,
    };
    int32_t word[3];
    for (int i = 0; i < 3; i++) {
        int fraction = i == 0 ? w->c_fraction : w->a_fraction;
        word[i] = into_word((acc[i] + pw_half(fraction, rules)) >> fraction, rules, clipped);
        if (trace) {
            trace->acc[i] = acc[i];
            trace->fraction[i] = fraction;
        }
    }
    state[U1] = word[1];
    state[U2] = word[2];
    return word[0];
}

int32_t pw_fixed_step(const pw_words *words, const pw_word_rules *rules, int64_t state[6],
                      int32_t x, uint64_t *clipped, pw_fixed_trace *trace)
{
    if (words->structure == PW_COUPLED) return coupled_step(words, rules, state, x, clipped, trace);
    return direct_step(words, rules, state, x, clipped, trace);
}
