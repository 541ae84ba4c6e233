/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "twin/welch.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include <gsl/gsl_fft_complex.h>

void pw_welch_begin(int n, pw_welch *out)
{
    *out = (pw_welch){.n = n, .bins = n / 2 + 1};
    size_t whole = (size_t)n * sizeof(double), half = (size_t)out->bins * sizeof(double complex);
    pw_arena *a = &out->arena;
    out->xx = pw_arena_take(a, half);
    out->yy = pw_arena_take(a, half);
    out->rr = pw_arena_take(a, half);
    out->xy = pw_arena_take(a, half);
    out->ry = pw_arena_take(a, half);
    out->window = pw_arena_take(a, whole);
    out->work = pw_arena_take(a, 4 * whole);
    for (int i = 0; i < 3; i++) out->ring[i] = pw_arena_take(a, whole);
    for (int i = 0; i < n; i++) out->window[i] = 0.5 - 0.5 * cos(2 * M_PI * i / n);
}

static double mean(const double *v, int n)
{
    double sum = 0;
    for (int i = 0; i < n; i++) sum += v[i];
    return sum / n;
}

/* Two real signals as one complex transform: Z = X + i Y, X(k) = (Z(k) + conj Z(n-k)) / 2. */
static void split(const double *z, int n, int k, double complex *x, double complex *y)
{
    int m = (n - k) % n;
    double complex a = CMPLX(z[2 * k], z[2 * k + 1]), b = CMPLX(z[2 * m], -z[2 * m + 1]);
    *x = (a + b) / 2;
    *y = (a - b) / CMPLX(0, 2);
}

static void add_segment(pw_welch *w)
{
    double *xy = w->work, *r = w->work + 2 * w->n, m[3];
    for (int i = 0; i < 3; i++) m[i] = mean(w->ring[i], w->n);
    for (int i = 0; i < w->n; i++) {
        xy[2 * i] = w->window[i] * (w->ring[0][i] - m[0]);
        xy[2 * i + 1] = w->window[i] * (w->ring[1][i] - m[1]);
        r[2 * i] = w->window[i] * (w->ring[2][i] - m[2]);
        r[2 * i + 1] = 0;
    }
    gsl_fft_complex_radix2_forward(xy, 1, (size_t)w->n);
    gsl_fft_complex_radix2_forward(r, 1, (size_t)w->n);
    for (int k = 0; k < w->bins; k++) {
        double complex X, Y, R = CMPLX(r[2 * k], r[2 * k + 1]);
        split(xy, w->n, k, &X, &Y);
        w->xx[k] += creal(X * conj(X));
        w->yy[k] += creal(Y * conj(Y));
        w->rr[k] += creal(R * conj(R));
        w->xy[k] += conj(X) * Y;
        w->ry[k] += conj(R) * Y;
    }
    w->segments++;
}

void pw_welch_add(pw_welch *welch, double x, double y, double r)
{
    const double v[] = {x, y, r};
    for (int i = 0; i < 3; i++) welch->ring[i][welch->filled] = v[i];
    if (++welch->filled < welch->n) return;
    add_segment(welch);
    welch->filled = welch->n / 2;
    for (int i = 0; i < 3; i++)
        memcpy(welch->ring[i], welch->ring[i] + welch->n / 2,
               (size_t)welch->filled * sizeof(double));
}

void pw_welch_end(pw_welch *welch) { pw_arena_free(&welch->arena); }

static void *copied(const void *from, size_t bytes, pw_arena *arena)
{
    return memcpy(pw_arena_take(arena, bytes), from, bytes);
}

void pw_welch_keep(const pw_welch *welch, pw_arena *arena, pw_welch *out)
{
    size_t bins = (size_t)welch->bins;
    *out = (pw_welch){.n = welch->n, .bins = welch->bins, .segments = welch->segments};
    out->xx = copied(welch->xx, bins * sizeof *out->xx, arena);
    out->yy = copied(welch->yy, bins * sizeof *out->yy, arena);
    out->rr = copied(welch->rr, bins * sizeof *out->rr, arena);
    out->xy = copied(welch->xy, bins * sizeof *out->xy, arena);
    out->ry = copied(welch->ry, bins * sizeof *out->ry, arena);
}

double pw_welch_averages(const pw_welch *welch)
{
    double k = (double)welch->segments;
    return k < 1 ? 0 : k / (1 + 2.0 / 36 * (k - 1) / k);
}

double pw_welch_leakage(const pw_welch *welch, const double *spectrum, int k)
{
    double sum = 0;
    for (int j = 0; j < welch->bins; j++) {
        double d = abs(j - k), gain = d < 3 ? 0 : 1 / (M_PI * d * (d * d - 1));
        sum += spectrum[j] * gain * gain;
    }
    return sum;
}
