/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Numbers with prefixes and units, and the letter-for-the-point codes of IEC 60062. */
#ifndef PW_STAGEFILE_QUANTITY_H
#define PW_STAGEFILE_QUANTITY_H

#include <stdbool.h>

/* What a value must be. The value that comes out is in the unit named; a bare number is taken in
 * that unit too. */
typedef enum pw_dimension {
    PW_DIM_NUMBER,               /* plain, prefixes allowed */
    PW_DIM_RATIO,                /* plain, or dB: 10^(dB/20) */
    PW_DIM_DECIBEL,              /* dB */
    PW_DIM_FREQUENCY,            /* Hz; rad/s are divided by 2 pi */
    PW_DIM_ANGULAR,              /* rad/s; Hz are multiplied by 2 pi */
    PW_DIM_TIME,                 /* s */
    PW_DIM_VOLTAGE, PW_DIM_CURRENT,                           /* V, A */
    PW_DIM_RESISTANCE, PW_DIM_CAPACITANCE, PW_DIM_INDUCTANCE, /* ohm, F, H: codes allowed */
    PW_DIM_CONDUCTANCE,          /* S */
    PW_DIM_ANGLE,                /* deg */
    PW_DIM_FRACTION,             /* plain, or %: 0.01 is 1 % */
    PW_DIM_BITS, PW_DIM_BYTES,   /* KiB, MiB, kB */
    PW_DIMENSIONS
} pw_dimension;

typedef struct pw_quantity_fault {
    char what[160];              /* "'48 V' is a voltage" */
    char near[32];               /* a unit that was meant, most likely: "kHz"; or "" */
} pw_quantity_fault;

/* Reads text as a quantity: [sign] decimal [e exponent] [blank] [prefix] [unit], or a code such as
 * 4k7. Prefixes f p n u (also the Greek letter) m k (also K) M G T fold into the decimal exponent
 * before the one conversion to double, so "1.6 nF" is exactly strtod("1.6e-9"). M is mega and m is
 * milli, always. False with *fault filled where it is no number, not finite, too small for a
 * double, or of another dimension. */
bool pw_quantity_read(const char *text, pw_dimension want, double *value, pw_quantity_fault *fault);

/* "a frequency", and a sample of one: "1 kHz". */
const char *pw_dimension_phrase(pw_dimension dimension);
const char *pw_dimension_sample(pw_dimension dimension);

/* The unit as documents print it: "Hz", "dB"; "" for plain numbers. */
const char *pw_dimension_unit(pw_dimension dimension);

/* What a user typed, in quotes, cut to a readable length at a character. Returns buffer. */
#define PW_SHOWN_ROOM 64
char *pw_shown(char *buffer, const char *text);

/* The text without blanks (spaces, tabs, no-break and thin spaces) before *p; p moves over them. */
const char *pw_skip_blanks(const char *p);
/* The end of the decimal number that begins at p (sign, digits, point, exponent), or p. */
const char *pw_decimal_end(const char *p);

#endif
