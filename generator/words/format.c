/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "words/inner.h"

#include <math.h>

typedef unsigned __int128 wide;

pw_format pw_format_of(const pw_arithmetic *arithmetic)
{
    pw_format f = {.sample = arithmetic->sample, .truncate = arithmetic->truncate, .largest = 1};
    f.fixed = f.sample == PW_Q15 || f.sample == PW_Q31;
    if (!f.fixed)
        return f;
    f.sample_bits = f.sample == PW_Q15 ? 16 : 32;
    f.word_bits = arithmetic->coefficient_bits;
    if (f.word_bits == 0)
        f.word_bits = f.sample_bits;
    f.lsb = ldexp(1, 1 - f.sample_bits);
    f.largest = 1 - f.lsb;
    return f;
}

static wide size_of(int64_t v) { return v < 0 ? (wide)-v : (wide)v; }

/* Largest magnitude of a direct accumulator, the half step of its rounding included, over every
 * state and input; *inner that of the unshifted products of b. */
static wide direct_reach(const pw_format *format, const pw_words *w, wide *inner)
{
    wide sample = (wide)1 << (format->sample_bits - 1), b = 0;
    wide a = size_of(w->a[1]) + size_of(w->a[2]);
    int shift = w->b_fraction - w->a_fraction;
    for (int k = 0; k < 3; k++)
        b += size_of(w->b[k]);
    b *= sample;
    *inner = shift > 0 ? b + ((wide)1 << (shift - 1)) : b;
    b = shift > 0 ? (*inner >> shift) + 1 : b << -shift;
    wide feedback = (size_of(w->k1) + size_of(w->k2)) << w->a_fraction;
    return b + a * sample + feedback + ((wide)1 << (w->a_fraction - 1));
}

bool pw_words_safe(const pw_format *format, const pw_words *w)
{
    const wide limit = (wide)1 << 63;
    wide sample = (wide)1 << (format->sample_bits - 1), inner;
    if (w->structure != PW_COUPLED)
        return direct_reach(format, w, &inner) < limit && inner < limit;
    wide out = size_of(w->c1) + size_of(w->c2) + size_of(w->d);
    wide first = size_of(w->sigma) + size_of(w->omega) + size_of(w->g);
    return out * sample + ((wide)1 << (w->c_fraction - 1)) < limit
        && first * sample + ((wide)1 << (w->a_fraction - 1)) < limit;
}

bool pw_words_fit_32(const pw_format *format, const pw_words *w)
{
    wide inner;
    return w->structure != PW_COUPLED && format->sample_bits == 16 && format->word_bits == 16
        && w->b_fraction == w->a_fraction && direct_reach(format, w, &inner) < (wide)1 << 31;
}

static void realise_coupled(pw_words *w)
{
    long double s = ldexpl(w->sigma, -w->a_fraction), o = ldexpl(w->omega, -w->a_fraction);
    long double g = ldexpl(w->g, -w->a_fraction), d = ldexpl(w->d, -w->c_fraction);
    long double c1 = ldexpl(w->c1, -w->c_fraction), c2 = ldexpl(w->c2, -w->c_fraction);
    w->realised_a[0] = 1;
    w->realised_a[1] = (double)(-2 * s);
    w->realised_a[2] = (double)(s * s + o * o);
    w->realised_b[0] = (double)d;
    w->realised_b[1] = (double)(g * c1 - 2 * s * d);
    w->realised_b[2] = (double)(d * (s * s + o * o) + g * (c2 * o - c1 * s));
}

void pw_words_realise(const pw_format *format, pw_words *w)
{
    if (w->structure == PW_COUPLED) {
        realise_coupled(w);
        return;
    }
    for (int k = 0; k < 3; k++) {
        w->realised_b[k] = format->fixed ? ldexp(w->b[k], -w->b_fraction) : w->fb[k];
        w->realised_a[k] = format->fixed ? ldexp(w->a[k], -w->a_fraction) : w->fa[k];
    }
    w->realised_a[0] = 1;
}
