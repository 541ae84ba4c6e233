/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Dead bands and round-off figures from textbooks, on the station's own arithmetic. Values as
 * collected in tests/outside/published/scaling-noise-deadband.json: Proakis & Manolakis (example
 * 7.7.1), Salivahanan et al. (examples 10.3 to 10.5); the classical second-order dead band,
 * Jackson 1969, is from memory. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <string.h>
#include <cmocka.h>

#include <math.h>
#include "words/cycles.h"
#include "words/noise.h"
#include "words/step.h"

static const pw_format q15 = {
    .sample = PW_Q15, .fixed = true, .sample_bits = 16, .word_bits = 16, .lsb = 0x1p-15,
        .largest = 32767 / 32768.0,
};

static pw_words section(double b0, double a1, double a2)
{
    pw_words w = {.structure = PW_DIRECT_1, .order = a2 != 0 ? 2 : 1, .b_fraction = 14,
                  .a_fraction = 14};
    w.b[0] = (int32_t)lrint(ldexp(b0, 14));
    w.a[1] = (int32_t)lrint(ldexp(a1, 14));
    w.a[2] = (int32_t)lrint(ldexp(a2, 14));
    pw_words_realise(&q15, &w);
    return w;
}

static void one_section(pw_realisation *r, pw_words w)
{
    memset(r, 0, sizeof *r);
    r->count = 1, r->sample = PW_Q15, r->input_peak = 1;
    r->section[0] = w;
}

static void find(pw_realisation *r, pw_proof *proof)
{
    pw_proof_start(&q15, r, proof);
    pw_prove(proof, r);
    pw_cycles_find(proof, r);
}

/* y(n) = 0.9 y(n-1), y(-1) = 12: 12 11 10 9 8 7 6 5 5 5 ..; in doubles 0.5/(1-0.9) would make it
 * 6. */
static void test_sequences(void **nothing)
{
    (void)nothing;
    static const struct { double a; int start, count; int64_t want[10]; } runs[] = {
        {0.9, 12, 10, {11, 10, 9, 8, 7, 6, 5, 5, 5, 5}},
        {0.5, 15, 6, {8, 4, 2, 1, 1, 1}},
        {0.75, 11, 8, {8, 6, 5, 4, 3, 2, 2, 2}},
    };
    for (size_t i = 0; i < sizeof runs / sizeof *runs; i++) {
        pw_words w = section(1, -runs[i].a, 0);
        int64_t state[6] = {0, 0, runs[i].start};
        for (int n = 0; n < runs[i].count; n++)
            assert_int_equal(pw_step_section(&q15, false, &w, state, 0, NULL), runs[i].want[n]);
    }
}

/* First order: 0.5 / (1 - |a|), rounded down: 1 for 1/2, 2 for 3/4, 5 for 0.9 (here 0.90002 in
 * words). */
static void test_first_order_dead_bands(void **nothing)
{
    (void)nothing;
    /* rounding half up, -1.5 becomes -1: the alternating cycle of -3/4 is one less than the band */
    static const struct { double a, want, found; } cases[] = {
        {0.5, 1, 1}, {0.75, 2, 2}, {-0.75, 2, 1}, {0.9, 5, 5}, {0.96875, 16, 16},
    };
    static pw_realisation r;
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        pw_proof proof;
        one_section(&r, section(0.01, -cases[i].a, 0));
        find(&r, &proof);
        assert_true(floor(r.limit_cycle.bound_lsb) == cases[i].want);
        assert_true(r.limit_cycle.found_lsb == cases[i].found);
        assert_int_equal(r.limit_cycle.found_period, cases[i].a > 0 ? 1 : 2);
        assert_true(r.limit_cycle.has_state);
        pw_proof_end(&proof);
    }
}

/* The largest value of any zero-input cycle that starts within reach, by trying every start. */
static int64_t every_cycle(const pw_words *w, int reach)
{
    int64_t most = 0;
    for (int y1 = -reach; y1 <= reach; y1++)
        for (int y2 = -reach; y2 <= reach; y2++) {
            int64_t state[6] = {0, 0, y1, y2}, y;
            for (int n = 0; n < 800; n++) {
                y = pw_step_section(&q15, false, w, state, 0, NULL);
                if (n > 500)
                    most = y > most ? y : -y > most ? -y : most;
            }
        }
    return most;
}

