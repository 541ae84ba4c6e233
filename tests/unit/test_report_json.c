/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <jansson.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdlib.h>
#include <cmocka.h>

#include "report/json.h"
#include "report_sample.h"

typedef struct report { pw_stage stage; pw_results results; json_t *json; char *text; } report;

static void write_report(report *it)
{
    pw_text text = {0};
    pw_report_json(&it->results, &text);
    json_decref(it->json);
    free(it->text);
    it->text = strdup(pw_text_string(&text));
    it->json = json_loads(it->text, JSON_REJECT_DUPLICATES, NULL);
    pw_text_free(&text);
    assert_non_null(it->json);
}

static int open_report(void **state)
{
    report *it = calloc(1, sizeof *it);
    sample_results(&it->stage, &it->results);
    write_report(it);
    *state = it;
    return 0;
}

static int close_report(void **state)
{
    report *it = *state;
    json_decref(it->json);
    free(it->text);
    free(it);
    return 0;
}

/* "response.total_error.magnitude_db.max", "sections.0.ideal.b" */
static json_t *at(const json_t *json, const char *path)
{
    char copy[200], *rest = copy;
    json_t *here = (json_t *)json;
    snprintf(copy, sizeof copy, "%s", path);
    for (char *key; here && (key = strsep(&rest, ".")) != NULL;)
        here = json_is_array(here) ? json_array_get(here, (size_t)atoi(key))
                                   : json_object_get(here, key);
    if (!here) fail_msg("%s is missing", path);
    return here;
}

static double real(const report *it, const char *path)
{
    const json_t *value = at(it->json, path);
    if (!json_is_number(value)) fail_msg("%s is no number", path);
    return json_number_value(value);
}

static void assert_word(const report *it, const char *path, const char *word)
{
    assert_string_equal(json_string_value(at(it->json, path)), word);
}

static void assert_missing(const report *it, const char *path)
{
    if (!json_is_null(at(it->json, path))) fail_msg("%s is not null", path);
}

/* Letters: n number, i integer, s string, b boolean, 0 null, o object, a array. */
typedef struct field { const char *path, *kinds; } field;

static char kind_of(const json_t *value)
{
    switch (json_typeof(value)) {
    case JSON_OBJECT: return 'o';
    case JSON_ARRAY: return 'a';
    case JSON_STRING: return 's';
    case JSON_INTEGER: return 'i';
    case JSON_REAL: return 'n';
    case JSON_TRUE: case JSON_FALSE: return 'b';
    case JSON_NULL: return '0';
    }
    return '?';
}

