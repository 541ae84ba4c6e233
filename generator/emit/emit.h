/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Results -> the files that firmware takes. Pure functions of the results: no date, no path. */
#ifndef PW_EMIT_EMIT_H
#define PW_EMIT_EMIT_H

#include "base/files.h"
#include "report/results.h"

/* <stage>.h and <stage>.c; with code: runtime also the pw_ files that they include, from where the
 * program keeps them. PW_FAILED with a line on stderr where those cannot be read. */
PW_CHECKED pw_status pw_emit_c(const pw_results *results, pw_fileset *out);

#endif
