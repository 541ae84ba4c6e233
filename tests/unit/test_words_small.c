/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Proof of range by exhaustion: the arithmetic with samples and words of 8 bits, where every state
 * that any input can reach is visited with every input. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdlib.h>
#include <string.h>
#include <cmocka.h>

#include <math.h>
#include "words/cycles.h"
#include "words/noise.h"
#include "words/step.h"

static const pw_format small = {
    .sample = PW_Q15, .fixed = true, .sample_bits = 8, .word_bits = 8, .lsb = 0x1p-7,
        .largest = 127 / 128.0,
};

typedef struct filter { double b0, b1, pole; int k1; } filter;

static void make(const pw_format *format, const filter *f, double peak, pw_realisation *r)
{
    pw_section section = {.order = 1, .poles = 1, .zeros = 1, .pole = {f->pole}, .gain = f->b0};
    section.zero[0] = f->b0 != 0 ? -f->b1 / f->b0 : 0;
    if (f->b1 == 0)
        section.zeros = 0;
    pw_section_expand(&section);
    memset(r, 0, sizeof *r);
    r->count = 1, r->sample = PW_Q15, r->input_peak = peak, r->truncate = format->truncate;
    r->ideal[0] = section;
    r->section[0].structure = f->k1 ? PW_DIRECT_1_SHAPED : PW_DIRECT_1;
    r->section[0].k1 = f->k1;
    assert_true(pw_quantise_direct(format, &section, 1, &r->section[0]));
    assert_true(pw_words_stable(&section, &r->section[0]));
}

/* State: x1 and y1 (-128..127), and the fed back error where there is one. */
typedef struct states { char *seen; int64_t *queue; long count; int errors; } states;

static long index_of(const states *s, const int64_t state[6])
{
    return ((state[0] + 128) * 256 + state[2] + 128) * s->errors + state[4] + s->errors / 2;
}

static void enter(states *s, const int64_t state[6])
{
    long i = index_of(s, state);
    if (s->seen[i])
        return;
    s->seen[i] = 1;
    s->queue[s->count++] = i;
}

static void state_at(const states *s, long i, int64_t state[6])
{
    memset(state, 0, 6 * sizeof *state);
    state[4] = i % s->errors - s->errors / 2, i /= s->errors;
    state[2] = i % 256 - 128, state[0] = i / 256 - 128;
}

/* Visits all reachable states with all inputs up to the peak; returns the largest |y|, counts
 * clips. */
static int64_t exhaust(const pw_format *format, const pw_realisation *r, int stride,
                       uint64_t *clips)
{
    const pw_words *w = &r->section[0];
    int limit = (int)floor(r->input_peak * 128 + 1e-9), low = -limit, high = limit < 127 ? limit
        : 127;
    states s = {.errors = w->k1 ? 2 << w->a_fraction : 1};
    s.seen = calloc((size_t)65536 * (size_t)s.errors, 1);
    s.queue = malloc(sizeof *s.queue * 65536 * (size_t)s.errors);
    assert_non_null(s.seen);
    assert_non_null(s.queue);
    int64_t state[6] = {0}, most = 0;
    enter(&s, state);
    for (long at = 0; at < s.count; at++) {
        int64_t start[6];
        state_at(&s, s.queue[at], start);
        for (int x = low; x <= high; x = x + stride > high && x < high ? high : x + stride) {
            memcpy(state, start, sizeof state);
            int64_t y = pw_step_section(format, false, w, state, x, clips);
            most = llabs(y) > most ? llabs(y) : most;
            if (w->b[1] == 0)
                state[0] = 0;    /* x1 is not used: one state for all */
            enter(&s, state);
        }
    }
    free(s.seen);
    free(s.queue);
    return most;
}

