/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <cmocka.h>

#include "report/curves.h"
#include "report_sample.h"

#define RATE 8000.0

static pw_stage stage;
static pw_results results;
static pw_step_curve curve;

static int fill(void **state)
{
    (void)state;
    sample_results(&stage, &results);
    return 0;
}

typedef double closed_form(double t);

static void assert_step(const pw_roots *analog, closed_form *expected, bool logarithmic)
{
    results.analog = *analog;
    assert_int_equal(pw_curve_step(&results, &curve), PW_OK);
    assert_int_equal(curve.logarithmic, logarithmic);
    assert_in_range(curve.analogs, 100, PW_CURVE_POINTS);
    double largest = 0, worst = 0;
    for (int i = 0; i < curve.analogs; i++) {
        assert_true(!i || curve.analog_t[i] > curve.analog_t[i - 1]);
        largest = fmax(largest, fabs(expected(curve.analog_t[i])));
        worst = fmax(worst, fabs(curve.analog[i] - expected(curve.analog_t[i])));
    }
    double last = curve.analog_t[curve.analogs - 1];
    assert_float_equal(curve.digital_t[curve.digitals - 1] / last, 1, 0.1);
    if (worst > 1e-9 * largest) fail_msg("off by %g of %g", worst, largest);
}

/* Inverse Laplace transforms of H(s)/s from the common tables. */
static double low_pass(double t) { return 1 - exp(-500 * t); }
static double double_pole(double t) { return 1 - (1 + 500 * t) * exp(-500 * t); }
static double high_pass(double t) { return -2 * exp(-500 * t); }
static double integrator(double t) { return 300 * t; }
static double pair(double t)          /* poles -300 +- 400j, gain 1 at 0 Hz */
{
    return 1 - exp(-300 * t) * (cos(400 * t) + 0.75 * sin(400 * t));
}
static double notch(double t)         /* (s^2 + 250000) / (s + 500)^2 */
{
    return 1 - 1000 * t * exp(-500 * t);
}
static double far_apart(double t)     /* s 1e5 / ((s + 1) (s + 1e5)) */
{
    return 1e5 / (1e5 - 1) * (exp(-t) - exp(-1e5 * t));
}
static double integrator_with_lead(double t)   /* 1000 (s + 200) / (s (s + 5000)) */
{
    return 40 * t + (1000 - 40) / 5000.0 * (1 - exp(-5000 * t));
}

static void steps_follow_the_tables(void **state)
{
    (void)state;
    assert_step(&(pw_roots){.poles = 1, .pole = {-500}, .factor = 500}, low_pass, false);
    assert_step(&(pw_roots){.poles = 2, .pole = {-500, -500}, .factor = 250000}, double_pole,
                false);
    assert_step(&(pw_roots){.poles = 1, .zeros = 1, .pole = {-500}, .factor = -2}, high_pass,
                false);
    assert_step(&(pw_roots){.poles = 1, .pole = {0}, .factor = 300}, integrator, false);
    assert_step(&(pw_roots){.poles = 2, .pole = {-300 + 400 * I, -300 - 400 * I}, .factor = 250000},
                pair, false);
    assert_step(&(pw_roots){.poles = 2, .zeros = 2, .pole = {-500, -500},
                            .zero = {500 * I, -500 * I}, .factor = 1}, notch, false);
    assert_step(&(pw_roots){.poles = 2, .zeros = 1, .pole = {-1, -1e5}, .factor = 1e5},
                far_apart, true);
    assert_step(&(pw_roots){.poles = 2, .zeros = 1, .pole = {0, -5000}, .zero = {-200},
                            .factor = 1000}, integrator_with_lead, false);
}

/* A pair of Q 500 at 1 kHz: 16 points a cycle, so that what is drawn is what happens. */
static void ringing_is_drawn_finely(void **state)
{
    (void)state;
    double w = 2 * M_PI * 1000;
    double complex p = w * (-0.001 + sqrt(1 - 1e-6) * I);
    results.analog = (pw_roots){.poles = 2, .pole = {p, conj(p)}, .factor = w * w};
    assert_int_equal(pw_curve_step(&results, &curve), PW_OK);
    assert_false(curve.logarithmic);
    assert_true(curve.analog_t[1] * 1000 <= 1 / 15.9);
    double highest = 0;
    for (int i = 0; i < curve.analogs; i++) highest = fmax(highest, curve.analog[i]);
    assert_float_equal(highest, 1 + exp(-0.001 * M_PI), 0.02);   /* the textbook overshoot */
}

