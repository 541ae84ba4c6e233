/* SPDX-License-Identifier: GPL-3.0-or-later */
/* <stage>_block for code: standalone on a part that has kernels: section by section over the whole
 * block, each by the kernel that the part likes best, state in registers meanwhile. <stage>_step
 * stays sample by sample, and takes what is left of a block that is no multiple of a turn. */
#ifndef PW_EMIT_CASCADE_H
#define PW_EMIT_CASCADE_H

#include "emit/code.h"
#include "emit/kernel.h"

/* The lvalue of a section's state word k (x1 x2 y1 y2, or s1 s2), with # for the section's number;
 * null where the section keeps no such word. of is the caller's own. */
typedef const char *(*pw_cascade_member)(const void *of, const pw_words *w, int k);

typedef struct pw_cascade {
    const pw_realisation *realisation;
    const pw_target *target;
    bool array;                  /* the state is s->d[section from 0][4]; otherwise member tells */
    pw_cascade_member member;
    const void *of;
} pw_cascade;

/* Whether some section has a kernel of the part. */
bool pw_cascade_fits(const pw_cascade *cascade);

/* Whether all have: then the state may be an array. */
bool pw_cascade_fits_all(const pw_cascade *cascade);

/* The kernels, their tables and the function $_block. Uses $_section_#(s, x) for sections without a
 * kernel and $_cascade(s, x) for the rest of a block, both of which must stand before. */
PW_CHECKED pw_status pw_cascade_emit(const pw_cascade *cascade, pw_code *file);

/* Its float half: groups of up to four sections, four samples a turn. */
bool pw_cascade_floats_fit(const pw_cascade *cascade);
void pw_cascade_floats(const pw_cascade *cascade, pw_code *file);

#endif
