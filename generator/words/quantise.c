/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "words/inner.h"

#include <complex.h>
#include <math.h>
#include <string.h>

/* A zero this near to the circle was meant to be on it: bilinear leaves an error of an ulp or
 * two. */
#define ON_CIRCLE 4e-15

static bool exact_one(double complex zero)
{
    return cimag(zero) == 0 && fabs(creal(zero)) == 1;
}

static void add_unit(pw_basis *basis, long double value, int u0, int u1, int u2, int delay)
{
    const int unit[3] = {u0, u1, u2};
    int *to = basis->unit[basis->count];
    memset(to, 0, sizeof basis->unit[0]);
    for (int k = 0; k + delay < 3; k++)
        to[k + delay] = unit[k];
    basis->value[basis->count++] = value;
}

static void pair_basis(const pw_section *section, long double gain, int delay, pw_basis *out)
{
    double complex z1 = section->zero[0], z2 = section->zero[1];
    if (!exact_one(z1)) {
        double complex t = z1;
        z1 = z2, z2 = t;
    }
    long double re = creal(z1), sum = (long double)creal(z1) + creal(z2);
    long double product = cimag(z1) != 0 ? re * re + (long double)cimag(z1) * cimag(z1)
                                         : re * creal(z2);
    int sign = re > 0 ? 1 : -1;
    if (exact_one(z1) && exact_one(z2)) {
        add_unit(out, gain, 1, -(int)sum, (int)product, delay);
    } else if (exact_one(z1)) {
        add_unit(out, gain, 1, -sign, 0, delay);
        add_unit(out, gain * product, 0, -sign, 1, delay);
    } else if (cimag(z1) != 0 && fabs(cabs(z1) - 1) < ON_CIRCLE) {
        add_unit(out, gain, 1, 0, 1, delay);
        add_unit(out, -gain * sum, 0, 1, 0, delay);
    } else {
        add_unit(out, gain, 1, 0, 0, delay);
        add_unit(out, -gain * sum, 0, 1, 0, delay);
        add_unit(out, gain * product, 0, 0, 1, delay);
    }
}

pw_basis pw_numerator_basis(const pw_section *section, long double gain)
{
    pw_basis basis = {0};
    int delay = section->poles - section->zeros;
    gain *= section->gain;
    if (section->zeros == 0) {
        add_unit(&basis, gain, 1, 0, 0, delay);
    } else if (section->zeros == 2) {
        pair_basis(section, gain, delay, &basis);
    } else if (exact_one(section->zero[0])) {
        add_unit(&basis, gain, 1, creal(section->zero[0]) > 0 ? -1 : 1, 0, delay);
    } else {
        add_unit(&basis, gain, 1, 0, 0, delay);
        add_unit(&basis, -gain * creal(section->zero[0]), 0, 1, 0, delay);
    }
    return basis;
}

/* The largest fraction, at most most, at which size still fits a word. */
static int fraction_for(double size, int word_bits, int most)
{
    double limit = ldexp(1, word_bits - 1) - 1;
    int fraction = most;
    while (fraction > 0 && rint(ldexp(size, fraction)) > limit)
        fraction--;
    return fraction;
}

static double largest_of(const double v[3])
{
    return fmax(fabs(v[0]), fmax(fabs(v[1]), fabs(v[2])));
}

int pw_pole_fraction(const pw_format *format, const pw_section *section)
{
    double size = fmax(fabs(section->a[1]), fabs(section->a[2]));
    int fraction = fraction_for(size, format->word_bits, format->word_bits - 1);
    return fraction < 1 ? 1 : fraction;
}

static void basis_words(const pw_basis *basis, int fraction, int32_t b[3])
{
    b[0] = b[1] = b[2] = 0;
    for (int j = 0; j < basis->count; j++) {
        int32_t word = (int32_t)llrintl(ldexpl(basis->value[j], fraction));
        for (int k = 0; k < 3; k++)
            b[k] += basis->unit[j][k] * word;
    }
}

static void basis_doubles(const pw_basis *basis, double b[3])
{
    for (int k = 0; k < 3; k++) {
        long double sum = 0;
        for (int j = 0; j < basis->count; j++)
            sum += basis->unit[j][k] * basis->value[j];
        b[k] = (double)sum;
    }
}

