/* SPDX-License-Identifier: GPL-3.0-or-later */
/* report.html: one file for people, plots inside, nothing fetched from anywhere. */
#ifndef PW_REPORT_HTML_H
#define PW_REPORT_HTML_H

#include "base/text.h"
#include "report/results.h"

/* Adds the page to out. plots: draws them with gnuplot; where that is not to be had, the page says
 * so in their place. PW_FAILED where a curve could not be computed. */
PW_CHECKED pw_status pw_report_html(const pw_results *results, bool plots, pw_text *out);

#endif