static void many_poles_do_not_break_it(void **state)
{
    (void)state;
    pw_roots *a = &results.analog;
    *a = (pw_roots){.poles = PW_MAX_ROOTS, .factor = 1};
    for (int i = 0; i < PW_MAX_ROOTS; i++) {
        a->pole[i] = -300 - 20 * i;
        a->factor *= 300 + 20 * i;
    }
    assert_int_equal(pw_curve_step(&results, &curve), PW_OK);
    assert_float_equal(curve.analog[0], 0, 1e-12);
    results.analog.poles = 0;
    results.analog.zeros = 0;
    results.analog.factor = 3;
    assert_int_equal(pw_curve_step(&results, &curve), PW_OK);
    assert_float_equal(curve.analog[10], 3, 1e-12);
}

/* One first-order section y = 0.25 x + 0.5 y1, words as they are: its step is 0.5 (1 - 0.5^(n+1)). */
static void the_digital_side_runs_the_realised_sections(void **state)
{
    (void)state;
    pw_realisation *r = &results.realisation;
    r->count = 1;
    memcpy(r->section[0].realised_b, (double[]){0.25, 0, 0}, sizeof r->section[0].realised_b);
    memcpy(r->section[0].realised_a, (double[]){1, -0.5, 0}, sizeof r->section[0].realised_a);
    r->output_full_scale = 3 * r->input_full_scale;
    results.analog = (pw_roots){.poles = 1, .pole = {-500}, .factor = 500};
    assert_int_equal(pw_curve_step(&results, &curve), PW_OK);
    assert_in_range(curve.digitals, 90, PW_CURVE_POINTS);
    for (int i = 0; i < curve.digitals; i++) {
        double n = round(curve.digital_t[i] * RATE);
        assert_float_equal(curve.digital[i], 3 * 0.5 * (1 - pow(0.5, n + 1)), 1e-12);
    }
}

/* The density integrated from 0 to half the rate, in LSB^2. */
static double total_power(void)
{
    double sum = 0;
    int n = 4096;
    for (int i = 0; i < n; i++)
        sum += pw_noise_density(&results.realisation, RATE, (i + 0.5) * RATE / 2 / n);
    return sum * RATE / 2 / n;
}

/* Variance 1/12 through 1 / (1 - 0.5/z): 1/12 / (1 - 0.25); with k1 = 1 shaped by (1 - 1/z):
 * impulse response 1, -0.5, -0.25, ..: 1 + 0.25 / (1 - 0.25). A rotation of radius r rounds twice
 * into states that keep r^2 of their power a sample: Oppenheim, Schafer, ch. 6. */
static void noise_adds_up_to_the_closed_forms(void **state)
{
    (void)state;
    pw_realisation *r = &results.realisation;
    pw_words *w = &r->section[0];
    r->count = 1;
    *w = (pw_words){.structure = PW_DIRECT_1, .order = 1, .a_fraction = 14, .b_fraction = 14,
                    .realised_b = {0.25, 0, 0}, .realised_a = {1, -0.5, 0}};
    assert_float_equal(total_power(), 1.0 / 12 / 0.75, 1e-9);
    w->structure = PW_DIRECT_1_SHAPED;
    w->k1 = 1;
    assert_float_equal(total_power(), 1.0 / 12 * (1 + 0.25 / 0.75), 1e-9);
    *w = (pw_words){.structure = PW_COUPLED, .order = 2, .a_fraction = 15, .c_fraction = 15,
                    .sigma = 16384, .omega = 19661, .c1 = 32768, .c2 = 0};
    double sigma = w->sigma / 32768.0, omega = w->omega / 32768.0;
    assert_float_equal(total_power(), 1.0 / 12 * (1 + 1 / (1 - sigma * sigma - omega * omega)),
                       1e-9);
}

static void floats_have_no_noise_curve(void **state)
{
    (void)state;
    static pw_noise_curve noise;
    pw_curve_noise(&results, &noise);
    assert_in_range(noise.points, 100, PW_CURVE_POINTS);
    assert_float_equal(noise.hz[0], 1, 1e-12);
    assert_float_equal(noise.hz[noise.points - 1], RATE / 2, 1e-6);
    results.realisation.sample = PW_FLOAT64;
    pw_curve_noise(&results, &noise);
    assert_int_equal(noise.points, 0);
}

#define TEST(f) cmocka_unit_test_setup(f, fill)

int main(void)
{
    const struct CMUnitTest tests[] = {
        TEST(steps_follow_the_tables), TEST(ringing_is_drawn_finely), TEST(many_poles_do_not_break_it),
        TEST(the_digital_side_runs_the_realised_sections), TEST(noise_adds_up_to_the_closed_forms),
        TEST(floats_have_no_noise_curve),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
