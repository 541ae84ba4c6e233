/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Preferred numbers of IEC 60063. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "analog/sensitivity.h"

/* E24 as the standard lists it; E12, E6 and E3 are every second, fourth and eighth. */
static const int e24[] = {10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30,
                          33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91};

/* Value i of a series of n, 1 to 10: E48, E96 and E192 are rounded powers but for one value. */
static double member(int n, int i)
{
    if (n <= 24) return e24[i * (24 / n)] / 10.0;
    double value = rint(100 * pow(10, (double)i / n)) / 100;
    return value == 9.19 ? 9.20 : value;
}

double pw_series_nearest(const char *series, double value)
{
    int n = series && series[0] == 'E' ? atoi(series + 1) : 0;
    if (n < 3 || 192 % n || (n <= 24 && 24 % n)) return value;
    int decade = (int)floor(log10(value));
    double best = value, least = INFINITY;
    for (int d = decade - 1; d <= decade + 1; d++)
        for (int i = 0; i < n; i++) {
            /* a quotient or product of exact numbers reads as the decimal it stands for */
            double power = pow(10, abs(d)), m = d < 0 ? member(n, i) / power : member(n, i) * power;
            double far = fabs(log(m / value));
            if (far < least) {
                least = far;
                best = m;
            }
        }
    return best;
}
