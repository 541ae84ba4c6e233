/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Analog model -> digital model -> sections. */
#ifndef PW_DISCRETE_DIGITAL_H
#define PW_DISCRETE_DIGITAL_H

#include "analog/model.h"

typedef struct pw_error_peak { double max, at_hz; } pw_error_peak;   /* max is >= 0 */
typedef struct pw_error_figures {
    pw_error_peak magnitude_db, phase_deg, delay_s;
} pw_error_figures;

typedef struct pw_candidate {
    pw_method method;
    pw_prewarp prewarp;
    double prewarp_hz;
    pw_infinity zeros_at_infinity;    /* matched-z */
    bool possible;               /* impulse invariance: not with as many zeros as poles */
    double magnitude_error_db, phase_error_deg;   /* largest over the band, above the floor */
} pw_candidate;

#define PW_MAX_CANDIDATES 16

typedef struct pw_digital {
    pw_method method;            /* never PW_BEST: the one that was chosen */
    pw_prewarp prewarp;          /* never PW_PREWARP_DEFAULT */
    double prewarp_hz;           /* PW_PREWARP_AT */
    pw_infinity zeros_at_infinity;    /* matched-z */
    bool gain_matched;
    double match_gain_hz;
    pw_roots z;                  /* in the z plane; output units per input unit, like the analog
                                    one. fewer zeros than poles: whole-sample delays */
    pw_candidate candidate[PW_MAX_CANDIDATES];   /* what was tried, best first; one for a named
                                                    method */
    int candidates;
} pw_digital;

/* The transform that the stage asks for. Messages: prewarp, band, match-gain at or above half the
 * rate (errors), roots above it (warnings), a form that does not exist (error); each with the rate
 * that would do. */
PW_CHECKED pw_status pw_discretise(const pw_stage *stage, const pw_roots *analog, pw_digital *out,
                                   pw_messages *messages);

/* Digital response at a frequency in Hz, and its group delay in seconds. */
double complex pw_digital_at(const pw_roots *z, double rate_hz, double hz);
double pw_digital_group_delay(const pw_roots *z, double rate_hz, double hz);

/* ---- sections ---- */

#define PW_MAX_SECTIONS (PW_MAX_ROOTS / 2 + 2)

/* y = b0 x + b1 x1 + b2 x2 - a1 y1 - a2 y2, a[0] = 1; order 1: b[2] = a[2] = 0.
 * = gain * prod(z - zero) / prod(z - pole), in powers of 1/z: with fewer zeros than poles the first
 * b are 0. Complex roots stand as both of a pair. */
typedef struct pw_section {
    int order;                   /* 1 or 2 (0: a plain gain b[0]) */
    double b[3], a[3];
    int poles, zeros;
    double complex pole[2], zero[2];
    double gain;
} pw_section;

typedef struct pw_sections { pw_section list[PW_MAX_SECTIONS]; int count; } pw_sections;

/* Pairs poles with the nearest zeros, orders the sections so that peaks stay low, spreads the gain
 * evenly. The product of the sections equals the model to rounding. as_listed keeps the order in
 * which the poles were given. */
void pw_sections_make(const pw_roots *z, bool as_listed, pw_sections *out);

/* Fills b and a from roots and gain; exact zeros of the z plane (1, -1, 0) give exact words. */
void pw_section_expand(pw_section *section);

/* (b0 + b1/z + b2/z^2) / (a0 + a1/z + a2/z^2), and its group delay in samples at z = e^(j theta).
 * Evaluated about the nearer of z = 1 and z = -1, so that a low corner at a high rate does not
 * cancel. */
double complex pw_section_at(const double b[3], const double a[3], double complex z);
double pw_section_group_delay(const double b[3], const double a[3], double complex z);

#endif
