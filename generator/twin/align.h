/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Where one signal lies in time against another, and one delayed by part of a sample. */
#ifndef PW_TWIN_ALIGN_H
#define PW_TWIN_ALIGN_H

#include <stdbool.h>

#include "twin/welch.h"

#define PW_LAG_MOST 32768        /* samples */

/* Correlates y with r in pieces, over the first 64 of them. */
typedef struct pw_lag {
    double *r, *y, *spectrum, *work;
    int filled, pieces;
    pw_arena arena;
} pw_lag;

void pw_lag_begin(pw_lag *out);
void pw_lag_add(pw_lag *lag, double r, double y);
/* By how many samples y is behind r, to the nearest, and whether it is upside down. Among peaks of
 * at least 0.98 of the largest the one nearest to 0 is taken: a tone repeats itself. */
int pw_lag_find(pw_lag *lag, bool *inverted);
void pw_lag_end(pw_lag *lag);

/* The delay in samples of y behind r, which is below 2 of them: slope of the phase of ry, bins
 * weighted by their power and by coherence / (1 - coherence). Accuracy: without noise, and with y a
 * delayed r, 1e-6 samples. */
double pw_align_phase(const pw_welch *welch, bool inverted);

/* y and r brought to one time: r is delayed by delay samples (fewer than 0: y instead), by a
 * Kaiser-windowed sinc of 64 taps (beta 10; Kaiser 1974), flat to 1e-4 up to 0.43 of the rate. */
#define PW_ALIGN_TAPS 64
typedef struct pw_aligned {
    int whole_r, whole_y, room, at;
    long seen;
    bool plain;                  /* whole samples only: no taps */
    double tap[PW_ALIGN_TAPS];
    double *r, *y;
    pw_arena arena;
} pw_aligned;

void pw_aligned_begin(double delay, pw_aligned *out);
/* True once *y and *late (r, delayed) are both there. */
bool pw_aligned_add(pw_aligned *a, double r, double y, double *late, double *y_out);
void pw_aligned_end(pw_aligned *a);

#endif
