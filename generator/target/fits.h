/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Whether a part can do a stage at all. */
#ifndef PW_TARGET_FITS_H
#define PW_TARGET_FITS_H

#include "report/results.h"

/* PW_WRONG, with a message at the stage's target, where the part has no multiply instruction for
 * fixed-point samples, or where code and constants, or state and stack of one channel, are larger
 * than the part's memory. Sizes that are not known (no cost model, no size of the part) pass. */
PW_CHECKED pw_status pw_target_fits(const pw_stage *stage, const pw_target *target, const pw_cost *cost,
                                    pw_messages *messages);

#endif
