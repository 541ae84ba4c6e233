/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A circuit reduced to its reactive terms, in double precision, to be evaluated often. */
#ifndef PW_ANALOG_SPREAD_MODEL_H
#define PW_ANALOG_SPREAD_MODEL_H

#include "analog/circuit.h"

/* H(s) = h0 - x p'(I + x M)^-1 q, x = s - s0 (Woodbury's identity on the nodal equations), with M
 * brought to Hessenberg form so that each frequency costs m^2. One for each thread. */
typedef struct pw_reduced {
    const pw_net *net;
    double s0, h0;
    int n, m;
    double *value, *a, *row_scale, *x, *M, *t, *p, *q;
    int *pivot;
    double complex *work, *solution, *second;
    struct gsl_reduced *eigen;
} pw_reduced;

void pw_reduced_make(const pw_net *net, double s0, pw_arena *arena, pw_reduced *out);
void pw_reduced_free(pw_reduced *r);                     /* what the arena does not hold */

/* The model for parts at scale[part] times their values. false: singular at s0. */
bool pw_reduced_set(pw_reduced *r, const double *scale);

/* H and dH/ds at s. */
void pw_reduced_at(pw_reduced *r, double complex s, double complex *h, double complex *slope);

/* Whether a pole is in the right half plane, beyond rounding. Destroys the model: set it again. */
bool pw_reduced_unstable(pw_reduced *r);

#endif
