/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The fast replay against the plain simulation, bit for bit: random cascades of every length up to
 * ten sections, every structure, formats, rounding and overflow, in blocks of odd sizes, on each
 * instruction set that this processor has. The fixed signals clip, and that is counted. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <cmocka.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "twin/replay.h"

#define N 20000

static uint64_t seed = 1;

static double uniform(void)      /* -1 .. 1 */
{
    seed = seed * UINT64_C(6364136223846793005) + UINT64_C(1442695040888963407);
    return (double)(int64_t)seed / 9223372036854775808.0;
}

static int whole(int from, int to)
{
    return from + (int)floor((uniform() + 1) / 2 * (to - from + 1) * 0.999999);
}

/* A stable pair, or a real pole, with b that make about one clip in twenty samples. */
static void random_section(pw_words *w, bool fixed, bool wide)
{
    double r = 0.5 + 0.45 * fabs(uniform()), angle = M_PI * fabs(uniform());
    double a1 = -2 * r * cos(angle), a2 = r * r, gain = 0.4 * (1 - r);
    *w = (pw_words){.structure = PW_TRANSPOSED_2, .order = whole(1, 2)};
    if (w->order == 1) a1 = -r * uniform(), a2 = 0;
    double b[3] = {gain * (1 + uniform()), gain * uniform(), w->order == 2 ? gain * uniform() : 0};
    w->fa[0] = 1;
    w->fa[1] = (float)a1;
    w->fa[2] = (float)a2;
    for (int i = 0; i < 3; i++) w->fb[i] = (float)(3 * b[i]);
    if (!fixed) return;
    w->structure = whole(0, 2) ? PW_DIRECT_1 : PW_DIRECT_1_SHAPED;
    w->a_fraction = wide ? 30 : 14;
    w->b_fraction = w->a_fraction + whole(-2, 4);
    for (int i = 0; i < 3; i++)
        w->b[i] =
            (int32_t)fmax(-2147483647, fmin(2147483647, rint(ldexp(8 * b[i], w->b_fraction))));
    if (!wide)
        for (int i = 0; i < 3; i++) w->b[i] = (int32_t)fmax(-32767, fmin(32767, w->b[i]));
    w->a[1] = (int32_t)rint(ldexp(a1, w->a_fraction));
    w->a[2] = (int32_t)rint(ldexp(a2, w->a_fraction));
    if (w->structure == PW_DIRECT_1_SHAPED) w->k1 = whole(-2, 2), w->k2 = whole(-1, 1);
}

static void random_cascade(pw_realisation *r, pw_sample sample)
{
    bool fixed = sample == PW_Q15 || sample == PW_Q31;
    memset(r, 0, sizeof *r);
    r->sample = sample;
    r->truncate = whole(0, 2) == 0;
    r->wrap = whole(0, 3) == 0;
    r->count = whole(1, 10);
    bool full = whole(0, 2) == 0; /* eight sections of second order take a way of their own */
    if (full) r->count = whole(8, 10);
    for (int k = 0; k < r->count; k++)
        do random_section(&r->section[k], fixed, sample == PW_Q31);
        while (full && r->section[k].order != 2);
    if (full) return;
    if (fixed && whole(0, 4) == 0)
        r->section[r->count / 2] = (pw_words){.structure = PW_COUPLED,
                                              .order = 2,
                                              .sigma = 20000,
                                              .omega = 15000,
                                              .g = 9000,
                                              .c1 = 8000,
                                              .c2 = -7000,
                                              .d = 3000,
                                              .a_fraction = 15,
                                              .c_fraction = 14};
    if (!fixed && whole(0, 4) == 0) r->section[r->count / 2].structure = PW_DIRECT_1;
    if (!fixed && whole(0, 4) == 0) r->section[r->count / 3].order = 0;
}

