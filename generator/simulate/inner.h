/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the files of simulate/ share. */
#ifndef PW_SIMULATE_INNER_H
#define PW_SIMULATE_INNER_H

#include "simulate/simulate.h"

/* What a fixed-point step needs besides the words of its section. */
typedef struct pw_word_rules {
    int64_t low, high;           /* the sample word's ends */
    bool wrap, truncate;
} pw_word_rules;

/* What one step of a section passed through on its way, for the nodes. */
typedef struct pw_fixed_trace {
    int64_t acc[3];              /* of y, u1, u2 before rounding; direct forms: [0] only */
    int fraction[3];
} pw_fixed_trace;

pw_word_rules pw_word_rules_of(const pw_realisation *realisation);

/* 2^(fraction-1), or 0 for truncation or where there is nothing to round. */
int64_t pw_half(int fraction, const pw_word_rules *rules);

/* b-side sum p brought from 2^-b_fraction to 2^-a_fraction. */
int64_t pw_align(const pw_words *words, int64_t p);

/* One sample through one section; state as pw_simulation holds it. trace may be null. */
int32_t pw_fixed_step(const pw_words *words, const pw_word_rules *rules, int64_t state[6],
                      int32_t x, uint64_t *clipped, pw_fixed_trace *trace);

/* n samples through one section; in may be out. single: float32, else float64. */
void pw_float_run(const pw_words *words, bool single, double state[4], const double *in,
                  double *out, size_t n);

/* Settles one section at x and returns its y. */
int32_t pw_fixed_settle(const pw_words *words, const pw_word_rules *rules, int64_t state[6],
                        int32_t x);
double pw_float_settle(const pw_words *words, bool single, double state[4], double x);

#endif
