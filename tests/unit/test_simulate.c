/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The simulated arithmetic against hand-worked numbers, exact rational arithmetic done another way,
 * and closed forms. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <cmocka.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "simulate/simulate.h"

static pw_realisation one_section(pw_sample sample, pw_words words)
{
    pw_realisation r = {.sample = sample, .count = 1, .input_peak = 1};
    r.section[0] = words;
    return r;
}

/* y = x/2 + y1/2 in q15 with 14-bit words, worked by hand: 3 -> (24576 + 8192) >> 14 = 2; 0 ->
 * (16384 + 8192) >> 14 = 1; 0 -> (8192 + 8192) >> 14 = 1 for ever; -3 from rest -> (-24576 + 8192)
 * >> 14 = -1. */
static const pw_words half_pole = {.structure = PW_DIRECT_1,
                                   .order = 1,
                                   .b = {8192},
                                   .a = {0, -8192},
                                   .b_fraction = 14,
                                   .a_fraction = 14};

static void hand_worked(void **state)
{
    (void)state;
    pw_realisation r = one_section(PW_Q15, half_pole);
    pw_simulation sim;
    pw_simulation_reset(&sim, &r);
    int32_t in[4] = {3, 0, 0, 0}, out[4];
    pw_simulation_run_words(&sim, in, out, 4);
    const int32_t expected[4] = {2, 1, 1, 1};
    assert_memory_equal(out, expected, sizeof out);
    pw_simulation_reset(&sim, &r);
    int32_t below = -3;
    pw_simulation_run_words(&sim, &below, &below, 1);
    assert_int_equal(below, -1);
    r.truncate = true; /* floor(-1.5) */
    pw_simulation_reset(&sim, &r);
    below = -3;
    pw_simulation_run_words(&sim, &below, &below, 1);
    assert_int_equal(below, -2);
}

/* A right shift of p by 2 rounds half up: 1/4 -> 0, 2/4 -> 1, 3/4 -> 1, -1/4 -> 0, -2/4 -> 0, -3/4
 * -> -1. */
static void align_rounds_half_up(void **state)
{
    (void)state;
    pw_words w = {.structure = PW_DIRECT_1, .order = 0, .b = {1}, .b_fraction = 2, .a_fraction = 0};
    pw_realisation r = one_section(PW_Q31, w);
    pw_simulation sim;
    pw_simulation_reset(&sim, &r);
    int32_t in[6] = {1, 2, 3, -1, -2, -3}, out[6];
    pw_simulation_run_words(&sim, in, out, 6);
    const int32_t expected[6] = {0, 1, 1, 0, 0, -1};
    assert_memory_equal(out, expected, sizeof out);
}

/* 1.5 x: 45000, -45000, 32767.5 -> 32768 and -32767.5 -> -32767 (half up). */
static void overflow_saturates_or_wraps(void **state)
{
    (void)state;
    pw_words w = {.structure = PW_DIRECT_1, .b = {3}, .b_fraction = 1, .a_fraction = 1};
    pw_realisation r = one_section(PW_Q15, w);
    pw_simulation sim;
    const int32_t in[4] = {30000, -30000, 21845, -21845};
    int32_t out[4];
    pw_simulation_reset(&sim, &r);
    pw_simulation_run_words(&sim, in, out, 4);
    const int32_t saturated[4] = {32767, -32768, 32767, -32767};
    assert_memory_equal(out, saturated, sizeof out);
    assert_int_equal(sim.clipped, 3);
    r.wrap = true;
    pw_simulation_reset(&sim, &r);
    pw_simulation_run_words(&sim, in, out, 4);
    const int32_t wrapped[4] = {45000 - 65536, 65536 - 45000, -32768, -32767};
    assert_memory_equal(out, wrapped, sizeof out);
    assert_int_equal(sim.clipped, 3);
}

static int64_t noise_at(uint64_t *seed, int bits) /* within -2^(bits-1) .. 2^(bits-1)-1 */
{
    *seed = *seed * UINT64_C(6364136223846793005) + UINT64_C(1442695040888963407);
    return (int64_t)(*seed >> (64 - bits)) - (INT64_C(1) << (bits - 1));
}

__extension__ typedef __int128 wide;

