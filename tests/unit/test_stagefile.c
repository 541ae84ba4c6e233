/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The reader: places, defaults, overrides, roots, and what its table of keys must hold. */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

#include "stagefile/read.h"
#include "stagefile/take.h"

#define HEAD "stage: quay_hum\nrate: 8 kHz\n"
#define ROOTS "analog:\n  roots:\n    poles: [-1 krad/s]\n    gain: {at: 0 Hz, is: 0 dB}\n"

typedef struct outcome {
    pw_status status;
    pw_stage stage;
    char *said;                  /* every message */
} outcome;

static outcome read_with(const char *yaml, const char *const *sets, int n)
{
    outcome o = {0};
    size_t size = 0;
    pw_text text = {0};
    pw_messages messages = {.file = "f"};
    pw_text_add(&text, yaml);
    o.status = pw_stage_read(&text, sets, n, &o.stage, &messages);
    FILE *to = open_memstream(&o.said, &size);
    pw_messages_print(&messages, to, false);
    fclose(to);
    pw_messages_free(&messages);
    pw_text_free(&text);
    return o;
}

static outcome read_text(const char *yaml) { return read_with(yaml, NULL, 0); }

static void drop(outcome *o)
{
    pw_stage_free(&o->stage);
    free(o->said);
}

static outcome read_well(const char *yaml)
{
    outcome o = read_text(yaml);
    if (o.status || *o.said) fail_msg("%s", o.said);
    return o;
}

/* ---- defaults ---- */

static void smallest(void **state)
{
    (void)state;
    outcome o = read_well(HEAD ROOTS);
    const pw_stage *s = &o.stage;
    assert_string_equal(s->name, "quay_hum");
    assert_string_equal(s->about, "");
    assert_true(s->rate_hz == 8000);
    assert_int_equal(s->transform.method, PW_BEST);
    assert_int_equal(s->transform.prewarp, PW_PREWARP_DEFAULT);
    assert_false(s->transform.match_gain_hz.given);
    assert_int_equal(s->transform.zeros_at_infinity, PW_INFINITY_NYQUIST);
    assert_int_equal(s->arithmetic.sample, PW_FLOAT32);
    assert_int_equal(s->arithmetic.coefficient_bits, 0);
    assert_int_equal(s->arithmetic.scaling, PW_SCALING_L1);
    assert_false(s->arithmetic.truncate || s->arithmetic.wrap || s->arithmetic.standalone);
    assert_true(s->limits.band_hz[0] == 0.8 && s->limits.band_hz[1] == 3200);
    assert_true(s->limits.floor_db == 60 && !s->limits.magnitude_db.given);
    assert_true(s->input.full_scale == 1 && s->output.full_scale == 1 && s->input.peak == 1);
    assert_string_equal(s->target, "host");
    assert_false(s->target_given);
    assert_true(s->vectors.length == 2048 && s->vectors.seed == 1);
    for (int i = 0; i < PW_SIGNALS; i++) assert_true(s->vectors.want[i]);
    assert_true(s->spread.draws == 2000 && s->spread.seed == 1);
    drop(&o);
}

/* FIPS 180-2, the digest of "abc". */
static void digest(void **state)
{
    (void)state;
    outcome o = read_text("abc");
    assert_string_equal(o.stage.sha256, "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f2"
                                        "0015ad");
    drop(&o);
}

static bool is_taken(const pw_stage *stage, const char *line)
{
    for (const char *const *p = stage->taken; *p; p++)
        if (!strcmp(*p, line)) return true;
    return false;
}

static void taken_defaults(void **state)
{
    (void)state;
    outcome o = read_well(HEAD ROOTS "transform: {method: bilinear}\n");
    assert_true(is_taken(&o.stage, "arithmetic.sample: float32"));
    assert_true(is_taken(&o.stage, "limits.floor: 60 dB"));
    assert_false(is_taken(&o.stage, "transform.method: best"));
    drop(&o);
}

static void word_lengths(void **state)
{
    (void)state;
    static const struct { const char *yaml; int bits;
    } rows[] = {
        {"arithmetic: {sample: q15}\n", 16},
        {"arithmetic: {sample: q31}\n", 32},
        {"arithmetic: {sample: q15, coefficient: 32 bits}\n", 32},
        {"arithmetic: {sample: q31, coefficient: 16}\n", 16},
    };
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        char yaml[512];
        snprintf(yaml, sizeof yaml, HEAD ROOTS "%s", rows[i].yaml);
        outcome o = read_well(yaml);
        assert_int_equal(o.stage.arithmetic.coefficient_bits, rows[i].bits);
        drop(&o);
    }
}