static void every_field_of_the_contract_has_its_type(void **state)
{
    static const field contract[] = {
        {"format", "s"}, {"stage", "s"}, {"rate_hz", "n"}, {"version", "s"},
        {"stage_file_sha256", "s"},
        {"analog.poles.0.1", "n"}, {"analog.zeros.0.1", "n"}, {"analog.factor", "n"},
        {"transform.method", "s"}, {"transform.prewarp_hz", "n"}, {"transform.match_gain_hz", "0"},
        {"transform.candidates.0.method", "s"}, {"transform.candidates.0.magnitude_error_db", "n"},
        {"transform.candidates.0.phase_error_deg", "n"},
        {"digital.poles.2.1", "n"}, {"digital.zeros.2.1", "n"}, {"digital.factor", "n"},
        {"sections.1.ideal.b.2", "n"}, {"sections.1.ideal.a.2", "n"},
        {"sections.1.realised.b.2", "n"}, {"sections.1.realised.a.2", "n"},
        {"sections.1.realised.b_words.2", "i"}, {"sections.1.realised.a_words.1", "i"},
        {"sections.1.realised.b_fraction_bits", "i"}, {"sections.1.realised.a_fraction_bits", "i"},
        {"sections.1.realised.structure", "s"}, {"sections.1.realised.words", "0"},
        {"response.band_hz.1", "n"},
        {"response.transform_error.magnitude_db.max", "n"},
        {"response.transform_error.magnitude_db.at_hz", "n"},
        {"response.transform_error.phase_deg.max", "n"},
        {"response.transform_error.phase_deg.at_hz", "n"},
        {"response.quantisation_error.magnitude_db.max", "n"},
        {"response.quantisation_error.phase_deg.at_hz", "n"},
        {"response.total_error.magnitude_db.max", "n"},
        {"response.total_error.phase_deg.at_hz", "n"},
        {"response.table.240.hz", "n"}, {"response.table.0.analog_db", "n"},
        {"response.table.0.analog_deg", "n"},
        {"response.table.0.digital_db", "n"}, {"response.table.0.digital_deg", "n"},
        {"nodes.0.name", "s"}, {"nodes.0.section", "i"}, {"nodes.0.bound", "n"},
        {"nodes.0.full_scale", "n"},
        {"nodes.0.headroom_db", "n"}, {"nodes.0.can_clip", "b"}, {"nodes.0.integrates", "b"},
        {"nodes.0.samples_to_clip", "0"}, {"nodes.3.samples_to_clip", "i"},
        {"noise.output_rms_lsb", "n"}, {"noise.output_offset_lsb", "n"}, {"noise.output_dbfs", "n"},
        {"noise.snr_db", "n"}, {"noise.grows", "b"},
        {"limit_cycle.bound_lsb", "n"}, {"limit_cycle.found_lsb", "n"},
        {"cost.target", "s"}, {"cost.sections", "i"}, {"cost.multiplies_per_sample", "i"},
        {"cost.cycles_per_sample", "n"}, {"cost.flash_bytes", "i"}, {"cost.ram_bytes", "i"},
        {"loop", "0"},
        {"limits.0.name", "s"}, {"limits.0.limit", "n"}, {"limits.0.value", "n"},
        {"limits.0.unit", "s"},
        {"limits.0.met", "b"}, {"verdict", "s"},
    };
    const report *it = *state;
    for (size_t i = 0; i < sizeof contract / sizeof *contract; i++) {
        char kind = kind_of(at(it->json, contract[i].path));
        if (kind != contract[i].kinds[0])
            fail_msg("%s is %c, not %s", contract[i].path, kind, contract[i].kinds);
    }
    assert_word(it, "format", "polewright-report-1");
    assert_word(it, "verdict", "not met");
    assert_int_equal(json_array_size(at(it->json, "response.table")), PW_RESPONSE_ROWS);
}

static void matched_z_says_where_its_zeros_went(void **state)
{
    report *it = *state;
    assert_missing(it, "transform.zeros_at_infinity");
    assert_missing(it, "transform.candidates.0.zeros_at_infinity");
    it->results.digital.method = it->results.digital.candidate[0].method = PW_MATCHED_Z;
    it->results.digital.zeros_at_infinity = PW_INFINITY_KEEP_ONE;
    it->results.digital.candidate[0].zeros_at_infinity = PW_INFINITY_KEEP;
    write_report(it);
    assert_word(it, "transform.zeros_at_infinity", "keep-one");
    assert_word(it, "transform.candidates.0.zeros_at_infinity", "keep");
}

static void numbers_read_back_exactly(void **state)
{
    report *it = *state;
    const pw_results *r = &it->results;
    assert_true(real(it, "analog.poles.0.0") == creal(r->analog.pole[0]));
    assert_true(real(it, "analog.poles.1.1") == cimag(r->analog.pole[1]));
    assert_true(real(it, "response.table.77.digital_deg") == r->response.row[77].digital_deg);
    assert_non_null(strstr(it->text, "\"max\": 0.0625,"));
    assert_non_null(strstr(it->text, "0.10000000000000001"));   /* 0.1 with 17 digits */
}

static void words_times_their_weight_are_the_realised_coefficients(void **state)
{
    const report *it = *state;
    for (int k = 0; k < 3; k++) {
        char b[60], word[60];
        snprintf(b, sizeof b, "sections.0.realised.b.%d", k);
        snprintf(word, sizeof word, "sections.0.realised.b_words.%d", k);
        assert_true(real(it, b) == ldexp(real(it, word),
        -(int)real(it, "sections.0.realised.b_fraction_bits")));
    }
    assert_true(real(it, "sections.0.realised.a.2")
                == ldexp(real(it, "sections.0.realised.a_words.1"), -14));
    assert_true(real(it, "sections.0.realised.error_feedback.0") == 1);
}

