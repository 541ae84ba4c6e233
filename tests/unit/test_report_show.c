/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <jansson.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdio.h>
#include <stdlib.h>
#include <cmocka.h>

#include "report/show.h"
#include "report/table.h"
#include "report_sample.h"

static pw_stage stage;
static pw_results results;

static int fill(void **state)
{
    (void)state;
    sample_results(&stage, &results);
    return 0;
}

static pw_text shown(bool plot)
{
    pw_text text = {0};
    pw_show_text(&stage, &results.analog, plot, false, &text);
    return text;
}

static void assert_has(const pw_text *text, const char *what)
{
    if (!strstr(pw_text_string(text), what)) fail_msg("no \"%s\" in:\n%s", what, text->data);
}

static void assert_a_screen(const pw_text *text)
{
    char *copy = strdup(pw_text_string(text)), *rest = copy;
    int n = 0;
    for (char *line; (line = strsep(&rest, "\n")) != NULL; n++)
        if (pw_text_width(line) > 100) fail_msg("%d columns: %s", pw_text_width(line), line);
    free(copy);
    if (n - 1 > 24) fail_msg("%d lines:\n%s", n - 1, text->data);
}

static void roots_have_frequency_q_and_time_constant(void **state)
{
    (void)state;
    pw_text text = shown(false);
    assert_has(&text, "3 poles and 1 zero");
    assert_has(&text,
               "pole  -1777.15 \302\261 1777.15j rad/s               400 Hz  0.7071       562.7"
               " us");
    assert_has(&text,
               "pole  -3.14159 rad/s                          0.5 Hz               318.3 ms");
    assert_has(&text, "zero  0 rad/s                                   0 Hz");
    assert_has(&text, "towards 0 Hz +20 dB a decade; towards infinity -40 dB a decade");
    pw_text_free(&text);
}

/* Butterworth of order 2 at 400 Hz, at 500 Hz by hand: -10 log10(1 + 1.25^4) dB, and
 * -(180 - atan(1.25 sqrt 2 / (1.25^2 - 1))) degrees. */
static void the_table_has_the_response(void **state)
{
    (void)state;
    pw_text text = {0};
    results.analog.zeros = 0;
    results.analog.poles = 2;
    pw_show_text(&stage, &results.analog, false, false, &text);
    assert_has(&text, "1 (0.000 dB) at 0 Hz");
    assert_has(&text, "500 Hz   -5.367 dB  -107.65 deg");
    pw_text_free(&text);
}

static void it_fits_a_screen(void **state)
{
    (void)state;
    for (int plot = 0; plot < 2; plot++) {
        sample_results(&stage, &results);
        pw_text text = shown(plot);
        assert_a_screen(&text);
        pw_text_free(&text);
        pw_roots *a = &results.analog;
        a->poles = a->zeros = PW_MAX_ROOTS;
        for (int i = 0; i < PW_MAX_ROOTS; i++) {
            a->pole[i] = -1.23456789e5 * pow(1.3, i);
            a->zero[i] = -2.23456789e3 * pow(1.3, i);
        }
        text = shown(plot);
        assert_a_screen(&text);
        assert_has(&text, plot ? "and 123 more" : "and 118 more (--json lists all)");
        pw_text_free(&text);
    }
}

static void frequencies_rise_within_the_span(void **state)
{
    (void)state;
    static const double spans[][2] = {{1, 1000}, {0.03, 4.2e4}, {1e-6, 1e9}, {3e-9, 1e15}};
    for (size_t i = 0; i < sizeof spans / sizeof *spans; i++)
        for (int room = 5; room < 14; room++) {
            double hz[14];
            int n = pw_show_frequencies(spans[i], hz, room);
            assert_in_range(n, 2, room);
            for (int k = 0; k < n; k++) {
                assert_true(hz[k] >= spans[i][0] * 0.99 && hz[k] <= spans[i][1] * 1.01);
                assert_true(!k || hz[k] > hz[k - 1]);
            }
        }
}

/* The row of dots of the curve in each column: the flat part lies at 0 dB, the end lower. */
static void the_plot_follows_the_magnitude(void **state)
{
    (void)state;
    pw_text text = shown(true);
    assert_has(&text, "    0 dB\342\224\244");
    assert_has(&text, "1 kHz");
    char *last = strstr(text.data, "  -40 dB");
    assert_non_null(last);
    *strchr(last, '\n') = 0;
    assert_true(pw_text_width(last) > 60);   /* the deepest point is at the right edge */
    pw_text_free(&text);
}

static void an_empty_model_is_shown_too(void **state)
{
    (void)state;
    results.analog = (pw_roots){.factor = 2};
    for (int plot = 0; plot < 2; plot++) {
        pw_text text = shown(plot);
        assert_has(&text, "0 poles and 0 zeros");
        assert_has(&text, "2 (6.021 dB) at 0 Hz");
        pw_text_free(&text);
    }
}

static void the_json_reads_back(void **state)
{
    (void)state;
    pw_text text = {0};
    pw_show_json(&stage, &results.analog, &text);
    json_t *json = json_loads(text.data, 0, NULL);
    assert_non_null(json);
    json_t *analog = json_object_get(json, "analog");
    assert_int_equal(json_array_size(json_object_get(analog, "poles")), 3);
    assert_true(json_number_value(json_object_get(analog,
                                                  "factor")) == (double)results.analog.factor);
    json_t *row = json_array_get(json_object_get(json, "table"), 60);
    assert_true(json_is_real(json_object_get(row, "analog_delay_s")));
    json_decref(json);
    pw_text_free(&text);
}

#define TEST(f) cmocka_unit_test_setup(f, fill)

int main(void)
{
    const struct CMUnitTest tests[] = {
        TEST(roots_have_frequency_q_and_time_constant), TEST(the_table_has_the_response),
        TEST(it_fits_a_screen), TEST(frequencies_rise_within_the_span),
        TEST(the_plot_follows_the_magnitude), TEST(an_empty_model_is_shown_too),
        TEST(the_json_reads_back),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
