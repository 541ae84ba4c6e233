/* SPDX-License-Identifier: GPL-3.0-or-later */
#define _GNU_SOURCE
#include "base/progress.h"

#include <stdio.h>
#include <string.h>
#include <time.h>
#include <unistd.h>

#include "base/text.h"

#define FIRST_SHOWN_AFTER 1.0    /* seconds */
#define SHOWN_EVERY 0.2
#define CELLS 24

static double now(void)
{
    struct timespec t;
    clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

void pw_progress_begin(pw_progress *progress, const char *label, double total, const char *unit, bool quiet)
{
    *progress = (pw_progress){.label = label, .unit = unit, .total = total, .began = now()};
    progress->shown = progress->began + FIRST_SHOWN_AFTER - SHOWN_EVERY;
    progress->terminal = !quiet && isatty(STDERR_FILENO);
}

void pw_progress_step(pw_progress *progress, double done)
{
    if (!progress->terminal) return;
    double t = now();
    if (t - progress->shown < SHOWN_EVERY) return;
    progress->shown = t;
    progress->visible = true;
    double rate = done / (t - progress->began);
    char rate_text[PW_NUMBER_ROOM], bar[CELLS + 1];
    pw_si(rate_text, rate, progress->unit, 3);
    if (progress->total <= 0) {
        fprintf(stderr, "\r\033[K%s: %.0f %s, %s/s", progress->label, done, progress->unit, rate_text);
        return;
    }
    double share = done < progress->total ? done / progress->total : 1;
    int full = (int)(share * CELLS);
    memset(bar, '.', CELLS);
    memset(bar, '#', (size_t)full);
    bar[CELLS] = 0;
    fprintf(stderr, "\r\033[K%s %s %3.0f %%, %s/s, %.0f s left", progress->label, bar, 100 * share, rate_text,
            rate > 0 ? (progress->total - done) / rate : 0);
}

void pw_progress_end(pw_progress *progress)
{
    if (progress->visible) fputs("\r\033[K", stderr);
    progress->visible = false;
}
