/* SPDX-License-Identifier: 0BSD */
/* Sections on q15 samples: int16_t, 1.0 is 2^15. Words and their precondition: pw_fixed.h.
 *
 * A kernel takes one section over n samples; in may be out, n may be 0. It returns how many results
 * lay outside the word and were clamped (or wrapped, where the table says so). The results are the
 * same however a signal is cut into blocks. settle sets the state as if x had been there for ever,
 * clamped to the word, and returns y. A state of zeros is a section at rest. */
#ifndef PW_Q15_H
#define PW_Q15_H

#include "pw_fixed.h"

#ifdef __cplusplus
extern "C" {
#endif

typedef struct pw_q15_direct_state { int16_t x1, x2, y1, y2; } pw_q15_direct_state;   /* 8 bytes */
typedef struct pw_q15_coupled_state { int16_t u1, u2; } pw_q15_coupled_state;         /* 4 bytes */
typedef struct pw_q15_shaped_state {                                              /* 16 bytes */
    pw_q15_direct_state direct;
    int32_t e1, e2;      /* |e| <= 2^(a_fraction-1); 0 <= e < 2^a_fraction to truncate */
} pw_q15_shaped_state;

uint32_t pw_q15_gain(const pw_gain *w, const int16_t *in, int16_t *out, size_t n);
uint32_t pw_q15_direct(const pw_direct *w, pw_q15_direct_state *s,
                       const int16_t *in, int16_t *out, size_t n);
uint32_t pw_q15_shaped(const pw_shaped *w, pw_q15_shaped_state *s,
                       const int16_t *in, int16_t *out, size_t n);
uint32_t pw_q15_coupled(const pw_coupled *w, pw_q15_coupled_state *s,
                        const int16_t *in, int16_t *out, size_t n);

int16_t pw_q15_gain_settle(const pw_gain *w, int16_t x);
int16_t pw_q15_direct_settle(const pw_direct *w, pw_q15_direct_state *s, int16_t x);
int16_t pw_q15_shaped_settle(const pw_shaped *w, pw_q15_shaped_state *s, int16_t x);
int16_t pw_q15_coupled_settle(const pw_coupled *w, pw_q15_coupled_state *s, int16_t x);

#ifdef __cplusplus
}
#endif
#endif
