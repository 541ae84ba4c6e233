/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The long part of report.txt: every table. */
#ifndef PW_REPORT_TEXT_FULL_H
#define PW_REPORT_TEXT_FULL_H

#include "report/results.h"
#include "report/style.h"

void pw_report_text_full(const pw_results *results, const pw_style *style, pw_text *out);

#endif
