/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "twin/replay.h"

#include <string.h>

#include "simulate/inner.h"
#include "twin/replay_inner.h"

static pw_reach limit = PW_REACH_AVX512;
static const char *const kinds[] = {"plain", "SSE2", "AVX2", "AVX-512"};

pw_reach pw_replay_reach(void)
{
    pw_reach reach = PW_REACH_PLAIN;
#if defined(__x86_64__)
    reach = PW_REACH_SSE2;
    if (__builtin_cpu_supports("avx2")) reach = PW_REACH_AVX2;
    if (__builtin_cpu_supports("avx512f") && __builtin_cpu_supports("avx512vl")
        && __builtin_cpu_supports("avx512dq") && __builtin_cpu_supports("avx512bw"))
        reach = PW_REACH_AVX512;
#endif
    return reach < limit ? reach : limit;
}

const char *pw_replay_kind(void) { return kinds[pw_replay_reach()]; }

void pw_replay_limit(const char *kind)
{
    limit = PW_REACH_AVX512;
    for (int i = 0; kind && i < 4; i++)
        if (!strcmp(kinds[i], kind)) limit = (pw_reach)i;
}

/* How many sections from k on the lanes can take together. */
static int run_length(const pw_realisation *r, int k, bool fixed)
{
    int m = 0;
    for (; k + m < r->count && m < PW_LANES; m++) {
        const pw_words *w = &r->section[k + m];
        if (fixed ? w->structure == PW_COUPLED : w->structure == PW_DIRECT_1 || w->order == 0)
            break; /* a plain gain has no s1 + */
    }
    return m;
}

void pw_replay_words(pw_simulation *sim, const int32_t *in, int32_t *out, size_t n)
{
    const pw_realisation *r = sim->realisation;
    pw_word_rules rules = pw_word_rules_of(r);
    bool lanes = pw_replay_reach() >= PW_REACH_AVX2;
    for (size_t at = 0, size; at < n; at += size) {
        size = n - at < PW_REPLAY_BLOCK ? n - at : PW_REPLAY_BLOCK;
        int32_t *io = out + at;
        if (in != out) memcpy(io, in + at, size * sizeof *io);
        for (int k = 0, m; k < r->count; k += m) {
            m = lanes ? run_length(r, k, true) : 0;
            if (m > 1) pw_lanes_words(sim, k, m, io, size);
            else {
                for (size_t i = 0; i < size; i++)
                    io[i] = pw_fixed_step(&r->section[k], &rules, sim->state[k], io[i],
                                          &sim->clipped, NULL);
                m = 1;
            }
        }
    }
}

/* One section the plain way, on pieces brought to double. */
static void plain_float32(pw_simulation *sim, int k, float *io, size_t n)
{
    double piece[256];
    for (size_t at = 0, size; at < n; at += size) {
        size = n - at < 256 ? n - at : 256;
        for (size_t i = 0; i < size; i++) piece[i] = io[at + i];
        pw_float_run(&sim->realisation->section[k], true, sim->fstate[k], piece, piece, size);
        for (size_t i = 0; i < size; i++) io[at + i] = (float)piece[i];
    }
}

static void plain_float64(pw_simulation *sim, int k, double *io, size_t n)
{
    pw_float_run(&sim->realisation->section[k], false, sim->fstate[k], io, io, n);
}

#define REPLAY(NAME, REAL)                                                                         \
    void pw_replay_##NAME(pw_simulation *sim, const REAL *in, REAL *out, size_t n)                 \
    {                                                                                              \
        const pw_realisation *r = sim->realisation;                                                \
        bool lanes = pw_replay_reach() > PW_REACH_PLAIN;                                           \
        for (size_t at = 0, size; at < n; at += size) {                                            \
            size = n - at < PW_REPLAY_BLOCK ? n - at : PW_REPLAY_BLOCK;                            \
            if (in != out) memcpy(out + at, in + at, size * sizeof *out);                          \
            for (int k = 0, m; k < r->count; k += m) {                                             \
                m = lanes ? run_length(r, k, false) : 0;                                           \
                if (m > 1) pw_lanes_##NAME(sim, k, m, out + at, size);                             \
                else {                                                                             \
                    plain_##NAME(sim, k, out + at, size);                                          \
                    m = 1;                                                                         \
                }                                                                                  \
            }                                                                                      \
        }                                                                                          \
    }

REPLAY(float32, float)
REPLAY(float64, double)
