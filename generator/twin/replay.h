/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The emitted arithmetic over long records, fast: the same results as simulate/, bit for bit.
 *
 * Method: up to eight sections of the cascade stand in the lanes of a vector, each lane some
 * samples behind the one before it, so that one vector operation does the same step of eight
 * sections. The lanes fill and drain at the ends of every block, where idle lanes keep their state.
 * Order of operations within a section is that of words/realisation.h; nothing is fused. Sections
 * that the lanes cannot take (coupled, direct-1 in floats) and processors without wide integers
 * take the plain way. Accuracy: every output, state and clip count equals that of
 * pw_simulation_run_* (a NaN may have another payload). */
#ifndef PW_TWIN_REPLAY_H
#define PW_TWIN_REPLAY_H

#include "simulate/simulate.h"

#define PW_LANES 8
#define PW_REPLAY_BLOCK 8192     /* samples that lanes fill and drain for */

/* sim is that of simulate.h: reset or settled there, and may change between the two ways of
 * running. in may be out, else apart from it. */
void pw_replay_words(pw_simulation *sim, const int32_t *in, int32_t *out, size_t n); /* q15, q31 */
void pw_replay_float32(pw_simulation *sim, const float *in, float *out, size_t n);
void pw_replay_float64(pw_simulation *sim, const double *in, double *out, size_t n);

/* What this processor runs them with: "AVX-512", "AVX2", "SSE2" or "plain". */
const char *pw_replay_kind(void);
/* Lets the lanes use no more than this ("plain", "SSE2", "AVX2"; null: whatever there is), for
 * tests. */
void pw_replay_limit(const char *kind);

#endif