static void what_does_not_exist_is_null(void **state)
{
    report *it = *state;
    assert_missing(it, "nodes.3.bound");
    assert_missing(it, "nodes.3.headroom_db");
    assert_missing(it, "transform.candidates.1.magnitude_error_db");
    it->results.cost.cycles_per_sample = NAN;
    it->results.cost.flash_bytes = -1;
    it->results.response.row[0].analog_db = -INFINITY;
    it->results.realisation.limit_cycle.bound_lsb = INFINITY;
    it->results.digital.prewarp = PW_PREWARP_NONE;
    write_report(it);
    assert_missing(it, "cost.cycles_per_sample");
    assert_missing(it, "cost.flash_bytes");
    assert_missing(it, "cost.stack_bytes");
    assert_missing(it, "response.table.0.analog_db");
    assert_missing(it, "limit_cycle.bound_lsb");
    assert_missing(it, "transform.prewarp_hz");
    it->results.digital.prewarp = PW_PREWARP_EACH_SECTION;
    write_report(it);
    assert_word(it, "transform.prewarp_hz", "each-section");
}

static void floats_have_no_words_and_no_round_off_figures(void **state)
{
    report *it = *state;
    it->results.realisation.sample = PW_FLOAT32;
    it->results.realisation.coefficient_bits = 0;
    it->results.realisation.noise = (pw_noise){0};
    it->results.realisation.limit_cycle = (pw_limit_cycle){0};
    write_report(it);
    static const char *const nulls[] = {
        "sections.0.realised.b_words", "sections.0.realised.a_words", "sections.0.realised.words",
        "sections.0.realised.b_fraction_bits", "sections.0.realised.a_fraction_bits",
        "noise.output_rms_lsb", "noise.output_offset_lsb", "noise.output_dbfs", "noise.snr_db",
        "limit_cycle.bound_lsb", "limit_cycle.found_lsb"};
    for (size_t i = 0; i < sizeof nulls / sizeof *nulls; i++) assert_missing(it, nulls[i]);
    assert_true(json_is_false(at(it->json, "noise.grows")));
}

static void a_coupled_section_names_its_words(void **state)
{
    report *it = *state;
    pw_words *w = &it->results.realisation.section[0];
    w->structure = PW_COUPLED;
    w->sigma = 32000;
    w->omega = -77;
    w->c_fraction = 12;
    write_report(it);
    assert_missing(it, "sections.0.realised.b_words");
    assert_missing(it, "sections.0.realised.a_words");
    assert_missing(it, "sections.0.realised.error_feedback");
    assert_true(real(it, "sections.0.realised.words.sigma") == 32000);
    assert_true(real(it, "sections.0.realised.words.omega") == -77);
    assert_true(real(it, "sections.0.realised.words.c_fraction_bits") == 12);
}

static void a_factor_beyond_a_double_keeps_its_logarithm(void **state)
{
    report *it = *state;
    it->results.analog.factor = 1e300L * 1e100L;
    write_report(it);
    assert_missing(it, "analog.factor");
    assert_float_equal(real(it, "analog.log10_factor"), 400, 1e-9);
}

#define TEST(f) cmocka_unit_test_setup_teardown(f, open_report, close_report)

int main(void)
{
    const struct CMUnitTest tests[] = {
        TEST(every_field_of_the_contract_has_its_type), TEST(numbers_read_back_exactly),
        TEST(matched_z_says_where_its_zeros_went),
        TEST(words_times_their_weight_are_the_realised_coefficients),
        TEST(what_does_not_exist_is_null),
        TEST(floats_have_no_words_and_no_round_off_figures),
        TEST(a_coupled_section_names_its_words),
        TEST(a_factor_beyond_a_double_keeps_its_logarithm),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
