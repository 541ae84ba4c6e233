/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Complex numbers in long double as two parts, without the NaN checks of C's own operators. */
#ifndef PW_DISCRETE_LONGS_H
#define PW_DISCRETE_LONGS_H

#include <complex.h>

#define PW_PIL 3.141592653589793238462643383279502884L

typedef struct pw_long { long double re, im; } pw_long;

static inline double complex pw_complex(double re, double im)
{
    return __builtin_complex(re, im);
}

static inline pw_long pw_long_times(pw_long a, pw_long b)
{
    return (pw_long){a.re * b.re - a.im * b.im, a.re * b.im + a.im * b.re};
}

static inline long double pw_long_square(pw_long a) { return a.re * a.re + a.im * a.im; }

static inline pw_long pw_long_over(pw_long a, pw_long b)
{
    long double scale = 1 / pw_long_square(b);   /* one slow division instead of two */
    pw_long top = pw_long_times(a, (pw_long){b.re, -b.im});
    return (pw_long){top.re * scale, top.im * scale};
}

#endif
