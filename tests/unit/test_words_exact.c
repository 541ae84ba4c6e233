/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What must hold exactly for every choice of words: zeros and poles at 1 and -1, zeros on the
 * circle, and accumulators that stay within int64_t for any state and input. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <string.h>
#include <cmocka.h>

#include <complex.h>
#include <math.h>
#include "words/inner.h"

static uint64_t seed = 0x9E3779B97F4A7C15u;

static double uniform(double low, double high)
{
    seed ^= seed << 13, seed ^= seed >> 7, seed ^= seed << 17;
    return low + (high - low) * ((double)(seed >> 11) * 0x1p-53);
}

static pw_format format_of(pw_sample sample, int bits)
{
    pw_arithmetic a = {.sample = sample, .coefficient_bits = bits};
    return pw_format_of(&a);
}

/* A random section: kind 0 zeros at 1 1, 1 at -1 -1, 2 at 1 -1, 3 on the circle, 4 anywhere, 5 one
 * at 1 and one anywhere. */
static pw_section random_section(int kind)
{
    pw_section s = {.order = 2, .poles = 2, .zeros = 2, .gain = 1};
    double r = 1 - pow(10, uniform(-5, -0.3)), angle = pow(10, uniform(-4, 0.49));
    s.pole[0] = r * cexp(CMPLX(0, angle)), s.pole[1] = conj(s.pole[0]);
    s.zero[0] = kind == 1 ? -1 : 1, s.zero[1] = kind == 0 ? 1 : -1;
    if (kind == 3 || kind == 4) {
        double turn = uniform(0.001, 3);
        s.zero[0] = (kind == 3 ? 1 : 0.8) * CMPLX(cos(turn), sin(turn));
        s.zero[1] = conj(s.zero[0]);
    }
    if (kind == 5)
        s.zero[1] = uniform(-0.9, 0.99);
    pw_section_expand(&s);
    return s;
}

static void check_zeros(int kind, const int32_t b[3])
{
    int64_t at_one = (int64_t)b[0] + b[1] + b[2], at_minus = (int64_t)b[0] - b[1] + b[2];
    if (kind == 0 || kind == 2 || kind == 5)
        assert_true(at_one == 0);
    if (kind == 1 || kind == 2)
        assert_true(at_minus == 0);
    if (kind == 0)
        assert_true(b[1] == -2 * b[0]);
    if (kind == 3)
        assert_true(b[0] == b[2]);
}

typedef __int128 wide;

static wide size_of(int64_t v) { return v < 0 ? -(wide)v : v; }

/* The worst input and state, worked out again: every product at its largest, every partial sum. */
static void check_range(const pw_format *format, const pw_words *w)
{
    wide sample = (wide)1 << (format->sample_bits - 1), limit = (wide)1 << 63, p = 0;
    for (int k = 0; k < 3; k++)
        p += size_of(w->b[k]) * sample;
    int shift = w->b_fraction - w->a_fraction;
    if (shift > 0) {
        assert_true(p + ((wide)1 << (shift - 1)) < limit);
        p = (p >> shift) + 1;
    } else {
        p <<= -shift;
    }
    for (int k = 1; k < 3; k++)
        p += size_of(w->a[k]) * sample;
    p += (size_of(w->k1) + size_of(w->k2)) << (w->a_fraction - 1);
    assert_true(p + ((wide)1 << (w->a_fraction - 1)) < limit);
    assert_true(w->a_fraction >= 1 && w->a_fraction <= 31 && w->b_fraction >= 0
                && w->b_fraction <= 62);
    int32_t most = format->word_bits == 16 ? 32767 : INT32_MAX;
    for (int k = 0; k < 3; k++)
        assert_true(w->b[k] >= -most && w->b[k] <= most && w->a[k] >= -most && w->a[k] <= most);
}

