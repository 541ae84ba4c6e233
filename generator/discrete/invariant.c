/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Impulse- and step-invariant transforms.
 * Method: poles go to exp(p T). The zeros are those of the numerator that the samples of the
 * response make (series.h), found in many digits (many.h); the number of digits doubles until every
 * zero stands still to 2^-58 of itself, so that near and multiple poles, and the zeros of very
 * different sizes that sampling makes, come out right to the last place of double.
 * Special cases: with h(0) = 0 one zero is exactly 0 (impulse). A zero of the stage at 0 makes one
 * zero of exactly 1 (step). A zero beyond 1e300 is taken as one at infinity.
 * Source: Z-transforms of sampled responses are textbook matter; halving h(0) where h jumps is the
 * mean of the two sides, to which the sum of the aliased spectra converges (L. B. Jackson, IEEE
 * Signal Processing Letters 7 (2000), 273-275). */
#include <math.h>
#include <string.h>

#include "discrete/longs.h"
#include "discrete/series.h"
#include "discrete/transforms.h"

#define MOST_BITS 16384
#define STANDS_STILL (-58 * M_LN2)           /* log of a relative change */

/* The coefficients from the first that is not 0 to the last that is not; how many zeros at 0 that
 * leaves out, and how many powers at the top. */
static void trim(const pw_many *b, int *first, int *last)
{
    *first = 0;
    *last = b->count - 1;
    while (*first < *last && mpc_cmp_si(b->at[*first], 0) == 0) ++*first;
    while (*last > *first && mpc_cmp_si(b->at[*last], 0) == 0) --*last;
}

static double change(mpc_srcptr now, mpc_srcptr before, long bits)
{
    mpc_t differ;
    mpc_init2(differ, bits);
    mpc_sub(differ, now, before, MPC_RNDNN);
    double relative = pw_many_log(differ) - pw_many_log(now);
    mpc_clear(differ);
    return relative;
}

/* One pass at a precision: the first coefficient in *lead, zeros in *root (made here). */
typedef struct pass { pw_many b, root; int first, last; bool rest; } pass;

static void pass_make(const pw_transfer *transfer, double rate_hz, bool halve, long bits,
                      const pass *before, pass *out)
{
    pw_series_numerator(transfer, rate_hz, halve, bits, &out->b);
    trim(&out->b, &out->first, &out->last);
    pw_many part = {out->b.at + out->first, out->last - out->first + 1, bits};
    pw_many_make(&out->root, part.count - 1, bits);
    bool warm = before && before->rest && before->root.count == out->root.count;
    for (int i = 0; warm && i < out->root.count; i++)
        mpc_set(out->root.at[i], before->root.at[i], MPC_RNDNN);
    out->rest = pw_many_zeros(&part, &out->root, warm);
}

static void pass_free(pass *p)
{
    pw_many_free(&p->b);
    pw_many_free(&p->root);
}

static bool agree(const pass *now, const pass *before)
{
    if (!now->rest || !before->rest || now->root.count != before->root.count) return false;
    if (now->first != before->first) return false;
    bool same = change(now->b.at[now->first], before->b.at[now->first], now->b.bits) < STANDS_STILL;
    for (int i = 0; i < now->root.count && same; i++)
        same = change(now->root.at[i], before->root.at[i], now->b.bits) < STANDS_STILL;
    return same;
}

/* Passes at twice the precision until two agree. */
static bool settle(const pw_transfer *transfer, double rate_hz, bool halve, pass *out)
{
    long bits = 128 + 8L * transfer->poles;
    pass before;
    pass_make(transfer, rate_hz, halve, bits, NULL, &before);
    for (bits *= 2; bits <= MOST_BITS; bits *= 2) {
        pass_make(transfer, rate_hz, halve, bits, &before, out);
        bool done = agree(out, &before);
        pass_free(&before);
        if (done) return true;
        before = *out;
    }
    pass_free(&before);
    return false;
}

