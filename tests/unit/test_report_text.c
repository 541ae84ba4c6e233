/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdio.h>
#include <stdlib.h>
#include <cmocka.h>

#include "analog/spread.h"
#include "report/figures.h"
#include "report/phrases.h"
#include "report/rootgroups.h"
#include "report/style.h"
#include "report/table.h"
#include "report/text.h"
#include "report_sample.h"

#define WIDTH 100
#define SCREEN 22

static pw_stage stage;
static pw_results results;

static int fill(void **state)
{
    (void)state;
    sample_results(&stage, &results);
    return 0;
}

static pw_text written(bool color, bool full)
{
    pw_text text = {0};
    pw_report_text(&results, color, full, &text);
    return text;
}

static void assert_has(const pw_text *text, const char *what)
{
    pw_text flat = {0};           /* a paragraph may be wrapped inside the phrase */
    bool there = strstr(pw_text_string(text), what) != NULL;
    for (const char *c = pw_text_string(text); *c; c++) {
        if (*c == '\n' && c[1] == ' ') {
            pw_text_add(&flat, " ");
            c += strspn(c + 1, " ");
        } else pw_text_add_bytes(&flat, c, 1);
    }
    there = there || strstr(pw_text_string(&flat), what) != NULL;
    pw_text_free(&flat);
    if (!there) fail_msg("no \"%s\" in:\n%s", what, text->data);
}

static int lines_within(const pw_text *text, int width)
{
    char *copy = strdup(pw_text_string(text)), *rest = copy;
    int n = 0;
    for (char *line; (line = strsep(&rest, "\n")) != NULL; n++) {
        if (pw_text_width(line) > width) fail_msg("%d columns: %s", pw_text_width(line), line);
        size_t end = strlen(line);
        if (end && line[end - 1] == ' ') fail_msg("a space ends: %s", line);
    }
    free(copy);
    return n - 1;
}

static void the_screen_says_what_matters(void **state)
{
    (void)state;
    pw_text text = written(false, false);
    assert_has(&text, "keel_strain: 1 of 2 limits is NOT MET");
    assert_has(&text, "at most 0.1 dB");
    assert_has(&text, "0.0625 dB at 998.5 Hz");
    assert_has(&text, "1.25 deg at 1 kHz");
    assert_has(&text, "section 1 accumulator    1.250000  -1.94 dB  -0.32 bits  can clip");
    assert_has(&text, "clamps after 812 samples (101.5 ms)");
    assert_has(&text, "1 node integrates up to the clamp; 1 node beside can clip");
    assert_has(&text, "0.75 LSB rms");
    assert_has(&text, "proved at most 3 LSB");
    assert_has(&text, "about 41.5 instructions");
    assert_has(&text, "not certified");
    pw_text_free(&text);
}

static void cycles_beyond_the_noise_are_told_beside_it(void **state)
{
    (void)state;
    pw_text text = written(false, false);
    assert_null(strstr(pw_text_string(&text), "quiet or slow inputs"));
    pw_text_free(&text);
    results.realisation.limit_cycle.found_lsb = 476;
    results.realisation.limit_cycle.bound_lsb = 8444.51;
    text = written(false, false);
    assert_has(&text, "quiet or slow inputs");
    assert_has(&text, "proved at most 8444.6 LSB");
    pw_text_free(&text);
}

static void fill_to_the_brim(void)
{
    static pw_spread spread = {.seed = UINT64_MAX, .draws = 1000000, .drawn = 1000000, .parts = 47,
                               .unstable = 12345, .worst_db = 12.345, .worst_db_hz = 12345.67,
                               .worst_deg = 123.456, .worst_deg_hz = 12345.67};
    results.spread = &spread;
    pw_realisation *r = &results.realisation;
    static const char *const name[] = {"magnitude", "phase", "delay", "noise", "overflow", "cycles",
                                       "flash", "ram"};
    static const char *const unit[] = {"dB", "deg", "s", "dB below FS", "nodes", "cycles", "bytes",
                                       "bytes"};
    results.limits = 8;
    for (int i = 0; i < 8; i++) {
        results.limit[i] = (pw_limit_row){.limit = 1.234567, .value = 12345.678, .met = i % 2};
        snprintf(results.limit[i].name, sizeof results.limit[i].name, "%s", name[i]);
        snprintf(results.limit[i].unit, sizeof results.limit[i].unit, "%s", unit[i]);
    }
    r->count = PW_MAX_SECTIONS;
    for (int i = 2; i < r->count; i++) {
        r->section[i] = r->section[i % 2];
        r->section[i].structure = i % 2 ? PW_COUPLED : PW_DIRECT_1;
    }
    r->nodes = PW_MAX_NODES;
    for (int i = 4; i < r->nodes; i++) r->node[i] = r->node[i % 4];
    results.analog.poles = PW_MAX_ROOTS;
    for (int i = 0; i < PW_MAX_ROOTS; i++) results.analog.pole[i] = -123456.789 * (i + 1);
    results.cost = (pw_cost){34, 320, 12345.5, 1234567, 123456, 1234};
}

