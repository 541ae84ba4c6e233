/* SPDX-License-Identifier: 0BSD */
/* Sections on double-precision samples.
 *
 * A kernel takes one section over n samples; in may be out, n may be 0. Results equal the
 * generator's vectors bit for bit where the compiler rounds every operation on its own: with
 * -ffp-contract=off, on a machine that evaluates double as double. settle sets the state as if x
 * had been there for ever and returns y; it must not be asked of an integrator (1 + a1 + a2 = 0):
 * a stage with one is reset instead. A state of zeros is a section at rest. */
#ifndef PW_F64_H
#define PW_F64_H

#include <float.h>

#include "pw_runtime.h"

PW_ASSERT(sizeof(double) == 8 && DBL_MANT_DIG == 53,
          pw_f64_needs_a_double_of_64_bits_use_float32_q15_or_q31);

#ifdef __cplusplus
extern "C" {
#endif

typedef struct pw_f64_first { double b0, b1, a1; } pw_f64_first;               /* 24 bytes */
typedef struct pw_f64_second { double b0, b1, b2, a1, a2; } pw_f64_second;     /* 40 bytes */

typedef struct pw_f64_transposed_state { double s1, s2; } pw_f64_transposed_state;   /* 16 bytes */
typedef struct pw_f64_direct_state { double x1, x2, y1, y2; } pw_f64_direct_state;   /* 32 bytes */

void pw_f64_gain(double b, const double *in, double *out, size_t n);
/* y = s1 + b0 x; s1 = b1 x - a1 y */
void pw_f64_first_transposed(const pw_f64_first *w, pw_f64_transposed_state *s,
                             const double *in, double *out, size_t n);
/* y = s1 + b0 x; s1 = (s2 + b1 x) - a1 y; s2 = b2 x - a2 y */
void pw_f64_second_transposed(const pw_f64_second *w, pw_f64_transposed_state *s,
                              const double *in, double *out, size_t n);
/* y = b0 x + b1 x1 - a1 y1, and y = b0 x + b1 x1 + b2 x2 - a1 y1 - a2 y2, from left to right */
void pw_f64_first_direct(const pw_f64_first *w, pw_f64_direct_state *s,
                         const double *in, double *out, size_t n);
void pw_f64_second_direct(const pw_f64_second *w, pw_f64_direct_state *s,
                          const double *in, double *out, size_t n);

double pw_f64_first_transposed_settle(const pw_f64_first *w, pw_f64_transposed_state *s, double x);
double pw_f64_second_transposed_settle(const pw_f64_second *w, pw_f64_transposed_state *s,
                                       double x);
double pw_f64_first_direct_settle(const pw_f64_first *w, pw_f64_direct_state *s, double x);
double pw_f64_second_direct_settle(const pw_f64_second *w, pw_f64_direct_state *s, double x);

#ifdef __cplusplus
}
#endif
#endif