/* Real roots have no imaginary part left; the lower one of a pair follows its upper one. */
static void take_roots(const pass *found, pw_roots *z)
{
    for (int i = 0; i < found->root.count; i++) {
        mpc_srcptr x = found->root.at[i];
        double re = mpfr_get_d(mpc_realref(x), MPFR_RNDN);
        double im = mpfr_get_d(mpc_imagref(x), MPFR_RNDN);
        if (fabs(im) <= 0x1p-55 * fabs(re)) {
            if (fabs(re) < 1e300) z->zero[z->zeros++] = re;
            else z->factor *= -mpfr_get_ld(mpc_realref(x), MPFR_RNDN);
        } else if (im > 0) {
            z->zero[z->zeros++] = pw_complex(re, im);
            z->zero[z->zeros++] = pw_complex(re, -im);
        }
    }
}

/* scale: of the samples. degree: of the numerator in 1/z, so that z^degree clears it: what it lacks
 * at the end are zeros at 0. */
static bool numerator(const pw_transfer *transfer, double rate_hz, bool halve, long double scale,
                      int degree, pw_roots *z)
{
    pass found;
    if (!settle(transfer, rate_hz, halve, &found)) return false;
    z->factor = scale * mpfr_get_ld(mpc_realref(found.b.at[found.first]), MPFR_RNDN);
    take_roots(&found, z);
    for (int k = found.last; k < degree; k++) z->zero[z->zeros++] = 0;
    pass_free(&found);
    return true;
}

static void digital_poles(const pw_roots *analog, double rate_hz, pw_roots *z)
{
    pw_matched(analog, rate_hz, PW_INFINITY_KEEP, z);
    z->zeros = 0;
}

static pw_transfer transfer_of(const pw_roots *analog)
{
    pw_transfer t = {.poles = analog->poles, .zeros = analog->zeros};
    memcpy(t.pole, analog->pole, (size_t)analog->poles * sizeof t.pole[0]);
    memcpy(t.zero, analog->zero, (size_t)analog->zeros * sizeof t.zero[0]);
    return t;
}

/* K T^(poles - zeros): the factor in units of one sample. */
static long double sample_factor(const pw_roots *analog, double rate_hz)
{
    return analog->factor / powl(rate_hz, analog->poles - analog->zeros);
}

bool pw_impulse_invariant(const pw_roots *analog, double rate_hz, pw_roots *out)
{
    if (analog->zeros == analog->poles) return false;
    pw_transfer t = transfer_of(analog);
    pw_roots z = {.poles = 0};
    digital_poles(analog, rate_hz, &z);
    bool jumps = analog->poles == analog->zeros + 1;
    if (!numerator(&t, rate_hz, jumps, sample_factor(analog, rate_hz), z.poles, &z)) return false;
    *out = z;
    return true;
}

/* Takes one zero at 0 out; false where there is none. */
static bool take_zero_at_0(pw_transfer *t)
{
    for (int i = 0; i < t->zeros; i++) {
        if (t->zero[i] != 0) continue;
        t->zeros--;
        memmove(t->zero + i, t->zero + i + 1, (size_t)(t->zeros - i) * sizeof t->zero[0]);
        return true;
    }
    return false;
}

bool pw_step_invariant(const pw_roots *analog, double rate_hz, pw_roots *out)
{
    pw_transfer t = transfer_of(analog);
    pw_roots z = {.poles = 0};
    digital_poles(analog, rate_hz, &z);
    if (analog->poles == 0) {
        z.factor = analog->factor;
        *out = z;
        return true;
    }
    bool blocks = take_zero_at_0(&t);
    if (!blocks) t.pole[t.poles++] = 0;
    int degree = blocks ? z.poles - 1 : z.poles;
    if (!numerator(&t, rate_hz, false, sample_factor(analog, rate_hz), degree, &z)) return false;
    if (blocks) z.zero[z.zeros++] = 1;
    *out = z;
    return true;
}
