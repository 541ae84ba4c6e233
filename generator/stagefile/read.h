/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Reads a stage file: YAML text -> located tree -> stage. */
#ifndef PW_STAGEFILE_READ_H
#define PW_STAGEFILE_READ_H

#include "base/text.h"
#include "stagefile/stage.h"

/* Reads the text of a stage file into *out. sets are "PATH=VALUE" overrides from the command line
 * (a fault in one is told as "--set PATH=VALUE: ...", also where a later station finds it). Every
 * independent mistake becomes a message.
 * PW_WRONG where there was an error; *out must be freed in any case. */
PW_CHECKED pw_status pw_stage_read(const pw_text *yaml, const char *const *sets, int n_sets,
                                   pw_stage *out, pw_messages *messages);

#endif
