/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Floating-point sections. Every operation is rounded on its own to the format: this file must be
 * compiled without contraction (the Makefile says -ffp-contract=off) where float and double are
 * evaluated in their own types. */
#include <float.h>

#include "simulate/inner.h"

#if FLT_EVAL_METHOD != 0
#error "float and double must keep their own types: on 32-bit x86 add -msse2 -mfpmath=sse"
#endif

enum { X1, X2, Y1, Y2 };         /* state of direct-1 */
enum { S1, S2 };                 /* of transposed-2 */

#define REAL float
#define NAME(part) single_##part
#include "simulate/float_section.h"
#undef REAL
#undef NAME

#define REAL double
#define NAME(part) double_##part
#include "simulate/float_section.h"

void pw_float_run(const pw_words *words, bool single, double state[4], const double *in,
                  double *out, size_t n)
{
    if (single) single_run(words, state, in, out, n);
    else double_run(words, state, in, out, n);
}

double pw_float_settle(const pw_words *words, bool single, double state[4], double x)
{
    return single ? single_settle(words, state, (float)x) : double_settle(words, state, x);
}
