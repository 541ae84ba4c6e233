/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Exact counts about a circuit's roots, from arithmetic modulo a prime.
 *
 * Method: the parts' values are decimals, so that numerator and denominator of H are polynomials
 * with rational coefficients (pi, of a gain-bandwidth product in Hz, and square roots, of coupled
 * inductors, are further numbers that the field has a stand-in for). Degrees, multiplicities and
 * common factors of such polynomials survive the step to integers modulo a random 61-bit prime but
 * for a chance below 1e-15 (Schwartz 1980, Zippel 1979). A rank that floating-point arithmetic can
 * only judge by a threshold is a plain count here. */
#ifndef PW_ANALOG_CIRCUIT_EXACT_H
#define PW_ANALOG_CIRCUIT_EXACT_H

#include "analog/circuit.h"

/* About det(G + s C), or about det [G + s C, b; c', 0], the numerator. */
typedef struct pw_exact {
    bool regular;                /* not singular at s0; otherwise nothing below holds */
    int m;                       /* reactive terms */
    int infinite[PW_MAX_STORES]; /* ranks lost at each step of deflating infinity */
    int zero[PW_MAX_STORES];     /* and then 0 */
    int infinite_steps, zero_steps;
    int finite;                  /* roots that are neither infinite nor 0 */
    int repeated[PW_MAX_STORES + 1]; /* [k]: how many distinct finite roots (0 too) are k-fold */
    uint64_t poly[PW_MAX_STORES + 1];          /* in s - s0, lowest power first */
    int degree;
    uint64_t prime;
} pw_exact;

/* s0 > 0, rad/s, a decimal of at most 17 digits. bordered: the numerator. */
void pw_exact_analyse(const pw_net *net, const double *scale, double s0, bool bordered,
                      pw_exact *out);

/* How many roots the two have in common (with their multiplicity). */
int pw_exact_common(const pw_exact *left, const pw_exact *right);

/* Unknowns that take part in a null vector of G + s0 C: which[unknown]. The nullity. */
int pw_exact_undetermined(const pw_net *net, double s0, bool *which);

#endif
