/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a firmware engineer writes first, to measure emitted code against: samples outside, sections
 * inside, words and state behind pointers, the number of sections known at run time only. Compiled
 * -O2. Feedback words are negated: y = b0 x + b1 x1 + b2 x2 + c1 y1 + c2 y2. */
#include "yardstick.h"

__attribute__((noinline)) void plain_float(const float (*word)[5], float (*delay)[2], int sections,
                                           const float *from, float *to, int samples)
{
    while (samples-- > 0) {
        float v = *from++;
        for (int s = 0; s < sections; s++) {
            const float *w = word[s];
            float *d = delay[s];
            const float u = v;
            v = w[0] * u + d[0];
            d[0] = w[1] * u + w[3] * v + d[1];
            d[1] = w[2] * u + w[4] * v;
        }
        *to++ = v;
    }
}

__attribute__((noinline)) void plain_q31(const int32_t (*word)[5], int32_t (*past)[4], int sections,
                                         const int32_t *from, int32_t *to, int samples)
{
    while (samples-- > 0) {
        int32_t v = *from++;
        for (int s = 0; s < sections; s++) {
            const int32_t *w = word[s];
            int32_t *p = past[s];
            int64_t sum = (int64_t)w[0] * v + (int64_t)w[1] * p[0] + (int64_t)w[2] * p[1]
                        + (int64_t)w[3] * p[2] + (int64_t)w[4] * p[3];
            sum = (sum + ((int32_t)1 << 29)) >> 30;
            p[1] = p[0];
            p[0] = v;
            p[3] = p[2];
            v = sum > INT32_MAX ? INT32_MAX : sum < INT32_MIN ? INT32_MIN : (int32_t)sum;
            p[2] = v;
        }
        *to++ = v;
    }
}

__attribute__((noinline)) void plain_q15(const int16_t (*word)[5], int16_t (*past)[4], int sections,
                                         const int16_t *from, int16_t *to, int samples)
{
    while (samples-- > 0) {
        int16_t v = *from++;
        for (int s = 0; s < sections; s++) {
            const int16_t *w = word[s];
            int16_t *p = past[s];
            int32_t sum = (int32_t)w[0] * v + (int32_t)w[1] * p[0] + (int32_t)w[2] * p[1]
                        + (int32_t)w[3] * p[2] + (int32_t)w[4] * p[3];
            sum = (sum + ((int32_t)1 << 13)) >> 14;
            p[1] = p[0];
            p[0] = v;
            p[3] = p[2];
            v = (int16_t)(sum > INT16_MAX ? INT16_MAX : sum < INT16_MIN ? INT16_MIN : sum);
            p[2] = v;
        }
        *to++ = v;
    }
}
