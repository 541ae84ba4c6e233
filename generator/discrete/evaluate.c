/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Digital responses from roots and from coefficients.
 * Method: with z = e^(j theta), z - r is taken as (z - 1) - (r - 1) or (z + 1) - (r + 1),
 *     z - 1 = 2j sin(theta/2) e^(j theta/2),   z + 1 = 2 cos(theta/2) e^(j theta/2),
 * all in long double, so that a low corner at a high rate costs no digits.
 * Group delay in samples of one root: Re(z/(z - r)) = 1/2 + (1 - |r|^2)/(2 |z - r|^2).
 * Special cases: at 0 Hz roots at 1 cancel one another; what is left makes 0 or infinity.
 * Accuracy: for the stored roots, a few units of double unless a root is within 1e-16 of z. */
#include <float.h>
#include <math.h>

#include "discrete/digital.h"
#include "discrete/longs.h"

/* e^(j theta) - 1 and + 1; exact zeros at 0 and at half the rate. */
typedef struct circle_point { pw_long less, more; } circle_point;

static circle_point point_at(double rate_hz, double hz)
{
    long double turn = (long double)hz / rate_hz;              /* theta = 2 pi turn */
    long double half_sin = sinl(PW_PIL * turn), half_cos = sinl(PW_PIL * (0.5L - turn));
    return (circle_point){
        .less = {-2 * half_sin * half_sin, 2 * half_sin * half_cos},
        .more = {2 * half_cos * half_cos, 2 * half_sin * half_cos},
    };
}

static pw_long from_root(circle_point z, double complex r)
{
    long double x = creal(r), y = cimag(r);
    if (x >= 0) return (pw_long){z.less.re - (x - 1), z.less.im - y};
    return (pw_long){z.more.re - (x + 1), z.more.im - y};
}

double complex pw_digital_at(const pw_roots *z, double rate_hz, double hz)
{
    circle_point at = point_at(rate_hz, hz);
    pw_long value = {z->factor, 0};
    int order = 0;                           /* zeros less poles exactly here */
    for (int i = 0; i < z->poles; i++) {
        if (i < z->zeros) {
            pw_long up = from_root(at, z->zero[i]);
            if (pw_long_square(up) == 0) order++;
            else value = pw_long_times(value, up);
        }
        pw_long down = from_root(at, z->pole[i]);
        if (pw_long_square(down) == 0) order--;
        else value = pw_long_over(value, down);
    }
    if (order > 0) return 0;
    if (order < 0) return pw_complex(INFINITY, 0);
    return pw_complex((double)value.re, (double)value.im);
}

/* Re(z/(z - r)); on the unit circle, to rounding, it is 1/2 but at the root itself. */
static long double delay_of(circle_point z, double complex r)
{
    long double x = creal(r), y = cimag(r);
    long double inside = (1 - fabsl(x)) * (1 + fabsl(x)) - y * y;     /* 1 - |r|^2 */
    if (fabsl(inside) < 4 * DBL_EPSILON) return 0.5L;
    return 0.5L + inside / (2 * pw_long_square(from_root(z, r)));
}

double pw_digital_group_delay(const pw_roots *z, double rate_hz, double hz)
{
    circle_point at = point_at(rate_hz, hz);
    long double samples = 0;
    for (int i = 0; i < z->poles; i++) samples += delay_of(at, z->pole[i]);
    for (int i = 0; i < z->zeros; i++) samples -= delay_of(at, z->zero[i]);
    return (double)(samples / rate_hz);
}

/* c0 z^2 + c1 z + c2 about z = side (1 or -1), d = z - side. */
static pw_long about(const double c[3], long double side, pw_long d)
{
    long double sum = (long double)c[0] + side * c[1] + c[2];
    long double slope = 2 * side * (long double)c[0] + c[1];
    pw_long inner = {c[0] * d.re + slope, c[0] * d.im};
    pw_long value = pw_long_times(inner, d);
    return (pw_long){value.re + sum, value.im};
}

static pw_long distance(double complex z, long double side)
{
    return (pw_long){creal(z) - side, cimag(z)};
}

double complex pw_section_at(const double b[3], const double a[3], double complex z)
{
    long double side = creal(z) >= 0 ? 1 : -1;
    pw_long d = distance(z, side), up = about(b, side, d), down = about(a, side, d);
    if (pw_long_square(up) == 0) return 0;
    if (pw_long_square(down) == 0) return pw_complex(INFINITY, 0);
    pw_long value = pw_long_over(up, down);
    return pw_complex((double)value.re, (double)value.im);
}

/* -d(phase)/d(theta) of c0 + c1/z + c2/z^2 on the unit circle:
 * Re(sum k c_k z^-k / sum c_k z^-k) = 2 - Re(z P'(z)/P(z)), P = c0 z^2 + c1 z + c2. */
static long double polynomial_delay(const double c[3], double complex z, long double side,
                                    pw_long d)
{
    long double slope = 2 * side * (long double)c[0] + c[1];
    pw_long rise = {2 * c[0] * d.re + slope, 2 * c[0] * d.im};
    pw_long value = about(c, side, d);
    if (pw_long_square(value) == 0) return 0;
    pw_long ratio = pw_long_over(pw_long_times((pw_long){creal(z), cimag(z)}, rise), value);
    return 2 - ratio.re;
}

double pw_section_group_delay(const double b[3], const double a[3], double complex z)
{
    long double side = creal(z) >= 0 ? 1 : -1;
    pw_long d = distance(z, side);
    return (double)(polynomial_delay(b, z, side, d) - polynomial_delay(a, z, side, d));
}
