/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Pairing and order of sections for the least round-off noise. */
#ifndef PW_WORDS_ARRANGE_H
#define PW_WORDS_ARRANGE_H

#include "words/units.h"

typedef struct pw_arranged { int pole, zero[2]; } pw_arranged;   /* a pole unit and its zero
                                                                    groups, -1 none */

/* What the noise depends on beside the order. */
typedef struct pw_arrange_context {
    bool shaped;                 /* error feedback where a section is loud */
    double factor;               /* magnitude of the whole, sample to sample, times the input's
                                    peak */
    double step;                 /* of the words of poles in a second-order section; 0 for floats */
} pw_arrange_context;

/* Every pairing and every order of the first `poles` pole units with the zero groups: exact for the
 * cost below, by dynamic programming over what has been placed. False where there are too many
 * states (then nothing is written).
 *
 * Cost: sections are scaled so that the product up to each one can just reach full scale (its L1
 * norm); each one's rounding then reaches the output through what follows it. The last section's
 * scale is that of the output. Noise is taken on a grid of frequencies that is dense about each
 * pole. */
bool pw_arrange_all(const pw_units *units, int poles, const pw_arrange_context *context,
                    pw_arranged *order);

/* The order alone, pairs given in order[]: exact up to 12 sections; above, a local search that
 * takes one section out and puts it in elsewhere while that helps, from the order given and from
 * the one in which each next section adds least. Returns true where exact. */
bool pw_arrange_order(const pw_units *units, int poles, const pw_arrange_context *context,
                      pw_arranged *order);

/* ---- order.c ---- */

/* Poles and zeros -> monic sections (gain 1) in the order they are computed; the factor is left to
 * the caller. Integrators (poles at exactly 1) stand last. why: how the order was found. */
void pw_order_sections(const pw_roots *z, bool as_listed, const pw_arrange_context *context,
                       pw_sections *out, const char **why);

#endif
