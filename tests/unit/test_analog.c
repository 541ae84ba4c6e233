/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The analog station: what is refused and where, exactness of roots, evaluation. */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <cmocka.h>

#include "analog/model.h"

#define COUNT(list) ((int)(sizeof (list) / sizeof *(list)))

/* Builds, and returns the messages as one text, which the caller frees. */
static char *build(const pw_analog_spec *spec, pw_roots *out, pw_status wanted)
{
    pw_messages messages = {.file = "x"};
    char *text = NULL;
    size_t size = 0;
    FILE *to = open_memstream(&text, &size);
    assert_int_equal(pw_analog_build(spec, out, &messages), wanted);
    assert_int_equal(messages.errors == 0, wanted == PW_OK);
    pw_messages_print(&messages, to, false);
    fclose(to);
    pw_messages_free(&messages);
    return text;
}

static void refused(const pw_analog_spec *spec, const char *part)
{
    pw_roots out;
    char *text = build(spec, &out, PW_WRONG);
    if (!strstr(text, part))
        fail_msg("expected \"%s\" in \"%s\"", part, text);
    free(text);
}

static void accepted(const pw_analog_spec *spec, pw_roots *out)
{
    char *text = build(spec, out, PW_OK);
    assert_string_equal(text, "");
    free(text);
}

static pw_root root(double re, double im, int line)
{
    return (pw_root){.s = CMPLX(re, im), .at = {line, 9}};
}

static pw_analog_spec of_roots(pw_root *zero, int zeros, pw_root *pole, int poles)
{
    return (pw_analog_spec){.kind = PW_ANALOG_ROOTS, .at = {1, 1}, .zero = zero, .zeros = zeros,
                            .pole = pole, .poles = poles,
                            .gain = {.kind = PW_GAIN_FACTOR, .factor = 2, .at = {90, 1}}};
}

/* ---- roots ---- */

static void poles_where_they_may_not_be(void **state)
{
    (void)state;
    pw_root pole[] = {root(-1, 0, 3), root(5, 0, 4), root(0, 7, 5), root(2, 3, 6)};
    pw_analog_spec spec = of_roots(NULL, 0, pole, COUNT(pole));
    refused(&spec, "x:4:9: a pole at 5 rad/s is in the right half plane");
    refused(&spec, "x:5:9: a pole at 0 ± 7j rad/s is on the imaginary axis");
    refused(&spec, "x:6:9: a pole at 2 ± 3j rad/s is in the right half plane");
}

static void zeros_in_the_right_half_plane_may(void **state)
{
    (void)state;
    pw_root zero[] = {root(5, 3, 3)}, pole[] = {root(-5, 3, 4)};
    pw_analog_spec spec = of_roots(zero, 1, pole, 1);
    pw_roots out;
    accepted(&spec, &out);
    assert_true(out.zero[0] == CMPLX(5, 3) && out.zero[1] == CMPLX(5, -3));
    assert_true(out.pole[0] == CMPLX(-5, 3) && out.pole[1] == CMPLX(-5, -3));
    assert_true(fabs(cabs(pw_analog_at(&out, 0.7)) - 2) < 1e-15);      /* an all-pass */
}

static void integrators_up_to_two(void **state)
{
    (void)state;
    pw_root pole[] = {root(0, 0, 3), root(-0.0, 0, 4), root(0, 0, 5)};
    pw_analog_spec spec = of_roots(NULL, 0, pole, 2);
    pw_roots out;
    accepted(&spec, &out);
    assert_int_equal(pw_analog_integrators(&out), 2);
    assert_false(signbit(creal(out.pole[1])));
    spec.poles = 3;
    refused(&spec, "x:5:9: 3 poles at 0; expected at most 2");
}

static void more_zeros_than_poles(void **state)
{
    (void)state;
    pw_root zero[] = {root(-1, 0, 3), root(-2, 0, 4)}, pole[] = {root(-5, 0, 6)};
    pw_analog_spec spec = of_roots(zero, 2, pole, 1);
    refused(&spec, "x:4:9: 2 zeros and 1 pole: ");
    refused(&spec, "add a pole");
    /* in a cascade another member may bring the pole */
    pw_analog_spec pair[] = {spec, of_roots(NULL, 0, pole, 1)};
    pw_analog_spec cascade = {.kind = PW_ANALOG_CASCADE, .member = pair, .members = 2};
    pw_roots out;
    accepted(&cascade, &out);
    assert_true(out.poles == 2 && out.zeros == 2 && out.factor == 4);
}

