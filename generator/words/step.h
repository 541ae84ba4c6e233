/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The arithmetic of realisation.h, one sample at a time, for samples of any width up to 32 bits:
 * what the search for limit cycles runs, and what small words are proved with exhaustively. */
#ifndef PW_WORDS_STEP_H
#define PW_WORDS_STEP_H

#include "words/inner.h"

/* One sample through a fixed-point section. state: x1 x2 y1 y2 e1 e2, or u1 u2. clips, where not
 * null, is counted up by each clamp that acted. */
int64_t pw_step_section(const pw_format *format, bool wrap, const pw_words *words, int64_t state[6],
                        int64_t x, uint64_t *clips);

#endif
