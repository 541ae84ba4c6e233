/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The renderer's spelling of numbers, lines and comments, and what the test signals are. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <cmocka.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "emit/code.h"
#include "emit/signals.h"

/* ---- the renderer ---- */

static const char *rendered(const pw_code *file)
{
    static pw_text text;
    pw_text_free(&text);
    pw_code_render(file, &text);
    return pw_text_string(&text);
}

static void spelled(pw_number number, const char *expected)
{
    pw_text text = {0};
    pw_number_render(number, &text);
    assert_string_equal(pw_text_string(&text), expected);
    pw_text_free(&text);
}

static void integers_fit_any_int(void **state)
{
    (void)state;
    spelled(pw_word(0), "0");
    spelled(pw_word(-32767), "-32767");
    spelled(pw_word(-32768), "-INT32_C(32768)");
    spelled(pw_word(INT32_MAX), "INT32_C(2147483647)");
    spelled(pw_word(INT32_MIN), "(-INT32_C(2147483647) - 1)");
    spelled(pw_word(INT64_C(2147483648)), "INT64_C(2147483648)");
    spelled(pw_word(INT64_MAX), "INT64_C(9223372036854775807)");
    spelled(pw_word(INT64_MIN), "(-INT64_C(9223372036854775807) - 1)");
}

static void floats_are_exact_and_floats(void **state)
{
    (void)state;
    spelled(pw_real(1, false), "1.0");
    spelled(pw_real(-0.1, false), "-0.1");
    spelled(pw_real((double)0.1f, true), "0.1f");
    spelled(pw_real(1e30, true), "1e+30f");
    spelled(pw_real(-0.0, false), "-0.0");
    srand(3);
    for (int i = 0; i < 10000; i++) {
        double value = ldexp((double)rand() / RAND_MAX - 0.5, rand() % 200 - 100)
                       + ldexp(rand(), -90);
        pw_text text = {0};
        pw_number_render(pw_real(value, false), &text);
        assert_true(strtod(pw_text_string(&text), NULL) == value);
        text.size = 0;
        pw_number_render(pw_real((double)(float)value, true), &text);
        assert_true(strtof(pw_text_string(&text), NULL) == (float)value);
        pw_text_free(&text);
    }
}

static int significant(const char *decimal)
{
    int digits = 0, zeros = 0;
    for (const char *c = decimal; *c && *c != 'e'; c++) {
        if (*c < '0' || *c > '9' || (*c == '0' && !digits)) continue;
        zeros = *c == '0' ? zeros + 1 : 0;
        digits++;
    }
    return digits - zeros;
}

/* No decimal with fewer digits reads back: the slow search from one digit on finds as many. */
static void shortest_is_shortest(void **state)
{
    (void)state;
    const double edges[] = {5e-324, 2.5e-310, 2.2250738585072014e-308, 1.7976931348623157e308,
                            0.3,    1e22};
    srand(4);
    for (int i = 0; i < 20000; i++) {
        double value = i < 6 ? edges[i] : ldexp(rand() + rand() / 3e9, rand() % 1900 - 950);
        if (i % 3 == 0) value = (double)(rand() % 100000) / 1000;
        char shortest[PW_NUMBER_ROOM], slow[PW_NUMBER_ROOM];
        pw_shortest(shortest, value);
        for (int digits = 1; digits <= 17; digits++) {
            snprintf(slow, sizeof slow, "%.*g", digits, value);
            if (strtod(slow, NULL) == value) break;
        }
        assert_true(strtod(shortest, NULL) == value);
        assert_int_equal(significant(shortest), significant(slow));
    }
}

static void items_become_c(void **state)
{
    (void)state;
    pw_arena arena = {0};
    pw_code *file = pw_code_file(&arena, "keel", "int16_t");
    pw_directive(file, "#include \"$.h\"");
    pw_code *f = pw_function(pw_section_group(file, 2), "static @ $_section_#($_state *s, @ x)");
    pw_code *loop = pw_block(f, "while (x)", "");
    pw_put_with(loop, "x = s->d[`];", "back");
    pw_constant(f, "const @ y", pw_word(7), NULL);
    pw_put(f, "return y;");
    assert_string_equal(rendered(file), "#include \"keel.h\"\n"
                                        "static int16_t keel_section_2(keel_state *s, int16_t x)\n"
                                        "{\n"
                                        "    while (x) {\n"
                                        "        x = s->d[1];   /* back */\n"
                                        "    }\n"
                                        "    const int16_t y = 7;\n"
                                        "    return y;\n"
                                        "}\n");
    pw_arena_free(&arena);
}

