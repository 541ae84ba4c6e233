/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sensitivities against closed forms and theorems, and preferred values against IEC 60063. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <cmocka.h>

#include <jansson.h>
#include <math.h>

#include "analog/sensitivity.h"
#include "analog/sensitivity_adjoint.h"
#include "circuit_text.h"

static void compute(const char *yaml, fixture *f, pw_arena *arena, pw_sensitivity *s)
{
    assert_int_equal(pw_sensitivity_compute(fixture_read(f, yaml), arena, s), PW_OK);
}

static int row_of(const pw_sensitivity *s, const char *part)
{
    for (int i = 0; i < s->parts; i++)
        if (!strcmp(s->circuit->part[s->part[i]].name, part)) return i;
    fail_msg("no part %s", part);
    return -1;
}

#define NEAR(x, y) assert_true(fabs((x) - (y)) < 1e-6 * (1 + fabs((double)(y))))

#define SALLEN_KEY                                                                                 \
    CIRCUIT(PARTS(                                                                                 \
        "R1: {resistor: 12k, between: [in, a]}, R2: {resistor: 8.2k, between: [a, b]}, "           \
        "C1: {capacitor: 22n, between: [a, out]}, C2: {capacitor: 10n, between: [b, ground]}, "    \
        "RA: {resistor: 10k, between: [m, ground]}, RB: {resistor: 3.3k, between: [m, out]}, "     \
        "U1: {op-amp: ideal, plus: b, minus: m, out: out}"))

/* Franco, ch. 3: S(Q; R1) = -1/2 + Q sqrt(R2 C2 / (R1 C1)), S(Q; C1) = -1/2 +
 * Q (sqrt(R1 C2/(R2 C1)) + sqrt(R2 C2/(R1 C1))), S(Q; K) = Q K sqrt(R1 C1 / (R2 C2)); f0: -1/2
 * each. */
static void sallen_key(void **state)
{
    (void)state;
    fixture f;
    pw_arena arena = {0};
    pw_sensitivity s;
    compute(SALLEN_KEY, &f, &arena, &s);
    double r1 = 12e3, r2 = 8.2e3, c1 = 22e-9, c2 = 10e-9, k = 1.33;
    double q = 1
               / (sqrt(r1 * c1 / (r2 * c2)) * (1 - k) + sqrt(r1 * c2 / (r2 * c1))
                  + sqrt(r2 * c2 / (r1 * c1)));
    assert_int_equal(s.modes, 1);
    NEAR(s.mode[0].q, q);
    NEAR(s.mode[0].f0_hz, 1 / (2 * M_PI * sqrt(r1 * r2 * c1 * c2)));
    NEAR(s.mode[0].tau_s, 2 * q * sqrt(r1 * r2 * c1 * c2));
    NEAR(s.move[row_of(&s, "R1")].q, -0.5 + q * sqrt(r2 * c2 / (r1 * c1)));
    NEAR(s.move[row_of(&s, "R2")].q, 0.5 - q * sqrt(r2 * c2 / (r1 * c1)));
    NEAR(s.move[row_of(&s, "C1")].q,
         -0.5 + q * (sqrt(r1 * c2 / (r2 * c1)) + sqrt(r2 * c2 / (r1 * c1))));
    NEAR(s.move[row_of(&s, "RB")].q, q * k * sqrt(r1 * c1 / (r2 * c2)) * (k - 1) / k);
    NEAR(s.move[row_of(&s, "RA")].q, -q * k * sqrt(r1 * c1 / (r2 * c2)) * (k - 1) / k);
    for (int i = 0; i < s.parts; i++) {
        char kind = s.circuit->part[s.part[i]].name[0], digit = s.circuit->part[s.part[i]].name[1];
        NEAR(s.move[i].f0,
             (kind == 'R' || kind == 'C') && (digit == '1' || digit == '2') ? -0.5 : 0);
    }
    /* K = 1 + RB/RA: dB at DC per percent of RB: 0.0869 (K - 1)/K */
    NEAR(s.gain_db[row_of(&s, "RB")][PW_GAIN_DC], 0.2 / M_LN10 * (k - 1) / k);
    NEAR(s.gain[PW_GAIN_DC], k);
    assert_true(s.gain[PW_GAIN_INFINITY] == 0 && isnan(s.gain_db[0][PW_GAIN_INFINITY]));
    fixture_free(&f);
    pw_arena_free(&arena);
}

