/* SPDX-License-Identifier: GPL-3.0-or-later */
/* report.txt, and what build and check print. */
#ifndef PW_REPORT_TEXT_H
#define PW_REPORT_TEXT_H

#include "base/text.h"
#include "report/results.h"

/* Adds the report to out: UTF-8, at most 100 columns. Not full: one screen (24 lines at most).
 * color adds terminal colours; they never say anything that the words do not. */
void pw_report_text(const pw_results *results, bool color, bool full, pw_text *out);

#endif
