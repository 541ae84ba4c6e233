/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Roots of circuits: exactness at 0 and of repeated roots, infinite against large, hidden pairs,
 * extreme part values, and another way to the same eigenvalues. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <cmocka.h>

#include <math.h>

#include <gsl/gsl_eigen.h>

#include "analog/circuit_exact.h"
#include "analog/circuit_prime.h"
#include "analog/circuit_quad.h"
#include "circuit_text.h"

static void solve(const char *yaml, pw_roots *roots, int warnings)
{
    fixture f;
    const pw_circuit *circuit = fixture_read(&f, yaml);
    int before = f.messages.count;
    pw_status status = pw_analog_from_circuit(circuit, roots, &f.messages);
    int told = f.messages.count - before;
    if (status || told != warnings) pw_messages_print(&f.messages, stderr, false);
    assert_int_equal(status, PW_OK);
    assert_int_equal(told, warnings);
    fixture_free(&f);
}

static bool near(double x, double y, double relative) { return fabs(x - y) <= relative * fabs(y); }

/* ---- Exactness ---- */

static void poles_at_0_are_0(void **state)
{
    (void)state;
    pw_roots r;
    solve(CIRCUIT(
              PARTS("R1: {resistor: 22k, between: [in, m]}, C1: {capacitor: 4n7, between: [m, x]}, "
                    "U1: {op-amp: ideal, plus: ground, minus: m, out: x}, R2: {resistor: 33k, "
                    "between: [x, n]}, "
                    "C2: {capacitor: 330p, between: [n, out]}, "
                    "U2: {op-amp: ideal, plus: ground, minus: n, out: out}")),
          &r, 0);
    assert_int_equal(r.poles, 2);
    assert_int_equal(r.zeros, 0);
    assert_true(r.pole[0] == 0 && r.pole[1] == 0);
    assert_true(near((double)r.factor, 1 / (22e3 * 4.7e-9 * 33e3 * 330e-12), 1e-15));
}

/* Two lags of one time constant each, from different parts: 10k x 3n3 = 33k x 1n. */
static void double_poles_stay_together(void **state)
{
    (void)state;
    pw_roots r;
    solve(
        CIRCUIT(PARTS(
            "R1: {resistor: 10k, between: [in, a]}, C1: {capacitor: 3n3, between: [a, ground]}, "
            "U1: {op-amp: ideal, plus: a, minus: b, out: b}, R2: {resistor: 33k, between: [b, c]}, "
            "C2: {capacitor: 1n, between: [c, ground]}, U2: {op-amp: ideal, plus: c, minus: out, "
            "out: out}")),
        &r, 0);
    assert_int_equal(r.poles, 2);
    assert_true(r.pole[0] == r.pole[1] && cimag(r.pole[0]) == 0);
    assert_true(near(creal(r.pole[0]), -1 / 33e-6, 1e-15));
}

#define LAG(i, from, to)                                                                           \
    "R" #i ": {resistor: 10k, between: [" from ", a" #i "]}, C" #i                                 \
    ": {capacitor: 10n, between: [a" #i ", ground]}, U" #i ": {op-amp: ideal, plus: a" #i          \
    ", minus: " to ", out: " to "}, "

static void six_equal_poles_stay_together(void **state)
{
    (void)state;
    pw_roots r;
    solve(CIRCUIT(PARTS(LAG(1, "in", "b") LAG(2, "b", "c") LAG(3, "c", "d") LAG(4, "d", "e")
                            LAG(5, "e", "f") LAG(6, "f", "out"))),
          &r, 0);
    assert_int_equal(r.poles, 6);
    for (int i = 0; i < 6; i++)
        assert_true(near(creal(r.pole[i]), -1e4, 1e-15) && cimag(r.pole[i]) == 0);
}