static void every_line_fits(void **state)
{
    (void)state;
    pw_arena arena = {0};
    pw_code *file = pw_code_file(&arena, "keel", "int16_t");
    int32_t words[500];
    for (int i = 0; i < 500; i++) words[i] = i * i * (i % 2 ? 31 : -7919);
    pw_array_words(file, "static const int32_t many[500]", words, 500);
    pw_put_with(
        file, "acc = $_one * s->one_of_many + $_two * s->two_of_many + $_three * s->three_of_many;",
        "a note that does not fit beside so long a statement, and so has to stand above it in the "
        "file");
    pw_prose(
        pw_comment(file), "%s",
        "a paragraph of many words that goes on and on until it has to be broken at least once, "
        "because no line of the file may be longer than a hundred columns");
    const char *text = rendered(file);
    long seen = 0, last = 0;
    for (const char *line = text; *line; line = strchr(line, '\n') + 1) {
        assert_true(strcspn(line, "\n") <= 100);
        last = (long)strcspn(line, "\n");
        seen++;
    }
    assert_true(seen > 50 && last > 0);
    for (int i = 0; i < 500; i++) {
        char number[32];
        snprintf(number, sizeof number, "%d", abs(words[i]));
        assert_non_null(strstr(text, number));
    }
    pw_arena_free(&arena);
}

static void prose_stays_in_its_comment(void **state)
{
    (void)state;
    pw_arena arena = {0};
    pw_code *file = pw_code_file(&arena, "keel", "int16_t");
    pw_comment_line(file, "one */ two /* three ?\?/ four\nfive $ @ # six \\");
    const char *text = rendered(file);
    assert_string_equal(text, "/* one * / two / * three ? ?/ four five $ @ # six \\ . */\n");
    pw_arena_free(&arena);
}

/* ---- signals ---- */

typedef struct bench {
    pw_stage stage;
    pw_results results;
} bench;

/* y = 3 x at 8 kHz, which clips; the band is 10 Hz to 1 kHz. */
static bench *make_bench(pw_sample sample, double peak, int length)
{
    bench *b = calloc(1, sizeof *b);
    pw_realisation *r = &b->results.realisation;
    b->stage.rate_hz = 8000;
    b->stage.limits.band_hz[0] = 10;
    b->stage.limits.band_hz[1] = 1000;
    b->stage.vectors.length = length;
    b->stage.vectors.seed = 5;
    b->results.stage = &b->stage;
    *r = (pw_realisation){.sample = sample, .count = 1, .input_peak = peak, .nodes = 1};
    r->section[0] = (pw_words){.structure = PW_DIRECT_1,
                               .b = {3},
                               .fb = {3},
                               .fa = {1},
                               .realised_b = {3},
                               .realised_a = {1}};
    strcpy(r->node[0].name, "section 1 output");
    r->node[0].section = 1;
    return b;
}

static void extremes(const pw_vector *v, double *low, double *high)
{
    *low = *high = 0;
    for (long i = 0; i < v->n; i++) {
        double x = v->in_words ? v->in_words[i] : v->in_reals[i];
        *low = fmin(*low, x);
        *high = fmax(*high, x);
    }
}

static void signals_reach_the_peak_and_no_more(void **state)
{
    (void)state;
    const double peaks[] = {1, 0.3, 1e-3};
    for (int sample = 0; sample < 4; sample++)
        for (int p = 0; p < 3; p++) {
            bench *b = make_bench((pw_sample)sample, peaks[p], 3000);
            double unit = sample == PW_Q15 ? 32768 : sample == PW_Q31 ? 2147483648.0 : 1;
            double top = peaks[p] * unit,
                   most = sample >= PW_Q31 ? fmin(floor(top), unit - 1) : top;
            for (int s = 0; s < PW_SIGNALS; s++) {
                pw_vector v;
                double low, high;
                pw_vector_make(&b->results, (pw_signal)s, &v);
                extremes(&v, &low, &high);
                bool both = s == PW_SIGNAL_SINE || s == PW_SIGNAL_SWEEP || s == PW_SIGNAL_NOISE;
                if (s == PW_SIGNAL_SILENCE)
                    assert_true(low == 0 && high == 0);
                else if (s == PW_SIGNAL_FULL_SCALE_SQUARE)
                    assert_true(low == -unit && high == (sample >= PW_Q31 ? unit - 1 : 1));
                else
                    assert_true(high <= most && high > 0.99 * most - 1 && low >= -top);
                if (both) assert_true(low < -0.99 * most + 1);
                pw_vector_free(&v);
            }
            free(b);
        }
}

static void signals_are_what_they_are_called(void **state)
{
    (void)state;
    bench *b = make_bench(PW_Q15, 1, 800);
    pw_vector v;
    pw_vector_make(&b->results, PW_SIGNAL_IMPULSE, &v);
    for (long i = 0; i < v.n; i++) assert_int_equal(v.in_words[i], i == 0 ? 32767 : 0);
    pw_vector_free(&v);
    pw_vector_make(&b->results, PW_SIGNAL_STEP, &v);
    for (long i = 0; i < v.n; i++) assert_int_equal(v.in_words[i], 32767);
    pw_vector_free(&v);
    pw_vector_make(&b->results, PW_SIGNAL_SINE, &v); /* middle of the band: 100 Hz, 80 samples */
    assert_true(v.hz == 100);
    for (long i = 80; i < v.n; i++) assert_int_equal(v.in_words[i], v.in_words[i - 80]);
    assert_int_equal(v.in_words[20], 32767);
    assert_int_equal(v.in_words[60], -32768);
    pw_vector_free(&v);
    free(b);
}

