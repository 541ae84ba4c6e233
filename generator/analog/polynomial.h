/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Roots of real polynomials. Inside the analog station only; include analog/wide.h first. */
#ifndef PW_ANALOG_POLYNOMIAL_H
#define PW_ANALOG_POLYNOMIAL_H

#include "analog/wide.h"
#include "stagefile/stage.h"

/* All n roots of c[0] s^n + .. + c[n], 1 <= n <= PW_MAX_ROOTS, c[0] and c[n] not 0.
 * Method: simultaneous iteration (Ehrlich 1967, Aberth 1973) from starting points on the Newton
 * polygon of the moduli (Bini 1996), in 113 bits; the coefficients count as exact.
 * On return a real root has an imaginary part of exactly 0 and a pair stands together, the upper
 * one first. False where it did not converge. */
bool pw_wide_roots(const pw_wide *c, int n, pw_wide_complex *root);

/* A real factor of a polynomial: (s + c)^m, or (s^2 + b s + c)^m with complex roots.
 * axis: b is held at exactly 0. */
typedef struct pw_factor {
    bool pair, axis;
    int multiplicity;
    pw_wide b, c;
} pw_factor;

/* The factors of the polynomial above, given its roots as pw_wide_roots leaves them: the fewest
 * different roots, and those on the axis that may be, with which every coefficient is met within
 * a few units of the 53rd bit, the coefficients' own rounding. Returns how many factors. */
int pw_factors_find(const pw_wide *c, int n, const pw_wide_complex *root, pw_factor *out);

/* Fits the factors to the coefficients by least squares (Gauss-Newton on the pejorative manifold,
 * Zeng 2005), each equation weighted by the coefficient of prod(s + |root|). Returns the largest
 * weighted residual; infinity where the fit broke down and the factors mean nothing. */
pw_wide pw_factors_fit(const pw_wide *c, int n, pw_factor *factor, int factors);

/* The upper root, or the real one, of a factor. */
pw_wide_complex pw_factor_root(const pw_factor *factor);

/* Roots of a polynomial of doubles, c[0] and c[n] not 0, as pw_roots wants them: exact conjugates,
 * multiple roots equal bit for bit, ascending modulus. PW_FAILED where it did not converge,
 * PW_WRONG where a root is beyond the range of a double. */
PW_CHECKED pw_status pw_polynomial_roots(const double *c, int n, double complex *root);

#endif