/* A double pair of complex poles: two equal unity-gain Sallen-Key sections, Q = 1. */
static void double_pairs_stay_together(void **state)
{
    (void)state;
    pw_roots r;
    solve(CIRCUIT(PARTS(
              "R1: {resistor: 10k, between: [in, a]}, R2: {resistor: 10k, between: [a, b]}, "
              "C1: {capacitor: 4n, between: [a, c]}, C2: {capacitor: 1n, between: [b, ground]}, "
              "U1: {op-amp: ideal, plus: b, minus: c, out: c}, "
              "R3: {resistor: 10k, between: [c, d]}, R4: {resistor: 10k, between: [d, e]}, "
              "C3: {capacitor: 4n, between: [d, out]}, C4: {capacitor: 1n, between: [e, ground]}, "
              "U2: {op-amp: ideal, plus: e, minus: out, out: out}")),
          &r, 0);
    assert_int_equal(r.poles, 4);
    for (int i = 0; i < 4; i++) {
        assert_true(near(creal(r.pole[i]), -5e4 / 2, 1e-15));
        assert_true(near(cimag(r.pole[i]), (i % 2 ? -1 : 1) * 5e4 * sqrt(0.75), 1e-15));
    }
}

/* A notch's zeros have no real part at all; the third pole of the matched twin-T cancels. */
static void matched_twin_t_is_second_order(void **state)
{
    (void)state;
    pw_roots r;
    solve(
        CIRCUIT(PARTS(
            "R1: {resistor: 26.53k, between: [in, a]}, R2: {resistor: 26.53k, between: [a, out]}, "
            "C3: {capacitor: 200n, between: [a, ground]}, C1: {capacitor: 100n, between: [in, b]}, "
            "C2: {capacitor: 100n, between: [b, out]}, R3: {resistor: 13.265k, between: [b, "
            "ground]}")),
        &r, 1);
    assert_int_equal(r.poles, 2);
    assert_int_equal(r.zeros, 2);
    assert_true(creal(r.zero[0]) == 0 && near(cimag(r.zero[0]), 1 / 2.653e-3, 1e-15));
}

/* An unmatched one is not: nothing is removed by nearness. */
static void almost_matched_twin_t_is_third_order(void **state)
{
    (void)state;
    pw_roots r;
    solve(
        CIRCUIT(PARTS(
            "R1: {resistor: 26.53k, between: [in, a]}, R2: {resistor: 26.53k, between: [a, out]}, "
            "C3: {capacitor: 200n, between: [a, ground]}, C1: {capacitor: 100n, between: [in, b]}, "
            "C2: {capacitor: 100n, between: [b, out]}, R3: {resistor: 13.265001k, between: [b, "
            "ground]}")),
        &r, 0);
    assert_int_equal(r.poles, 3);
    assert_int_equal(r.zeros, 3);
    assert_true(creal(r.zero[1]) != 0);
}

/* ---- Infinite against large, and extreme values ---- */

/* 1 ohm and 1 pF beside 100 Mohm and 10 mF: time constants 18 decades apart. */
static void eighteen_decades(void **state)
{
    (void)state;
    pw_roots r;
    solve(CIRCUIT(PARTS(
              "R1: {resistor: 1, between: [in, a]}, C1: {capacitor: 1p, between: [a, ground]}, "
              "U1: {op-amp: ideal, plus: a, minus: b, out: b}, R2: {resistor: 100M, between: [b, "
              "out]}, "
              "C2: {capacitor: 10m, between: [out, ground]}")),
          &r, 0);
    assert_int_equal(r.poles, 2);
    assert_int_equal(r.zeros, 0);
    assert_true(near(creal(r.pole[0]), -1e-6, 1e-15) && near(creal(r.pole[1]), -1e12, 1e-15));
}

/* One farad times one ohm and one femtofarad times one ohm, loading each other: 15 decades. */
static void large_is_not_infinite(void **state)
{
    (void)state;
    pw_roots r;
    solve(CIRCUIT(PARTS(
              "R1: {resistor: 1, between: [in, a]}, C1: {capacitor: 1, between: [a, ground]}, "
              "R2: {resistor: 1, between: [a, out]}, C2: {capacitor: 1f, between: [out, ground]}")),
          &r, 0);
    assert_int_equal(r.poles, 2);
    assert_int_equal(r.zeros, 0);
    double sum = 1 + 2e-15, product = 1e-15;                     /* of the time constants */
    double slow = 2 / (sum + sqrt(sum * sum - 4 * product));
    assert_true(near(creal(r.pole[0]), -slow, 1e-15));
    assert_true(near(creal(r.pole[1]), -1 / (product * slow), 1e-14));
}

