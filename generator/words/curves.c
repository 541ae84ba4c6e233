/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "words/curves.h"
#include "words/job.h"
#include "words/noise.h"

#include <complex.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>
#include "base/arena.h"

static int rising(const void *a, const void *b)
{
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

/* Angles over (0, pi]: evenly, by decades, and dense about each pole. */
static int choose_angles(const pw_units *u, int poles, double angle[PW_CURVE_POINTS])
{
    static const double out[] = {0, 0.3, 0.7, 1, 1.6, 2.5, 4, 7, 12, 20};
    int n = 0;
    for (int k = 1; k <= 60; k++) {
        angle[n++] = M_PI * k / 60;
        angle[n++] = M_PI * pow(10, -k / 8.0);
    }
    for (int p = 0; p < poles && n + 20 < PW_CURVE_POINTS; p++) {
        double centre = fabs(carg(u->pole[p].pole[0])), width = fabs(log(cabs(u->pole[p].pole[0])));
        for (size_t i = 0; i < sizeof out / sizeof *out; i++) {
            if (centre - out[i] * width > 0)
                angle[n++] = centre - out[i] * width;
            if (i && centre + out[i] * width < M_PI)
                angle[n++] = centre + out[i] * width;
        }
    }
    qsort(angle, (size_t)n, sizeof *angle, rising);
    return n;
}

/* |exp(j theta) - root|^2 without cancellation near 1. */
static double square_distance(double complex root, double theta)
{
    double s = sin(theta / 2), c = cos(theta / 2);
    double complex d = CMPLX(-2 * s * s, 2 * s * c) + (1 - root);
    return creal(d) * creal(d) + cimag(d) * cimag(d);
}

static double zero_square(const pw_zero_group *zero, double theta)
{
    if (zero->infinite)
        return 1;
    double size = square_distance(zero->zero, theta);
    return zero->size == 2 ? size * square_distance(conj(zero->zero), theta) : size;
}

static double feedback_square(int k1, int k2, double theta)
{
    double complex z = cexp(CMPLX(0, -theta));
    double complex n = 1 - k1 * z - k2 * z * z;
    return creal(n) * creal(n) + cimag(n) * cimag(n);
}

static void feedback_of(const pw_pole_unit *unit, const pw_arrange_context *context, int32_t *k1,
                        int32_t *k2)
{
    double complex p = unit->pole[0], q = unit->size == 2 ? unit->pole[1] : 0;
    double a[3] = {1, -creal(p + q), creal(p * q)};
    *k1 = *k2 = 0;
    if (context->shaped && pw_feedback_power(a, 0, 0) > 12)
        pw_choose_feedback(a, false, k1, k2);
}

static void pole_curves(const pw_units *units, int u, const pw_arrange_context *context,
                        const double *angle, pw_curves *out)
{
    const pw_pole_unit *unit = &units->pole[u];
    int32_t k1, k2;
    feedback_of(unit, context, &k1, &k2);
    for (int i = 0; i < out->points; i++) {
        double below = 1;
        for (int k = 0; k < unit->size; k++)
            below *= square_distance(unit->pole[k], angle[i]);
        out->pole[u][i] = (float)-log(below);
        out->noise[u][i] = (float)(feedback_square(k1, k2, angle[i]) / below);
        out->whole[i] -= (float)log(below);
    }
}

void pw_curves_make(const pw_units *units, int poles, const pw_arrange_context *context,
                    pw_curves *out)
{
    double angle[PW_CURVE_POINTS];
    memset(out, 0, sizeof *out);
    int n = out->points = choose_angles(units, poles, angle);
    size_t curves = (size_t)(2 * poles + units->zeros + 1);
    float *next = out->memory = pw_take(sizeof *next * (size_t)n * curves);
    for (int i = 0; i < n; i++) {
        double low = i ? angle[i - 1] : 0, high = i + 1 < n ? angle[i + 1] : M_PI;
        out->weight[i] = (i ? (high - low) / 2 : (high + angle[0]) / 2) / M_PI;
    }
    for (int u = 0; u < poles; u++) {
        out->pole[u] = next, next += n;
        out->noise[u] = next, next += n;
        pole_curves(units, u, context, angle, out);
    }
    for (int g = 0; g < units->zeros; g++) {
        out->zero[g] = next, next += n;
        for (int i = 0; i < n; i++) {
            out->zero[g][i] = (float)log(fmax(zero_square(&units->zero[g], angle[i]), 1e-30));
            out->whole[i] += (float)units->zero[g].count * out->zero[g][i];
        }
    }
}

void pw_curves_free(pw_curves *curves)
{
    free(curves->memory);
    curves->memory = NULL;
}

void pw_curves_place(const pw_curves *curves, const float *product, pw_placed *out)
{
    float peak = -INFINITY;
    for (int i = 0; i < curves->points; i++) {
        peak = fmaxf(peak, product[i]);
        out->rest[i] = curves->weight[i] * expf(curves->whole[i] - product[i]);
    }
    out->peak = exp(peak);
}

double pw_curves_noise(const pw_curves *curves, const pw_placed *placed, int u, bool last,
                       double factor)
{
    double sum = 0;
    for (int i = 0; i < curves->points; i++)
        sum += placed->rest[i] * curves->noise[u][i];
    return last ? sum : sum * placed->peak * factor * factor;
}

void pw_quick_start(const pw_units *units, int poles, pw_quick *out)
{
    double slowest = 1;
    for (int k = 0; k < poles; k++)
        for (int i = 0; i < units->pole[k].size; i++)
            slowest = fmax(slowest, 1 / (1 - cabs(units->pole[k].pole[i])));
    double need = 6 * slowest + 3 * poles;
    out->samples = need <= PW_QUICK_SAMPLES ? (int)need : 0;
    memset(out->v, 0, sizeof out->v);
    out->v[0] = 1;
}

double pw_quick_add(pw_quick *quick, const pw_section *section, double at_least)
{
    const double *b = section->b, *a = section->a;
    double s1 = 0, s2 = 0, sum = 0;
    if (quick->samples == 0)
        return at_least * 1.4;   /* between 1 and (4 / pi)^2 and more: the common middle */
    for (int i = 0; i < quick->samples; i++) {
        double x = quick->v[i], y = s1 + b[0] * x;
        s1 = s2 + b[1] * x - a[1] * y;
        s2 = b[2] * x - a[2] * y;
        quick->v[i] = y;
        sum += fabs(y);
    }
    return fmax(sum * sum, at_least);
}
