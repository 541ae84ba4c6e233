/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The largest difference between two responses over a band: a dense grid with every root on it,
 * then each peak followed to its top. */
#ifndef PW_DISCRETE_ERRORS_H
#define PW_DISCRETE_ERRORS_H

#include "discrete/digital.h"

/* Frequencies in Hz between low and high, both included. */
typedef struct pw_grid { double *hz; int count, room; double low, high; } pw_grid;

/* 0 <= low < high. Log-spaced (with 0 itself where low is 0) and evenly spaced ones. */
void pw_grid_make(pw_grid *grid, double low, double high);
/* Around the frequency of each root, out to several of its half-widths: a notch or a peak of any
 * Q has points on it. */
void pw_grid_add_analog(pw_grid *grid, const pw_roots *analog);
void pw_grid_add_digital(pw_grid *grid, const pw_roots *z, double rate_hz);
void pw_grid_add(pw_grid *grid, double hz, double half_width);
void pw_grid_put(pw_grid *grid, double hz);  /* this one alone; outside low..high it is left out */
void pw_grid_sort(pw_grid *grid);            /* after the last add: sorted, each once */
void pw_grid_free(pw_grid *grid);

/* The largest value of a continuous function over a sorted grid; each local peak near the largest
 * is followed by golden-section search. */
typedef double (*pw_level)(const void *context, double hz);
pw_error_peak pw_grid_peak(const pw_grid *grid, pw_level level, const void *context);

/* The same from values that are known on the grid already; a value < 0 marks a frequency that does
 * not count, and the edge of a stretch of those is found by bisection. */
pw_error_peak pw_grid_follow(const pw_grid *grid, const double *value, pw_level level,
                             const void *context);

/* One side of a comparison. delay may be null: no delay is compared then. */
typedef struct pw_side {
    double complex (*at)(const void *context, double hz);
    double (*delay)(const void *context, double hz);      /* seconds */
    const void *context;
} pw_side;

/* Largest magnitude (dB), phase (degrees, wrapped to 180) and delay error of one response against
 * the truth, over the sorted grid, where the judge's magnitude is within floor_db of its largest
 * on the grid; the judge is the analog stage. A level more than twice floor_db down counts as that
 * far down, so that a notch of the other side that stands beside the true one makes a large error
 * and not an infinite one; it has no phase there. All errors are >= 0; a level error stops at
 * PW_WORST_DB. */
#define PW_WORST_DB 400
void pw_compare(const pw_grid *grid, const pw_side *judge, const pw_side *truth,
                const pw_side *other, double floor_db, pw_error_figures *out);

/* The same for a digital model against its analog one. */
void pw_compare_digital(const pw_roots *analog, const pw_roots *z, double rate_hz,
                        const double band_hz[2], double floor_db, pw_error_figures *out);

#endif
