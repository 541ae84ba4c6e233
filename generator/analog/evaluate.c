/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analog/rootlist.h"

#include <math.h>

#define TWO_PI 6.28318530717958647692528676655900577L

/* A zero over a pole at a time, so that 64 fast roots stay in range on the way. */
long double complex pw_roots_product_at(const pw_roots *roots, long double complex x)
{
    long double complex product = 1;
    int most = roots->poles > roots->zeros ? roots->poles : roots->zeros;
    for (int i = 0; i < most; i++) {
        if (i < roots->zeros)
            product *= x - (long double complex)roots->zero[i];
        if (i < roots->poles) {
            long double complex away = x - (long double complex)roots->pole[i];
            if (away == 0)
                return INFINITY;
            product /= away;
        }
    }
    return product;
}

double complex pw_roots_at(const pw_roots *roots, double complex x)
{
    return (double complex)(roots->factor * pw_roots_product_at(roots, x));
}

/* arg(re + j im) that goes on along the imaginary axis: beside a root to the right it would jump by a turn
 * where x passes the root's height. */
static long double angle_beside(double complex root, long double re, long double im)
{
    long double angle = atan2l(im, re);
    if (re >= 0 || cimag(root) == 0) return angle;
    if (cimag(root) > 0 && im >= 0) return angle - TWO_PI;
    return cimag(root) < 0 && im <= 0 ? angle + TWO_PI : angle;
}

void pw_roots_log_at(const pw_roots *roots, double complex x, double *log_magnitude, double *phase)
{
    long double size = logl(fabsl(roots->factor)), turn = roots->factor < 0 ? TWO_PI / 2 : 0;
    for (int i = 0; i < roots->zeros + roots->poles; i++) {
        bool zero = i < roots->zeros;
        double complex root = zero ? roots->zero[i] : roots->pole[i - roots->zeros];
        long double re = (long double)creal(x) - creal(root);
        long double im = (long double)cimag(x) - cimag(root);
        long double log_size = logl(hypotl(re, im)), angle = angle_beside(root, re, im);
        size += zero ? log_size : -log_size;
        turn += zero ? angle : -angle;
    }
    *log_magnitude = (double)size;
    *phase = (double)turn;
}

double complex pw_analog_at(const pw_roots *analog, double hz)
{
    return (double complex)(analog->factor * pw_roots_product_at(analog, CMPLXL(0, TWO_PI * hz)));
}

/* d(arg(jw - r))/dw = -re(r) / |jw - r|^2; a root on the axis makes a jump, not a slope. */
static long double slope(double complex root, long double w)
{
    long double re = creal(root), im = w - cimag(root);
    return re == 0 ? 0 : -re / (re * re + im * im);
}

double pw_analog_group_delay(const pw_roots *analog, double hz)
{
    long double delay = 0, w = TWO_PI * hz;
    for (int i = 0; i < analog->poles; i++)
        delay += slope(analog->pole[i], w);
    for (int i = 0; i < analog->zeros; i++)
        delay -= slope(analog->zero[i], w);
    return (double)delay;
}

int pw_analog_integrators(const pw_roots *analog)
{
    int count = 0;
    for (int i = 0; i < analog->poles; i++)
        count += analog->pole[i] == 0;
    return count;
}
