/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Matched-z: every finite root s becomes exp(s T); and the matching of gains, which any transform
 * may ask for.
 * Special cases: s = 0 gives exactly 1. Where exp(s T) underflows the root is exactly 0. A zero so
 * far to the right that exp(s T) overflows is a constant -exp(s T): it is dropped with its sign.
 * Accuracy: exp, sine and cosine in long double, rounded once to double.
 * Source: the two conventions for zeros at infinity (at z = -1, or left at infinity for delays)
 * are both common practice; so is matching at one frequency. */
#include <math.h>

#include "discrete/errors.h"
#include "discrete/longs.h"
#include "discrete/transforms.h"

/* exp(s T), with the upper root of a pair kept upper however often it wraps. */
static double complex move(double complex s, double rate_hz)
{
    long double size = expl(creall(s) / rate_hz), angle = cimagl(s) / rate_hz;
    if (cimag(s) == 0) return (double)size;
    return pw_complex((double)(size * cosl(angle)), (double)(size * fabsl(sinl(angle))));
}

/* Moves root i of the list, and its conjugate; returns how many roots that were. */
static int move_pair(const double complex *root, int i, double rate_hz, double complex *out)
{
    out[0] = move(root[i], rate_hz);
    if (cimag(root[i]) == 0) return 1;
    out[1] = conj(out[0]);
    if (cimag(out[0]) == 0) out[0] = out[1] = creal(out[0]);
    return 2;
}

void pw_matched(const pw_roots *analog, double rate_hz, pw_infinity at_infinity, pw_roots *out)
{
    pw_roots z = {.poles = analog->poles, .factor = analog->factor};
    for (int i = 0; i < analog->poles;) i += move_pair(analog->pole, i, rate_hz, z.pole + i);
    int kept = 0;
    for (int i = 0; i < analog->zeros;) {
        int n = move_pair(analog->zero, i, rate_hz, z.zero + z.zeros);
        i += n;
        if (cabs(z.zero[z.zeros]) < 1e300) z.zeros += n;
        else {
            kept += n;
            if (n == 1) z.factor = -z.factor;
        }
    }
    int at_infinity_count = analog->poles - analog->zeros;
    if (at_infinity == PW_INFINITY_KEEP) kept += at_infinity_count;
    if (at_infinity == PW_INFINITY_KEEP_ONE && at_infinity_count > 0) kept++;
    while (z.zeros + kept < z.poles) z.zero[z.zeros++] = -1;
    *out = z;
}

static double analog_level(const void *context, double hz)
{
    return cabs(pw_analog_at(context, hz));
}

double pw_gain_place(const pw_roots *analog, const double band_hz[2])
{
    double low = band_hz[0];
    if (!(low > 0)) low = band_hz[1] * 1e-4;   /* off a pole at 0 */
    pw_grid grid;
    pw_grid_make(&grid, low, band_hz[1]);
    pw_grid_add_analog(&grid, analog);
    pw_grid_sort(&grid);
    pw_error_peak top = pw_grid_peak(&grid, analog_level, analog);
    pw_grid_free(&grid);
    double at_zero = analog_level(analog, 0);
    bool zero_is_as_high = isfinite(at_zero) && fabs(at_zero - top.max) <= 1.16e-2 * top.max;
    return zero_is_as_high ? 0 : top.at_hz;
}

bool pw_match_gain(const pw_roots *analog, double rate_hz, double hz, pw_roots *z)
{
    pw_roots unit = *z;
    unit.factor = 1;
    double wanted = cabs(pw_analog_at(analog, hz)), has = cabs(pw_digital_at(&unit, rate_hz, hz));
    if (!(wanted > 0) || !(has > 0) || !isfinite(wanted) || !isfinite(has)) return false;
    z->factor = copysignl((long double)wanted / has, z->factor);
    return true;
}
