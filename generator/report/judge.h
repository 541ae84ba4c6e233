/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The limits of the stage file against the figures that were found. */
#ifndef PW_REPORT_JUDGE_H
#define PW_REPORT_JUDGE_H

#include "report/results.h"

/* Fills results->limit, limits and met from everything else in results: a row for each limit that
 * was given, in the order magnitude, phase, delay, noise, overflow, cycles, flash, ram. A figure
 * that is not known (NAN) does not meet its limit. */
void pw_judge(pw_results *results);

#endif