/* A capacitor across the ideal input and a loop of three capacitors add no poles. */
static void capacitor_loops_add_no_poles(void **state)
{
    (void)state;
    pw_roots r;
    solve(
        CIRCUIT(PARTS(
            "C0: {capacitor: 1u, between: [in, ground]}, R1: {resistor: 10k, between: [in, a]}, "
            "C1: {capacitor: 10n, between: [a, ground]}, C2: {capacitor: 22n, between: [a, out]}, "
            "C3: {capacitor: 47n, between: [out, ground]}, R2: {resistor: 47k, between: [out, "
            "ground]}")),
        &r, 0);
    assert_int_equal(r.poles, 2);
    assert_int_equal(r.zeros, 1);
    assert_true(r.zero[0] == 0);
}

/* Twenty RC stages: every zero is infinite, one block of twenty for a rank to find. */
static void a_long_ladder_has_no_zeros(void **state)
{
    (void)state;
    char yaml[4000] =
        "stage: t\nrate: 48 kHz\nanalog: {circuit: {input: {voltage: in}, output: n20, parts: {";
    for (int i = 1; i <= 20; i++)
        sprintf(yaml + strlen(yaml),
                "R%d: {resistor: %dk, between: [%s%d, n%d]}, C%d: {capacitor: %dn, "
                "between: [n%d, ground]}%s",
                i, 1 + i, i > 1 ? "n" : "in ,n", i > 1 ? i - 1 : 0, i, i, 30 - i, i,
                i < 20 ? ", " : "}}}\n");
    char *wrong = strstr(yaml, "in ,n0");
    memcpy(wrong, "in    ", 6);
    pw_roots r;
    solve(yaml, &r, 0);
    assert_int_equal(r.poles, 20);
    assert_int_equal(r.zeros, 0);
    for (int i = 0; i < 20; i++) assert_true(cimag(r.pole[i]) == 0 && creal(r.pole[i]) < 0);
    assert_true(near(creal(pw_roots_at(&r, 0)), 1, 1e-12));
}

static void resistors_alone_have_no_roots(void **state)
{
    (void)state;
    pw_roots r;
    solve(CIRCUIT(PARTS("R1: {resistor: 10k, between: [in, out]}, R2: {resistor: 30k, between: "
                        "[out, ground]}")),
          &r, 0);
    assert_int_equal(r.poles, 0);
    assert_true((double)r.factor == 0.75);
}

/* ---- Coupled inductors and sources ---- */

/* Two coupled coils between resistors: H = s M R2 / ((R1 + s L1)(R2 + s L2) - s^2 M^2)
 * (Van Valkenburg, Network Analysis, ch. on magnetic coupling). */
static void transformer(void **state)
{
    (void)state;
    pw_roots r;
    double r1 = 50, r2 = 600, l1 = 3e-3, l2 = 12e-3, m = 0.98 * sqrt(l1 * l2);
    solve(CIRCUIT(PARTS(
              "R1: {resistor: 50, between: [in, a]}, L1: {inductor: 3 mH, between: [a, ground]}, "
              "L2: {inductor: 12 mH, between: [out, ground]}, R2: {resistor: 600, between: [out, "
              "ground]}, "
              "K1: {coupling: 0.98, between: [L1, L2]}")),
          &r, 0);
    assert_int_equal(r.poles, 2);
    assert_int_equal(r.zeros, 1);
    assert_true(r.zero[0] == 0);
    for (int i = -3; i <= 3; i++) {
        double complex s = CMPLX(0, 2e4 * pow(10, i));
        double complex h = s * m * r2 / ((r1 + s * l1) * (r2 + s * l2) - s * s * m * m);
        assert_true(cabs(pw_roots_at(&r, s) - h) < 1e-12 * cabs(h));
    }
}

