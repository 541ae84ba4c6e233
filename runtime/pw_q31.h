/* SPDX-License-Identifier: 0BSD */
/* Sections on q31 samples: int32_t, 1.0 is 2^31. Words and their precondition: pw_fixed.h.
 *
 * A kernel takes one section over n samples; in may be out, n may be 0. It returns how many results
 * lay outside the word and were clamped (or wrapped, where the table says so). The results are the
 * same however a signal is cut into blocks. settle sets the state as if x had been there for ever,
 * clamped to the word, and returns y. A state of zeros is a section at rest. */
#ifndef PW_Q31_H
#define PW_Q31_H

#include "pw_fixed.h"

#ifdef __cplusplus
extern "C" {
#endif

typedef struct pw_q31_direct_state { int32_t x1, x2, y1, y2; } pw_q31_direct_state;   /* 16 bytes */
typedef struct pw_q31_coupled_state { int32_t u1, u2; } pw_q31_coupled_state;         /* 8 bytes */
typedef struct pw_q31_shaped_state {                                              /* 24 bytes */
    pw_q31_direct_state direct;
    int32_t e1, e2;      /* |e| <= 2^(a_fraction-1); 0 <= e < 2^a_fraction to truncate */
} pw_q31_shaped_state;

uint32_t pw_q31_gain(const pw_gain *w, const int32_t *in, int32_t *out, size_t n);
uint32_t pw_q31_direct(const pw_direct *w, pw_q31_direct_state *s,
                       const int32_t *in, int32_t *out, size_t n);
uint32_t pw_q31_shaped(const pw_shaped *w, pw_q31_shaped_state *s,
                       const int32_t *in, int32_t *out, size_t n);
uint32_t pw_q31_coupled(const pw_coupled *w, pw_q31_coupled_state *s,
                        const int32_t *in, int32_t *out, size_t n);

int32_t pw_q31_gain_settle(const pw_gain *w, int32_t x);
int32_t pw_q31_direct_settle(const pw_direct *w, pw_q31_direct_state *s, int32_t x);
int32_t pw_q31_shaped_settle(const pw_shaped *w, pw_q31_shaped_state *s, int32_t x);
int32_t pw_q31_coupled_settle(const pw_coupled *w, pw_q31_coupled_state *s, int32_t x);

#ifdef __cplusplus
}
#endif
#endif
