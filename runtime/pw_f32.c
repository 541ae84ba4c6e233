/* SPDX-License-Identifier: 0BSD */
/* Parentheses and the order of every sum are part of what these kernels promise. */
#include "pw_f32.h"

void pw_f32_gain(float b, const float *in, float *out, size_t n)
{
    size_t i;
    for (i = 0; i < n; i++) out[i] = b * in[i];
}

void pw_f32_first_transposed(const pw_f32_first *w, pw_f32_transposed_state *s,
                             const float *in, float *out, size_t n)
{
    const float b0 = w->b0, b1 = w->b1, a1 = w->a1;
    float s1 = s->s1;
    size_t i;
    for (i = 0; i < n; i++) {
        const float x = in[i];
        const float y = s1 + b0 * x;
        s1 = b1 * x - a1 * y;
        out[i] = y;
    }
    s->s1 = s1;
}

void pw_f32_second_transposed(const pw_f32_second *w, pw_f32_transposed_state *s,
                              const float *in, float *out, size_t n)
{
    const float b0 = w->b0, b1 = w->b1, b2 = w->b2, a1 = w->a1, a2 = w->a2;
    float s1 = s->s1, s2 = s->s2;
    size_t i;
    for (i = 0; i < n; i++) {
        const float x = in[i];
        const float y = s1 + b0 * x;
        s1 = (s2 + b1 * x) - a1 * y;
        s2 = b2 * x - a2 * y;
        out[i] = y;
    }
    s->s1 = s1;
    s->s2 = s2;
}

void pw_f32_first_direct(const pw_f32_first *w, pw_f32_direct_state *s,
                         const float *in, float *out, size_t n)
{
    const float b0 = w->b0, b1 = w->b1, a1 = w->a1;
    float x1 = s->x1, y1 = s->y1;
    size_t i;
    for (i = 0; i < n; i++) {
        const float x = in[i];
        const float y = b0 * x + b1 * x1 - a1 * y1;
        x1 = x;
        y1 = y;
        out[i] = y;
    }
    s->x1 = x1;
    s->y1 = y1;
}

void pw_f32_second_direct(const pw_f32_second *w, pw_f32_direct_state *s,
                          const float *in, float *out, size_t n)
{
    const float b0 = w->b0, b1 = w->b1, b2 = w->b2, a1 = w->a1, a2 = w->a2;
    float x1 = s->x1, x2 = s->x2, y1 = s->y1, y2 = s->y2;
    size_t i;
    for (i = 0; i < n; i++) {
        const float x = in[i];
        const float y = b0 * x + b1 * x1 + b2 * x2 - a1 * y1 - a2 * y2;
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

float pw_f32_first_transposed_settle(const pw_f32_first *w, pw_f32_transposed_state *s, float x)
{
    const float y = (w->b0 + w->b1) / (1 + w->a1) * x;
    s->s1 = y - w->b0 * x;
    s->s2 = 0;
    return y;
}

float pw_f32_second_transposed_settle(const pw_f32_second *w, pw_f32_transposed_state *s, float x)
{
    const float above = w->b0 + w->b1 + w->b2, below = 1 + w->a1 + w->a2;
    const float y = above / below * x;
    s->s1 = y - w->b0 * x;
    s->s2 = w->b2 * x - w->a2 * y;
    return y;
}

float pw_f32_first_direct_settle(const pw_f32_first *w, pw_f32_direct_state *s, float x)
{
    const float y = (w->b0 + w->b1) / (1 + w->a1) * x;
    s->x1 = s->x2 = x;
    s->y1 = s->y2 = y;
    return y;
}

float pw_f32_second_direct_settle(const pw_f32_second *w, pw_f32_direct_state *s, float x)
{
    const float above = w->b0 + w->b1 + w->b2, below = 1 + w->a1 + w->a2;
    const float y = above / below * x;
    s->x1 = s->x2 = x;
    s->y1 = s->y2 = y;
    return y;
}
