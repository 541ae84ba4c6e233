/* SPDX-License-Identifier: 0BSD */
/* Sections on single-precision samples.
 *
 * A kernel takes one section over n samples; in may be out, n may be 0. Results equal the
 * generator's vectors bit for bit where the compiler rounds every operation on its own: with
 * -ffp-contract=off, on a machine that evaluates float as float. settle sets the state as if x
 * had been there for ever and returns y; it must not be asked of an integrator (1 + a1 + a2 = 0):
 * a stage with one is reset instead. A state of zeros is a section at rest. */
#ifndef PW_F32_H
#define PW_F32_H

#include <float.h>

#include "pw_runtime.h"

PW_ASSERT(sizeof(float) == 4 && FLT_MANT_DIG == 24,
          pw_f32_needs_an_ieee_float_of_32_bits_use_q15_or_q31);

#ifdef __cplusplus
extern "C" {
#endif

typedef struct pw_f32_first { float b0, b1, a1; } pw_f32_first;               /* 12 bytes */
typedef struct pw_f32_second { float b0, b1, b2, a1, a2; } pw_f32_second;     /* 20 bytes */

typedef struct pw_f32_transposed_state { float s1, s2; } pw_f32_transposed_state;   /* 8 bytes */
typedef struct pw_f32_direct_state { float x1, x2, y1, y2; } pw_f32_direct_state;   /* 16 bytes */

void pw_f32_gain(float b, const float *in, float *out, size_t n);
/* y = s1 + b0 x; s1 = b1 x - a1 y */
void pw_f32_first_transposed(const pw_f32_first *w, pw_f32_transposed_state *s,
                             const float *in, float *out, size_t n);
/* y = s1 + b0 x; s1 = (s2 + b1 x) - a1 y; s2 = b2 x - a2 y */
void pw_f32_second_transposed(const pw_f32_second *w, pw_f32_transposed_state *s,
                              const float *in, float *out, size_t n);
/* y = b0 x + b1 x1 - a1 y1, and y = b0 x + b1 x1 + b2 x2 - a1 y1 - a2 y2, from left to right */
void pw_f32_first_direct(const pw_f32_first *w, pw_f32_direct_state *s,
                         const float *in, float *out, size_t n);
void pw_f32_second_direct(const pw_f32_second *w, pw_f32_direct_state *s,
                          const float *in, float *out, size_t n);

float pw_f32_first_transposed_settle(const pw_f32_first *w, pw_f32_transposed_state *s, float x);
float pw_f32_second_transposed_settle(const pw_f32_second *w, pw_f32_transposed_state *s, float x);
float pw_f32_first_direct_settle(const pw_f32_first *w, pw_f32_direct_state *s, float x);
float pw_f32_second_direct_settle(const pw_f32_second *w, pw_f32_direct_state *s, float x);

#ifdef __cplusplus
}
#endif
#endif