/* Current input with its resistance, output between two nodes, load across them. */
static void current_in_difference_out(void **state)
{
    (void)state;
    pw_roots r;
    solve("stage: t\nrate: 48 kHz\nanalog: {circuit: {input: {current: a, source-resistance: 2k}, "
          "output: [a, b], "
          "load: 3k, parts: {C1: {capacitor: 10n, between: [a, b]}, R1: {resistor: 1k, between: "
          "[b, ground]}}}}\n",
          &r, 0);
    /* of the current, R2k takes a part: v = i 2k (ZL) / (2k + ZL + 1k), ZL = 3k || C */
    assert_int_equal(r.poles, 1);
    assert_true(near(creal(pw_roots_at(&r, 0)), 2e3 * 3e3 / 6e3, 1e-15));
    assert_true(near(creal(r.pole[0]), -1 / (1.5e3 * 10e-9), 1e-15));
}

/* The signs that the manual gives: both sources push the first drive node up. */
static void controlled_sources_push_up(void **state)
{
    (void)state;
    pw_roots r;
    solve(CIRCUIT(PARTS(
              "E1: {amplifier: 10, sense: [in, ground], drive: [x, ground]}, "
              "R1: {resistor: 1k, between: [x, out]}, R2: {resistor: 1k, between: [out, ground]}")),
          &r, 0);
    assert_true((double)r.factor == 5);
    solve(CIRCUIT(PARTS("R0: {resistor: 1k, between: [in, ground]}, "
                        "G1: {transconductor: 2 mS, sense: [in, ground], drive: [out, ground]}, "
                        "R1: {resistor: 1k, between: [out, ground]}")), &r, 0);
    assert_true(near((double)r.factor, 2, 1e-15));
}

/* ---- The proof that ends every solution ---- */

/* Roots that are off by a millionth are told from right ones, and by how much. */
static void wrong_roots_are_found_out(void **state)
{
    (void)state;
    fixture f;
    pw_net net;
    pw_quad_roots quad;
    pw_roots roots;
    double at_hz;
    pw_net_make(fixture_read(&f, CIRCUIT(PARTS("R1: {resistor: 10k, between: [in, out]}, "
                                               "C1: {capacitor: 10n, between: [out, ground]}"))),
                &net);
    assert_int_equal(pw_net_solve(&net, NULL, &quad), PW_SOLVED);
    assert_true(pw_quad_roots_round(&quad, &roots));
    assert_true(pw_net_compare(&net, &roots, &at_hz) < 1e-14);
    roots.pole[0] *= 1 + 1e-6;                           /* at DC all of it is seen */
    double off = pw_net_compare(&net, &roots, &at_hz);
    assert_true(near(off, 1e-6, 1e-4) && at_hz < 1000);
    roots.pole[0] /= 1 + 1e-6;
    roots.factor *= 1 - 1e-7L;
    assert_true(near(pw_net_compare(&net, &roots, &at_hz), 1e-7, 1e-4));
    pw_net_free(&net);
    fixture_free(&f);
}

/* ---- The numerics beside other ways ---- */

static double random_number(void) { return 2.0 * (double)random() / (double)RAND_MAX - 1; }

static int by_size(const void *left, const void *right)
{
    const double *l = left, *r = right;
    return l[0] != r[0] ? (l[0] < r[0] ? -1 : 1) : l[1] < r[1] ? -1 : 1;
}

