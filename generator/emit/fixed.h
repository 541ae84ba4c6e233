/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What kernels on fixed-point samples share, portable ones and those of a target. */
#ifndef PW_EMIT_FIXED_H
#define PW_EMIT_FIXED_H

#include "emit/emission.h"

/* How wide an accumulator must be. MODULO: sums are kept modulo 2^32 in a uint32_t, because the
 * last value is proved to fit int32_t though a sum on the way may not. */
typedef enum pw_accumulator { PW_ACC_64, PW_ACC_32, PW_ACC_MODULO } pw_accumulator;

pw_accumulator pw_direct_accumulator(const pw_emission *e, const pw_words *w);

/* A constant "static const TYPE $_NAME_#" in the smallest of int16_t, int32_t, int64_t; nothing
 * where the value is 0. fraction gives the real value of the note; note replaces it where not null.
 * */
void pw_fixed_constant(const pw_emission *e, pw_code *in, const char *name, int64_t value,
                       int fraction,
                       const char *note);

/* The sum with one product more: "SUM + (TYPE)$_NAME_# * FACTOR"; SUM itself where the word is 0.
 * */
const char *pw_fixed_term(const pw_emission *e, const char *sum, char sign, pw_accumulator acc,
                          int64_t value, const char *name, const char *factor);

/* "int64_t", "int32_t", "uint32_t". */
const char *pw_accumulator_type(pw_accumulator acc);

/* The statements that end a step: "const @ NAME = .." from v, clamped, wrapped or bare as the
 * section needs; w tells whether the clamp is needless. */
void pw_fixed_into_word(const pw_emission *e, const pw_words *w, pw_code *body, const char *name,
                        const char *v, const char *node);

/* Helpers at file scope, once a file: $_into_word (counts), $_clamp (does not), $_ratio. */
void pw_fixed_helpers(const pw_emission *e, const pw_words *w, pw_code *file);

/* The parts of the portable direct kernels, for kernels that differ from them in the step alone. */
void pw_direct_fields(const pw_emission *e, const pw_words *w, pw_code *in);
void pw_direct_constants(const pw_emission *e, const pw_words *w, pw_code *in);
void pw_direct_settle(const pw_emission *e, const pw_words *w, pw_code *body);
const char *pw_direct_member(const pw_emission *e, const pw_words *w, int k);
int64_t pw_direct_gain_sum(const pw_words *w);           /* b0 + b1 + b2: 0 blocks a constant */

/* The same for the coupled form. */
void pw_coupled_fields(const pw_emission *e, const pw_words *w, pw_code *in);
void pw_coupled_constants(const pw_emission *e, const pw_words *w, pw_code *in);
void pw_coupled_step(const pw_emission *e, const pw_words *w, pw_code *body);
void pw_coupled_settle(const pw_emission *e, const pw_words *w, pw_code *body);
const char *pw_coupled_member(const pw_emission *e, const pw_words *w, int k);

#endif
