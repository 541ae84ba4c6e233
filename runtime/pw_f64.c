/* SPDX-License-Identifier: 0BSD */
/* Parentheses and the order of every sum are part of what these kernels promise. */
#include "pw_f64.h"

void pw_f64_gain(double b, const double *in, double *out, size_t n)
{
    size_t i;
    for (i = 0; i < n; i++) out[i] = b * in[i];
}

void pw_f64_first_transposed(const pw_f64_first *w, pw_f64_transposed_state *s,
                             const double *in, double *out, size_t n)
{
    const double b0 = w->b0, b1 = w->b1, a1 = w->a1;
    double s1 = s->s1;
    size_t i;
    for (i = 0; i < n; i++) {
        const double x = in[i];
        const double y = s1 + b0 * x;
        s1 = b1 * x - a1 * y;
        out[i] = y;
    }
    s->s1 = s1;
}

void pw_f64_second_transposed(const pw_f64_second *w, pw_f64_transposed_state *s,
                              const double *in, double *out, size_t n)
{
    const double b0 = w->b0, b1 = w->b1, b2 = w->b2, a1 = w->a1, a2 = w->a2;
    double s1 = s->s1, s2 = s->s2;
    size_t i;
    for (i = 0; i < n; i++) {
        const double x = in[i];
        const double y = s1 + b0 * x;
        s1 = (s2 + b1 * x) - a1 * y;
        s2 = b2 * x - a2 * y;
        out[i] = y;
    }
    s->s1 = s1;
    s->s2 = s2;
}

void pw_f64_first_direct(const pw_f64_first *w, pw_f64_direct_state *s,
                         const double *in, double *out, size_t n)
{
    const double b0 = w->b0, b1 = w->b1, a1 = w->a1;
    double x1 = s->x1, y1 = s->y1;
    size_t i;
    for (i = 0; i < n; i++) {
        const double x = in[i];
        const double y = b0 * x + b1 * x1 - a1 * y1;
        x1 = x;
        y1 = y;
        out[i] = y;
    }
    s->x1 = x1;
    s->y1 = y1;
}

void pw_f64_second_direct(const pw_f64_second *w, pw_f64_direct_state *s,
                          const double *in, double *out, size_t n)
{
    const double b0 = w->b0, b1 = w->b1, b2 = w->b2, a1 = w->a1, a2 = w->a2;
    double x1 = s->x1, x2 = s->x2, y1 = s->y1, y2 = s->y2;
    size_t i;
    for (i = 0; i < n; i++) {
        const double x = in[i];
        const double y = b0 * x + b1 * x1 + b2 * x2 - a1 * y1 - a2 * y2;
        x2 = x1;
        x1 = x;
        y2 = y1;
        y1 = y;
        out[i] = y;
    }
    s->x1 = x1;
    s->x2 = x2;
    s->y1 = y1;
    s->y2 = y2;
}

double pw_f64_first_transposed_settle(const pw_f64_first *w, pw_f64_transposed_state *s, double x)
{
    const double y = (w->b0 + w->b1) / (1 + w->a1) * x;
    s->s1 = y - w->b0 * x;
    s->s2 = 0;
    return y;
}

double pw_f64_second_transposed_settle(const pw_f64_second *w, pw_f64_transposed_state *s,
                                       double x)
{
    const double above = w->b0 + w->b1 + w->b2, below = 1 + w->a1 + w->a2;
    const double y = above / below * x;
    s->s1 = y - w->b0 * x;
    s->s2 = w->b2 * x - w->a2 * y;
    return y;
}

double pw_f64_first_direct_settle(const pw_f64_first *w, pw_f64_direct_state *s, double x)
{
    const double y = (w->b0 + w->b1) / (1 + w->a1) * x;
    s->x1 = s->x2 = x;
    s->y1 = s->y2 = y;
    return y;
}

double pw_f64_second_direct_settle(const pw_f64_second *w, pw_f64_direct_state *s, double x)
{
    const double above = w->b0 + w->b1 + w->b2, below = 1 + w->a1 + w->a2;
    const double y = above / below * x;
    s->x1 = s->x2 = x;
    s->y1 = s->y2 = y;
    return y;
}
