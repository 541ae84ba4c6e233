/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The analog stage's exact response to an input that is held, or joined by straight lines, between
 * samples. */
#ifndef PW_TWIN_EXACT_H
#define PW_TWIN_EXACT_H

#include "analog/model.h"

/* Method: the roots as a chain of second-order parts in state space, x' = A x + B u, y = C x + D u,
 * time in sample periods; one step of an input u + (u_next - u) t is
 *     x_next = phi x + gamma u + ramp (u_next - u),
 * all three from one exponential of [A B 0; 0 0 1; 0 0 0] (Van Loan, "Computing integrals involving
 * the matrix exponential", IEEE Trans. AC-23, 1978). The exponential is Pade's of degree 13 with
 * scaling and squaring (Higham, SIAM J. Matrix Anal. Appl. 26, 2005).
 * Accuracy: about 1e-13 of the largest response for poles up to 1000 times the rate. */
typedef struct pw_exact {
    int n;                       /* states */
    bool linear;
    double *phi, *gamma, *ramp, *c, *x, *next;
    double d, u;                 /* u: the input of the latest step */
    double *a, *b;
    bool integrates;
    pw_arena arena;
} pw_exact;

void pw_exact_begin(const pw_roots *analog, double rate_hz, bool linear, pw_exact *out);
/* The state as if u had been there for ever; with a pole at 0: rest. */
void pw_exact_settle(pw_exact *exact, double u);
/* The output at this sample: y(n) from u(n) and, with a held input, what came before it. The first
 * call is sample 0 and does not move the state. */
double pw_exact_step(pw_exact *exact, double u);
void pw_exact_end(pw_exact *exact);

/* out = exp(a), n by n, row by row; a is destroyed. */
void pw_matrix_exponential(double *a, int n, double *out);

#endif
