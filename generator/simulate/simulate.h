/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The emitted arithmetic, bit for bit, on the host: an own implementation of the arithmetic that
 * words/realisation.h states, independent of runtime/, so that each checks the other. */
#ifndef PW_SIMULATE_SIMULATE_H
#define PW_SIMULATE_SIMULATE_H

#include <stddef.h>
#include "words/realisation.h"

typedef struct pw_simulation {
    const pw_realisation *realisation;   /* borrowed */
    int64_t state[PW_MAX_SECTIONS][6];   /* fixed: x1 x2 y1 y2 e1 e2, or u1 u2; */
    double fstate[PW_MAX_SECTIONS][4];   /* floats: s1 s2 (or x1 x2 y1 y2) */
    uint64_t clipped;                    /* since the start */
} pw_simulation;

void pw_simulation_reset(pw_simulation *sim, const pw_realisation *realisation);
/* Samples are integers in words for fixed point, values for floats. in may be out. */
void pw_simulation_run_words(pw_simulation *sim, const int32_t *in, int32_t *out, size_t n);
void pw_simulation_run_floats(pw_simulation *sim, const double *in, double *out, size_t n);
/* As emitted <stage>_settle does. */
void pw_simulation_settle(pw_simulation *sim, double x);
/* Every node (realisation.node order) for one sample; values of full scale, before any clamp for
 * accumulators. node_out has realisation->nodes entries. Fixed point only. */
void pw_simulation_step_nodes(pw_simulation *sim, int32_t x, int32_t *y, double *node_out);

#endif
