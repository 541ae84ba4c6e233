/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Floating-point sections. Every operation is rounded on its own to the format: this file must be
 * compiled without contraction (the Makefile says -ffp-contract=off) where float and double are
 * evaluated in their own types. The two formats are one text, because C has no templates. */
#include <float.h>

#include "simulate/inner.h"

#if FLT_EVAL_METHOD != 0
#error "the simulation needs float and double evaluated in their own types: on 32-bit x86 add -msse2 -mfpmath=sse"
#endif

enum { X1, X2, Y1, Y2 };         /* direct-1 */
enum { S1, S2 };                 /* transposed-2 */

#define FLOAT_SECTION(real, name)                                                                  \
    static real name##_transposed(const pw_words *w, real *s, real x)                              \
    {                                                                                              \
        real b0 = (real)w->fb[0], b1 = (real)w->fb[1], b2 = (real)w->fb[2];                        \
        real a1 = (real)w->fa[1], a2 = (real)w->fa[2];                                             \
        real y = s[S1] + b0 * x;                                                                   \
        if (w->order == 1) {                                                                       \
            s[S1] = b1 * x - a1 * y;                                                               \
            return y;                                                                              \
        }                                                                                          \
        s[S1] = (s[S2] + b1 * x) - a1 * y;                                                         \
        s[S2] = b2 * x - a2 * y;                                                                   \
        return y;                                                                                  \
    }                                                                                              \
    static real name##_direct(const pw_words *w, real *s, real x)                                  \
    {                                                                                              \
        real b0 = (real)w->fb[0], b1 = (real)w->fb[1], b2 = (real)w->fb[2];                        \
        real a1 = (real)w->fa[1], a2 = (real)w->fa[2];                                             \
        real y = b0 * x + b1 * s[X1] - a1 * s[Y1];                                                 \
        if (w->order == 2) y = b0 * x + b1 * s[X1] + b2 * s[X2] - a1 * s[Y1] - a2 * s[Y2];         \
        s[X2] = s[X1];                                                                             \
        s[X1] = x;                                                                                 \
        s[Y2] = s[Y1];                                                                             \
        s[Y1] = y;                                                                                 \
        return y;                                                                                  \
    }                                                                                              \
    static void name##_run(const pw_words *w, double *state, const double *in, double *out,        \
                           size_t n)                                                               \
    {                                                                                              \
        real s[4] = {(real)state[0], (real)state[1], (real)state[2], (real)state[3]};              \
        for (size_t i = 0; i < n; i++) {                                                           \
            real x = (real)in[i];                                                                  \
            if (w->order == 0) out[i] = (real)w->fb[0] * x;                                        \
            else if (w->structure == PW_DIRECT_1) out[i] = name##_direct(w, s, x);                 \
            else out[i] = name##_transposed(w, s, x);                                              \
        }                                                                                          \
        for (int k = 0; k < 4; k++) state[k] = s[k];                                               \
    }                                                                                              \
    static double name##_settle(const pw_words *w, double *s, real x)                              \
    {                                                                                              \
        real b0 = (real)w->fb[0], b1 = (real)w->fb[1], b2 = (real)w->fb[2];                        \
        real a1 = (real)w->fa[1], a2 = (real)w->fa[2];                                             \
        if (w->order == 0) return b0 * x;                                                          \
        real above = w->order == 1 ? b0 + b1 : b0 + b1 + b2;                                       \
        real below = w->order == 1 ? (real)1 + a1 : (real)1 + a1 + a2;                             \
        real y = above / below * x;                                                                \
        if (w->structure == PW_DIRECT_1) {                                                         \
            s[X1] = s[X2] = x;                                                                     \
            s[Y1] = s[Y2] = y;                                                                     \
            return y;                                                                              \
        }                                                                                          \
        s[S1] = y - b0 * x;                                                                        \
        if (w->order == 2) s[S2] = b2 * x - a2 * y;                                                \
        return y;                                                                                  \
    }

FLOAT_SECTION(float, single)
FLOAT_SECTION(double, twice)

void pw_float_run(const pw_words *words, bool single, double state[4], const double *in,
                  double *out, size_t n)
{
    if (single) single_run(words, state, in, out, n);
    else twice_run(words, state, in, out, n);
}

double pw_float_settle(const pw_words *words, bool single, double state[4], double x)
{
    return single ? single_settle(words, state, (float)x) : twice_settle(words, state, x);
}