#define NETWORK                                                                                    \
    CIRCUIT(PARTS(                                                                                 \
        "R1: {resistor: 1.2k, between: [in, a]}, C1: {capacitor: 2n2, between: [a, ground]}, "     \
        "L1: {inductor: 3.3 mH, between: [a, b]}, C2: {capacitor: 4n7, between: [b, ground]}, "    \
        "R2: {resistor: 680, between: [b, c]}, "                                                   \
        "C3: {capacitor: 1n, between: [c, out]}, R3: {resistor: 10k, between: [out, ground]}, "    \
        "L2: {inductor: 10 mH, between: [out, ground]}"))

/* Homogeneity (Goldstein and Kuo 1961; Temes and LaPatra, ch. 4): scaling all impedances changes no
 * voltage ratio, so that over R, L and 1/C the sums are 0; scaling frequency, over L and C, moves
 * every f0 by -1 and no Q. */
static void sums_of_sensitivities(void **state)
{
    (void)state;
    fixture f;
    pw_arena arena = {0};
    pw_sensitivity s;
    compute(NETWORK, &f, &arena, &s);
    assert_true(s.modes >= 3);
    for (int mode = 0; mode < s.modes; mode++) {
        double impedance[2] = {0, 0}, frequency[2] = {0, 0};
        for (int i = 0; i < s.parts; i++) {
            char kind = s.circuit->part[s.part[i]].name[0];
            const pw_moves *m = &s.move[i * s.modes + mode];
            double sign = kind == 'C' ? -1 : 1;
            impedance[0] += sign * m->f0;
            impedance[1] += sign * m->q;
            if (kind == 'R') continue;
            frequency[0] += m->f0;
            frequency[1] += m->q;
        }
        NEAR(impedance[0], 0);
        NEAR(frequency[0], -1);
        if (s.mode[mode].count != 2) continue;
        NEAR(impedance[1], 0);
        NEAR(frequency[1], 0);
    }
    fixture_free(&f);
    pw_arena_free(&arena);
}

/* The derivatives against differences: two ways that share the equations only. */
static void compare_with_steps(const char *yaml)
{
    fixture f;
    pw_net net;
    pw_quad_roots before, after;
    double scale[16];
    long double complex move[16], gain[16];
    pw_net_make(fixture_read(&f, yaml), &net);
    const int parts = net.circuit->parts;
    for (int i = 0; i < parts; i++) scale[i] = 1;
    assert_int_equal(pw_net_solve(&net, scale, &before), PW_SOLVED);
    const double complex at = CMPLX(0, 2e5);
    assert_true(pw_adjoint_gain(&net, at, gain));
    for (int root = 0; root < before.poles; root++) {
        long double complex s =
            CMPLXL((long double)before.pole_re[root], (long double)before.pole_im[root]);
        assert_true(pw_adjoint_root(&net, false, s, move));
        for (int i = 0; i < parts; i++) {
            scale[i] = 1.00000001;
            assert_int_equal(pw_net_solve(&net, scale, &after), PW_SOLVED);
            scale[i] = 1;
            double complex ds =
                CMPLX((double)((after.pole_re[root] - before.pole_re[root]) * 1e8f128),
                      (double)((after.pole_im[root] - before.pole_im[root]) * 1e8f128));
            assert_true(cabs(ds - (double complex)move[i]) < 1e-6 * cabs((double complex)s));
            if (root) continue;
            pw_roots r[2];
            assert_true(pw_quad_roots_round(&before, &r[0]) && pw_quad_roots_round(&after, &r[1]));
            double complex dh = (pw_roots_at(&r[1], at) / pw_roots_at(&r[0], at) - 1) * 1e8;
            assert_true(cabs(dh - (double complex)gain[i]) < 1e-5);
        }
    }
    pw_net_free(&net);
    fixture_free(&f);
}

#define COUPLED                                                                                    \
    CIRCUIT(PARTS(                                                                                 \
        "R1: {resistor: 1.2k, between: [in, a]}, C1: {capacitor: 2n2, between: [a, ground]}, "     \
        "L1: {inductor: 3.3 mH, between: [a, ground]}, L2: {inductor: 4.7 mH, between: [out, "     \
        "ground]}, "                                                                               \
        "K1: {coupling: 0.3, between: [L1, L2]}, C2: {capacitor: 1n5, between: [out, ground]}, "   \
        "R2: {resistor: 3.3k, between: [out, ground]}, G1: {transconductor: 0.1 mS, sense: [out, " \
        "ground], drive: [a, ground]}"))

static void derivatives_against_steps(void **state)
{
    (void)state;
    compare_with_steps(NETWORK);
    compare_with_steps(COUPLED);
}

