/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the files of the replay share. */
#ifndef PW_TWIN_REPLAY_INNER_H
#define PW_TWIN_REPLAY_INNER_H

#include "twin/replay.h"

typedef enum pw_reach { PW_REACH_PLAIN, PW_REACH_SSE2, PW_REACH_AVX2, PW_REACH_AVX512 } pw_reach;

pw_reach pw_replay_reach(void);

/* m sections from first on, m <= PW_LANES, over one block in place. All are transposed-2 (floats)
 * or direct forms (fixed). */
void pw_lanes_float32(pw_simulation *sim, int first, int m, float *io, size_t n);
void pw_lanes_float64(pw_simulation *sim, int first, int m, double *io, size_t n);
void pw_lanes_words(pw_simulation *sim, int first, int m, int32_t *io, size_t n);

#endif