static void sixty_four_and_no_more(void **state)
{
    (void)state;
    pw_root pole[33];
    for (int i = 0; i < COUNT(pole); i++)
        pole[i] = root(-1, 1 + i, i + 1);
    pw_analog_spec spec = of_roots(NULL, 0, pole, 32);
    pw_roots out;
    accepted(&spec, &out);
    assert_int_equal(out.poles, PW_MAX_ROOTS);
    spec.poles = 33;
    refused(&spec, "x:33:9: more than 64 poles");
    pw_analog_spec members[] = {of_roots(NULL, 0, pole, 20), of_roots(NULL, 0, pole, 20)};
    pw_analog_spec cascade = {.kind = PW_ANALOG_CASCADE, .member = members, .members = 2};
    members[1].at = (pw_where){44, 2};
    refused(&cascade, "x:44:2: more than 64 poles");
}

static void a_q_of_a_half_is_two_real_roots(void **state)
{
    (void)state;
    pw_root pole[] = {{.s = -10, .s2 = -10, .double_real = true}};
    pw_analog_spec spec = of_roots(NULL, 0, pole, 1);
    pw_roots out;
    accepted(&spec, &out);
    assert_true(out.poles == 2 && out.pole[0] == -10 && out.pole[1] == -10);
}

static void every_member_of_a_cascade_is_told(void **state)
{
    (void)state;
    pw_root bad[] = {root(5, 0, 3)}, worse[] = {root(6, 0, 8)};
    pw_analog_spec members[] = {of_roots(NULL, 0, bad, 1), of_roots(NULL, 0, worse, 1)};
    pw_analog_spec cascade = {.kind = PW_ANALOG_CASCADE, .member = members, .members = 2};
    refused(&cascade, "x:3:9: a pole at 5 rad/s");
    refused(&cascade, "x:8:9: a pole at 6 rad/s");
}

/* ---- gains ---- */

static void gains_that_cannot_be(void **state)
{
    (void)state;
    pw_root zero[] = {root(0, 2 * M_PI * 50, 3)}, pole[] = {root(0, 0, 4), root(-9, 3, 5)};
    pw_analog_spec spec = of_roots(zero, 1, pole, 2);
    spec.gain = (pw_gain){.kind = PW_GAIN_FACTOR, .factor = 0, .at = {90, 1}};
    refused(&spec, "x:90:1: a gain of 0 leaves no stage");
    spec.gain = (pw_gain){.kind = PW_GAIN_AT, .at_hz = 0, .is = 1, .at = {91, 1}};
    refused(&spec, "x:91:1: the gain at 0 Hz is infinite");
    pole[0] = root(-1, 0, 4);
    zero[0] = root(0, 0, 3);
    refused(&spec, "x:91:1: the gain at 0 Hz is 0 whatever the factor");
}

/* ---- polynomials ---- */

static pw_analog_spec of_polynomials(double *n, int ns, double *d, int ds)
{
    return (pw_analog_spec){.kind = PW_ANALOG_POLYNOMIALS, .numerator = n, .numerators = ns,
                            .denominator = d, .denominators = ds, .at = {1, 1},
                            .numerator_at = {2, 1}, .denominator_at = {3, 1}};
}

static void polynomials_that_cannot_be(void **state)
{
    (void)state;
    double none[] = {0, 0}, leading[] = {0, 0, 1}, one[] = {1}, good[] = {1, 1}, axis[] = {1, 0, 4},
           right[] = {1, -1}, three[] = {1, 0, 0, 0}, top[] = {1, 2, 3};
    double many[66] = {1};
    many[65] = 1;
    pw_analog_spec spec = of_polynomials(none, 2, leading, 3);
    refused(&spec, "x:2:1: the numerator is 0");
    refused(&spec, "x:3:1: the denominator begins with 0");
    spec = of_polynomials(one, 1, axis, 3);
    refused(&spec, "x:3:1: a pole at 0 ± 2j rad/s is on the imaginary axis");
    spec = of_polynomials(one, 1, right, 2);
    refused(&spec, "x:3:1: a pole at 1 rad/s is in the right half plane");
    spec = of_polynomials(one, 1, three, 4);
    refused(&spec, "x:3:1: 3 poles at 0");
    spec = of_polynomials(top, 3, good, 2);
    refused(&spec, "x:2:1: 2 zeros and 1 pole");
    spec = of_polynomials(one, 1, many, 66);
    refused(&spec, "x:3:1: the denominator is of degree 65");
}

static void a_double_pole_is_one_number(void **state)
{
    (void)state;
    double w = 2 * M_PI * 1234.5, d[] = {1, 2 * w, w * w}, n[] = {w * w};
    pw_analog_spec spec = of_polynomials(n, 1, d, 3);
    pw_roots out;
    accepted(&spec, &out);
    assert_true(out.pole[0] == out.pole[1] && cimag(out.pole[0]) == 0);
    assert_true(fabs(creal(out.pole[0]) / w + 1) < 2e-16);
}

/* ---- families ---- */

