/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The order of sections, and the peaks of their running product. */
#ifndef PW_DISCRETE_ORDERING_H
#define PW_DISCRETE_ORDERING_H

#include "discrete/digital.h"

#define PW_ORDER_POINTS 1600     /* room for the frequencies that are looked at */

/* Squared magnitudes of sections of gain 1, each against its own largest. */
typedef struct pw_shapes {
    int points, count;
    double weight[PW_ORDER_POINTS];          /* of a mean over the circle; sum 1 */
    double *square[PW_MAX_SECTIONS];         /* [points] */
    double log_peak[PW_MAX_SECTIONS];        /* log of the largest magnitude that was divided out */
    bool integrates[PW_MAX_SECTIONS];        /* a pole at exactly 1 and no zero there */
} pw_shapes;

void pw_shapes_make(const pw_roots *z, const pw_sections *sections, pw_shapes *out);
void pw_shapes_free(pw_shapes *shapes);

/* order[k] is the section that comes k-th; the round-off noise of that order, up to a constant. */
double pw_order_best(const pw_shapes *shapes, int *order);
double pw_order_cost(const pw_shapes *shapes, const int *order);

/* log_peak[k]: log of the largest magnitude of the product of the first k + 1 sections. */
void pw_running_peaks(const pw_shapes *shapes, const int *order, double *log_peak);

#endif