static pw_realisation r;
static pw_simulation plain, fast;
static double real_in[N], real_out[N];
static float single_in[N], single_out[N];
static double single_wide[N], single_plain[N], plain_real[N];
static int32_t word_in[N], word_out[N], plain_word[N];

static size_t piece(size_t at)
{
    size_t n = (size_t)whole(1, 3) == 1 ? (size_t)whole(0, 20) : (size_t)whole(1, 9000);
    return n < N - at ? n : N - at;
}

static uint64_t try_words(pw_sample sample)
{
    random_cascade(&r, sample);
    double full = sample == PW_Q31 ? 2147483647.0 : 32767.0;
    for (int i = 0; i < N; i++) word_in[i] = (int32_t)(full * uniform());
    for (int i = 0; i < N / 4; i++) word_in[i] = i / 37 % 2 ? (int32_t)full : (int32_t)-full - 1;
    pw_simulation_reset(&plain, &r);
    pw_simulation_reset(&fast, &r);
    pw_simulation_run_words(&plain, word_in, plain_word, N);
    for (size_t at = 0, n; at < N; at += n) {
        n = piece(at);
        pw_replay_words(&fast, word_in + at, word_out + at, n);
    }
    assert_memory_equal(word_out, plain_word, sizeof word_out);
    assert_memory_equal(fast.state, plain.state, sizeof fast.state);
    assert_int_equal(fast.clipped, plain.clipped);
    return plain.clipped;
}

static void try_floats(void)
{
    random_cascade(&r, PW_FLOAT64);
    for (int i = 0; i < N; i++) real_in[i] = i % 50 < 5 ? 0.0 : i % 50 == 7 ? -0.0 : uniform();
    pw_simulation_reset(&plain, &r);
    pw_simulation_reset(&fast, &r);
    pw_simulation_run_floats(&plain, real_in, plain_real, N);
    for (size_t at = 0, n; at < N; at += n) {
        n = piece(at);
        pw_replay_float64(&fast, real_in + at, real_out + at, n);
    }
    assert_memory_equal(real_out, plain_real, sizeof real_out);
    assert_memory_equal(fast.fstate, plain.fstate, sizeof fast.fstate);
}

static void try_singles(void)
{
    random_cascade(&r, PW_FLOAT32);
    for (int i = 0; i < N; i++) single_wide[i] = single_in[i] = (float)uniform();
    pw_simulation_reset(&plain, &r);
    pw_simulation_reset(&fast, &r);
    pw_simulation_run_floats(&plain, single_wide, single_plain, N);
    for (size_t at = 0, n; at < N; at += n) {
        n = piece(at);
        pw_replay_float32(&fast, single_in + at, single_out + at, n);
    }
    for (int i = 0; i < N; i++) real_out[i] = single_out[i];
    assert_memory_equal(real_out, single_plain, sizeof real_out);
    assert_memory_equal(fast.fstate, plain.fstate, sizeof fast.fstate);
}

static void on_each_kind(void (*run)(void))
{
    static const char *const kinds[] = {"plain", "SSE2", "AVX2", NULL};
    for (int i = 0; i < 4; i++) {
        pw_replay_limit(kinds[i]);
        for (int k = 0; k < 25; k++) run();
    }
    pw_replay_limit(NULL);
}

static uint64_t clips;
static void some_words(void) { clips += try_words(PW_Q31) + try_words(PW_Q15); }

static void words_are_those_of_the_simulation(void **state)
{
    (void)state;
    clips = 0;
    on_each_kind(some_words);
    assert_true(clips > 100000);
}

static void doubles_are_those_of_the_simulation(void **state)
{
    (void)state;
    on_each_kind(try_floats);
}

static void floats_are_those_of_the_simulation(void **state)
{
    (void)state;
    on_each_kind(try_singles);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(words_are_those_of_the_simulation),
        cmocka_unit_test(doubles_are_those_of_the_simulation),
        cmocka_unit_test(floats_are_those_of_the_simulation),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
