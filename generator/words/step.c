/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Precondition: pw_words_safe. Shifts of negative values are arithmetic in gcc and clang. */
#include "words/step.h"

static int64_t into_word(const pw_format *format, bool wrap, int64_t v, bool *outside,
                         uint64_t *clips)
{
    const int64_t span = INT64_C(1) << format->sample_bits, high = span / 2 - 1, low = -span / 2;
    *outside = v < low || v > high;
    if (!*outside)
        return v;
    if (clips)
        ++*clips;
    if (!wrap)
        return v < low ? low : high;
    int64_t rest = (v - low) % span;
    return low + (rest < 0 ? rest + span : rest);
}

static int64_t rounded(const pw_format *format, int64_t acc, int fraction)
{
    return (acc + (format->truncate ? 0 : INT64_C(1) << (fraction - 1))) >> fraction;
}

static int64_t aligned(const pw_words *w, int64_t p)
{
    int shift = w->b_fraction - w->a_fraction;
    return shift > 0 ? (p + (INT64_C(1) << (shift - 1))) >> shift : p * (INT64_C(1) << -shift);
}

static int64_t step_coupled(const pw_format *format, bool wrap, const pw_words *w, int64_t s[6],
                            int64_t x, uint64_t *clips)
{
    bool outside;
    int64_t y = w->c1 * s[0] + w->c2 * s[1] + w->d * x;
    int64_t u1 = w->sigma * s[0] - w->omega * s[1] + w->g * x;
    int64_t u2 = w->omega * s[0] + w->sigma * s[1];
    s[0] = into_word(format, wrap, rounded(format, u1, w->a_fraction), &outside, clips);
    s[1] = into_word(format, wrap, rounded(format, u2, w->a_fraction), &outside, clips);
    return into_word(format, wrap, rounded(format, y, w->c_fraction), &outside, clips);
}

int64_t pw_step_section(const pw_format *format, bool wrap, const pw_words *w, int64_t s[6],
                        int64_t x,
                        uint64_t *clips)
{
    bool outside;
    if (w->structure == PW_COUPLED)
        return step_coupled(format, wrap, w, s, x, clips);
    int64_t p = w->b[0] * x + w->b[1] * s[0] + w->b[2] * s[1];
    int64_t acc = aligned(w, p) - w->a[1] * s[2] - w->a[2] * s[3] + w->k1 * s[4] + w->k2 * s[5];
    int64_t v = rounded(format, acc, w->a_fraction);
    int64_t y = into_word(format, wrap, v, &outside, clips);
    s[1] = s[0], s[0] = x, s[3] = s[2], s[2] = y;
    if (w->structure == PW_DIRECT_1_SHAPED) {
        s[5] = s[4];
        s[4] = outside ? 0 : acc - v * (INT64_C(1) << w->a_fraction);
    }
    return y;
}