/* Second order: what is found is what trying every start finds or little less, never above the
 * bound, about the classical 0.5 / (1 - a2) for the kinder angles, and the state that is kept goes
 * round in the period that is said. */
static void test_second_order_dead_bands(void **nothing)
{
    (void)nothing;
    static pw_realisation r;
    int near_classical = 0;
    for (int i = 1; i < 12; i++) {
        double radius = 0.97, angle = M_PI * i / 12;
        pw_proof proof;
        one_section(&r, section(0.01, -2 * radius * cos(angle), radius * radius));
        find(&r, &proof);
        const pw_limit_cycle *c = &r.limit_cycle;
        assert_true(c->found_lsb <= c->bound_lsb);
        int64_t every = every_cycle(&r.section[0], 20);
        assert_true((double)every <= c->bound_lsb);
        assert_true(c->found_lsb <= (double)every);
        assert_true(c->found_lsb >= 0.7 * (double)every);
        near_classical += fabs(c->found_lsb - 0.5 / (1 - radius * radius)) < 3;
        int64_t state[6], most = 0;
        memcpy(state, c->state[0], sizeof state);
        for (int n = 0; n < c->found_period; n++) {
            int64_t y = pw_step_section(&q15, false, &r.section[0], state, 0, NULL);
            most = y > most ? y : -y > most ? -y : most;
        }
        assert_memory_equal(state, c->state[0], sizeof state);
        assert_true((double)most == c->found_lsb);
        pw_proof_end(&proof);
    }
    assert_true(near_classical >= 5);
}

/* Noise gains 1/(1-a^2): 1/(1 - 0.5/z) 1.3333, 1/(1 - 0.25/z) 1.0667 (Proakis);
 * 1/((1-0.9/z)(1-0.8/z)) 89.80787, 1/(1 - 0.8/z) 2.77778 (Salivahanan). */
static void test_noise_gains(void **nothing)
{
    (void)nothing;
    static const struct { double a1, a2, want; } cases[] = {
        {-0.5, 0, 1.3333333}, {-0.25, 0, 1.0666667}, {-0.8, 0, 2.7777778}, {-1.7, 0.72, 89.8078530},
        {-0.75, 0.125, 1.8285714},
    };
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        double a[3] = {1, cases[i].a1, cases[i].a2};
        assert_float_equal(pw_feedback_power(a, 0, 0), cases[i].want, 1e-6);
    }
    double integrator[3] = {1, -1, 0};
    assert_true(isinf(pw_feedback_power(integrator, 0, 0)));
    assert_float_equal(pw_feedback_power(integrator, 1, 0), 1, 0);
}

/* H1 = 1/(1-z/2), H2 = 1/(1-z/4) in this order: 2.895 steps^2/12 of variance, 3.162 the other
 * way. */
static void test_order_of_two(void **nothing)
{
    (void)nothing;
    static const double pole[2] = {0.5, 0.25}, want[2] = {2.8952381, 3.1619048};
    static pw_realisation r;
    static pw_stage stage;
    for (int way = 0; way < 2; way++) {
        pw_proof proof;
        one_section(&r, section(0.3, -pole[way], 0));
        /* unit gain from one section to the next, with fraction bits to round in the second */
        r.section[1] = section(1, -pole[1 - way], 0);
        r.count = 2;
        pw_proof_start(&q15, &r, &proof);
        pw_prove(&proof, &r);
        pw_noise_find(&proof, &stage, &r, NULL);
        /* words of a quarter and a half round to two bits and one: those steps have fewer levels */
        double variance = r.noise.output_rms_lsb * r.noise.output_rms_lsb * 12;
        double levels[2] = {1, 1 - pow(4, pole[1 - way] == 0.5 ? -1 : -2)};
        double gain[2] = {want[way] - 1 / (1 - pole[1 - way] * pole[1 - way]),
                          1 / (1 - pole[1 - way] * pole[1 - way])};
        assert_float_equal(variance, levels[0] * gain[0] + levels[1] * gain[1], 0.01);
        pw_proof_end(&proof);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_sequences),
        cmocka_unit_test(test_first_order_dead_bands),
        cmocka_unit_test(test_second_order_dead_bands),
        cmocka_unit_test(test_noise_gains),
        cmocka_unit_test(test_order_of_two),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