static pw_analog_spec of_family(pw_approximation approximation, pw_shape shape, int order)
{
    return (pw_analog_spec){.kind = PW_ANALOG_FAMILY, .at = {1, 1}, .family = {
        .approximation = approximation, .shape = shape, .order = order, .corner_hz = {100, 400},
        .at = {2, 1}, .order_at = {3, 1}, .corner_at = {{4, 1}, {4, 8}}}};
}

static pw_given decibels(double value, int line)
{
    return (pw_given){.value = value, .given = true, .at = {line, 1}};
}

static void families_that_cannot_be(void **state)
{
    (void)state;
    pw_analog_spec spec = of_family(PW_ELLIPTIC, PW_LOWPASS, 21);
    refused(&spec, "x:2:1: ripple is missing");
    refused(&spec, "x:2:1: stopband is missing");
    refused(&spec, "x:3:1: order 21 is out of range; expected 1 to 20");
    spec = of_family(PW_LINKWITZ_RILEY, PW_LOWPASS, 3);
    spec.family.ripple_db = decibels(1, 5);
    refused(&spec, "x:3:1: order 3 is odd");
    refused(&spec, "x:5:1: this approximation has no ripple");
    spec = of_family(PW_BUTTERWORTH, PW_BANDPASS, 3);
    spec.family.corner_hz[1] = 100;
    spec.family.normalise = PW_NORMALISE_DELAY;
    refused(&spec, "x:4:8: the corners do not ascend");
    refused(&spec, "x:2:1: normalise goes with bessel only");
}

static void depths_that_cannot_be(void **state)
{
    (void)state;
    pw_analog_spec spec = of_family(PW_ELLIPTIC, PW_LOWPASS, 4);
    spec.family.ripple_db = decibels(1, 5);
    spec.family.stopband_db = decibels(1, 6);
    refused(&spec, "x:6:1: the stop band is not below the pass band; expected more than 1 dB");
    spec.family.stopband_db = decibels(40, 6);
    spec.family.corner_at_db = decibels(0.5, 7);
    refused(&spec, "x:7:1: corner-at is less than the ripple");
    spec.family.corner_at_db = decibels(40, 7);
    refused(&spec, "x:7:1: corner-at lies in the stop band");
    spec = of_family(PW_INVERSE_CHEBYSHEV, PW_LOWPASS, 4);
    spec.family.stopband_db = decibels(3, 6);
    refused(&spec, "x:6:1: the stop band is not below the pass band; expected more than 3.01 dB");
    spec = of_family(PW_BESSEL, PW_LOWPASS, 4);
    spec.family.normalise = PW_NORMALISE_PHASE;
    spec.family.corner_at_db = decibels(1, 7);
    refused(&spec, "x:7:1: corner-at goes with normalise: magnitude only");
    spec = of_family(PW_CHEBYSHEV, PW_LOWPASS, 4);
    spec.family.ripple_db = decibels(-1, 5);
    refused(&spec, "x:5:1: ripple must be above 0 dB");
    spec = of_family(PW_ELLIPTIC, PW_LOWPASS, 20);
    spec.family.ripple_db = decibels(3, 5);
    spec.family.stopband_db = decibels(3.001, 6);
    refused(&spec, "x:6:1: ripple and stopband are too near each other");
}

static void shapes_place_their_zeros_exactly(void **state)
{
    (void)state;
    const long double centre = 400 * 3.14159265358979323846L;      /* sqrt(100 x 400) Hz */
    pw_roots out;
    for (int order = 1; order <= 20; order++) {
        pw_analog_spec spec = of_family(PW_BUTTERWORTH, PW_BANDPASS, order);
        accepted(&spec, &out);
        assert_int_equal(out.poles, 2 * order);
        assert_int_equal(out.zeros, order);
        for (int i = 0; i < out.zeros; i++)
            assert_true(out.zero[i] == 0);
        spec.family.shape = PW_BANDSTOP;
        accepted(&spec, &out);
        assert_int_equal(out.zeros, 2 * order);
        for (int i = 0; i < out.zeros; i++)
            assert_true(creal(out.zero[i]) == 0
                        && fabsl(fabs(cimag(out.zero[i])) / centre - 1) < 1.2e-16L);
        spec.family.shape = PW_HIGHPASS;
        accepted(&spec, &out);
        assert_true(out.zeros == order && out.zero[order - 1] == 0 && out.factor == 1);
    }
}

static void critical_damping_and_linkwitz_riley_repeat_exactly(void **state)
{
    (void)state;
    pw_roots out;
    pw_analog_spec spec = of_family(PW_CRITICALLY_DAMPED, PW_BANDPASS, 7);
    accepted(&spec, &out);
    for (int i = 2; i < out.poles; i++)
        assert_true(out.pole[i] == out.pole[i - 2]);
    spec = of_family(PW_LINKWITZ_RILEY, PW_LOWPASS, 8);
    accepted(&spec, &out);
    for (int i = 0; i < out.poles; i += 4)
        assert_true(out.pole[i] == out.pole[i + 2] && out.pole[i + 1] == out.pole[i + 3]
                    && out.pole[i] == conj(out.pole[i + 1]));
}