static void full_scale(void **state)
{
    (void)state;
    outcome o = read_well(HEAD ROOTS "signal:\n  input: {low: -1 V, high: 3.3 V, bits: 12, zero: 1 "
                                     "V, peak: 50 mV}\n"
                                     "  output: {high: 5 V, zero: 1 V, rails: [0.1 V, 4.9 V]}\n");
    assert_true(o.stage.input.full_scale == 3.3 - 1.0);
    assert_true(o.stage.input.peak == 0.05 && o.stage.input.bits == 12);
    assert_true(o.stage.output.full_scale == 4 && o.stage.output.low == 0
                && o.stage.output.bits == 0);
    assert_true(o.stage.output.has_rails && o.stage.output.rail[1] == 4.9);
    drop(&o);
}

/* The larger side of zero counts. */
static void full_scale_below_zero(void **state)
{
    (void)state;
    outcome o = read_well(HEAD ROOTS "signal:\n  input: {high: 3 V, zero: 2 V}\n");
    assert_true(o.stage.input.full_scale == 2 && o.stage.input.peak == 2);
    drop(&o);
}

/* ---- roots ---- */

#define WITH(zeros, poles)                                                                         \
    HEAD "analog:\n  roots:\n    zeros: [" zeros "]\n    poles: [" poles "]\n    gain: {factor: "  \
                                                                         "2}\n"

static void assert_root(const pw_root *root, double real, double imag)
{
    if (fabs(creal(root->s) - real) > 1e-12 * hypot(real, imag)
        || fabs(cimag(root->s) - imag) > 1e-12 * hypot(real, imag))
        fail_msg("%.17g %.17g, not %.17g %.17g", creal(root->s), cimag(root->s), real, imag);
}

static void root_texts(void **state)
{
    (void)state;
    static const struct { const char *text; double real, imag;
    } rows[] = {
        {"-222 ± 333j", -222, 333},
        {"-222 +- 333j", -222, 333},
        {"-222+/-333j", -222, 333},
        {"-222 ± j333", -222, 333},
        {"-222 ± 333i", -222, 333},
        {"± 333j", 0, 333},
        {"-1 ± 2j krad/s", -1000, 2000},
        {"-1k ± 2kj", -1000, 2000},
        {"-1 krad/s ± 2 krad/s j", -1000, 2000},
        {"-1 ± 2j kHz", -2000 * M_PI, 4000 * M_PI},
        {"\u2212222 ± 333j", -222, 333},
        {"-5", -5, 0},
        {"-5 krad/s", -5000, 0},
        {"0", 0, 0},
        {"-1 kHz", -2000 * M_PI, 0},
        {"{real: -222, imag: -333}", -222, 333},
        {"{real: -7}", -7, 0},
        {"{frequency: 1000 rad/s, q: infinite}", 0, 1000},
        {"{real: -222, imag: 333, right: true}", 222, 333},
    };
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        char yaml[512];
        snprintf(yaml, sizeof yaml, WITH("%s", "-1, -2"), rows[i].text);
        outcome o = read_well(yaml);
        assert_int_equal(o.stage.analog.zeros, 1);
        assert_root(&o.stage.analog.zero[0], rows[i].real, rows[i].imag);
        drop(&o);
    }
}

/* Vieta: the pair of {frequency, q} has the sum -w/q and the product w^2; also for very small q,
 * where one root is very much larger than the other. */
static void resonances(void **state)
{
    (void)state;
    static const double qs[] = {1e-9, 1e-3, 0.1, 0.499999, 0.5, 0.500001, 0.7, 3, 1e4, 1e9};
    for (size_t i = 0; i < sizeof qs / sizeof qs[0]; i++) {
        char yaml[512];
        double w = 2 * M_PI * 50;
        snprintf(yaml, sizeof yaml, WITH("", "{frequency: 50 Hz, q: %.17g}"), qs[i]);
        outcome o = read_well(yaml);
        const pw_root *p = &o.stage.analog.pole[0];
        assert_int_equal(p->double_real, qs[i] <= 0.5);
        double sum = p->double_real ? creal(p->s) + p->s2 : 2 * creal(p->s);
        double product = p->double_real ? creal(p->s) * p->s2
                                        : creal(p->s) * creal(p->s) + cimag(p->s) * cimag(p->s);
        assert_true(fabs(sum / (-w / qs[i]) - 1) < 1e-14);
        assert_true(fabs(product / (w * w) - 1) < 1e-14);
        drop(&o);
    }
}