static wide floor_ratio(wide a, wide b) { return a / b - (a % b < 0); }

/* The recursion once more, with 128-bit integers and divisions instead of shifts, the whole history
 * kept, e found from its definition. */
static int32_t *recompute(const pw_realisation *r, const int32_t *x, int n, uint64_t *clipped)
{
    const pw_words *w = &r->section[0];
    int32_t *y = calloc((size_t)n + 2, sizeof *y), *at = y + 2;
    wide *e = calloc((size_t)n + 2, sizeof *e), one = (wide)1 << w->a_fraction;
    wide low = r->sample == PW_Q15 ? -32768 : INT32_MIN, high = -low - 1, span = high - low + 1;
    for (int i = 0; i < n; i++) {
        wide p = (wide)w->b[0] * x[i];
        if (i > 0) p += (wide)w->b[1] * x[i - 1];
        if (i > 1) p += (wide)w->b[2] * x[i - 2];
        wide scaled = 2 * p * one, unit = (wide)1 << w->b_fraction;
        p = w->b_fraction > w->a_fraction ? floor_ratio(scaled + unit, 2 * unit) : p * (one / unit);
        wide acc = p - (wide)w->a[1] * at[i - 1] - (wide)w->a[2] * at[i - 2] + w->k1 * e[i + 1]
                   + w->k2 * e[i];
        wide v = r->truncate ? floor_ratio(acc, one) : floor_ratio(2 * acc + one, 2 * one);
        bool out = v < low || v > high;
        *clipped += out;
        e[i + 2] = out ? 0 : acc - v * one;
        if (out) v = r->wrap ? v - span * floor_ratio(v - low, span) : v < low ? low : high;
        at[i] = (int32_t)v;
    }
    free(e);
    return y;
}

/* Random stable sections of every kind of word (sums stay below 2^63), driven hard enough to clip.
 * */
static void agrees_with_wide_integers(void **state)
{
    (void)state;
    enum { N = 400 };
    uint64_t seed = 7, total_clips = 0;
    for (int trial = 0; trial < 400; trial++) {
        bool q31 = trial & 1, wide_words = trial & 2;
        int bits = q31 ? 32 : 16, af = wide_words ? 29 : 13;
        pw_words w = {.structure = trial & 4 ? PW_DIRECT_1_SHAPED : PW_DIRECT_1,
                      .order = 2,
                      .a_fraction = af,
                      .b_fraction = af - 2 + (int)(trial % 9)};
        double radius = 0.5 + 0.499 * (double)(noise_at(&seed, 16) + 32768) / 65536;
        double angle = 3.1 * (double)(noise_at(&seed, 16) + 32768) / 65536;
        w.a[1] = (int32_t)lround(-2 * radius * cos(angle) * (1 << af));
        w.a[2] = (int32_t)lround(radius * radius * (1 << af));
        for (int k = 0; k < 3; k++) w.b[k] = (int32_t)noise_at(&seed, wide_words ? 28 : 15);
        if (trial & 4) {
            w.k1 = (int32_t)noise_at(&seed, 2);
            w.k2 = (int32_t)noise_at(&seed, 2);
        }
        pw_realisation r = one_section(q31 ? PW_Q31 : PW_Q15, w);
        r.truncate = trial & 8;
        r.wrap = trial & 16;
        int32_t in[N], out[N];
        for (int i = 0; i < N; i++) in[i] = (int32_t)noise_at(&seed, bits);
        pw_simulation sim;
        pw_simulation_reset(&sim, &r);
        pw_simulation_run_words(&sim, in, out, N);
        uint64_t clips = 0;
        int32_t *again = recompute(&r, in, N, &clips);
        assert_memory_equal(out, again + 2, sizeof out);
        assert_int_equal(sim.clipped, clips);
        total_clips += clips;
        free(again);
    }
    assert_true(total_clips > 10000);
}