/* ---- evaluation ---- */

static void logarithm_and_delay_of_a_first_order_pole(void **state)
{
    (void)state;
    pw_roots pole = {.poles = 1, .pole = {-100}, .factor = -100};
    double log_magnitude, phase;
    pw_roots_log_at(&pole, CMPLX(0, 100), &log_magnitude, &phase);
    assert_true(fabs(log_magnitude + 0.5 * log(2)) < 1e-16);
    assert_true(fabs(phase - (M_PI - M_PI / 4)) < 1e-15);
    assert_true(fabs(pw_analog_group_delay(&pole, 0) - 0.01) < 1e-18);
    assert_true(fabs(creal(pw_analog_at(&pole, 0)) + 1) < 1e-16);
    assert_true(cabs(pw_roots_at(&pole, 0) + 1) < 1e-16);
}

/* (s - a)/(s + a): both roots delay by a/(a^2 + w^2). */
static void delay_of_an_all_pass(void **state)
{
    (void)state;
    pw_roots pass = {.poles = 1, .zeros = 1, .pole = {-40}, .zero = {40}, .factor = 1};
    double w = 2 * M_PI * 5;
    assert_true(fabs(pw_analog_group_delay(&pass, 5) * (40 * 40 + w * w) / 80 - 1) < 1e-15);
}

/* A pair of zeros to the right: the phase falls by a turn on the way up, and never jumps. Each step of it is
 * -delay dw, by the trapezoid rule. */
static void phase_goes_on(void **state)
{
    (void)state;
    pw_roots pass = {.poles = 2, .zeros = 2, .pole = {CMPLX(-20, 300), CMPLX(-20, -300)},
                     .zero = {CMPLX(20, 300), CMPLX(20, -300)}, .factor = 1};
    double size, before, after, step = 0.01;
    pw_roots_log_at(&pass, 0, &size, &before);
    assert_true(fabs(before) < 1e-15);
    for (double hz = step; hz < 1000; hz += step) {
        pw_roots_log_at(&pass, CMPLX(0, 2 * M_PI * hz), &size, &after);
        double delay = (pw_analog_group_delay(&pass, hz) + pw_analog_group_delay(&pass, hz - step)) / 2;
        assert_true(fabs(before - after - delay * 2 * M_PI * step) < 1e-6);
        before = after;
    }
    assert_true(fabs(before + 2 * M_PI) < 0.02);
    pw_roots_log_at(&pass, CMPLX(0, -2 * M_PI * 1000), &size, &before);
    assert_true(fabs(before + after) < 1e-12);
}

static void on_a_root(void **state)
{
    (void)state;
    pw_roots both = {.poles = 2, .zeros = 2, .factor = 1, .pole = {0, -3},
                     .zero = {CMPLX(0, 5), CMPLX(0, -5)}};
    double log_magnitude, phase;
    assert_true(pw_roots_at(&both, CMPLX(0, 5)) == 0);
    assert_true(isinf(cabs(pw_analog_at(&both, 0))));
    pw_roots_log_at(&both, CMPLX(0, 5), &log_magnitude, &phase);
    assert_true(isinf(log_magnitude) && log_magnitude < 0);
    assert_true(fabs(pw_analog_group_delay(&both, 0) - 1.0 / 3) < 1e-16);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(poles_where_they_may_not_be),
        cmocka_unit_test(zeros_in_the_right_half_plane_may),
        cmocka_unit_test(integrators_up_to_two),
        cmocka_unit_test(more_zeros_than_poles),
        cmocka_unit_test(sixty_four_and_no_more),
        cmocka_unit_test(a_q_of_a_half_is_two_real_roots),
        cmocka_unit_test(every_member_of_a_cascade_is_told),
        cmocka_unit_test(gains_that_cannot_be),
        cmocka_unit_test(polynomials_that_cannot_be),
        cmocka_unit_test(a_double_pole_is_one_number),
        cmocka_unit_test(families_that_cannot_be),
        cmocka_unit_test(depths_that_cannot_be),
        cmocka_unit_test(shapes_place_their_zeros_exactly),
        cmocka_unit_test(critical_damping_and_linkwitz_riley_repeat_exactly),
        cmocka_unit_test(logarithm_and_delay_of_a_first_order_pole),
        cmocka_unit_test(delay_of_an_all_pass),
        cmocka_unit_test(phase_goes_on), cmocka_unit_test(on_a_root),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
