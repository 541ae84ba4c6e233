/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Progress of long work: a line on standard error, on a terminal only, once a second has passed;
 * it says how much is done, how fast, and how long it will still take. */
#ifndef PW_BASE_PROGRESS_H
#define PW_BASE_PROGRESS_H

#include <stdbool.h>

typedef struct pw_progress {
    const char *label, *unit;    /* "replaying", "samples" */
    double total;                /* of units; 0: not known, and no time left is given */
    double began, shown;         /* seconds on the monotonic clock */
    bool terminal, visible;
} pw_progress;

void pw_progress_begin(pw_progress *progress, const char *label, double total, const char *unit, bool quiet);
/* done: units so far. Cheap: looks at the clock and mostly returns. Not for several threads at once. */
void pw_progress_step(pw_progress *progress, double done);
/* Takes the line away again. */
void pw_progress_end(pw_progress *progress);

#endif
