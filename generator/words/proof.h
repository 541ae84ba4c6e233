/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Bounds on every node, and what follows from them. */
#ifndef PW_WORDS_PROOF_H
#define PW_WORDS_PROOF_H

#include "words/paths.h"

typedef struct pw_proof {
    pw_format format;
    pw_paths paths;
    /* As long as nothing clips (integrators still cut): the largest over the clamped words of each
     * section, per unit of input, and what rounding adds, of full scale. Filled by pw_prove. */
    double gain[PW_MAX_SECTIONS], rounding[PW_MAX_SECTIONS];
    double inner_gain[PW_MAX_SECTIONS], inner_rounding[PW_MAX_SECTIONS];   /* coupled: u1, u2 */
} pw_proof;

/* Between start and end the norms are kept, so that proof, noise and limit cycles share them. */
void pw_proof_start(const pw_format *format, const pw_realisation *r, pw_proof *out);
void pw_proof_end(pw_proof *proof);

/* Fills nodes, cannot_clip, fits_32, first_clip_input and worst_node. */
void pw_prove(pw_proof *proof, pw_realisation *r);

/* >= what rounding alone can keep up at the output of a section (from 0), of full scale; INFINITY
 * behind or in an integrator. */
long double pw_proof_rounding(pw_proof *proof, const pw_realisation *r, int section);

/* ---- integrator.c ---- */

/* samples_to_clip and samples_to_clip_code of the outputs that integrate: the exact response for as
 * long as it is stepped, then its line or parabola; clamps on the way are not counted on. */
void pw_integrators_time(const pw_proof *proof, pw_realisation *r);

#endif