/* Any x: after settle, step(x) stays exactly there. */
static void settle_is_a_fixed_point(void **state)
{
    (void)state;
    int clamped = 0, inside = 0;
    for (int trial = 0; trial < 64; trial++) {
        int af = 14;
        double radius = 0.3 + 0.0109 * trial, angle = 0.01 * trial;
        pw_words w = {
            .structure = PW_DIRECT_1, .order = 2, .a_fraction = af, .b_fraction = 10 + trial % 11};
        w.a[1] = (int32_t)lround(-2 * radius * cos(angle) * (1 << af));
        w.a[2] = (int32_t)lround(radius * radius * (1 << af));
        w.b[0] = 1000 + 37 * trial;
        w.b[1] = 300 - 11 * trial;
        w.b[2] = 91;
        pw_realisation r = one_section(PW_Q15, w);
        r.truncate = trial & 1;
        for (int32_t x = -32768; x < 32768; x += 1311) {
            pw_simulation sim;
            pw_simulation_settle((pw_simulation_reset(&sim, &r), &sim), x);
            int64_t y0 = sim.state[0][2];
            if (y0 == 32767 || y0 == -32768) {
                clamped++;
                continue;
            }
            inside++;
            for (int i = 0; i < 20; i++) {
                int32_t y;
                pw_simulation_run_words(&sim, &x, &y, 1);
                assert_int_equal(y, y0);
            }
        }
    }
    assert_true(inside > 1000 && clamped > 100);
}

static void settle_resets_an_integrator(void **state)
{
    (void)state;
    pw_words w = half_pole;
    w.a[1] = -16384;
    pw_realisation r = one_section(PW_Q15, w);
    pw_simulation sim;
    pw_simulation_reset(&sim, &r);
    sim.state[0][2] = 5;
    pw_simulation_settle(&sim, 1000);
    for (int k = 0; k < 6; k++) assert_int_equal(sim.state[0][k], 0);
}

static pw_words coupled_words(double radius, double angle, int f)
{
    double one = ldexp(1, f);
    return (pw_words){.structure = PW_COUPLED,
                      .order = 2,
                      .a_fraction = f,
                      .c_fraction = f,
                      .sigma = (int32_t)lround(radius * cos(angle) * one),
                      .omega = (int32_t)lround(radius * sin(angle) * one),
                      .g = (int32_t)lround(0.03 * one),
                      .c1 = (int32_t)lround(0.9 * one),
                      .c2 = (int32_t)lround(-0.4 * one),
                      .d = (int32_t)lround(0.25 * one)};
}

/* Impulse response against h = d, then g r^(n-1) (c1 cos + c2 sin)((n-1) angle) of the realised
 * words. */
static void coupled_follows_its_transfer_function(void **state)
{
    (void)state;
    pw_words w = coupled_words(0.98, 0.3, 30);
    pw_realisation r = one_section(PW_Q31, w);
    pw_simulation sim;
    pw_simulation_reset(&sim, &r);
    double one = ldexp(1, 30), radius = hypot(w.sigma, w.omega) / one,
           angle = atan2(w.omega, w.sigma);
    for (int n = 0; n < 300; n++) {
        int32_t x = n == 0 ? INT32_C(1) << 30 : 0, y;
        pw_simulation_run_words(&sim, &x, &y, 1);
        double tail = w.g / one * pow(radius, n - 1)
                      * (w.c1 * cos((n - 1) * angle) + w.c2 * sin((n - 1) * angle)) / one;
        double h = n == 0 ? w.d / one : tail;
        assert_true(fabs(y / ldexp(1, 30) - h) < 100 * ldexp(1, -30)); /* 0.5 step, times 1/(1-r) */
    }
}

static void coupled_settles_within_its_dead_band(void **state)
{
    (void)state;
    pw_words w = coupled_words(0.9, 0.7, 14);
    pw_realisation r = one_section(PW_Q15, w);
    for (int32_t x = -32768; x < 32768; x += 4099) {
        pw_simulation sim;
        pw_simulation_reset(&sim, &r);
        pw_simulation_settle(&sim, x);
        int64_t u1 = sim.state[0][0], u2 = sim.state[0][1];
        for (int i = 0; i < 200; i++) {
            int32_t y;
            pw_simulation_run_words(&sim, &x, &y, 1);
            /* rounding moves each of u by half a step: 0.5 sqrt(2) / (1 - 0.9) at most */
            assert_true(llabs(sim.state[0][0] - u1) <= 8 && llabs(sim.state[0][1] - u2) <= 8);
        }
        assert_int_equal(sim.clipped, 0);
    }
}