static void damping_is_half_over_q(void **state)
{
    (void)state;
    outcome a = read_well(WITH("", "{frequency: 1 kHz, q: 2}")),
            b = read_well(WITH("", "{frequency: 1 kHz, damping: 0.25}"));
    assert_true(a.stage.analog.pole[0].s == b.stage.analog.pole[0].s);
    drop(&a);
    drop(&b);
}

static void gains(void **state)
{
    (void)state;
    outcome o = read_well(HEAD "analog:\n  roots:\n    poles: [-1]\n    gain: {at: 2, is: -20 dB, "
                               "invert: true}\n");
    assert_int_equal(o.stage.analog.gain.kind, PW_GAIN_AT);
    assert_true(o.stage.analog.gain.at_hz == 2 && fabs(o.stage.analog.gain.is - 0.1) < 1e-16);
    assert_true(o.stage.analog.gain.invert);
    drop(&o);
}

/* ---- overrides ---- */

static void overrides(void **state)
{
    (void)state;
    static const char *const sets[] = {
        "rate=96k",
        "transform.method=matched-z",
        "limits.band=[1 Hz, 3 kHz]",
        "analog.roots.poles.1=-5",
        "analog.roots.gain={factor: 3}",
        "about=a=b",
    };
    outcome o = read_with(HEAD ROOTS "arithmetic: {sample: q15}\n", sets, 6);
    assert_string_equal(o.said, "");
    assert_true(o.stage.rate_hz == 96000);
    assert_int_equal(o.stage.transform.method, PW_MATCHED_Z);
    assert_true(o.stage.limits.band_hz[1] == 3000);
    assert_root(&o.stage.analog.pole[0], -5, 0);
    assert_true(o.stage.analog.gain.kind == PW_GAIN_FACTOR && o.stage.analog.gain.factor == 3);
    assert_string_equal(o.stage.about, "a=b");
    assert_int_equal(o.stage.arithmetic.sample, PW_Q15);
    drop(&o);
}

static void later_override_wins(void **state)
{
    (void)state;
    static const char *const sets[] = {"rate=1 kHz", "rate=2 kHz"};
    outcome o = read_with(HEAD ROOTS, sets, 2);
    assert_true(!o.status && o.stage.rate_hz == 2000);
    drop(&o);
}

/* An override that mends a fault of the file leaves no message. */
static void override_mends(void **state)
{
    (void)state;
    static const char *const sets[] = {"rate=2 kHz"};
    outcome o = read_with("stage: quay_hum\nrate: 8 kV\n" ROOTS, sets, 1);
    assert_true(!o.status && !*o.said);
    drop(&o);
}

/* An anchored map that is overridden in one place stays as it was in the others. */
static void override_of_an_alias(void **state)
{
    (void)state;
    static const char *const sets[] = {"signal.output.high=5 V"};
    outcome o = read_with(HEAD ROOTS "signal:\n  input: &adc {high: 3.3 V}\n  output: *adc\n", sets,
                          1);
    assert_string_equal(o.said, "");
    assert_true(o.stage.input.high == 3.3 && o.stage.output.high == 5);
    drop(&o);
}

/* ---- messages ---- */

static void assert_says(const char *yaml, const char *said)
{
    outcome o = read_text(yaml);
    assert_int_equal(o.status, PW_WRONG);
    if (!strstr(o.said, said)) fail_msg("\"%s\" lacks \"%s\"", o.said, said);
    drop(&o);
}

static void places(void **state)
{
    (void)state;
    assert_says("stage: quay_hum\nrate: 8 kV\n" ROOTS, "f:2:7: rate:");
    assert_says("stage: quay_hum\n\n\nrate:     8 kV\n" ROOTS, "f:4:11: rate:");
    assert_says("{stage: \"ä µ\", rate: 8 kV}", "f:1:22: rate:");
    assert_says("about: >\n  two\n  lines\nrate: 8 kV\n", "f:4:7: rate:");
    assert_says("stage: &n quay_hum\nabout: *n\nrate: &r 8 kV\n", "f:3:7: rate:");
}