static void test_zeros_and_ranges(void **nothing)
{
    (void)nothing;
    static const struct { pw_sample sample; int bits; } formats[] = {{PW_Q15, 16}, {PW_Q15, 32},
                                                                     {PW_Q31, 16}, {PW_Q31, 32}};
    int worded = 0;
    for (int i = 0; i < 4000; i++) {
        pw_format format = format_of(formats[i % 4].sample, formats[i % 4].bits);
        int kind = i / 4 % 6;
        pw_section section = random_section(kind);
        pw_words w = {.structure = i % 3 ? PW_DIRECT_1_SHAPED : PW_DIRECT_1, .k1 = i % 3 ? 2 : 0,
                      .k2 = i % 3 ? -1 : 0};
        if (!pw_quantise_direct(&format, &section, pow(10, uniform(-8, 3)), &w))
            continue;
        worded++;
        check_zeros(kind, w.b);
        check_range(&format, &w);
        assert_true(pw_words_safe(&format, &w));
    }
    assert_true(worded > 3900);
}

/* Sums that are one too large are refused. */
static void test_the_edge_of_int64(void **nothing)
{
    (void)nothing;
    pw_format q31 = format_of(PW_Q31, 32);
    pw_words w = {.structure = PW_DIRECT_1, .order = 2, .b_fraction = 30, .a_fraction = 30};
    /* (|b| + |a|) 2^31 + 2^29 < 2^63: a sum of words of 2^32 - 1 fits, of 2^32 does not */
    w.b[0] = INT32_MAX, w.a[1] = INT32_MAX, w.a[2] = 1;
    assert_true(pw_words_safe(&q31, &w));
    w.a[2] = 2;
    assert_false(pw_words_safe(&q31, &w));
    w.a[2] = 0, w.b_fraction = 29;           /* b is shifted left by one */
    assert_false(pw_words_safe(&q31, &w));
    pw_words c = {.structure = PW_COUPLED, .order = 2, .a_fraction = 31, .c_fraction = 30};
    c.sigma = INT32_MAX, c.omega = 1 << 30, c.g = (1 << 30) + 1;
    assert_false(pw_words_safe(&q31, &c));
    c.g = 1 << 30;
    assert_true(pw_words_safe(&q31, &c));
    pw_format q15 = format_of(PW_Q15, 16);
    pw_words s = {.structure = PW_DIRECT_1, .order = 2, .b_fraction = 14, .a_fraction = 14};
    s.b[0] = 16000, s.a[1] = -32000, s.a[2] = 16000;
    assert_true(pw_words_fit_32(&q15, &s));  /* 64000 2^15 + 2^13 < 2^31 */
    s.b[0] = 17535;
    assert_true(pw_words_fit_32(&q15, &s));
    s.b[0] = 17536;                          /* 65536 2^15 = 2^31 */
    assert_false(pw_words_fit_32(&q15, &s));
}

static void test_integrators(void **nothing)
{
    (void)nothing;
    pw_format q15 = format_of(PW_Q15, 16);
    for (int i = 0; i < 200; i++) {
        pw_section s = {.order = 2, .poles = 2, .zeros = 2, .gain = 1};
        s.pole[0] = 1, s.pole[1] = uniform(-0.9, 0.999);
        s.zero[0] = uniform(0, 0.99), s.zero[1] = -1;
        pw_section_expand(&s);
        pw_words w = {.structure = PW_DIRECT_1};
        assert_true(pw_quantise_direct(&q15, &s, uniform(0.001, 1), &w));
        assert_int_equal(w.a[1] + w.a[2], -(1 << w.a_fraction));
        assert_true(pw_words_stable(&s, &w));
    }
}

static void test_floats(void **nothing)
{
    (void)nothing;
    pw_format format = format_of(PW_FLOAT32, 0);
    for (int i = 0; i < 600; i++) {
        int kind = i % 6;
        pw_section s = random_section(kind);
        pw_words w = {.structure = PW_TRANSPOSED_2};
        pw_quantise_float(&format, &s, uniform(0.001, 30), &w);
        float b0 = (float)w.fb[0], b1 = (float)w.fb[1], b2 = (float)w.fb[2];
        assert_true((double)b0 == w.fb[0] && (double)b1 == w.fb[1] && (double)b2 == w.fb[2]);
        if (kind == 0 || kind == 2 || kind == 5)
            assert_true(w.fb[0] + w.fb[1] + w.fb[2] == 0);
        if (kind == 3)
            assert_true(w.fb[0] == w.fb[2]);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_zeros_and_ranges),
        cmocka_unit_test(test_the_edge_of_int64),
        cmocka_unit_test(test_integrators),
        cmocka_unit_test(test_floats),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
