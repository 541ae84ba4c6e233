/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "twin/sink.h"

#include <errno.h>
#include <stdbool.h>
#include <signal.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "base/arena.h"

static const int ending[] = {SIGINT, SIGTERM, SIGHUP};
static struct sigaction before[3];
static const char *volatile unfinished;

static void take_away(int number)
{
    if (unfinished) unlink(unfinished);
    signal(number, SIG_DFL);
    raise(number);
}

static pw_status cannot(const pw_sink *sink)
{
    fprintf(stderr, "polewright: cannot write %s: %s\n", sink->path, strerror(errno));
    return PW_FAILED;
}

pw_status pw_sink_open(const char *path, pw_sink *sink)
{
    size_t room = strlen(path) + 32;
    *sink = (pw_sink){.path = path, .beside = pw_take(room)};
    snprintf(sink->beside, room, "%s.new-%ld", path, (long)getpid());
    sink->file = fopen(sink->beside, "wb");
    if (!sink->file) {
        pw_status status = cannot(sink);
        free(sink->beside);
        *sink = (pw_sink){0};
        return status;
    }
    unfinished = sink->beside;
    struct sigaction action = {.sa_handler = take_away, .sa_flags = (int)SA_RESETHAND};
    for (int i = 0; i < 3; i++) {
        sigaction(ending[i], NULL, &before[i]);
        if (before[i].sa_handler != SIG_IGN) sigaction(ending[i], &action, NULL);
    }
    return PW_OK;
}

static void forget(pw_sink *sink)
{
    unfinished = NULL;
    for (int i = 0; i < 3; i++) sigaction(ending[i], &before[i], NULL);
    free(sink->beside);
    *sink = (pw_sink){0};
}

pw_status pw_sink_finish(pw_sink *sink)
{
    bool bad = ferror(sink->file) != 0;
    bad |= fclose(sink->file) != 0;
    sink->file = NULL;
    if (bad || rename(sink->beside, sink->path)) {
        pw_status status = cannot(sink);
        pw_sink_abandon(sink);
        return status;
    }
    forget(sink);
    return PW_OK;
}

void pw_sink_abandon(pw_sink *sink)
{
    if (!sink->beside) return;
    if (sink->file) fclose(sink->file);
    unlink(sink->beside);
    forget(sink);
}
