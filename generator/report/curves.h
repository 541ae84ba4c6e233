/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Curves that only the pictures need: step responses and the spectrum of the round-off. */
#ifndef PW_REPORT_CURVES_H
#define PW_REPORT_CURVES_H

#include "report/results.h"

#define PW_CURVE_POINTS 1536

typedef struct pw_step_curve {
    bool logarithmic;            /* time in octaves: fast and slow poles lie far apart */
    int analogs, digitals;       /* as many as the ringing needs to be drawn */
    double analog_t[PW_CURVE_POINTS], analog[PW_CURVE_POINTS];
    double digital_t[PW_CURVE_POINTS], digital[PW_CURVE_POINTS];
} pw_step_curve;

/* Output for an input step of one unit at t = 0 (seconds), in output units.
 * Analog: the matrix exponential of the cascade of second-order blocks, exact for a held input, to
 *   1e-9 of the largest value. Source: Van Loan, "Computing integrals involving the matrix
 *   exponential", IEEE Trans. Automatic Control 23(3), 1978: input held as one more state.
 * Digital: the realised sections run in double precision.
 * PW_FAILED where the exponential does not exist in double precision. */
PW_CHECKED pw_status pw_curve_step(const pw_results *results, pw_step_curve *out);

typedef struct pw_noise_curve {
    int points;
    double hz[PW_CURVE_POINTS];
    double round_off[PW_CURVE_POINTS];     /* LSB^2 / Hz, one-sided, what the filter adds */
    double input[PW_CURVE_POINTS];         /* what the rounding of the input becomes */
} pw_noise_curve;

/* Power density at the output, log-spaced from the band's low end to half the rate. Every rounding
 * is white with variance 1/12 of its step squared: common practice (Oppenheim, Schafer,
 * "Discrete-Time Signal Processing", ch. 6). Fixed point only: points is 0 for floats. */
void pw_curve_noise(const pw_results *results, pw_noise_curve *out);

/* The density of the round-off at one frequency, LSB^2 / Hz. */
double pw_noise_density(const pw_realisation *realisation, double rate_hz, double hz);

#endif