static void the_screen_is_a_screen_even_when_there_is_much(void **state)
{
    (void)state;
    pw_text text = written(false, false);
    assert_true(lines_within(&text, WIDTH) <= SCREEN);
    pw_text_free(&text);
    fill_to_the_brim();
    text = written(false, false);
    assert_true(lines_within(&text, WIDTH) <= SCREEN);
    assert_has(&text, "--verbose prints what found no room here");
    assert_has(&text, "not certified");
    pw_text_free(&text);
    text = written(false, true);
    lines_within(&text, WIDTH);
    pw_text_free(&text);
}

static void the_whole_has_every_table(void **state)
{
    (void)state;
    static const char *const taken[] = {"arithmetic.scaling: l1", "vectors.seed: 1", NULL};
    stage.taken = taken;
    pw_text text = written(false, true);
    static const char *const parts[] = {
        "Noise filter of a keel strain gauge", "-1777.15318 \302\261 1777.15318j rad/s",
        "impulse-invariant  does not exist", "zero    -1                          2 times",
        "b0    4588  \303\227 2^-18  0.0175018310547", "a1  -25633  \303\227 2^-14  -1.56451416016",
        "error feedback k1 1, k2 0", "cannot clip, so no clamp", "SHA-256",
        "9f86d081884c7d659a2feaa0c55ad015a3bf4f1b2b0b822cd15d6c15b0f00a08", "all 2 orders tried",
        "the worst input takes it to the clamp in 812 samples (101.5 ms)",
        "one code of offset in 53000000 samples (6625 s)",
        "arithmetic.scaling: l1; vectors.seed: 1", "anti-alias filter", "licensed or qualified"};
    for (size_t i = 0; i < sizeof parts / sizeof *parts; i++) assert_has(&text, parts[i]);
    pw_text_free(&text);
}

static void color_adds_nothing_to_the_words(void **state)
{
    (void)state;
    for (int full = 0; full < 2; full++) {
        pw_text plain = written(false, full), colored = written(true, full), bare = {0};
        assert_null(strchr(plain.data, '\033'));
        assert_non_null(strchr(colored.data, '\033'));
        for (const char *c = colored.data; *c; c++) {
            if (*c == '\033') c = strchr(c, 'm');
            else pw_text_add_bytes(&bare, c, 1);
        }
        assert_string_equal(plain.data, bare.data);
        pw_text_free(&plain);
        pw_text_free(&colored);
        pw_text_free(&bare);
    }
}

static void the_range_says_how_far_it_holds(void **state)
{
    (void)state;
    pw_realisation *r = &results.realisation;
    r->nodes = 3;
    pw_text text = written(false, false);
    assert_has(&text, "1 node can clip; the fullest is section 1 accumulator at 1.25 of full"
                      " scale");
    assert_has(&text, "the first can clip from 0.8 of full scale (1.32 V)");
    pw_text_free(&text);
    r->nodes = 2;
    text = written(false, false);
    assert_has(&text, "proved: no node can clip for any input up to 0.5 of full scale (825 mV)");
    assert_has(&text, "beyond that the first can clip from 0.8");
    pw_text_free(&text);
    r->first_clip_input = INFINITY;
    text = written(false, false);
    assert_has(&text, "none at full scale either");
    pw_text_free(&text);
}

static void floats_claim_no_round_off(void **state)
{
    (void)state;
    results.realisation.sample = PW_FLOAT32;
    results.realisation.noise.given = results.realisation.limit_cycle.given = false;
    pw_text text = written(false, true);
    assert_has(&text, "floats do not clip");
    assert_null(strstr(text.data, "LSB"));
    assert_null(strstr(text.data, "2^-"));
    pw_text_free(&text);
}

