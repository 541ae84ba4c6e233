/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/gnuplot.h"

#include <fcntl.h>
#include <spawn.h>
#include <stdio.h>
#include <stdlib.h>
#include <sys/wait.h>
#include <unistd.h>

/* gnuplot reads its script from in and writes to out; both are files, so neither side can block. */
static bool run(int in, int out)
{
    char path[4096], *const arguments[] = {"gnuplot", "-d", NULL};
    char *const environment[] = {path, "LC_ALL=C", NULL};
    const char *search = getenv("PATH");
    snprintf(path, sizeof path, "PATH=%s", search ? search : "/usr/local/bin:/usr/bin:/bin");
    posix_spawn_file_actions_t files;
    if (posix_spawn_file_actions_init(&files)) return false;
    posix_spawn_file_actions_adddup2(&files, in, STDIN_FILENO);
    posix_spawn_file_actions_adddup2(&files, out, STDOUT_FILENO);
    posix_spawn_file_actions_addopen(&files, STDERR_FILENO, "/dev/null", O_WRONLY, 0);
    pid_t child;
    int status = -1, failed = posix_spawnp(&child, "gnuplot", &files, NULL, arguments, environment);
    posix_spawn_file_actions_destroy(&files);
    return !failed && waitpid(child, &status, 0) == child && status == 0;
}

static void take(FILE *from, pw_text *out)
{
    char piece[4096];
    size_t n;
    rewind(from);
    while ((n = fread(piece, 1, sizeof piece, from)) > 0) pw_text_add_bytes(out, piece, n);
}

bool pw_gnuplot(const pw_text *script, pw_text *out)
{
    FILE *in = tmpfile(), *drawn = tmpfile();
    bool done = in && drawn && fwrite(pw_text_string(script), 1, script->size, in) == script->size
                && !fflush(in);
    if (done) {
        rewind(in);
        lseek(fileno(in), 0, SEEK_SET);
        done = run(fileno(in), fileno(drawn));
    }
    if (done) take(drawn, out);
    if (in) fclose(in);
    if (drawn) fclose(drawn);
    return done;
}
