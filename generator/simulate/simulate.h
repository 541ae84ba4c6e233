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
    uint64_t clipped;                    /* since the reset; emitted: modulo 2^32 */
} pw_simulation;

void pw_simulation_reset(pw_simulation *sim, const pw_realisation *realisation);
/* Samples are integers in words for fixed point, values for floats. in may be out. */
void pw_simulation_run_words(pw_simulation *sim, const int32_t *in, int32_t *out, size_t n);
void pw_simulation_run_floats(pw_simulation *sim, const double *in, double *out, size_t n);
/* As emitted <stage>_settle does: the state as if x (a word, or a value for floats) had been there
 * for ever; clipped becomes 0. Section by section, y of one being x of the next:
 *     direct forms   p = (b0 + b1 + b2) x aligned as in a step, D = 2^a_fraction + a1 + a2;
 *                    y = p / D to the nearest, half up (truncate: the floor), clamped to the word
 *                    (with wrap too: a steady state outside the word does not exist); e = 0
 *     coupled        pw_coupled_steady's gains; y as in a step
 *     floats         y = (b0 + b1 + b2) / (1 + a1 + a2) * x, sums from left to right;
 *                    s1 = y - b0 * x (direct-1: x1 = x2 = x, y1 = y2 = y), s2 = b2 * x - a2 * y
 * For D <= 2^a_fraction y is a fixed point of the recursion; a section with poles on the negative
 * real side may have none, and is then within its dead band. A stage with an integrator (D = 0 in
 * any section) is reset. */
void pw_simulation_settle(pw_simulation *sim, double x);

/* Whether D = 0 in this section, by its words. */
bool pw_section_integrates(const pw_words *words, bool fixed);

/* Steady state of a coupled section for a constant x: u[i] = (gain[i] x + 2^(fraction-1)) >>
 * fraction, clamped. gain is (1 - sigma) g / D and omega g / D with D = (1 - sigma)^2 + omega^2,
 * rounded half up to as many fraction bits (32 to 61) as leave |gain| within 2^61. The section does
 * not integrate. */
void pw_coupled_steady(const pw_words *words, int64_t gain[2], int *fraction);
/* Every node (realisation.node order) for one sample; values of full scale, before any clamp for
 * accumulators. node_out has realisation->nodes entries. Fixed point only. Nodes are known by their
 * names: "section N output", "section N accumulator" (of y, in the unit of y), "section N u1",
 * "section N u2" (after the clamp), "section N u1 accumulator", "section N u2 accumulator"; others
 * become NAN. */
void pw_simulation_step_nodes(pw_simulation *sim, int32_t x, int32_t *y, double *node_out);

#endif
