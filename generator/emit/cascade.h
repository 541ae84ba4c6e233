/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The inside of <stage>_block for code: standalone, section by section, each by the kernel that the
 * part likes best. */
#ifndef PW_EMIT_CASCADE_H
#define PW_EMIT_CASCADE_H

#include "emit/kernel.h"

typedef struct pw_cascade {
    pw_text functions;           /* kernels and tables, before the first use */
    pw_text body;                /* statements: s, in, out, n are known there */
} pw_cascade;

/* False where some section has no kernel: the caller then emits the plain loop.
 * state: a printf format of one %d, the section from 0, naming its x1 x2 y1 y2 ("&s->d[%d]");
 * clipped: the counter ("s->clipped"); prefix: of every name ("keel_strain"). A remainder of
 * fewer samples than a turn goes through <prefix>_step. */
PW_CHECKED pw_status pw_cascade_fixed(const pw_realisation *realisation, const pw_target *target,
                                      const char *prefix, const char *state, const char *clipped,
                                      pw_cascade *out, bool *done);
void pw_cascade_free(pw_cascade *cascade);

#endif