/* Two equal buffered lags: each pole alone moves without bound in the limit, the pair does not. */
static void double_pole(void **state)
{
    (void)state;
    fixture f;
    pw_arena arena = {0};
    pw_sensitivity s;
    compute(
        CIRCUIT(PARTS(
            "R1: {resistor: 10k, between: [in, a]}, C1: {capacitor: 10n, between: [a, ground]}, "
            "U1: {op-amp: ideal, plus: a, minus: b, out: b}, R2: {resistor: 10k, between: [b, "
            "out]}, "
            "C2: {capacitor: 10n, between: [out, ground]}")),
        &f, &arena, &s);
    assert_int_equal(s.modes, 1);
    assert_int_equal(s.mode[0].count, 2);
    NEAR(s.mode[0].q, 0.5);
    for (int i = 0; i < s.parts; i++) {
        NEAR(s.move[i].f0, -0.5);
        NEAR(s.move[i].q, 0);
    }
    fixture_free(&f);
    pw_arena_free(&arena);
}

/* A real op-amp's gain-bandwidth is a part like others; an integrator has no gain at DC. */
static void integrator_of_a_real_op_amp(void **state)
{
    (void)state;
    fixture f;
    pw_arena arena = {0};
    pw_sensitivity s;
    compute(CIRCUIT(PARTS(
                "R1: {resistor: 10k, between: [in, m]}, C1: {capacitor: 10n, between: [m, out]}, "
                "U1: {op-amp: {gain-bandwidth: 1 MHz, dc-gain: 120 dB}, plus: ground, minus: m, "
                "out: out}")),
            &f, &arena, &s);
    int u = row_of(&s, "U1");
    assert_int_equal(s.modes, 2);                         /* slow, and at the gain-bandwidth */
    assert_true(fabs(s.mode[1].f0_hz / 1e6 - 1) < 0.01 && fabs(s.move[u * 2 + 1].f0 - 1) < 0.01);
    NEAR(s.gain[PW_GAIN_DC], -1e6);
    fixture_free(&f);
    compute(CIRCUIT(PARTS(
                "R1: {resistor: 10k, between: [in, m]}, C1: {capacitor: 10n, between: [m, out]}, "
                "U1: {op-amp: ideal, plus: ground, minus: m, out: out}")),
            &f, &arena, &s);
    assert_true(s.modes == 0 && isinf(s.gain[PW_GAIN_DC]));
    assert_int_equal(s.parts, 2);
    fixture_free(&f);
    pw_arena_free(&arena);
}

/* A multiple-feedback band-pass of Q 70: its gain at f0 is -R3 C1 / (R1 (C1 + C2)) (Franco, ch. 3);
 * a low-pass without a peak is largest at DC. */
static void where_the_gain_is_largest(void **state)
{
    (void)state;
    fixture f;
    pw_arena arena = {0};
    pw_sensitivity s;
    compute(CIRCUIT(PARTS(
                "R1: {resistor: 10k, between: [in, a]}, R2: {resistor: 51, between: [a, ground]}, "
                "C1: {capacitor: 10n, between: [a, m]}, C2: {capacitor: 10n, between: [a, out]}, "
                "R3: {resistor: 1M, between: [m, out]}, "
                "U1: {op-amp: ideal, plus: ground, minus: m, out: out}")),
            &f, &arena, &s);
    NEAR(s.gain[PW_GAIN_MIDDLE], 50);
    assert_true(fabs(s.middle_hz / s.mode[0].f0_hz - 1) < 1e-6);
    NEAR(s.gain_db[row_of(&s, "R1")][PW_GAIN_MIDDLE], -0.2 / M_LN10);
    NEAR(s.gain_db[row_of(&s, "R3")][PW_GAIN_MIDDLE], 0.2 / M_LN10);
    NEAR(s.gain_db[row_of(&s, "C1")][PW_GAIN_MIDDLE], 0.1 / M_LN10);
    fixture_free(&f);
    compute(CIRCUIT(PARTS("R1: {resistor: 10k, between: [in, out]}, "
                          "C1: {capacitor: 10n, between: [out, ground]}")), &f, &arena, &s);
    assert_true(s.middle_hz == 0);
    NEAR(s.gain[PW_GAIN_MIDDLE], 1);
    NEAR(s.gain_db[0][PW_GAIN_MIDDLE], 0);
    fixture_free(&f);
    compute(COUPLED, &f, &arena, &s);                    /* on no grid: the top of a flat hill */
    pw_net net;
    pw_net_make(&f.stage.analog.circuit, &net);
    double top = cabs(pw_net_response(&net, CMPLX(0, 2 * M_PI * s.middle_hz)));
    NEAR(top, s.gain[PW_GAIN_MIDDLE]);
    for (int side = -1; side <= 1; side += 2)
        assert_true(
            cabs(pw_net_response(&net, CMPLX(0, 2 * M_PI * s.middle_hz * (1 + side * 1e-5))))
            < top);
    pw_net_free(&net);
    fixture_free(&f);
    pw_arena_free(&arena);
}