/* Eigenvalues of random matrices against GSL's in double precision. */
static void eigenvalues_against_gsl(void **state)
{
    (void)state;
    srandom(5);
    for (int n = 1; n <= 24; n++) {
        gsl_matrix *m = gsl_matrix_alloc((size_t)n, (size_t)n);
        gsl_vector_complex *value = gsl_vector_complex_alloc((size_t)n);
        gsl_eigen_nonsymm_workspace *space = gsl_eigen_nonsymm_alloc((size_t)n);
        pw_quad a[24 * 24], re[24], im[24];
        double mine[24][2], theirs[24][2];
        for (int i = 0; i < n * n; i++) a[i] = m->data[i] = random_number();
        assert_int_equal(gsl_eigen_nonsymm(m, value, space), 0);
        assert_true(pw_quad_eigenvalues(n, a, re, im));
        for (int i = 0; i < n; i++) {
            gsl_complex z = gsl_vector_complex_get(value, (size_t)i);
            theirs[i][0] = rint(GSL_REAL(z) * 1e9);
            theirs[i][1] = GSL_IMAG(z) * 1e9;
            mine[i][0] = rint((double)re[i] * 1e9);
            mine[i][1] = (double)im[i] * 1e9;
        }
        qsort(mine, (size_t)n, sizeof mine[0], by_size);
        qsort(theirs, (size_t)n, sizeof theirs[0], by_size);
        for (int i = 0; i < n; i++)
            assert_true(fabs(mine[i][0] - theirs[i][0]) < 10
                        && fabs(mine[i][1] - theirs[i][1]) < 10);
        gsl_matrix_free(m);
        gsl_vector_complex_free(value);
        gsl_eigen_nonsymm_free(space);
    }
}

/* A product of known factors mod p has their multiplicities; the decimals are those written. */
static void prime_arithmetic(void **state)
{
    (void)state;
    uint64_t p = pw_prime_next(UINT64_C(1) << 61);
    assert_int_equal(pw_prime_mul(pw_prime_decimal(4.7e-9, p), pw_prime_decimal(1e9, p), p),
                     pw_prime_decimal(4.7, p));
    assert_int_equal(pw_prime_mul(pw_prime_decimal(10e3, p), pw_prime_decimal(3.3e-9, p), p),
                     pw_prime_mul(pw_prime_decimal(33e3, p), pw_prime_decimal(1e-9, p), p));
    assert_int_equal(pw_prime_decimal(-2, p), p - 2);
    assert_int_equal(pw_prime_mul(pw_prime_root(49, p), pw_prime_root(49, p), p), 49);
    uint64_t poly[16] = {1};
    static const uint64_t root[] = {5, 7, 7, 11, 11, 11};
    for (int n = 0; n < 6; n++) {
        for (int k = n + 1; k > 0; k--)
            poly[k] = pw_prime_sub(poly[k - 1], pw_prime_mul(root[n], poly[k], p), p);
        poly[0] = pw_prime_sub(0, pw_prime_mul(root[n], poly[0], p), p);
    }
    int times[16];
    pw_prime_multiplicities(poly, 6, times, p);
    assert_int_equal(times[1], 1);
    assert_int_equal(times[2], 1);
    assert_int_equal(times[3], 1);
    uint64_t other[] = {77, p - 18, 1};                           /* (x - 7)(x - 11) */
    assert_int_equal(pw_prime_common(poly, 6, other, 2, p), 2);
    other[0] = 78;
    assert_int_equal(pw_prime_common(poly, 6, other, 2, p), 0);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(poles_at_0_are_0),
        cmocka_unit_test(double_poles_stay_together),
        cmocka_unit_test(six_equal_poles_stay_together),
        cmocka_unit_test(double_pairs_stay_together),
        cmocka_unit_test(matched_twin_t_is_second_order),
        cmocka_unit_test(almost_matched_twin_t_is_third_order),
        cmocka_unit_test(eighteen_decades),
        cmocka_unit_test(large_is_not_infinite),
        cmocka_unit_test(capacitor_loops_add_no_poles),
        cmocka_unit_test(a_long_ladder_has_no_zeros),
        cmocka_unit_test(resistors_alone_have_no_roots),
        cmocka_unit_test(transformer),
        cmocka_unit_test(current_in_difference_out),
        cmocka_unit_test(controlled_sources_push_up),
        cmocka_unit_test(wrong_roots_are_found_out),
        cmocka_unit_test(eigenvalues_against_gsl),
        cmocka_unit_test(prime_arithmetic),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
