/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The analog model: zeros, poles and factor. The same struct holds a digital model in z. */
#ifndef PW_ANALOG_MODEL_H
#define PW_ANALOG_MODEL_H

#include "stagefile/stage.h"

/* H(x) = factor * prod(x - zero[i]) / prod(x - pole[i]), x = s in rad/s or z.
 * Real roots have an imaginary part of exactly 0. A complex root with imag > 0 is followed at once
 * by its exact conjugate. poles <= PW_MAX_ROOTS, zeros <= poles. long double, because a product of
 * 64 fast poles leaves the range of double. */
typedef struct pw_roots {
    int poles, zeros;
    double complex pole[PW_MAX_ROOTS], zero[PW_MAX_ROOTS];
    long double factor;
} pw_roots;

/* Stage description -> zeros, poles and factor in rad/s. Messages say what is wrong at its place:
 * poles in the right half plane, poles on the axis but for up to two at 0, more zeros than poles,
 * more than PW_MAX_ROOTS. A root at 0 is exactly 0. */
PW_CHECKED pw_status pw_analog_build(const pw_analog_spec *spec, pw_roots *out,
                                     pw_messages *messages);

/* The parts of it, one file each; cascades multiply. */
PW_CHECKED pw_status pw_analog_from_roots(const pw_analog_spec *spec, pw_roots *out,
                                          pw_messages *messages);
PW_CHECKED pw_status pw_analog_from_polynomials(const pw_analog_spec *spec, pw_roots *out,
                                                pw_messages *messages);
PW_CHECKED pw_status pw_analog_from_family(const pw_family *family, pw_roots *out,
                                           pw_messages *messages);
PW_CHECKED pw_status pw_analog_from_circuit(const pw_circuit *circuit, pw_roots *out,
                                            pw_messages *messages);
PW_CHECKED pw_status pw_analog_from_cell(const pw_cell *cell, pw_roots *out, pw_messages *messages);

/* H at the complex point x, from the roots, root by root (no overflow on the way). */
double complex pw_roots_at(const pw_roots *roots, double complex x);

/* log|H| (natural) and the continuous phase in radians, summed root by root: no overflow, no
 * wrap for roots in the closed left half plane (analog, x = j w) beyond the sum itself. */
void pw_roots_log_at(const pw_roots *roots, double complex x, double *log_magnitude, double *phase);

/* Analog response at a frequency in Hz. */
double complex pw_analog_at(const pw_roots *analog, double hz);
/* -d(phase)/d(omega) in seconds at a frequency in Hz, in closed form from the roots. */
double pw_analog_group_delay(const pw_roots *analog, double hz);
/* How many poles are exactly 0. */
int pw_analog_integrators(const pw_roots *analog);

#endif
