/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Long output files: written beside their place as they come, renamed when whole. */
#ifndef PW_TWIN_SINK_H
#define PW_TWIN_SINK_H

#include <stdio.h>

#include "base/text.h"

typedef struct pw_sink {
    const char *path;
    char *beside;
    FILE *file;                  /* null where the caller opens beside on its own */
} pw_sink;

/* Until the end of the sink, SIGINT, SIGTERM and SIGHUP take the file beside away before they end
 * the program. One sink at a time. PW_FAILED with a line on standard error. */
PW_CHECKED pw_status pw_sink_open(const char *path, pw_sink *sink);
/* Puts the whole file in its place. */
PW_CHECKED pw_status pw_sink_finish(pw_sink *sink);
/* Takes it away; nothing after pw_sink_finish. */
void pw_sink_abandon(pw_sink *sink);

#endif
