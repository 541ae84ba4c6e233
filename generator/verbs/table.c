/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "verbs/verbs.h"

const pw_verb *const pw_verbs[] = {
    &pw_verb_build, &pw_verb_show, &pw_verb_check, &pw_verb_vectors, &pw_verb_twin, &pw_verb_targets, &pw_verb_schema,
};
const int pw_verb_count = (int)(sizeof pw_verbs / sizeof pw_verbs[0]);