/* IEC 60063: values of each series, with those that are not rounded powers. */
static void preferred_values(void **state)
{
    (void)state;
    static const struct { const char *series; double value, nearest;
    } rows[] = {
        {"E6", 4.1e3, 4.7e3},    {"E12", 4.1e3, 3.9e3},     {"E24", 4.1e3, 4.3e3},
        {"E96", 4.1e3, 4.12e3},  {"E24", 15.92e3, 16e3},    {"E12", 15.92e3, 15e3},
        {"E24", 2.6e-9, 2.7e-9}, {"E24", 8.3e-9, 8.2e-9},   {"E6", 0.09, 0.1},
        {"E3", 30, 22},          {"E192", 919, 920},        {"E96", 976e3, 976e3},
        {"E96", 9.9e3, 10e3},    {"E48", 1.07e-6, 1.05e-6}, {"E24", 1e-12, 1e-12},
        {"E24", 9.7, 10},        {"E24", 95, 91},           {"none", 123.4, 123.4},
    };
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        double found = pw_series_nearest(rows[i].series, rows[i].value);
        if (fabs(found / rows[i].nearest - 1) > 1e-12)
            fail_msg("%s of %g: %.17g", rows[i].series, rows[i].value, found);
    }
    assert_true(pw_series_nearest("E24", 2.65e-9) == 2.7e-9);      /* the decimal itself */
    assert_true(pw_series_nearest("E24", 4.68e3) == 4.7e3);
}

/* The series as published (published/part-values.json names the standard): each value is nearest
 * to itself, and the geometric middle of two is where the nearest changes. */
static void published_series(void **state)
{
    (void)state;
    json_error_t error;
    json_t *file = json_load_file("tests/outside/published/part-values.json", 0, &error);
    assert_non_null(file);
    static const char *const names[] = {"E6", "E12", "E24", "E96"};
    for (int k = 0; k < 4; k++) {
        const json_t *list = json_object_get(json_object_get(file, "data"), names[k]);
        size_t n = json_array_size(list);
        assert_int_equal(n, atoi(names[k] + 1));
        double tens = n == 96 ? 100 : 10;
        for (size_t i = 0; i < n; i++) {
            double a = json_number_value(json_array_get(list, i)) / tens;
            double b = i + 1 < n ? json_number_value(json_array_get(list, i + 1)) / tens : 10;
            assert_true(fabs(pw_series_nearest(names[k], a) / a - 1) < 1e-15);
            assert_true(fabs(pw_series_nearest(names[k], sqrt(a * b) * 0.9999) / a - 1) < 1e-15);
            assert_true(fabs(pw_series_nearest(names[k], sqrt(a * b) * 1.0001) / b - 1) < 1e-15);
        }
    }
    json_decref(file);
}

static void show_names_every_part(void **state)
{
    (void)state;
    fixture f;
    pw_text text = {0};
    fixture_read(&f, "stage: t\nrate: 48 kHz\nanalog: {circuit: {input: {voltage: in}, output: "
                     "out, nearest: E12, parts: "
                     "{R1: {resistor: 10k, between: [in, out]}, C1: {capacitor: 4.1 nF, between: "
                     "[out, ground]}}}}\n");
    pw_circuit_show(&f.stage, &text);
    const char *shown = pw_text_string(&text);
    assert_non_null(strstr(shown, "R1          10 kohm   -1.000"));
    assert_non_null(strstr(shown, "C1           4.1 nF   -1.000"));
    assert_non_null(strstr(shown, "C1           4.1 nF -> 3.9 nF (-4.88 %)"));
    assert_non_null(strstr(shown, "pole 3.882 kHz -> 4.081 kHz (+5.13 %)"));
    pw_text_free(&text);
    fixture_free(&f);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(sallen_key),
        cmocka_unit_test(sums_of_sensitivities),
        cmocka_unit_test(derivatives_against_steps), cmocka_unit_test(double_pole),
        cmocka_unit_test(integrator_of_a_real_op_amp),
        cmocka_unit_test(where_the_gain_is_largest), cmocka_unit_test(preferred_values),
        cmocka_unit_test(published_series),
        cmocka_unit_test(show_names_every_part),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