static void the_verdict_counts(void **state)
{
    (void)state;
    static const struct { int limits, failed; const char *words; } row[] = {
        {0, 0, "no limit was given, so none is judged"}, {1, 0, "the one limit is met"},
        {1, 1, "1 of 1 limit is NOT MET"}, {3, 0, "all 3 limits are met"},
        {3, 2, "2 of 3 limits are NOT MET"}};
    for (size_t i = 0; i < sizeof row / sizeof *row; i++) {
        pw_text text = {0};
        results.limits = row[i].limits;
        for (int k = 0; k < row[i].limits; k++) results.limit[k].met = k >= row[i].failed;
        pw_phrase_verdict(&results, &text);
        assert_string_equal(pw_text_string(&text), row[i].words);
        pw_text_free(&text);
    }
}

static void nodes_come_fullest_first(void **state)
{
    (void)state;
    int order[PW_MAX_NODES];
    pw_nodes_by_headroom(&results.realisation, order);
    static const int expected[] = {3, 2, 0, 1};
    for (int i = 0; i < 4; i++) assert_int_equal(order[i], expected[i]);
}

static void figures_have_units(void **state)
{
    (void)state;
    static const struct { double value; const char *unit, *words; } row[] = {
        {48000, "Hz", "48 kHz"}, {0.5, "Hz", "0.5 Hz"}, {0, "Hz", "0 Hz"}, {1.5e-6, "s", "1.5 us"},
        {0.012345, "dB", "0.0123 dB"}, {12345, "bytes", "12345 bytes"}, {41.52, "cycles",
                                                                         "41.5 cycles"},
        {NAN, "dB", "not known"}, {INFINITY, "dB", "unbounded"}, {-INFINITY, "dB", "none"},
        {-5000, "rad/s", "-5 krad/s"}};
    char buffer[PW_FIGURE_ROOM];
    for (size_t i = 0; i < sizeof row / sizeof *row; i++)
        assert_string_equal(pw_figure(buffer, row[i].value, row[i].unit), row[i].words);
}

static void tables_align_by_what_is_seen(void **state)
{
    (void)state;
    pw_table table = {.align = "lrl"};
    static const char *const cells[] = {"\302\261", "1", "a", "\033[1mlong\033[0m", "22", "", "",
                                        "333", "c"};
    for (int i = 0; i < 9; i++) pw_table_cell(&table, "%s", cells[i]);
    pw_text text = {0};
    pw_table_print(&table, 1, &text);
    assert_string_equal(text.data,
                        " \302\261       1  a\n \033[1mlong\033[0m   22\n       333  c\n");
    pw_text_free(&text);
}

static void words_wrap_at_the_edge(void **state)
{
    (void)state;
    pw_text text = {0};
    pw_text_wrap("one two  three \302\261\302\261\302\261\302\261 four", 2, 11, &text);
    assert_string_equal(text.data, "one two\n  three\n  \302\261\302\261\302\261\302\261 four\n");
    pw_text_free(&text);
}

static void equal_roots_are_one_group(void **state)
{
    (void)state;
    const double complex root[] = {-1 + 2 * I, -1 - 2 * I, -3, -1 + 2 * I, -1 - 2 * I, -3 - 1e-12,
                                   0, 0};
    pw_root_group group[PW_MAX_ROOTS];
    assert_int_equal(pw_group_roots(root, 8, group), 3);
    assert_int_equal(group[0].count, 2);
    assert_int_equal(group[1].count, 2);
    assert_int_equal(group[2].count, 2);
    assert_true(group[2].root == 0);
}

#define TEST(f) cmocka_unit_test_setup(f, fill)

int main(void)
{
    const struct CMUnitTest tests[] = {
        TEST(the_screen_says_what_matters), TEST(cycles_beyond_the_noise_are_told_beside_it),
        TEST(the_screen_is_a_screen_even_when_there_is_much),
        TEST(the_whole_has_every_table), TEST(color_adds_nothing_to_the_words),
        TEST(the_range_says_how_far_it_holds),
        TEST(floats_claim_no_round_off), TEST(the_verdict_counts), TEST(nodes_come_fullest_first),
        TEST(figures_have_units), TEST(tables_align_by_what_is_seen), TEST(words_wrap_at_the_edge),
        TEST(equal_roots_are_one_group),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
