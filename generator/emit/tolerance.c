/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How far contraction can move float outputs: see signals.h. */
#include <float.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "emit/signals.h"
#include "simulate/simulate.h"

typedef struct delays { long double s1, s2; } delays;

/* One sample through a section in transposed form 2. */
static long double step(const pw_words *w, delays *d, long double x, bool poles_only)
{
    long double b[3] = {1, 0, 0};
    if (!poles_only) for (int k = 0; k < 3; k++) b[k] = w->fb[k];
    long double y = d->s1 + b[0] * x;
    d->s1 = d->s2 + b[1] * x - w->fa[1] * y;
    d->s2 = b[2] * x - w->fa[2] * y;
    return y;
}

/* Sum over n samples of |impulse response| from an error in section k's output to the stage's. */
static double error_gain(const pw_realisation *r, int k, long n)
{
    delays d[PW_MAX_SECTIONS] = {{0, 0}};
    long double sum = 0, half = 0, before = 0;
    long mark = 4096;
    for (long i = 0; i < n; i++) {
        long double v = step(&r->section[k], &d[k], i == 0, true);
        for (int j = k + 1; j < r->count; j++) v = step(&r->section[j], &d[j], v, false);
        sum += fabsl(v);
        if (i + 1 != mark) continue;
        long double last = sum - half, ratio = before > 0 ? last / before : 1;
        if (ratio < 0.5L && last / (1 - ratio) < 1e-3L * sum) return (double)(sum + last / (1 - ratio));
        before = last;
        half = sum;
        mark *= 2;
    }
    return (double)sum;
}

/* Largest |input| and |output| of section k over the vectors, whose samples in buf are its input
 * before and its output after. */
static void run_section(const pw_realisation *one, double **buf, const pw_vector *vectors, int n, double peak[2])
{
    pw_simulation sim;
    peak[0] = peak[1] = 0;
    for (int v = 0; v < n; v++) {
        pw_simulation_reset(&sim, one);
        for (long i = 0; i < vectors[v].n; i++) peak[0] = fmax(peak[0], fabs(buf[v][i]));
        pw_simulation_run_floats(&sim, buf[v], buf[v], (size_t)vectors[v].n);
        for (long i = 0; i < vectors[v].n; i++) peak[1] = fmax(peak[1], fabs(buf[v][i]));
    }
}

/* Sum of the results of one sample's operations: what u is multiplied by. */
static double results_of(const pw_words *w, const double peak[2])
{
    double b = fabs(w->fb[0]) + fabs(w->fb[1]) + fabs(w->fb[2]), a = fabs(w->fa[1]) + fabs(w->fa[2]);
    double products = b * peak[0] + a * peak[1];
    if (w->order == 0) return b * peak[0];
    if (w->structure == PW_DIRECT_1) return 5 * products;   /* each partial sum is below products */
    /* y: its product and itself; s1: two products, s2 + b1 x, itself; s2: two products, itself */
    double s2 = fabs(w->fb[2]) * peak[0] + fabs(w->fa[2]) * peak[1];
    return products + peak[1] + 2 * (s2 + fabs(w->fb[1]) * peak[0]) + fabs(w->fa[1]) * peak[1] + s2;
}

double pw_float_tolerance(const pw_results *results, const pw_vector *vectors, int n)
{
    const pw_realisation *r = &results->realisation;
    if ((r->sample != PW_FLOAT32 && r->sample != PW_FLOAT64) || n == 0) return 0;
    double u = r->sample == PW_FLOAT32 ? FLT_EPSILON / 2 : DBL_EPSILON / 2, total = 0, peak[2];
    pw_realisation *one = pw_take(sizeof *one);
    double **buf = pw_take((size_t)n * sizeof *buf);
    *one = (pw_realisation){.sample = r->sample, .count = 1};
    for (int v = 0; v < n; v++) {
        buf[v] = pw_take((size_t)vectors[v].n * sizeof **buf);
        memcpy(buf[v], vectors[v].in_reals, (size_t)vectors[v].n * sizeof **buf);
    }
    for (int k = 0; k < r->count; k++) {
        one->section[0] = r->section[k];
        run_section(one, buf, vectors, n, peak);
        total += error_gain(r, k, vectors[0].n) * results_of(&r->section[k], peak);
    }
    for (int v = 0; v < n; v++) free(buf[v]);
    free(buf);
    free(one);
    return 2 * u * total;
}
