/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Method: s = c (z - 1)/(z + 1) put into K prod(s - z_i)/prod(s - p_i), root by root:
 *     s - s0 = ((c - s0) z - (c + s0)) / (z + 1),
 * so each root moves to (c + s0)/(c - s0), leaves c - s0 in the factor and 1/(z + 1) behind; what
 * remains of those are the zeros at -1. Since a root carries its own c, each-section is the same
 * code: every root of a section has the constant of that section, which puts the whole section's
 * analog response at 0, at infinity and at its own natural frequency where it was.
 * Special cases: a real zero at s0 = c has c - s0 = 0: its factor is -2c/(z + 1), no zero.
 * Accuracy: in long double, rounded once: each part of a root to half a unit in its last place
 * where neither part of (c + s0)/(c - s0) cancels; real roots always; |z| - 1 keeps its sign.
 * Source: the trapezoidal rule as a substitution, A. Tustin, 1947; prewarping is common
 * practice. */
#include <math.h>

#include "discrete/grouping.h"
#include "discrete/longs.h"
#include "discrete/transforms.h"

long double pw_bilinear_constant(double rate_hz, double prewarp_hz)
{
    long double f = prewarp_hz, rate = rate_hz;
    if (!(f > 0)) return 2 * rate;
    long double w = 2 * PW_PIL * f;
    if (f > rate / 4)   /* tan near its pole: rate/2 - f is exact there */
        return w * tanl(PW_PIL * (rate / 2 - f) / rate);
    return w / tanl(PW_PIL * f / rate);
}

/* (c + s)/(c - s) = (c^2 - |s|^2 + 2j c Im s) / |c - s|^2; c^2 - |s|^2 as a product of differences
 * when s is real, so that a real root loses nothing. */
static double complex move(double complex s, long double c)
{
    long double x = creal(s), y = cimag(s);
    if (y == 0) return (double)((c + x) / (c - x));
    long double size = hypotl(x, y), below = (c - x) * (c - x) + y * y;
    return pw_complex((double)((c - size) * (c + size) / below), (double)(2 * c * y / below));
}

/* What s - s0 leaves in the factor; its conjugate partner multiplies separately. */
static pw_long left_behind(double complex s, long double c)
{
    return (pw_long){c - creall(s), -cimagl(s)};
}

static void bilinear(const pw_roots *analog, const long double *pole_c, const long double *zero_c,
                     pw_roots *out)
{
    pw_roots z = {.poles = analog->poles};
    pw_long gain = {analog->factor, 0};
    int lost = 0;                            /* zeros that went to infinity */
    for (int i = 0; i < analog->zeros; i++) {
        double complex s = analog->zero[i];
        bool gone = cimag(s) == 0 && (long double)creal(s) == zero_c[i];
        gain = pw_long_times(gain, gone ? (pw_long){-2 * zero_c[i], 0} : left_behind(s, zero_c[i]));
        if (gone) lost++;
        else z.zero[z.zeros++] = move(s, zero_c[i]);
    }
    for (int i = 0; i < analog->poles; i++) {
        gain = pw_long_over(gain, left_behind(analog->pole[i], pole_c[i]));
        z.pole[i] = move(analog->pole[i], pole_c[i]);
    }
    while (z.zeros + lost < z.poles) z.zero[z.zeros++] = -1;
    z.factor = gain.re;
    *out = z;
}

void pw_bilinear(const pw_roots *analog, double rate_hz, double prewarp_hz, pw_roots *out)
{
    long double c[PW_MAX_ROOTS];
    for (int i = 0; i < PW_MAX_ROOTS; i++) c[i] = pw_bilinear_constant(rate_hz, prewarp_hz);
    bilinear(analog, c, c, out);
}

void pw_bilinear_each(const pw_roots *analog, double rate_hz, pw_roots *out)
{
    long double pole_c[PW_MAX_ROOTS], zero_c[PW_MAX_ROOTS];
    pw_groups groups;
    pw_group_analog(analog, &groups);
    for (int g = 0; g < groups.count; g++) {
        const pw_group *group = &groups.list[g];
        double hz = pw_group_natural_hz(analog, group);
        if (hz >= rate_hz / 2) hz = 0;       /* cannot be kept in place: plain bilinear */
        long double c = pw_bilinear_constant(rate_hz, hz);
        for (int i = 0; i < group->poles; i++) pole_c[group->pole[i]] = c;
        for (int i = 0; i < group->zeros; i++) zero_c[group->zero[i]] = c;
    }
    bilinear(analog, pole_c, zero_c, out);
}

double pw_dominant_corner(const pw_roots *analog, double rate_hz)
{
    double best_damping = INFINITY, best_hz = 0;
    for (int i = 0; i < analog->poles; i++) {
        double size = cabs(analog->pole[i]), hz = size / (2 * M_PI);
        if (size == 0 || hz >= rate_hz / 2) continue;
        double damping = -creal(analog->pole[i]) / size;
        bool tie = fabs(damping - best_damping) <= 1e-9;
        if ((tie && hz > best_hz) || (!tie && damping < best_damping)) {
            best_damping = damping;
            best_hz = hz;
        }
    }
    return best_hz;
}
