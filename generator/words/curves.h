/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Magnitudes of the pieces of a filter on a grid of frequencies, as logarithms that add up. */
#ifndef PW_WORDS_CURVES_H
#define PW_WORDS_CURVES_H

#include "words/arrange.h"

#define PW_CURVE_POINTS 1024

typedef struct pw_curves {
    int points;
    float *pole[PW_MAX_SECTIONS];      /* log |1/A|^2 of each pole unit */
    float *noise[PW_MAX_SECTIONS];     /* |N/A|^2: the way of its rounding to its output */
    float *zero[PW_MAX_ROOTS];         /* log |.|^2 of each zero group, once */
    float whole[PW_CURVE_POINTS];      /* log |.|^2 of all of it */
    double weight[PW_CURVE_POINTS];    /* of a mean over the circle */
    float *memory;
} pw_curves;

void pw_curves_make(const pw_units *units, int poles, const pw_arrange_context *context,
                    pw_curves *out);
void pw_curves_free(pw_curves *curves);

/* With a product log |.|^2 placed so far, whose last section is pole unit u: the noise of that
 * section's rounding at the output. last: nothing follows. */
typedef struct pw_placed { double peak; double rest[PW_CURVE_POINTS]; } pw_placed;
void pw_curves_place(const pw_curves *curves, const float *product, pw_placed *out);

double pw_curves_noise(const pw_curves *curves, const pw_placed *placed, int u, bool last,
                       double factor);

/* The L1 norm of a growing chain of monic sections, squared, to a per cent or so: for choosing
 * only. at_least: its peak on the circle, squared, from which it is guessed where poles are too
 * slow to sum. */
#define PW_QUICK_SAMPLES 4096
typedef struct pw_quick { int samples; double v[PW_QUICK_SAMPLES]; } pw_quick;
void pw_quick_start(const pw_units *units, int poles, pw_quick *out);
double pw_quick_add(pw_quick *quick, const pw_section *section, double at_least);

#endif
