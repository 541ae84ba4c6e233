/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The twin's parts for tests and for the bench:
 *     probe_twin speed STAGE N [KIND]   realises STAGE, prints its sections "b0 b1 b2 a1 a2" and an
 * empty line; then for every line read replays N samples of noise and prints seconds and clips
 *     probe_twin exact STAGE zero|linear   the analog stage's exact output for the inputs read, one
 * a line probe_twin welch N   averaged spectra of lines "x y r": segments, then a bin a line
 *     probe_twin decimal   each line read as a number, printed with 17 digits
 *     probe_twin exponential N   exp of the N by N matrix read, row by row */
#define _GNU_SOURCE
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

#include "base/files.h"
#include "stagefile/read.h"
#include "twin/exact.h"
#include "twin/record.h"
#include "twin/replay.h"
#include "twin/welch.h"

static pw_stage stage;
static pw_roots analog;
static pw_digital digital;
static pw_target target;
static pw_realisation realisation;

static pw_status read_stage(const char *path, bool words)
{
    pw_text yaml = {0};
    pw_messages messages = {.file = path};
    pw_status status = pw_file_read(path, 1 << 20, &yaml);
    if (!status) status = pw_stage_read(&yaml, NULL, 0, &stage, &messages);
    if (!status) status = pw_analog_build(&stage.analog, &analog, &messages);
    if (!status && words)
        status = pw_target_read(stage.target, stage.target_at, &target, &messages);
    if (!status && words) status = pw_discretise(&stage, &analog, &digital, &messages);
    if (!status && words)
        status = pw_realise(&stage, &analog, &digital, &target, &realisation, &messages);
    pw_messages_print(&messages, stderr, true);
    pw_text_free(&yaml);
    return status;
}

/* ---- speed ---- */

static double now(void)
{
    struct timespec t;
    clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

static void replay(pw_simulation *sim, const void *in, void *out, size_t n)
{
    if (realisation.sample == PW_FLOAT32) pw_replay_float32(sim, in, out, n);
    else if (realisation.sample == PW_FLOAT64) pw_replay_float64(sim, in, out, n);
    else pw_replay_words(sim, in, out, n);
}

static void fill(void *in, size_t n)
{
    uint64_t seed = 1;
    for (size_t i = 0; i < n; i++) {
        seed = seed * UINT64_C(6364136223846793005) + UINT64_C(1442695040888963407);
        double v = 0.5 * (double)(int64_t)seed / 9223372036854775808.0;
        if (realisation.sample == PW_FLOAT32) ((float *)in)[i] = (float)v;
        else if (realisation.sample == PW_FLOAT64) ((double *)in)[i] = v;
        else
            ((int32_t *)in)[i] =
                (int32_t)(v * (realisation.sample == PW_Q15 ? 32768.0 : 2147483648.0));
    }
}

static int speed(size_t n)
{
    static pw_simulation sim;
    char line[16];
    void *in = calloc(n, 8), *out = calloc(n, 8);
    for (int k = 0; k < realisation.count; k++) {
        const pw_words *w = &realisation.section[k];
        printf("%.17g %.17g %.17g %.17g %.17g\n", w->realised_b[0], w->realised_b[1],
               w->realised_b[2], w->realised_a[1], w->realised_a[2]);
    }
    printf("%s\n\n", pw_replay_kind());
    fill(in, n);
    pw_simulation_reset(&sim, &realisation);
    fflush(stdout);
    while (fgets(line, sizeof line, stdin)) {
        double began = now();
        replay(&sim, in, out, n);
        printf("%.9g %llu\n", now() - began, (unsigned long long)sim.clipped);
        fflush(stdout);
    }
    free(in);
    free(out);
    return 0;
}

/* ---- the others ---- */

static int exact(bool linear)
{
    pw_exact e;
    double u;
    pw_exact_begin(&analog, stage.rate_hz, linear, &e);
    pw_exact_settle(&e, 0);
    while (scanf("%lf", &u) == 1) printf("%.17g\n", pw_exact_step(&e, u));
    pw_exact_end(&e);
    return 0;
}

static int welch(int n)
{
    pw_welch w;
    double x, y, r;
    pw_welch_begin(n, &w);
    while (scanf("%lf %lf %lf", &x, &y, &r) == 3) pw_welch_add(&w, x, y, r);
    printf("%ld\n", w.segments);
    for (int k = 0; k < w.bins; k++)
        printf("%.17g %.17g %.17g %.17g %.17g %.17g %.17g %.17g\n", w.xx[k], w.yy[k], w.rr[k],
               creal(w.xy[k]), cimag(w.xy[k]), creal(w.ry[k]), cimag(w.ry[k]),
               pw_welch_leakage(&w, w.xx, k));
    pw_welch_end(&w);
    return 0;
}

static int decimal(void)
{
    char line[256];
    while (fgets(line, sizeof line, stdin)) {
        const char *at = line;
        double v = pw_decimal(&at);
        printf("%.17g %d\n", v, (int)(at - line));
    }
    return 0;
}

static int exponential(int n)
{
    double *a = calloc((size_t)(n * n), sizeof *a), *out = calloc((size_t)(n * n), sizeof *out);
    for (int i = 0; i < n * n; i++)
        if (scanf("%lf", &a[i]) != 1) return 2;
    pw_matrix_exponential(a, n, out);
    for (int i = 0; i < n * n; i++) printf("%.17g\n", out[i]);
    free(a);
    free(out);
    return 0;
}

int main(int argc, char **argv)
{
    if (argc < 2) return 2;
    if (!strcmp(argv[1], "decimal")) return decimal();
    if (argc < 3) return 2;
    if (!strcmp(argv[1], "welch")) return welch(atoi(argv[2]));
    if (!strcmp(argv[1], "exponential")) return exponential(atoi(argv[2]));
    if (argc < 4) return 2;
    bool fast = !strcmp(argv[1], "speed");
    if (read_stage(argv[2], fast)) return 2;
    if (argc > 4) pw_replay_limit(argv[4]);
    return fast ? speed((size_t)atol(argv[3])) : exact(!strcmp(argv[3], "linear"));
}
