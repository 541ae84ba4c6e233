/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Poles and zeros of a model as pieces that sections are put together from. */
#ifndef PW_WORDS_UNITS_H
#define PW_WORDS_UNITS_H

#include "words/inner.h"

typedef struct pw_pole_unit {
    int size;                    /* 1 or 2 poles */
    double complex pole[2];
    bool integrates;             /* has a pole at exactly 1 */
} pw_pole_unit;

/* Zeros that are equal are one group. A group of complex pairs takes two places, a real zero or one
 * at infinity (a whole-sample delay) one. */
typedef struct pw_zero_group {
    int size, count;             /* places of one; how many there are */
    bool infinite;
    double complex zero;         /* imag > 0: with its conjugate */
} pw_zero_group;

typedef struct pw_units {
    pw_pole_unit pole[PW_MAX_SECTIONS];
    int poles;                   /* units; those that integrate last */
    pw_zero_group zero[PW_MAX_ROOTS];
    int zeros;                   /* groups; as many places in all as there are poles */
} pw_units;

/* as_listed keeps the order of the poles and pairs real ones as they come. A pole and a zero at
 * exactly 1 cancel. step: of the words of a second-order section's poles; 0 for floats. */
void pw_units_make(const pw_roots *z, bool as_listed, double step, pw_units *out);

/* A monic section of a pole unit with the zeros of one or two groups (-1: none). */
pw_section pw_units_section(const pw_units *units, int pole, int zero0, int zero1);

#endif
