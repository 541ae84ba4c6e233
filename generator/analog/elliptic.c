/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Elliptic (Cauer) prototypes by theta functions.
 *
 * Method: |H|^2 = 1/(1 + e^2 R(w)^2) with w = cd(u K, k) and R = cd(n u K1, k1). The two moduli are
 * tied by the nome, q1 = q^n, and q1 follows from k1 = e/e_stop by the arithmetic-geometric mean;
 * cd is a quotient of two theta series in q with no cancellation; the imaginary shift that puts the
 * poles where e R = +-j is a Carlson integral, free of cancellation too.
 * Special cases: order 1 has no zeros and is Chebyshev's. Real poles and zeros on the axis are
 * exactly so.
 * Accuracy: measured 1e-30 for q <= 0.9, more than is kept.
 * Source: Abramowitz and Stegun 16.27-16.28, 16.38, 17.3, 17.6 (theta functions, nome, AGM);
 * Antoniou, "Digital Filters" (1979) for the design by nomes; Carlson 1979 for R_F. */
#include "analog/wide.h"
#include "analog/prototype.h"

#define LARGEST_NOME 0.9F128

static pw_wide agm(pw_wide a, pw_wide b)
{
    for (int i = 0; i < 60 && fabsf128(a - b) > 4 * PW_WIDE_EPSILON * a; i++) {
        pw_wide mean = (a + b) / 2;
        b = sqrtf128(a * b);
        a = mean;
    }
    return a;
}

/* Carlson's R_F(x, y, z) by duplication, ended with the series to the fifth order. */
static pw_wide carlson(pw_wide x, pw_wide y, pw_wide z)
{
    pw_wide mean = (x + y + z) / 3, dx = 1, dy = 1;
    for (int i = 0; i < 100; i++) {
        dx = 1 - x / mean;
        dy = 1 - y / mean;
        if (fmaxf128(fabsf128(dx), fmaxf128(fabsf128(dy), fabsf128(dx + dy))) < 1e-7F128)
            break;
        pw_wide l = sqrtf128(x * y) + sqrtf128(x * z) + sqrtf128(y * z);
        x = (x + l) / 4;
        y = (y + l) / 4;
        z = (z + l) / 4;
        mean = (x + y + z) / 3;
    }
    pw_wide dz = -dx - dy, e2 = dx * dy - dz * dz, e3 = dx * dy * dz;
    return (1 - e2 / 10 + e3 / 14 + e2 * e2 / 24 - 3 * e2 * e3 / 44) / sqrtf128(mean);
}

/* theta_2(v, q) / q^(1/4) = 2 sum q^(m(m+1)) cos((2m+1) v) and theta_3(v, q). */
static void thetas(pw_wide_complex v, pw_wide q, pw_wide_complex *two, pw_wide_complex *three)
{
    *two = 0;
    *three = 1;
    for (int m = 0; m < 200; m++) {
        pw_wide_complex second = 2 * powf128(q, m * (m + 1)) * ccosf128((2 * m + 1) * v);
        pw_wide_complex third = 2 * powf128(q, (m + 1) * (m + 1)) * ccosf128((2 * m + 2) * v);
        *two += second;
        *three += third;
        if (cabsf128(second) + cabsf128(third) < PW_WIDE_EPSILON * PW_WIDE_EPSILON)
            break;
    }
}

/* cd(u K) at u = 2 v / pi: theta_3(0)/theta_2(0) * theta_2(v)/theta_3(v). */
static pw_wide_complex cd(pw_wide_complex v, pw_wide q)
{
    pw_wide_complex two, three, two0, three0;
    thetas(v, q, &two, &three);
    thetas(0, q, &two0, &three0);
    return three0 / two0 * (two / three);
}

/* The zeros are at 1/(k cd), k = (theta_2(0)/theta_3(0))^2. */
static pw_wide zero_at(pw_wide v, pw_wide q)
{
    pw_wide_complex two0, three0;
    thetas(0, q, &two0, &three0);
    pw_wide ratio = crealf128(three0 / two0);
    return ratio * ratio / (sqrtf128(q) * crealf128(cd(v, q)));
}

/* One pole: w = cd((u - j shift) K), s = j w, taken to the upper left; exactly real where u = 1. */
static pw_wide_complex pole_at(pw_wide v, pw_wide shift, pw_wide q, bool real)
{
    pw_wide_complex w = cd(PW_WIDE_COMPLEX(v, -PW_WIDE_PI / 2 * shift), q);
    pw_wide re = -fabsf128(cimagf128(w)), im = fabsf128(crealf128(w));
    return real ? PW_WIDE_COMPLEX(re, 0) : PW_WIDE_COMPLEX(re, im);
}

bool pw_prototype_elliptic(int order, double ripple_db, double stopband_db, pw_prototype *out)
{
    if (order == 1) {
        pw_prototype_chebyshev(order, ripple_db, out);
        return true;
    }
    pw_wide e2 = pw_depth(ripple_db), s2 = pw_depth(stopband_db);
    pw_wide k1 = sqrtf128(e2 / s2);
    pw_wide kp1 = sqrtf128((s2 - e2) / s2);
    pw_wide q = expf128(-PW_WIDE_PI * agm(1, kp1) / agm(1, k1) / order);
    if (!(q <= LARGEST_NOME))
        return false;
    pw_wide shift = carlson(e2, e2 + k1 * k1, 1 + e2) * 2 * agm(1, kp1) / (PW_WIDE_PI * order);
    *out = (pw_prototype){.poles = (order + 1) / 2, .zeros = order / 2,
                          .dc = order % 2 ? 1 : 1 / sqrtf128(1 + e2)};
    for (int k = 0; k < out->poles; k++) {          /* u from near 1 (low Q) down to near 0 */
        pw_wide u = (pw_wide)(2 * (out->poles - k) - 1) / order, v = PW_WIDE_PI / 2 * u;
        out->pole[k] = pole_at(v, shift, q, order % 2 && k == 0);
    }
    for (int k = 0; k < out->zeros; k++) {
        pw_wide u = (pw_wide)(2 * (out->zeros - k) - 1) / order;
        out->zero[k] = PW_WIDE_COMPLEX(0, zero_at(PW_WIDE_PI / 2 * u, q));
    }
    return true;
}
