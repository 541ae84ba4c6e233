/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the parts of the analog station share in filling a pw_roots. Not for other stations. */
#ifndef PW_ANALOG_ROOTLIST_H
#define PW_ANALOG_ROOTLIST_H

#include "analog/model.h"

/* Adds a root, with its conjugate where it is complex (either of the two may be given). Where
 * there is no room for it, a message at this place and false. */
bool pw_roots_add_pole(pw_roots *roots, double complex pole, pw_where at, pw_messages *messages);
bool pw_roots_add_zero(pw_roots *roots, double complex zero, pw_where at, pw_messages *messages);

/* Every pole and zero of part is appended to whole, and the factors are multiplied. */
bool pw_roots_append(pw_roots *whole, const pw_roots *part, pw_where at, pw_messages *messages);

/* A message at this place for a pole in the right half plane, or on the axis and not at 0. */
bool pw_roots_check_pole(double complex pole, pw_where at, pw_messages *messages);

/* The product of (x - zero) over that of (x - pole), without the factor. */
long double complex pw_roots_product_at(const pw_roots *roots, long double complex x);

#endif
