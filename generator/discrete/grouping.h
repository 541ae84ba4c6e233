/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Poles and zeros into groups of one or two that have real coefficients: the analog sections of an
 * each-section prewarp, and the digital sections. */
#ifndef PW_DISCRETE_GROUPING_H
#define PW_DISCRETE_GROUPING_H

#include "analog/model.h"

/* Indices into a model's pole[] and zero[]. zeros <= poles; a complex pair stands whole. */
typedef struct pw_group { int pole[2], zero[2], poles, zeros; } pw_group;
typedef struct pw_groups { pw_group list[PW_MAX_ROOTS]; int count; } pw_groups;

/* Analog sections: a complex pole pair is one, a real pole is one, except that a complex zero pair
 * without a complex pole pair of its own takes the two real poles whose natural frequency
 * sqrt(p1 p2) is nearest. Zeros go, nearest first, to the section whose natural frequency is
 * nearest on a logarithmic scale; a zero at 0 to the lowest with room. */
void pw_group_analog(const pw_roots *analog, pw_groups *out);

/* |p| of a pair or of a real pole, sqrt(p1 p2) of two real ones, in Hz; 0 with a pole at 0. */
double pw_group_natural_hz(const pw_roots *analog, const pw_group *group);

typedef enum pw_zero_choice { PW_ZEROS_NEAREST, PW_ZEROS_MIXED } pw_zero_choice;

/* Digital sections: complex pairs, real poles two by two with the roots of a pair kept apart, one
 * real pole left over where their number is odd. Two poles at exactly 1 stay together. Poles
 * nearest to the unit circle choose their zeros first, the nearest ones; with PW_ZEROS_MIXED the
 * second of two real zeros is the farthest instead. */
void pw_group_digital(const pw_roots *z, pw_zero_choice choice, pw_groups *out);

#endif
