/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Numbers of many digits (MPFR, MPC), in lists of one precision. */
#ifndef PW_DISCRETE_MANY_H
#define PW_DISCRETE_MANY_H

#include <stdbool.h>

#include <mpc.h>

typedef struct pw_many { mpc_t *at; int count; long bits; } pw_many;

void pw_many_make(pw_many *list, int count, long bits);      /* all zero */
void pw_many_free(pw_many *list);

/* Natural logarithm of |x| as a double at any exponent; -INFINITY for 0. */
double pw_many_log(mpc_srcptr x);

/* The zeros of sum coefficient[k] x^(n - k), coefficient[0] != 0, n = count - 1, into root (n of
 * them, of the precision of coefficient). warm: root holds guesses. Each zero is followed until a
 * step moves it by less than 2^-80 of itself; false where one does not come to rest. */
bool pw_many_zeros(const pw_many *coefficient, pw_many *root, bool warm);

#endif
