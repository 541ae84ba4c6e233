/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Low-pass prototypes of the families, and their transformation to the four shapes. Inside the
 * analog station only; include analog/wide.h first. */
#ifndef PW_ANALOG_PROTOTYPE_H
#define PW_ANALOG_PROTOTYPE_H

#include "analog/wide.h"
#include "analog/model.h"

/* A low-pass stage: of each pair the upper root only (a real root has an imaginary part of exactly
 * 0), poles from low Q to high Q, zeros on the positive imaginary axis. H(0) = dc > 0.
 * Roots in units of the corner. */
typedef struct pw_prototype {
    int poles, zeros;
    pw_wide_complex pole[PW_MAX_ROOTS / 2], zero[PW_MAX_ROOTS / 2];
    pw_wide dc;
} pw_prototype;

/* Each makes the prototype of this order. Frequency 1 is the -3.01 dB point for butterworth and
 * critically_damped, the -6.02 dB point for linkwitz_riley, the end of the ripple for chebyshev
 * and elliptic, the beginning of the stop band for inverse_chebyshev, 1/(delay at 0 Hz) for bessel.
 * Depths in positive dB. Largest pass-band gain 1. */
void pw_prototype_butterworth(int order, pw_prototype *out);
void pw_prototype_linkwitz_riley(int order, pw_prototype *out);
void pw_prototype_critically_damped(int order, pw_prototype *out);
void pw_prototype_chebyshev(int order, double ripple_db, pw_prototype *out);
void pw_prototype_inverse_chebyshev(int order, double stopband_db, pw_prototype *out);
/* False where the roots did not converge. */
PW_CHECKED bool pw_prototype_bessel(int order, pw_prototype *out);
/* False where the two depths are so near each other for this order that the transition would be
 * too narrow to compute (nome above 0.9). */
PW_CHECKED bool pw_prototype_elliptic(int order, double ripple_db, double stopband_db,
                                      pw_prototype *out);

/* Multiplies every root, so that frequency 1 becomes this one. */
void pw_prototype_scale(pw_prototype *prototype, pw_wide by);
/* |H(jw)|. */
pw_wide pw_prototype_gain(const pw_prototype *prototype, pw_wide w);
/* The modulus of the product of all poles: where the asymptotes meet, to the power of the order. */
pw_wide pw_prototype_pole_product(const pw_prototype *prototype);

/* Depth in dB (10 dB per decade of power) -> 10^(dB/10) - 1, without cancellation. */
pw_wide pw_depth(double db);

/* The shape at these corners in Hz, by transformation of the roots; zeros that come from infinity
 * are exactly 0 or exactly on the axis. */
void pw_prototype_shape(const pw_prototype *prototype, pw_shape shape, const double corner_hz[2],
                        pw_roots *out);

#endif
