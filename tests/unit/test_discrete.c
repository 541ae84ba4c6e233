/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <cmocka.h>

#include "discrete/errors.h"
#include "report/response.h"

static pw_roots low_pass(double hz, double q)
{
    double w = 2 * M_PI * hz;
    pw_roots s = {.poles = 2, .factor = (long double)w * w};
    s.pole[0] = __builtin_complex(-w / (2 * q), w * sqrt(1 - 1 / (4 * q * q)));
    s.pole[1] = conj(s.pole[0]);
    return s;
}

static pw_stage stage_at(double rate_hz, pw_method method)
{
    pw_stage stage = {.rate_hz = rate_hz, .transform.method = method};
    stage.limits.band_hz[0] = rate_hz / 10000;
    stage.limits.band_hz[1] = 0.4 * rate_hz;
    stage.limits.floor_db = 60;
    stage.analog.kind = PW_ANALOG_POLYNOMIALS;
    return stage;
}

static pw_digital discretised(const pw_stage *stage, const pw_roots *analog)
{
    pw_digital digital;
    pw_messages messages = {.file = "test"};
    assert_int_equal(pw_discretise(stage, analog, &digital, &messages), PW_OK);
    pw_messages_free(&messages);
    return digital;
}

/* ---- words ---- */

static void exact_roots_make_exact_words(void **state)
{
    (void)state;
    for (int i = 0; i < 1000; i++) {
        double gain = exp(0.01 * i - 5);
        pw_section s = {.order = 2, .poles = 2, .zeros = 2, .gain = gain, .zero = {-1, -1},
                        .pole = {1, 1}};
        pw_section_expand(&s);
        assert_true(s.b[0] == gain && s.b[1] == 2 * gain && s.b[2] == gain);
        assert_true(s.a[0] == 1 && s.a[1] == -2 && s.a[2] == 1);
        s.zero[0] = 1;
        pw_section_expand(&s);
        assert_true(s.b[0] == gain && s.b[1] == 0 && s.b[2] == -gain);
        s.zero[0] = s.zero[1] = 0;
        pw_section_expand(&s);
        assert_true(s.b[0] == gain && s.b[1] == 0 && s.b[2] == 0);
    }
}

static void missing_zeros_are_delays(void **state)
{
    (void)state;
    pw_section s = {.order = 2, .poles = 2, .zeros = 1, .gain = 3, .zero = {0.25},
                    .pole = {0.5, -0.5}};
    pw_section_expand(&s);
    assert_true(s.b[0] == 0 && s.b[1] == 3 && s.b[2] == -0.75);
    assert_true(s.a[1] == 0 && s.a[2] == -0.25);
    s.zeros = 0;
    pw_section_expand(&s);
    assert_true(s.b[0] == 0 && s.b[1] == 0 && s.b[2] == 3);
    pw_section first = {.order = 1, .poles = 1, .zeros = 1, .gain = 2, .zero = {-1}, .pole = {1}};
    pw_section_expand(&first);
    assert_true(first.b[0] == 2 && first.b[1] == 2 && first.b[2] == 0);
    assert_true(first.a[1] == -1 && first.a[2] == 0);
}

/* ---- responses at the ends ---- */

static void responses_at_the_ends_are_exact(void **state)
{
    (void)state;
    pw_roots analog = low_pass(700, 0.7);
    pw_stage stage = stage_at(8000, PW_BILINEAR);
    pw_digital digital = discretised(&stage, &analog);
    assert_true(pw_digital_at(&digital.z, 8000, 4000) == 0);
    assert_float_equal(creal(pw_digital_at(&digital.z, 8000, 0)), 1, 1e-13);
    pw_roots integrator = {.poles = 1, .factor = 10};
    digital = discretised(&stage, &integrator);
    assert_true(isinf(cabs(pw_digital_at(&digital.z, 8000, 0))));
    pw_roots cancelled = {.poles = 1, .zeros = 1, .factor = 10};
    digital = discretised(&stage, &cancelled);
    assert_true(pw_digital_at(&digital.z, 8000, 0) == 10);
    /* linear phase has a constant delay: (1 + 1/z)/2 is half a sample, wherever it is asked */
    pw_roots mean = {.poles = 1, .zeros = 1, .zero = {-1}, .pole = {0}, .factor = 0.5};
    for (double hz = 0; hz < 4000; hz += 333) {
        assert_float_equal(pw_digital_group_delay(&mean, 8000, hz) * 8000, 0.5, 1e-15);
        double complex z = __builtin_complex(cos(2 * M_PI * hz / 8000), sin(2 * M_PI * hz / 8000));
        const double b[3] = {0.5, 0.5, 0}, a[3] = {1, 0, 0};
        assert_float_equal(pw_section_group_delay(b, a, z), 0.5, 1e-13);
    }
}