/* Columns count characters, not bytes, also where the text is refused before it is YAML. */
static void utf8_places(void **state)
{
    (void)state;
    pw_where at;
    assert_non_null(pw_utf8_fault("a\nä€\xf0\x9f\x8c\x8a\xff", 12, &at));
    assert_true(at.line == 2 && at.column == 4);
    assert_non_null(pw_utf8_fault("a\r\nb\rc\xed\xa0\x80", 9, &at));   /* a surrogate */
    assert_true(at.line == 3 && at.column == 2);
    assert_null(pw_utf8_fault("\t\xf4\x8f\xbf\xbd\n", 6, &at));
    assert_non_null(pw_utf8_fault("\xf4\x90\x80\x80", 4, &at));        /* above U+10FFFF */
    assert_non_null(pw_utf8_fault("\xe2\x82", 2, &at));                /* cut off */
}

/* A fault in an anchored value is told where the value stands, once. */
static void alias_place(void **state)
{
    (void)state;
    outcome o = read_text(HEAD ROOTS "signal:\n  input: &adc {high: 3 F}\n  output: *adc\n");
    assert_true(strstr(o.said, "f:8:22: signal.input.high")
                && strstr(o.said, "f:8:22: signal.output.high"));
    drop(&o);
}

static void warnings_are_no_errors(void **state)
{
    (void)state;
    outcome o = read_text(HEAD ROOTS "arithmetic: {coefficient: 16 bits}\n");
    assert_true(!o.status && strstr(o.said, "warning: arithmetic.coefficient"));
    drop(&o);
}

/* ---- the table ---- */

static bool has_map(const char *map)
{
    for (int i = 0; i < pw_key_map_count; i++)
        if (!strcmp(pw_key_maps[i].map, map)) return true;
    return false;
}

/* Every map that is named exists, no key stands twice, every key says what it is for. */
static void table_is_whole(void **state)
{
    (void)state;
    for (int i = 0; i < pw_key_count; i++) {
        const pw_key *key = &pw_keys[i];
        if (!has_map(key->map) || (key->sub && !has_map(key->sub)))
            fail_msg("%s.%s: no such map", key->map, key->name);
        if (pw_key_find(key->map, key->name) != key)
            fail_msg("%s.%s stands twice", key->map, key->name);
        if (!*key->help || !key->example)
            fail_msg("%s.%s has no help or example", key->map, key->name);
        if (key->needed && (key->fallback || key->otherwise))
            fail_msg("%s.%s is needed and has a default", key->map, key->name);
        if ((key->forms & PW_FORM_WORD || key->item_forms & PW_FORM_WORD) && !key->words)
            fail_msg("%s.%s has no words", key->map, key->name);
    }
}

/* The words are in the order of their enumerations. */
static void words_fit(void **state)
{
    (void)state;
    assert_string_equal(pw_method_word(PW_BEST), "best");
    assert_string_equal(pw_sample_word(PW_Q15), "q15");
    assert_string_equal(pw_structure_word(PW_COUPLED), "coupled");
    assert_string_equal(pw_scaling_word(PW_SCALING_NONE), "none");
    assert_string_equal(pw_signal_word(PW_SIGNAL_SILENCE), "silence");
    assert_string_equal(pw_approximation_word(PW_LINKWITZ_RILEY), "linkwitz-riley");
    assert_string_equal(pw_shape_word(PW_BANDSTOP), "bandstop");
    for (int i = 0; i < PW_SIGNALS; i++) assert_non_null(pw_signal_words[i].word);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(smallest),
        cmocka_unit_test(digest),
        cmocka_unit_test(taken_defaults),
        cmocka_unit_test(word_lengths),
        cmocka_unit_test(full_scale), cmocka_unit_test(full_scale_below_zero),
        cmocka_unit_test(root_texts),
        cmocka_unit_test(resonances),
        cmocka_unit_test(damping_is_half_over_q),
        cmocka_unit_test(gains),
        cmocka_unit_test(overrides),
        cmocka_unit_test(later_override_wins),
        cmocka_unit_test(override_mends),
        cmocka_unit_test(override_of_an_alias),
        cmocka_unit_test(places), cmocka_unit_test(utf8_places),
        cmocka_unit_test(alias_place),
        cmocka_unit_test(warnings_are_no_errors),
        cmocka_unit_test(table_is_whole),
        cmocka_unit_test(words_fit),
    };
    return cmocka_run_group_tests_name("stage file", tests, NULL, NULL);
}
