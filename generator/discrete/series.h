/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Samples of an impulse response and the numerator that they make, in many digits. */
#ifndef PW_DISCRETE_SERIES_H
#define PW_DISCRETE_SERIES_H

#include "analog/model.h"
#include "discrete/many.h"

/* prod(s - zero)/prod(s - pole), zeros < poles; rad/s. One pole more than a model can have: the
 * step's. */
typedef struct pw_transfer {
    double complex pole[PW_MAX_ROOTS + 1], zero[PW_MAX_ROOTS];
    int poles, zeros;
} pw_transfer;

/* With h(k) the inverse Laplace transform of the transfer, taken in units of one sample, at sample
 * k: the b[0 .. poles] of
 *     sum_k h(k) z^-k = sum b[k] z^-k / prod(1 - exp(p T)/z),
 * h(0) halved where asked. b[poles] is exactly 0 where it is not halved. b is made here, of `bits`
 * bits, with real values. */
void pw_series_numerator(const pw_transfer *transfer, double rate_hz, bool halve_first, long bits,
                         pw_many *b);

#endif
