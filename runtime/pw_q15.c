/* SPDX-License-Identifier: 0BSD */
/* Precondition: the words of each table are as pw_fixed.h asks, so that every sum below stays
 * inside int64_t. Postcondition: every stored sample is inside int16_t. */
#include "pw_q15.h"

static int16_t clamp(int64_t v)
{
    if (v > INT16_MAX) return INT16_MAX;
    return v < INT16_MIN ? INT16_MIN : (int16_t)v;
}

/* The word for v: itself, or clamped, or v modulo 2^16; *outside counts. */
static int16_t into_word(int64_t v, unsigned flags, uint32_t *outside)
{
    if (v >= INT16_MIN && v <= INT16_MAX) return (int16_t)v;
    ++*outside;
    if (!(flags & PW_WRAP)) return clamp(v);
    v = (int64_t)(((uint64_t)v + 0x8000u) & 0xffffu);
    return (int16_t)(v - 0x8000);
}

/* |b x| 2^max(0, a_fraction - b_fraction) and half a step: below 2^63. */
static int64_t gain_value(const pw_gain *w, int32_t x)
{
    const int64_t acc = pw_align((int64_t)w->b * x, w->b_fraction, w->a_fraction);
    return (acc + pw_half(w->a_fraction, w->flags)) >> w->a_fraction;
}

uint32_t pw_q15_gain(const pw_gain *w, const int16_t *in, int16_t *out, size_t n)
{
    uint32_t outside = 0;
    size_t i;
    for (i = 0; i < n; i++) out[i] = into_word(gain_value(w, in[i]), w->flags, &outside);
    return outside;
}

int16_t pw_q15_gain_settle(const pw_gain *w, int16_t x)
{
    return clamp(gain_value(w, x));
}

uint32_t pw_q15_direct(const pw_direct *w, pw_q15_direct_state *s,
                       const int16_t *in, int16_t *out, size_t n)
{
    const int64_t half = pw_half(w->a_fraction, w->flags);
    int16_t x1 = s->x1, x2 = s->x2, y1 = s->y1, y2 = s->y2;
    uint32_t outside = 0;
    size_t i;
    for (i = 0; i < n; i++) {
        const int16_t x = in[i];
        const int64_t acc = pw_direct_sum(w, x, x1, x2, y1, y2);
        const int16_t y = into_word((acc + half) >> w->a_fraction, w->flags, &outside);
        x2 = x1;
        x1 = x;
        y2 = y1;
        y1 = y;
        out[i] = y;
    }
    s->x1 = x1;
    s->x2 = x2;
    s->y1 = y1;
    s->y2 = y2;
    return outside;
}

int16_t pw_q15_direct_settle(const pw_direct *w, pw_q15_direct_state *s, int16_t x)
{
    const int16_t y = clamp(pw_direct_rest(w, x));
    s->x1 = s->x2 = x;
    s->y1 = s->y2 = y;
    return y;
}

/* e = acc - v 2^a_fraction, taken before the clamp, is what rounding left: inside int32_t. An
 * output outside the word has no error worth feeding back. */
uint32_t pw_q15_shaped(const pw_shaped *w, pw_q15_shaped_state *s,
                       const int16_t *in, int16_t *out, size_t n)
{
    const pw_direct *const d = &w->direct;
    const int64_t half = pw_half(d->a_fraction, d->flags), one = (int64_t)1 << d->a_fraction;
    int16_t x1 = s->direct.x1, x2 = s->direct.x2, y1 = s->direct.y1, y2 = s->direct.y2;
    int32_t e1 = s->e1, e2 = s->e2;
    uint32_t outside = 0;
    size_t i;
    for (i = 0; i < n; i++) {
        const int16_t x = in[i];
        const int64_t back = (int64_t)w->k1 * e1 + (int64_t)w->k2 * e2;
        const int64_t acc = pw_direct_sum(d, x, x1, x2, y1, y2) + back;
        const int64_t v = (acc + half) >> d->a_fraction;
        const uint32_t before = outside;
        const int16_t y = into_word(v, d->flags, &outside);
        e2 = e1;
        e1 = outside == before ? (int32_t)(acc - v * one) : 0;
        x2 = x1;
        x1 = x;
        y2 = y1;
        y1 = y;
        out[i] = y;
    }
    s->direct.x1 = x1;
    s->direct.x2 = x2;
    s->direct.y1 = y1;
    s->direct.y2 = y2;
    s->e1 = e1;
    s->e2 = e2;
    return outside;
}

int16_t pw_q15_shaped_settle(const pw_shaped *w, pw_q15_shaped_state *s, int16_t x)
{
    s->e1 = s->e2 = 0;
    return pw_q15_direct_settle(&w->direct, &s->direct, x);
}

/* (c1 u1 + c2 u2 + d x + half) >> c_fraction */
static int64_t coupled_output(const pw_coupled *w, int32_t u1, int32_t u2, int32_t x)
{
    const int64_t acc = (int64_t)w->c1 * u1 + (int64_t)w->c2 * u2 + (int64_t)w->d * x;
    return (acc + pw_half(w->c_fraction, w->flags)) >> w->c_fraction;
}

uint32_t pw_q15_coupled(const pw_coupled *w, pw_q15_coupled_state *s,
                        const int16_t *in, int16_t *out, size_t n)
{
    const int64_t half = pw_half(w->a_fraction, w->flags);
    int32_t u1 = s->u1, u2 = s->u2;
    uint32_t outside = 0;
    size_t i;
    for (i = 0; i < n; i++) {
        const int32_t x = in[i];
        const int64_t acc1 = (int64_t)w->sigma * u1 - (int64_t)w->omega * u2 + (int64_t)w->g * x;
        const int64_t acc2 = (int64_t)w->omega * u1 + (int64_t)w->sigma * u2;
        out[i] = into_word(coupled_output(w, u1, u2, x), w->flags, &outside);
        u1 = into_word((acc1 + half) >> w->a_fraction, w->flags, &outside);
        u2 = into_word((acc2 + half) >> w->a_fraction, w->flags, &outside);
    }
    s->u1 = (int16_t)u1;
    s->u2 = (int16_t)u2;
    return outside;
}

int16_t pw_q15_coupled_settle(const pw_coupled *w, pw_q15_coupled_state *s, int16_t x)
{
    s->u1 = clamp(pw_coupled_rest(w->u1_high, w->u1_low, w->steady_fraction, x));
    s->u2 = clamp(pw_coupled_rest(w->u2_high, w->u2_low, w->steady_fraction, x));
    return clamp(coupled_output(w, s->u1, s->u2, x));
}
