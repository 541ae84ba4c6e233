/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One way of making the digital model, and the choice among several. */
#ifndef PW_DISCRETE_CHOICE_H
#define PW_DISCRETE_CHOICE_H

#include "discrete/digital.h"

/* The model that the candidate describes, its gain not yet matched; false where it has no form. */
bool pw_candidate_make(const pw_stage *stage, const pw_roots *analog, const pw_candidate *how,
                       pw_roots *z);

/* Matches the gain of out->z where the method or the stage asks for it, and notes where. False
 * where the gain at that place (out->match_gain_hz) is 0 or not finite. */
bool pw_candidate_gain(const pw_stage *stage, const pw_roots *analog, const pw_candidate *how,
                       pw_digital *out);

/* Fills the candidate's two errors. */
void pw_candidate_judge(const pw_stage *stage, const pw_roots *analog, pw_candidate *how,
                        const pw_roots *z);

/* Tries every candidate over limits.band; candidates sorted, best first: smallest magnitude error,
 * then phase error. out->z is the best one's, its gain not matched. False where there is
 * none. */
bool pw_best(const pw_stage *stage, const pw_roots *analog, pw_digital *out);

/* A warning for the roots above half the rate, at their place, that says what the chosen transform
 * does with them. */
void pw_warn_beyond(const pw_stage *stage, const pw_roots *analog, const pw_digital *digital,
                    pw_messages *messages);

#endif
