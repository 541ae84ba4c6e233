/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How far contraction moves float outputs: see signals.h. The sections once more, with every
 * multiply-add fused that can be; where two products meet, either may be the fused one. */
#include <float.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "emit/signals.h"

enum { WAYS = 2 };

typedef struct delays {
    double s[4];
} delays;

/* a b + c rounded once, to the format. */
static double fused(bool single, double a, double b, double c)
{
    return single ? (double)fmaf((float)a, (float)b, (float)c) : fma(a, b, c);
}

static double product(bool single, double a, double b)
{
    return single ? (double)((float)a * (float)b) : a * b;
}

/* a b + c d with the first or the second product fused. */
static double both(bool single, int way, double a, double b, double c, double d)
{
    return way ? fused(single, c, d, product(single, a, b))
               : fused(single, a, b, product(single, c, d));
}

static double direct(const pw_words *w, bool single, int way, delays *d, double x)
{
    double y = both(single, way, w->fb[0], x, w->fb[1], d->s[0]);
    if (w->order == 2) y = fused(single, w->fb[2], d->s[1], y);
    y = fused(single, -w->fa[1], d->s[2], y);
    if (w->order == 2) y = fused(single, -w->fa[2], d->s[3], y);
    *d = (delays){{x, d->s[0], y, d->s[2]}};
    return y;
}

static double transposed(const pw_words *w, bool single, int way, delays *d, double x)
{
    double y = fused(single, w->fb[0], x, d->s[0]);
    if (w->order == 1) {
        d->s[0] = both(single, way, w->fb[1], x, -w->fa[1], y);
        return y;
    }
    d->s[0] = fused(single, -w->fa[1], y, fused(single, w->fb[1], x, d->s[1]));
    d->s[1] = both(single, way, w->fb[2], x, -w->fa[2], y);
    return y;
}

static double cascade(const pw_realisation *r, int way, delays *d, double x)
{
    bool single = r->sample == PW_FLOAT32;
    for (int k = 0; k < r->count; k++) {
        const pw_words *w = &r->section[k];
        if (w->order == 0)
            x = product(single, w->fb[0], x);
        else if (w->structure == PW_DIRECT_1)
            x = direct(w, single, way, &d[k], x);
        else
            x = transposed(w, single, way, &d[k], x);
    }
    return x;
}

double pw_contraction_shift(const pw_results *results, const pw_vector *vectors, int n)
{
    const pw_realisation *r = &results->realisation;
    double most = 0;
    if (r->sample != PW_FLOAT32 && r->sample != PW_FLOAT64) return 0;
    for (int v = 0; v < n; v++)
        for (int way = 0; way < WAYS; way++) {
            delays d[PW_MAX_SECTIONS] = {{{0}}};
            for (long i = 0; i < vectors[v].n; i++)
                most = fmax(most, fabs(cascade(r, way, d, vectors[v].in_reals[i])
                                       - vectors[v].out_reals[i]));
        }
    return most;
}

double pw_float_tolerance(const pw_results *results, const pw_vector *vectors, int n, double shift)
{
    double ulp = results->realisation.sample == PW_FLOAT32 ? FLT_EPSILON : DBL_EPSILON, largest = 0;
    if (shift == 0) return 0;
    for (int v = 0; v < n; v++)
        for (long i = 0; i < vectors[v].n; i++)
            largest = fmax(largest, fabs(vectors[v].out_reals[i]));
    return 4 * shift + ulp * largest;
}
