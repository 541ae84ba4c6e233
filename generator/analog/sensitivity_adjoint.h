/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Derivatives of roots and gains with respect to parts, from the equations at one frequency. */
#ifndef PW_ANALOG_SENSITIVITY_ADJOINT_H
#define PW_ANALOG_SENSITIVITY_ADJOINT_H

#include "analog/circuit.h"

/* move[part] := ds / d ln(part), rad/s, of a simple root s of det(G + s C), or, with zero, of the
 * numerator. Method: with y and v the left and right null vectors of A(s), ds = -(y' dA v)/(y' C v)
 * (Lancaster 1964); inverse iteration in extended precision finds them. false: no simple root. */
bool pw_adjoint_root(const pw_net *net, bool zero, long double complex s,
                     long double complex *move);

/* move[part] := d ln H(s) / d ln(part). Method: the adjoint network (Director and Rohrer 1969).
 * false: singular at s, or H(s) = 0. */
bool pw_adjoint_gain(const pw_net *net, long double complex s, long double complex *move);

#endif
