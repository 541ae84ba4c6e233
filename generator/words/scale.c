/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Scales between sections. Scaling costs nothing here: it is a factor of b, which is rounded
 * anyway, and exact zeros survive any factor. So the factors are not powers of two. */
#include "words/inner.h"

#include <complex.h>
#include <math.h>
#include <stdlib.h>
#include "base/arena.h"

static pw_line ideal_line(const pw_section *section)
{
    pw_line line = {.coupled = false};
    for (int k = 0; k < 3; k++) {
        line.b[k] = section->b[k];
        line.a[k] = section->a[k];
    }
    pw_line_close(&line);
    return line;
}

/* The largest gain on the circle of the product of sections from..to. */
static long double peak_on_circle(const pw_section *section, int from, int to)
{
    double peak = 0;
    for (int i = 0; i <= 400; i++) {
        double theta = M_PI * (i < 200 ? pow(10, -8 + 8 * i / 200.0) : (i - 200) / 200.0), size = 1;
        for (int k = from; k <= to; k++)
            size *= cabs(pw_ideal_response(&section[k], theta));
        peak = fmax(peak, size);
    }
    for (int j = from; j <= to; j++)
        for (int p = 0; p < section[j].poles; p++) {
            double size = 1;
            for (int k = from; k <= to; k++)
                size *= cabs(pw_ideal_response(&section[k],
                                               fabs(carg(section[j].pole[p])) + 1e-12));
            peak = fmax(peak, size);
        }
    return peak;
}

/* size[k]: the norm of the product of the monic sections from..k. */
static void norms_of(const pw_realisation *r, int from, int to, long double size[])
{
    int n = to - from;
    pw_line *line = pw_take((size_t)n * sizeof *line);
    pw_norm (*norm)[PW_PLACES] = pw_take((size_t)n * sizeof *norm);
    for (int k = 0; k < n; k++) {
        line[k] = ideal_line(&r->ideal[from + k]);
        pw_line_own(&line[k]);
    }
    pw_norms_run(line, n, norm);
    for (int k = 0; k < n; k++)
        size[from + k] = r->scaling == PW_SCALING_L2 ? norm[k][0].l2
                       : r->scaling == PW_SCALING_LINF ? peak_on_circle(r->ideal, from, from + k)
                       : norm[k][0].l1;
    free(line);
    free(norm);
}

static int integrator_from(const pw_realisation *r, int k)
{
    while (k < r->count && !pw_section_has_integrator(&r->ideal[k]))
        k++;
    return k;
}

static void spread(int from, int to, long double factor, long double gain[])
{
    for (int k = from; k < to; k++)
        gain[k] = powl(fabsl(factor), 1.0L / (to - from));
    if (factor < 0)
        gain[from] = -gain[from];
}

void pw_scale_gains(const pw_format *format, const pw_realisation *r, long double factor,
                    long double margin, long double gain[])
{
    long double size[PW_MAX_SECTIONS], left = factor, peak = r->input_peak;
    if (!format->fixed || r->scaling == PW_SCALING_NONE) {
        spread(0, r->count, factor, gain);
        return;
    }
    int k = 0;
    while (k < r->count) {
        int stop = integrator_from(r, k);
        if (stop > k)
            norms_of(r, k, stop, size);
        long double before = 1;
        for (; k < stop && k + 1 < r->count; k++) {
            long double through = margin * format->largest / (size[k] * peak);   /* so far */
            gain[k] = through / before;
            left /= gain[k];
            before = through;
        }
        if (k + 1 >= r->count || stop == r->count)
            break;
        /* An integrator that others follow: what is left, shared evenly. */
        gain[k] = powl(fabsl(left), 1.0L / (r->count - k));
        left /= gain[k++];
        peak = 1;
    }
    gain[r->count - 1] = left;
}