/* ---- places of warnings ---- */

static void warned(pw_stage *stage, const pw_roots *analog, char **text)
{
    size_t size;
    pw_digital digital;
    pw_messages messages = {.file = "stage.yaml"};
    assert_int_equal(pw_discretise(stage, analog, &digital, &messages), PW_OK);
    FILE *memory = open_memstream(text, &size);
    pw_messages_print(&messages, memory, false);
    fclose(memory);
    pw_messages_free(&messages);
}

static void a_fast_root_is_told_where_it_stands(void **state)
{
    (void)state;
    char *text;
    pw_roots analog = {.poles = 3, .zeros = 1, .factor = 1};
    analog.pole[0] = -100;
    analog.pole[1] = __builtin_complex(-1000.0, 90000.0);
    analog.pole[2] = conj(analog.pole[1]);
    analog.zero[0] = -70000;
    pw_root pole[2] = {{.s = -100, .at = {4, 7}}, {.s = analog.pole[1], .at = {4, 15}}};
    pw_root zero[1] = {{.s = -200, .double_real = true, .s2 = -70000, .at = {3, 9}}};
    pw_analog_spec member = {.kind = PW_ANALOG_ROOTS, .at = {2, 3}, .pole = pole, .poles = 2,
                             .zero = zero, .zeros = 1};
    pw_stage stage = stage_at(8000, PW_BILINEAR);
    stage.analog = (pw_analog_spec){.kind = PW_ANALOG_CASCADE, .at = {1, 1}, .member = &member,
                                    .members = 1};
    warned(&stage, &analog, &text);
    assert_non_null(strstr(text, "stage.yaml:3:9: warning: a zero at 11.14 kHz lies above"));
    assert_non_null(strstr(text, "stage.yaml:4:15: warning: a pole at 14.32 kHz lies above"));
    assert_null(strstr(text, "4:7"));
    free(text);
}

/* ---- response analysis ---- */

static void realise_exactly(const pw_digital *digital, double full_scale_out, pw_realisation *out)
{
    pw_sections sections;
    memset(out, 0, sizeof *out);
    pw_sections_make(&digital->z, false, &sections);
    out->count = sections.count;
    out->input_full_scale = 1;
    out->output_full_scale = full_scale_out;
    for (int k = 0; k < sections.count; k++) {
        memcpy(out->section[k].realised_b, sections.list[k].b, sizeof sections.list[k].b);
        memcpy(out->section[k].realised_a, sections.list[k].a, sizeof sections.list[k].a);
    }
    for (int i = 0; i < 3; i++) out->section[0].realised_b[i] /= full_scale_out;
}

static void exact_words_leave_no_quantisation_error(void **state)
{
    (void)state;
    pw_roots analog = low_pass(700, 8);
    pw_stage stage = stage_at(8000, PW_BILINEAR);
    pw_digital digital = discretised(&stage, &analog);
    pw_realisation realised;
    pw_response response;
    realise_exactly(&digital, 2.5, &realised);
    pw_response_analyse(&stage, &analog, &digital, &realised, &response);
    assert_true(response.quantisation.magnitude_db.max < 1e-12);
    assert_true(response.quantisation.phase_deg.max < 1e-11);
    assert_true(response.quantisation.delay_s.max < 1e-15);
    assert_float_equal(response.total.magnitude_db.max, response.transform.magnitude_db.max, 1e-9);
    assert_true(response.transform.magnitude_db.max > 1);
}

static void a_wrong_gain_is_all_of_the_error(void **state)
{
    (void)state;
    pw_roots analog = low_pass(700, 0.7);
    pw_stage stage = stage_at(8000, PW_BILINEAR);
    pw_digital digital = discretised(&stage, &analog);
    pw_realisation realised;
    pw_response response;
    realise_exactly(&digital, 1, &realised);
    for (int i = 0; i < 3; i++) realised.section[0].realised_b[i] *= -1.25;
    pw_response_analyse(&stage, &analog, &digital, &realised, &response);
    assert_float_equal(response.quantisation.magnitude_db.max, 20 * log10(1.25), 1e-12);
    assert_float_equal(response.quantisation.phase_deg.max, 180, 1e-9);
    assert_true(response.quantisation.delay_s.max < 1e-15);
}

