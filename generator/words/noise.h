/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Round-off noise at the output. */
#ifndef PW_WORDS_NOISE_H
#define PW_WORDS_NOISE_H

#include "words/proof.h"

/* Fills r->noise for fixed point (given = false for floats). share, where not null, gets each
 * section's part of the output variance, in LSB^2.
 * Model: every rounding is an error that is uniform over its step, white, and independent of the
 * others (Bennett; common practice); where the words end in zeros the step has fewer levels. */
void pw_noise_find(pw_proof *proof, const pw_stage *stage, pw_realisation *r, double *share);

/* ||(1 - k1/z - k2/z^2) / (1 + a1/z + a2/z^2)||^2 in closed form; INFINITY where it diverges.
 * Source: Astrom, Introduction to Stochastic Control Theory, 1970, the table for order 2. */
double pw_feedback_power(const double a[3], int k1, int k2);

#endif
