/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Test vectors as files: CSV for benches, C arrays with a self-test for parts. */
#ifndef PW_EMIT_VECTORS_H
#define PW_EMIT_VECTORS_H

#include "base/files.h"
#include "report/results.h"

/* vectors/<signal>.csv for every signal that the stage wants. */
PW_CHECKED pw_status pw_emit_vectors(const pw_results *results, pw_fileset *out);

/* <stage>_selftest.h and <stage>_selftest.c. */
PW_CHECKED pw_status pw_emit_selftest(const pw_results *results, pw_fileset *out);

#endif
