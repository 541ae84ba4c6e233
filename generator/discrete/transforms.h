/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The transforms of this station, each on roots: analog zeros, poles and factor in rad/s to
 * digital ones in the z plane. The order of the poles is kept. No function here writes a message:
 * discretise.c judges what the user asked for before it calls one. */
#ifndef PW_DISCRETE_TRANSFORMS_H
#define PW_DISCRETE_TRANSFORMS_H

#include "discrete/digital.h"

/* c of s = c (z - 1)/(z + 1), in rad/s: w0/tan(w0 T/2), so that the analog response at
 * prewarp_hz stands at prewarp_hz; 0 Hz: 2/T, its limit. 0 <= prewarp_hz < rate_hz / 2. */
long double pw_bilinear_constant(double rate_hz, double prewarp_hz);

/* Bilinear with one constant. z = (c + s)/(c - s); s = 0 gives exactly 1, the zeros at infinity
 * exactly -1, a zero at exactly c (right half plane) goes to infinity. */
void pw_bilinear(const pw_roots *analog, double rate_hz, double prewarp_hz, pw_roots *out);

/* Bilinear with a constant for each section (grouping.h, pw_group_analog), from its own natural
 * frequency. */
void pw_bilinear_each(const pw_roots *analog, double rate_hz, pw_roots *out);

/* The largest natural frequency below half the rate, in Hz, among the least damped poles; 0 where
 * every pole is 0 or above half the rate. */
double pw_dominant_corner(const pw_roots *analog, double rate_hz);

/* Matched-z: z = exp(s T) for poles and zeros; the zeros at infinity as asked. The factor has the
 * sign of the analog one; its magnitude is to be matched by pw_match_gain. */
void pw_matched(const pw_roots *analog, double rate_hz, pw_infinity at_infinity, pw_roots *out);

/* The frequency at which a gain is matched where the user named none: where the analog gain is
 * largest in the band; 0 Hz where the gain there is that largest one to 0.1 dB, so that a low-pass
 * keeps its gain at 0 Hz. In Hz. */
double pw_gain_place(const pw_roots *analog, const double band_hz[2]);

/* Rescales the digital factor, sign kept, so that both magnitudes at hz agree. False, and nothing
 * changed, where one of them is 0 or not finite. */
bool pw_match_gain(const pw_roots *analog, double rate_hz, double hz, pw_roots *z);

/* T h(nT), h(0) halved where h jumps there; false where zeros == poles. */
bool pw_impulse_invariant(const pw_roots *analog, double rate_hz, pw_roots *out);

/* The step response at the samples (a zero-order hold before the stage). */
bool pw_step_invariant(const pw_roots *analog, double rate_hz, pw_roots *out);

#endif
