/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Low-pass prototype -> shape, root by root.
 *
 * Method: low-pass s -> s/wc; high-pass s -> wc/s; band-pass s -> (s^2 + w0^2)/(B s); band-stop its
 * reciprocal; w0^2 = w1 w2, B = w2 - w1. A band root solves s^2 - 2 d s + w0^2 = 0: the root of
 * larger modulus by the sum that does not cancel, the other as w0^2 over it.
 * The factor is H at the end of the axis that the shape keeps (0 or infinity), not a quotient of
 * high powers, wherever that is possible.
 * Accuracy: worked in 113 bits and rounded once.
 * Source: textbook frequency transformations (Zverev 1967, Daniels 1974). */
#include "analog/wide.h"
#include "analog/prototype.h"

#define TWO_PI (2 * PW_WIDE_PI)

typedef struct pw_list { double complex *root; int *count; } pw_list;

static void add(pw_list list, pw_wide_complex root)
{
    double re = (double)crealf128(root) + 0.0, im = (double)fabsf128(cimagf128(root));
    list.root[(*list.count)++] = CMPLX(re, im);
    if (im != 0)
        list.root[(*list.count)++] = CMPLX(re, -im);
}

static void add_on_axis(pw_list list, pw_wide w)
{
    add(list, PW_WIDE_COMPLEX(0, w));
}

/* Both roots of s^2 - 2 d s + w2 = 0 for a real d: a pair, or two real roots. */
static void band_real(pw_list list, pw_wide d, pw_wide w2)
{
    pw_wide w0 = sqrtf128(w2), rest = (w0 - fabsf128(d)) * (w0 + fabsf128(d));
    if (rest > 0) {
        add(list, PW_WIDE_COMPLEX(d, sqrtf128(rest)));
        return;
    }
    pw_wide large = d + copysignf128(sqrtf128(-rest), d);
    add(list, large);
    add(list, w2 / large);
}

/* For d on the axis: two frequencies whose product is w2. */
static void band_axis(pw_list list, pw_wide d, pw_wide w2)
{
    pw_wide large = d + sqrtf128(d * d + w2);
    add_on_axis(list, w2 / large);
    add_on_axis(list, large);
}

static void band_complex(pw_list list, pw_wide_complex d, pw_wide w2)
{
    pw_wide w0 = sqrtf128(w2);
    pw_wide_complex root = csqrtf128(d - w0) * csqrtf128(d + w0);
    if (crealf128(d) * crealf128(root) + cimagf128(d) * cimagf128(root) < 0)
        root = -root;
    add(list, w2 / (d + root));
    add(list, d + root);
}

static void band(pw_list list, pw_wide_complex d, pw_wide w2)
{
    if (cimagf128(d) == 0)
        band_real(list, crealf128(d), w2);
    else if (crealf128(d) == 0)
        band_axis(list, fabsf128(cimagf128(d)), w2);
    else
        band_complex(list, d, w2);
}

/* 1/r, exactly real or exactly on the axis where r is. */
static pw_wide_complex reciprocal(pw_wide_complex r)
{
    if (cimagf128(r) == 0)
        return 1 / crealf128(r);
    if (crealf128(r) == 0)
        return PW_WIDE_COMPLEX(0, -1 / cimagf128(r));
    return 1 / r;
}

/* The factor of the low-pass K prod(s - z)/prod(s - p), frequency 1 at w: dc prod|p|/prod|z|. */
static pw_wide low_factor(const pw_prototype *prototype, pw_wide w)
{
    pw_wide k = prototype->dc * pw_prototype_pole_product(prototype);
    int excess = -2 * prototype->zeros;
    for (int i = 0; i < prototype->zeros; i++)
        k /= cimagf128(prototype->zero[i]) * cimagf128(prototype->zero[i]);
    for (int i = 0; i < prototype->poles; i++)
        excess += cimagf128(prototype->pole[i]) == 0 ? 1 : 2;
    return k * powf128(w, excess);
}

/* One root of the prototype in its new place; w: corner or width, w2: centre squared. */
static void place(pw_list list, pw_wide_complex root, pw_shape shape, pw_wide w, pw_wide w2)
{
    switch (shape) {
    case PW_LOWPASS:
        add(list, w * root);
        break;
    case PW_HIGHPASS:
        add(list, w * reciprocal(root));
        break;
    case PW_BANDPASS:
        band(list, root * (w / 2), w2);
        break;
    case PW_BANDSTOP:
        band(list, reciprocal(root) * (w / 2), w2);
        break;
    }
}

/* The zeros that the prototype has at infinity. */
static void place_infinite(pw_list zeros, int excess, pw_shape shape, pw_wide w2)
{
    for (int i = 0; i < excess; i++) {
        if (shape == PW_HIGHPASS || shape == PW_BANDPASS)
            add(zeros, 0);
        else if (shape == PW_BANDSTOP)
            add_on_axis(zeros, sqrtf128(w2));
    }
}

void pw_prototype_shape(const pw_prototype *prototype, pw_shape shape, const double corner_hz[2],
                        pw_roots *out)
{
    bool is_band = shape == PW_BANDPASS || shape == PW_BANDSTOP;
    pw_wide low = TWO_PI * corner_hz[0], high = is_band ? TWO_PI * corner_hz[1] : 0;
    pw_wide w = is_band ? TWO_PI * ((pw_wide)corner_hz[1] - corner_hz[0]) : low, w2 = low * high;
    pw_list poles = {out->pole, &out->poles}, zeros = {out->zero, &out->zeros};
    int excess = -2 * prototype->zeros;
    *out = (pw_roots){.factor = 0};
    for (int i = 0; i < prototype->poles; i++) {
        place(poles, prototype->pole[i], shape, w, w2);
        excess += cimagf128(prototype->pole[i]) == 0 ? 1 : 2;
    }
    place_infinite(zeros, excess, shape, w2);
    for (int i = 0; i < prototype->zeros; i++)
        place(zeros, prototype->zero[i], shape, w, w2);
    bool falls = shape == PW_LOWPASS || shape == PW_BANDPASS;
    out->factor = (long double)(falls ? low_factor(prototype, w) : prototype->dc);
}