static void run_one(const pw_format *format, const filter *f, double peak, int stride, int *proved,
                    int *tight)
{
    static pw_realisation r;
    pw_proof proof;
    uint64_t clips = 0;
    make(format, f, peak, &r);
    pw_proof_start(format, &r, &proof);
    pw_prove(&proof, &r);
    double most = (double)exhaust(format, &r, stride, &clips) * format->lsb;
    pw_proof_end(&proof);
    if (!r.node[0].can_clip) {
        assert_int_equal(clips, 0);
        assert_true(most <= r.node[0].bound);
        *tight += most >= 0.99 * r.node[0].bound - 2 * format->lsb;
        ++*proved;
    }
    /* an input that attains the peak gain is among those tried; rounding may work against it */
    double gain = r.node[0].peak_gain * (peak - (peak == 1) * format->lsb);
    double sure = 0.995 * gain - (r.node[0].bound - r.node[0].peak_gain * peak) - format->lsb;
    assert_true(most >= fmin(sure, 127 / 128.0));
    if (r.section[0].cannot_clip)
        assert_false(r.node[0].can_clip);
}

/* One state word: every pair of state and input takes no time. */
static const filter plain[] = {
    {0.4, 0, 0.5, 0}, {0.45, 0, 0.55, 0}, {0.85, 0, 0.1, 0}, {0.39, 0, -0.6, 0}, {0.09, 0, 0.9, 0},
    {0.6, 0, 0.3, 0}, {0.12, 0, 0.875, 0}, {0.79, 0, -0.2, 0}, {0.24, 0, -0.75, 0},
        {0.7, 0, 0.4, 0},
};

/* Two state words: sixteen million pairs each. */
static const filter with_zero[] = {{0.2, 0.2, 0.55, 0}, {0.45, -0.45, 0.1, 0}, {0.3, 0.1, -0.6, 0}};

static void test_every_state_plain(void **nothing)
{
    (void)nothing;
    int proved = 0, tight = 0;
    for (size_t i = 0; i < sizeof plain / sizeof *plain; i++)
        for (int truncate = 0; truncate < 2; truncate++) {
            pw_format format = small;
            format.truncate = truncate;
            run_one(&format, &plain[i], 1, 1, &proved, &tight);
            run_one(&format, &plain[i], 0.5, 1, &proved, &tight);
        }
    assert_true(proved >= 30);
    assert_true(tight >= proved / 2);        /* the bounds are not merely large */
}

static void test_every_state_with_zero(void **nothing)
{
    (void)nothing;
    int proved = 0, tight = 0;
    for (size_t i = 0; i < sizeof with_zero / sizeof *with_zero; i++)
        run_one(&small, &with_zero[i], i ? 0.25 : 0.8, 1, &proved, &tight);
    assert_int_equal(proved, 3);
}

static void test_every_state_shaped(void **nothing)
{
    (void)nothing;
    int proved = 0, tight = 0;
    static const filter shaped[] = {{0.4, 0, 0.5, 1}, {0.09, 0, 0.9, 1}, {0.2, 0, -0.7, -1}};
    for (size_t i = 0; i < sizeof shaped / sizeof *shaped; i++)
        run_one(&small, &shaped[i], 1, 9, &proved, &tight);
    assert_int_equal(proved, 3);
}

/* Every free start of a first-order section: what is found is never above what is proved. */
static void test_every_cycle(void **nothing)
{
    (void)nothing;
    static pw_realisation r;
    for (size_t i = 0; i < sizeof plain / sizeof *plain; i++) {
        pw_proof proof;
        make(&small, &plain[i], 1, &r);
        pw_proof_start(&small, &r, &proof);
        pw_prove(&proof, &r);
        pw_cycles_find(&proof, &r);
        double most = 0;
        for (int start = -128; start < 128; start++) {
            int64_t state[6] = {0, 0, start}, y = start;
            for (int n = 0; n < 400; n++)
                y = pw_step_section(&small, false, &r.section[0], state, 0, NULL);
            most = fmax(most, (double)llabs(y));
        }
        assert_true(most <= r.limit_cycle.bound_lsb);
        assert_true(r.limit_cycle.found_lsb <= most);
        assert_true(r.limit_cycle.found_constant_lsb <= r.limit_cycle.bound_lsb);
        assert_true(r.limit_cycle.found_lsb >= most - 1);
        pw_proof_end(&proof);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_every_state_plain),
        cmocka_unit_test(test_every_state_with_zero),
        cmocka_unit_test(test_every_state_shaped),
        cmocka_unit_test(test_every_cycle),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
