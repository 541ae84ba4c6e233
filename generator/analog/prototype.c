/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The families with a closed form, and Bessel's.
 * Sources: Butterworth 1930; Linkwitz 1976 (a Butterworth stage squared); for Chebyshev's two
 * Daniels, "Approximation Methods for Electronic Filter Design" (1974); for Bessel's Thomson 1949
 * and Storch 1954. */
#include "analog/wide.h"
#include "analog/polynomial.h"
#include "analog/prototype.h"

pw_wide pw_depth(double db)
{
    return expm1f128(db * logf128(10) / 10);
}

/* The angle of pole k from the negative real axis, k = 0 nearest to it, n equally spaced. */
static pw_wide angle(int order, int k)
{
    return PW_WIDE_PI * (2 * k + (order % 2 == 0)) / (2 * (pw_wide)order);
}

void pw_prototype_butterworth(int order, pw_prototype *out)
{
    *out = (pw_prototype){.poles = (order + 1) / 2, .dc = 1};
    for (int k = 0; k < out->poles; k++)
        out->pole[k] = PW_WIDE_COMPLEX(-cosf128(angle(order, k)), sinf128(angle(order, k)));
}

void pw_prototype_linkwitz_riley(int order, pw_prototype *out)
{
    pw_prototype half;
    pw_prototype_butterworth(order / 2, &half);
    *out = (pw_prototype){.dc = 1};
    for (int k = 0; k < half.poles; k++)
        for (int twice = 0; twice < 2; twice++)
            out->pole[out->poles++] = half.pole[k];
}

/* (1 + w^2/c^2)^-n is a half at w = 1. */
void pw_prototype_critically_damped(int order, pw_prototype *out)
{
    *out = (pw_prototype){.poles = order, .dc = 1};
    for (int k = 0; k < order; k++)
        out->pole[k] = -1 / sqrtf128(expm1f128(logf128(2) / order));
}

/* Poles on the ellipse with half axes sinh(v) and cosh(v). */
static void ellipse(int order, pw_wide v, pw_prototype *out)
{
    out->poles = (order + 1) / 2;
    for (int k = 0; k < out->poles; k++)
        out->pole[k] = PW_WIDE_COMPLEX(-sinhf128(v) * cosf128(angle(order, k)),
                                       coshf128(v) * sinf128(angle(order, k)));
}

/* |H|^2 = 1 / (1 + e^2 T_n(w)^2). */
void pw_prototype_chebyshev(int order, double ripple_db, pw_prototype *out)
{
    pw_wide e = sqrtf128(pw_depth(ripple_db));
    *out = (pw_prototype){.dc = order % 2 ? 1 : 1 / sqrtf128(1 + e * e)};
    ellipse(order, asinhf128(1 / e) / order, out);
}

/* |H|^2 = 1 / (1 + 1 / (e^2 T_n(1/w)^2)): the reciprocals of Chebyshev poles, and zeros where
 * T_n(1/w) is 0. */
void pw_prototype_inverse_chebyshev(int order, double stopband_db, pw_prototype *out)
{
    *out = (pw_prototype){.dc = 1, .zeros = order / 2};
    ellipse(order, asinhf128(sqrtf128(pw_depth(stopband_db))) / order, out);
    for (int k = 0; k < out->poles; k++) {
        pw_wide_complex inverse = 1 / out->pole[k];
        out->pole[k] = PW_WIDE_COMPLEX(crealf128(inverse), fabsf128(cimagf128(inverse)));
    }
    for (int k = 0; k < out->zeros; k++)
        out->zero[k] = PW_WIDE_COMPLEX(0, 1 / sinf128(angle(order, order % 2 + k)));
}

/* The reverse Bessel polynomial: the coefficient of s^k is (2n-k)! / (2^(n-k) k! (n-k)!), a whole
 * number below 2^79 for n <= 20, so exact here. Poles by descending damping. */
bool pw_prototype_bessel(int order, pw_prototype *out)
{
    pw_wide c[PW_MAX_ROOTS + 1];
    pw_wide_complex z[PW_MAX_ROOTS];
    *out = (pw_prototype){.dc = 1};
    c[0] = 1;
    for (int k = order; k > 0; k--)
        c[order - k + 1] = c[order - k] * k * (2 * order - k + 1) / (2 * (order - k + 1));
    if (!pw_wide_roots(c, order, z))
        return false;
    for (int i = 0; i < order; i++) {
        if (cimagf128(z[i]) < 0)
            continue;
        int at = out->poles++;
        for (; at > 0 && cargf128(out->pole[at - 1]) < cargf128(z[i]); at--)
            out->pole[at] = out->pole[at - 1];
        out->pole[at] = z[i];
    }
    return true;
}

void pw_prototype_scale(pw_prototype *prototype, pw_wide by)
{
    for (int k = 0; k < prototype->poles; k++)
        prototype->pole[k] *= by;
    for (int k = 0; k < prototype->zeros; k++)
        prototype->zero[k] = PW_WIDE_COMPLEX(0, by * cimagf128(prototype->zero[k]));
}

/* |1 - jw/r| for a real root; for a pair the product of both. */
static pw_wide relative(pw_wide_complex root, pw_wide w)
{
    pw_wide one = cabsf128(PW_WIDE_COMPLEX(0, w) - root) / cabsf128(root);
    pw_wide other = cabsf128(PW_WIDE_COMPLEX(0, w) - conjf128(root)) / cabsf128(root);
    return cimagf128(root) == 0 ? one : one * other;
}

pw_wide pw_prototype_gain(const pw_prototype *prototype, pw_wide w)
{
    pw_wide gain = prototype->dc;
    for (int k = 0; k < prototype->zeros; k++)
        gain *= relative(prototype->zero[k], w);
    for (int k = 0; k < prototype->poles; k++)
        gain /= relative(prototype->pole[k], w);
    return gain;
}

pw_wide pw_prototype_pole_product(const pw_prototype *prototype)
{
    pw_wide product = 1;
    for (int k = 0; k < prototype->poles; k++) {
        pw_wide modulus = cabsf128(prototype->pole[k]);
        product *= cimagf128(prototype->pole[k]) == 0 ? modulus : modulus * modulus;
    }
    return product;
}