/* A sweep's phase advances by 2 pi f / rate: zero crossings come as often as its frequencies say.
 * */
static void sweep_covers_the_band(void **state)
{
    (void)state;
    bench *b = make_bench(PW_FLOAT64, 1, 80000);
    pw_vector v;
    pw_vector_make(&b->results, PW_SIGNAL_SWEEP, &v);
    assert_true(v.hz == 10 && v.hz_end == 1000);
    int first = 0, last = 0;
    for (long i = 1; i < v.n; i++) {
        bool crosses = (v.in_reals[i - 1] < 0) != (v.in_reals[i] < 0);
        if (i < 8000) first += crosses;
        if (i >= 72000) last += crosses;
    }
    /* mean of 10 100^t over the first tenth: 12.7 Hz; over the last: 801 Hz */
    assert_in_range(first, 24, 27);
    assert_in_range(last, 1595, 1610);
    pw_vector_free(&v);
    free(b);
}

static void noise_follows_its_seed(void **state)
{
    (void)state;
    bench *b = make_bench(PW_FLOAT32, 1, 20000);
    pw_vector one, again, other;
    pw_vector_make(&b->results, PW_SIGNAL_NOISE, &one);
    pw_vector_make(&b->results, PW_SIGNAL_NOISE, &again);
    b->stage.vectors.seed = 6;
    pw_vector_make(&b->results, PW_SIGNAL_NOISE, &other);
    assert_memory_equal(one.in_reals, again.in_reals, 20000 * sizeof(double));
    assert_memory_not_equal(one.in_reals, other.in_reals, 20000 * sizeof(double));
    double sum = 0, square = 0, lagged = 0;
    for (long i = 0; i < 20000; i++) {
        assert_true((double)(float)one.in_reals[i] == one.in_reals[i]);
        sum += one.in_reals[i];
        square += one.in_reals[i] * one.in_reals[i];
        if (i) lagged += one.in_reals[i] * one.in_reals[i - 1];
    }
    /* uniform: variance 1/3, here within five deviations */
    assert_true(fabs(sum / 20000) < 5 * sqrt(1.0 / 3 / 20000));
    assert_true(fabs(square / 20000 - 1.0 / 3) < 5 * sqrt(4.0 / 45 / 20000));
    assert_true(fabs(lagged / 20000) < 5 * (1.0 / 3) / sqrt(20000));
    pw_vector_free(&one);
    pw_vector_free(&again);
    pw_vector_free(&other);
    free(b);
}

/* splitmix64 from seed 1234567, the first values as its author's program prints them (from memory
 * of the widely used test vector). */
static void noise_is_splitmix64(void **state)
{
    (void)state;
    const uint64_t published[3] = {UINT64_C(6457827717110365317), UINT64_C(3203168211198807973),
                                   UINT64_C(9817491932198370423)};
    bench *b = make_bench(PW_Q31, 1, 3);
    pw_vector v;
    b->stage.vectors.seed = 1234567;
    pw_vector_make(&b->results, PW_SIGNAL_NOISE, &v);
    for (int i = 0; i < 3; i++) {
        double u = (double)(published[i] >> 11) * 0x1p-53;
        assert_int_equal(v.in_words[i], (int32_t)(-2147483648.0 + floor(u * 4294967296.0)));
    }
    pw_vector_free(&v);
    free(b);
}

static void clips_are_counted(void **state)
{
    (void)state;
    bench *b = make_bench(PW_Q15, 1, 100);
    pw_vector v;
    pw_vector_make(&b->results, PW_SIGNAL_FULL_SCALE_SQUARE, &v);
    assert_int_equal(v.clipped, 100);
    for (long i = 0; i < v.n; i++)
        assert_int_equal(v.out_words[i], v.in_words[i] < 0 ? -32768 : 32767);
    pw_vector_free(&v);
    free(b);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(integers_fit_any_int),
        cmocka_unit_test(floats_are_exact_and_floats),
        cmocka_unit_test(shortest_is_shortest),
        cmocka_unit_test(items_become_c),
        cmocka_unit_test(every_line_fits),
        cmocka_unit_test(prose_stays_in_its_comment),
        cmocka_unit_test(signals_reach_the_peak_and_no_more),
        cmocka_unit_test(signals_are_what_they_are_called),
        cmocka_unit_test(sweep_covers_the_band),
        cmocka_unit_test(noise_follows_its_seed),
        cmocka_unit_test(noise_is_splitmix64),
        cmocka_unit_test(clips_are_counted),
    };
    return cmocka_run_group_tests_name("emit", tests, NULL, NULL);
}
