/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Runs gnuplot on a script and takes what it draws. */
#ifndef PW_REPORT_GNUPLOT_H
#define PW_REPORT_GNUPLOT_H

#include <stdbool.h>
#include "base/text.h"

/* Runs gnuplot (from PATH, without anyone's start-up file, in the C locale) with script on its
 * standard input; appends its standard output. False where there is no gnuplot or it failed. */
bool pw_gnuplot(const pw_text *script, pw_text *out);

#endif