static void coupled_steady_gains_are_exact(void **state)
{
    (void)state;
    for (int f = 14; f <= 30; f += 16) {
        pw_words w = coupled_words(0.999, 0.001, f);
        double one = ldexp(1, f), near = (one - w.sigma) / one, omega = w.omega / one;
        double d = near * near + omega * omega,
               expected[2] = {near * w.g / one / d, omega * w.g / one / d};
        int64_t gain[2];
        int fraction;
        pw_coupled_steady(&w, gain, &fraction);
        assert_in_range(fraction, 32, 61);
        for (int i = 0; i < 2; i++)
            assert_true(fabs(ldexp((double)gain[i], -fraction) / expected[i] - 1) < 1e-12);
    }
}

static void nodes_show_the_accumulator_before_the_clamp(void **state)
{
    (void)state;
    pw_words w = {.structure = PW_DIRECT_1, .b = {3}, .b_fraction = 1, .a_fraction = 1};
    pw_realisation r = one_section(PW_Q15, w);
    r.nodes = 2;
    strcpy(r.node[0].name, "section 1 output");
    strcpy(r.node[1].name, "section 1 accumulator");
    r.node[0].section = r.node[1].section = 1;
    pw_simulation sim;
    pw_simulation_reset(&sim, &r);
    int32_t y;
    double node[2];
    pw_simulation_step_nodes(&sim, 32000, &y, node);
    assert_int_equal(y, 32767);
    assert_true(node[0] == 32767 / 32768.0);
    assert_true(node[1] == 48000 / 32768.0);
}

/* One pole: h = b0 (-a1)^n, exact in binary for these words; and float32 really rounds to float. */
static void floats_round_each_operation(void **state)
{
    (void)state;
    pw_words w = {.structure = PW_TRANSPOSED_2, .order = 1, .fb = {0.5, 0}, .fa = {1, -0.5}};
    pw_realisation r = one_section(PW_FLOAT64, w);
    double in[6] = {1}, out[6];
    pw_simulation sim;
    pw_simulation_reset(&sim, &r);
    pw_simulation_run_floats(&sim, in, out, 6);
    for (int n = 0; n < 6; n++) assert_true(out[n] == ldexp(0.5, -n));
    w.fb[0] = w.fa[1] = (float)0.1;
    r = one_section(PW_FLOAT32, w);
    pw_simulation_reset(&sim, &r);
    pw_simulation_run_floats(&sim, in, out, 3);
    volatile float y0 = 0.1f, product = 0.1f * y0, y1 = 0.0f - product;
    assert_true(out[0] == y0 && out[1] == y1);
}

static void floats_settle(void **state)
{
    (void)state;
    for (int form = 0; form < 2; form++) {
        pw_words w = {.structure = form ? PW_TRANSPOSED_2 : PW_DIRECT_1,
                      .order = 2,
                      .fb = {0.02, 0.04, 0.02},
                      .fa = {1, -1.5, 0.6}};
        pw_realisation r = one_section(PW_FLOAT64, w);
        pw_simulation sim;
        pw_simulation_reset(&sim, &r);
        pw_simulation_settle(&sim, 0.7);
        for (int i = 0; i < 100; i++) {
            double x = 0.7, y;
            pw_simulation_run_floats(&sim, &x, &y, 1);
            assert_true(fabs(y - 0.7 * 0.8) < 1e-14); /* H(1) = 0.08 / 0.1 */
        }
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(hand_worked),
        cmocka_unit_test(align_rounds_half_up),
        cmocka_unit_test(overflow_saturates_or_wraps),
        cmocka_unit_test(agrees_with_wide_integers),
        cmocka_unit_test(settle_is_a_fixed_point),
        cmocka_unit_test(settle_resets_an_integrator),
        cmocka_unit_test(coupled_follows_its_transfer_function),
        cmocka_unit_test(coupled_settles_within_its_dead_band),
        cmocka_unit_test(coupled_steady_gains_are_exact),
        cmocka_unit_test(nodes_show_the_accumulator_before_the_clamp),
        cmocka_unit_test(floats_round_each_operation),
        cmocka_unit_test(floats_settle),
    };
    return cmocka_run_group_tests_name("simulate", tests, NULL, NULL);
}