/* A pole that the words moved: the worst place is at the top of the narrow peak. */
static void a_moved_peak_is_found(void **state)
{
    (void)state;
    pw_roots analog = low_pass(1000, 3000);
    pw_stage stage = stage_at(48000, PW_BILINEAR);
    stage.transform.prewarp = PW_PREWARP_AT;
    stage.transform.prewarp_hz = 1000;
    pw_digital digital = discretised(&stage, &analog);
    pw_realisation realised;
    pw_response response;
    realise_exactly(&digital, 1, &realised);
    realised.section[0].realised_a[1] *= 1 - 5e-5;
    pw_response_analyse(&stage, &analog, &digital, &realised, &response);
    double worst = 0, at = 0;
    for (double hz = 995; hz < 1010; hz += 1e-4) {
        double off = fabs(20 * log10(cabs(pw_realised_response(&realised, 48000, hz)) /
                                     cabs(pw_digital_at(&digital.z, 48000, hz))));
        if (off > worst) {
            worst = off;
            at = hz;
        }
    }
    assert_true(worst > 1);
    assert_float_equal(response.quantisation.magnitude_db.max, worst, 1e-5 * worst);
    assert_float_equal(response.quantisation.magnitude_db.at_hz, at, 1e-3);
}

static void the_table_covers_the_band(void **state)
{
    (void)state;
    pw_roots analog = low_pass(700, 0.7);
    pw_stage stage = stage_at(8000, PW_MATCHED_Z);
    pw_digital digital = discretised(&stage, &analog);
    pw_realisation realised;
    pw_response response;
    realise_exactly(&digital, 1, &realised);
    pw_response_analyse(&stage, &analog, &digital, &realised, &response);
    assert_in_range(response.rows, PW_RESPONSE_SPACED, PW_RESPONSE_ROWS);
    assert_true(response.row[0].hz <= stage.limits.band_hz[0]);
    assert_true(response.row[response.rows - 1].hz >= stage.limits.band_hz[1]);
    assert_true(response.row[response.rows - 1].hz < 4000);
    bool shows_the_worst = false;
    for (int i = 0; i < response.rows; i++) {
        const pw_response_row *row = &response.row[i];
        if (i) assert_true(row->hz > row[-1].hz);
        shows_the_worst |= row->hz == response.total.magnitude_db.at_hz;
        double analog_db = 20 * log10(cabs(pw_analog_at(&analog, row->hz)));
        double digital_db = 20 * log10(cabs(pw_digital_at(&digital.z, 8000, row->hz)));
        double delay = pw_digital_group_delay(&digital.z, 8000, row->hz);
        assert_float_equal(row->analog_db, analog_db, 1e-9);
        assert_float_equal(row->digital_db, digital_db, 1e-9);
        assert_float_equal(row->digital_delay_s, delay, 1e-13);
        assert_true(fabs(row->digital_deg) <= 180 && isfinite(row->analog_deg));
    }
    assert_true(shows_the_worst);
}

/* ---- the peak search ---- */

static double narrow(const void *context, double hz)
{
    const double *peak = context;
    return 1 / (1 + pow((hz - peak[0]) / peak[1], 2));
}

static void a_peak_between_grid_points_is_climbed(void **state)
{
    (void)state;
    const double peak[2] = {1234.56789, 20};
    pw_grid grid;
    pw_grid_make(&grid, 1, 4000);
    pw_grid_sort(&grid);
    pw_error_peak found = pw_grid_peak(&grid, narrow, peak);
    pw_grid_free(&grid);
    assert_float_equal(found.at_hz, peak[0], 1e-4);
    assert_float_equal(found.max, 1, 1e-12);
}

/* Below 1000 Hz nothing counts: the largest value of a falling function is at the edge itself. */
static double falling(const void *context, double hz)
{
    (void)context;
    return hz < 1000 ? -1 : 1 / hz;
}

static void the_edge_of_what_counts_is_found(void **state)
{
    (void)state;
    pw_grid grid;
    pw_grid_make(&grid, 1, 4000);
    pw_grid_sort(&grid);
    pw_error_peak found = pw_grid_peak(&grid, falling, NULL);
    pw_grid_free(&grid);
    assert_float_equal(found.at_hz, 1000, 1e-9);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(exact_roots_make_exact_words),
        cmocka_unit_test(missing_zeros_are_delays),
        cmocka_unit_test(responses_at_the_ends_are_exact),
        cmocka_unit_test(a_fast_root_is_told_where_it_stands),
        cmocka_unit_test(exact_words_leave_no_quantisation_error),
        cmocka_unit_test(a_wrong_gain_is_all_of_the_error),
        cmocka_unit_test(a_moved_peak_is_found),
        cmocka_unit_test(the_table_covers_the_band),
        cmocka_unit_test(a_peak_between_grid_points_is_climbed),
        cmocka_unit_test(the_edge_of_what_counts_is_found),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