/* Whether b may share the fraction of a (a shorter kernel) without losing accuracy to speak of:
 * its smallest rounded value keeps 2^-19 (32 bits) or 2^-11 (16 bits) of itself. */
static bool shares_fraction(const pw_format *format, const pw_basis *basis, int fraction)
{
    double least = INFINITY;
    for (int j = 0; j < basis->count; j++)
        if (basis->value[j] != 0)
            least = fmin(least, ldexp(fabs((double)basis->value[j]), fraction));
    return least >= ldexp(1, format->word_bits == 32 ? 18 : 10);
}

bool pw_section_has_integrator(const pw_section *section)
{
    for (int k = 0; k < section->poles; k++)
        if (section->pole[k] == 1)
            return true;
    return false;
}

/* A pole at exactly 1 stays: the words of a sum to minus one. */
static void poles_words(const pw_section *section, pw_words *w)
{
    w->a[0] = 0;
    for (int k = 1; k < 3; k++)
        w->a[k] = (int32_t)llrint(ldexp(section->a[k], w->a_fraction));
    if (pw_section_has_integrator(section))
        w->a[1] = -(1 << w->a_fraction) - w->a[2];
}

bool pw_quantise_direct(const pw_format *format, const pw_section *section, long double gain,
                        pw_words *w)
{
    pw_basis basis = pw_numerator_basis(section, gain);
    double b[3];
    basis_doubles(&basis, b);
    /* A value of the basis can be larger than the b it adds to. */
    double size = largest_of(b);
    for (int j = 0; j < basis.count; j++)
        size = fmax(size, fabs((double)basis.value[j]));
    int most = fraction_for(size * (1 + 1e-12), format->word_bits, 62);
    w->order = section->order;
    for (w->a_fraction = pw_pole_fraction(format, section); w->a_fraction >= 1; w->a_fraction--) {
        poles_words(section, w);
        int b_fraction = w->a_fraction;
        if (most < b_fraction || !shares_fraction(format, &basis, b_fraction))
            b_fraction = most;
        for (w->b_fraction = b_fraction; w->b_fraction >= b_fraction - 4 && w->b_fraction >= 0;
             w->b_fraction--) {
            basis_words(&basis, w->b_fraction, w->b);
            if (pw_words_safe(format, w))
                return pw_words_realise(format, w), true;
            if (w->b_fraction <= w->a_fraction)
                break;
        }
    }
    return false;
}

bool pw_words_stable(const pw_section *section, const pw_words *w)
{
    if (w->order == 0)
        return true;
    if (w->structure == PW_COUPLED) {
        __int128 r = (__int128)w->sigma * w->sigma + (__int128)w->omega * w->omega;
        return r < (__int128)1 << (2 * w->a_fraction);
    }
    double a1 = w->realised_a[1], a2 = w->realised_a[2];
    if (pw_section_has_integrator(section))
        return a2 <= 1 && a1 == -1 - a2;
    return a2 < 1 && fabs(a1) < 1 + a2;
}

/* ---- floats ---- */

/* Rounds to the format, on the grid of the largest of the values, so that sums of words that
 * should cancel do so exactly. */
static double on_grid(const pw_format *format, long double value, double largest)
{
    int digits = format->sample == PW_FLOAT32 ? 24 : 53, exponent;
    if (largest == 0)
        return 0;
    frexp(largest, &exponent);
    return (double)ldexpl(rintl(ldexpl(value, digits - exponent)), exponent - digits);
}

void pw_quantise_float(const pw_format *format, const pw_section *section, long double gain,
                       pw_words *w)
{
    pw_basis basis = pw_numerator_basis(section, gain);
    double b[3];
    basis_doubles(&basis, b);
    bool tied = basis.count < section->zeros + 1;
    w->order = section->order;
    memset(w->fb, 0, sizeof w->fb);
    for (int j = 0; j < basis.count; j++) {
        double own = (double)fabsl(basis.value[j]);
        bool shared = tied && basis.count > 1;
        double word = on_grid(format, basis.value[j], shared ? largest_of(b) : own);
        for (int k = 0; k < 3; k++)
            w->fb[k] += basis.unit[j][k] * word;
    }
    w->fa[0] = 1;
    for (int k = 1; k < 3; k++)
        w->fa[k] = format->sample == PW_FLOAT32 ? (double)(float)section->a[k] : section->a[k];
    pw_words_realise(format, w);
}
