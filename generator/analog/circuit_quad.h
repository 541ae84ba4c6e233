/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Dense real linear algebra in quadruple precision (113 bits), for circuits: matrices of up to a
 * few hundred rows, stored by rows. Double precision would split a double pole by 1e-8 and lose
 * picofarads beside seconds; here the same algorithms have 18 digits to spare. */
#ifndef PW_ANALOG_CIRCUIT_QUAD_H
#define PW_ANALOG_CIRCUIT_QUAD_H

#include "analog/circuit.h"

#define PW_QUAD_EPSILON 0x1p-112f128

/* LU with scaled partial pivoting, in place. false: singular to working precision. */
bool pw_quad_lu(int n, pw_quad *a, int *pivot);
/* Solves for one right-hand side, in place. */
void pw_quad_lu_solve(int n, const pw_quad *lu, const int *pivot, pw_quad *x);

/* Given an m by m matrix (row stride m) with a null space of exactly n dimensions: an orthogonal
 * similarity that makes the last n columns 0; what is left, m-n by m-n, replaces it (stride m-n).
 * Householder QR with column pivoting of the transpose (Golub and Van Loan, 5.4.2; the staircase
 * of Van Dooren 1979, with ranks known). */
void pw_quad_deflate(int m, int n, pw_quad *matrix);

/* Eigenvalues of a real matrix, which is destroyed: balancing by powers of 2 (Parlett and Reinsch
 * 1969), Householder reduction to Hessenberg form, Francis's implicit double shift (Golub and Van
 * Loan, 7.5). Real ones have an imaginary part of exactly 0; of a pair, the one with the positive
 * part comes first. false: no convergence in 60 sweeps a root. */
bool pw_quad_eigenvalues(int m, pw_quad *matrix, pw_quad *re, pw_quad *im);

#endif
