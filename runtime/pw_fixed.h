/* SPDX-License-Identifier: 0BSD */
/* What pw_q15 and pw_q31 share: the tables of words and the arithmetic on them.
 *
 * A word w with fraction f stands for w 2^-f. A sample is an int16_t (1.0 is 2^15) or an int32_t
 * (1.0 is 2^31). Precondition of every kernel, seen to by the generator: the sum of |word| times
 * the largest sample, shifts and roundings included, stays below 2^63. Then no sum here leaves
 * int64_t, whatever the input and whatever the state. */
#ifndef PW_FIXED_H
#define PW_FIXED_H

#include "pw_runtime.h"

/* ---- tables: constant data, one a section ---- */

enum { PW_TRUNCATE = 1, PW_WRAP = 2 };   /* flags; neither: round to nearest, saturate */

/* y = b x. 8 bytes. */
typedef struct pw_gain {
    int32_t b;
    uint8_t b_fraction, a_fraction;      /* 0..62, 0..31: of b; of the accumulator */
    uint8_t flags;
} pw_gain;

/* y = b0 x + b1 x1 + b2 x2 - a1 y1 - a2 y2. A first-order section has b2 = a2 = 0. 24 bytes. */
typedef struct pw_direct {
    int32_t b0, b1, b2, a1, a2;
    uint8_t b_fraction, a_fraction;      /* 0..62, 0..31: of b; of a and of the accumulator */
    uint8_t flags;
} pw_direct;

/* The same with the last two rounding errors e fed back: + k1 e1 + k2 e2. 32 bytes. */
typedef struct pw_shaped {
    pw_direct direct;
    int32_t k1, k2;
} pw_shaped;

/* A rotation: y = c1 u1 + c2 u2 + d x from the old u, then u1 = sigma u1 - omega u2 + g x and
 * u2 = omega u1 + sigma u2 from the old u. 44 bytes. The steady state for a constant x is
 * u1 = (u1_high 2^31 + u1_low) 2^-steady_fraction x, u2 alike; lows 0..2^31-1, |highs| <= 2^30. */
typedef struct pw_coupled {
    int32_t sigma, omega, g, c1, c2, d;
    int32_t u1_high, u1_low, u2_high, u2_low;
    uint8_t c_fraction, a_fraction;      /* 0..31: of c1, c2, d; of sigma, omega, g */
    uint8_t steady_fraction;             /* 32..61 */
    uint8_t flags;
} pw_coupled;

/* ---- arithmetic ---- */

/* Half of one step of a word with this fraction; 0 to truncate. */
static inline int64_t pw_half(unsigned fraction, unsigned flags)
{
    return (flags & PW_TRUNCATE) || fraction == 0 ? 0 : (int64_t)1 << (fraction - 1);
}

/* p brought from 2^-b_fraction to 2^-a_fraction: exact to the left, half up to the right. */
static inline int64_t pw_align(int64_t p, unsigned b_fraction, unsigned a_fraction)
{
    if (b_fraction > a_fraction) {
        const unsigned right = b_fraction - a_fraction;
        return (p + ((int64_t)1 << (right - 1))) >> right;
    }
    return p * ((int64_t)1 << (a_fraction - b_fraction));
}

/* The accumulator of a direct section, before rounding. */
static inline int64_t pw_direct_sum(const pw_direct *w, int32_t x, int32_t x1, int32_t x2,
                                    int32_t y1, int32_t y2)
{
    const int64_t p = (int64_t)w->b0 * x + (int64_t)w->b1 * x1 + (int64_t)w->b2 * x2;
    return pw_align(p, w->b_fraction, w->a_fraction) - (int64_t)w->a1 * y1 - (int64_t)w->a2 * y2;
}

/* The y at which a direct section rests for a constant x, before any clamp: the nearest to p / D,
 * half up, or its floor to truncate; D = 2^a_fraction + a1 + a2. 0 for an integrator, D = 0. */
static inline int64_t pw_direct_rest(const pw_direct *w, int32_t x)
{
    const int64_t b = (int64_t)w->b0 + w->b1 + w->b2;
    const int64_t d = ((int64_t)1 << w->a_fraction) + w->a1 + w->a2;
    int64_t p = pw_align(b * x, w->b_fraction, w->a_fraction), q;
    if (d <= 0) return 0;
    if (!(w->flags & PW_TRUNCATE)) p += d >> 1;
    q = p / d;
    return p % d < 0 ? q - 1 : q;
}

/* (high 2^31 + low) x 2^-fraction to the nearest, half up: the low 31 bits of the product cannot
 * reach the rounding, since fraction >= 32. */
static inline int64_t pw_coupled_rest(int32_t high, int32_t low, unsigned fraction, int32_t x)
{
    const int64_t product = (int64_t)high * x + (((int64_t)low * x) >> 31);
    return (product + ((int64_t)1 << (fraction - 32))) >> (fraction - 31);
}

#endif
