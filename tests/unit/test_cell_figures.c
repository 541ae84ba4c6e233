/* SPDX-License-Identifier: GPL-3.0-or-later */
/* f0, Q and gain of the second-order cells by the design formulas of the books named in their rows
 * (Franco, ch. 3; Williams and Taylor), against the roots that the program finds. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <cmocka.h>

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "analog/cell.h"
#include "analog/model.h"

typedef struct values { double R[8], C[4]; } values;
typedef double (*figure)(const values *v);
enum { DC, CENTRE, TOP };

#define R1 v->R[1]
#define R2 v->R[2]
#define R3 v->R[3]
#define R4 v->R[4]
#define R5 v->R[5]
#define R6 v->R[6]
#define R7 v->R[7]
#define C1 v->C[1]
#define C2 v->C[2]
#define C3 v->C[3]

#define FIGURE(name, formula) static double name(const values *v) { return formula; }

static double k3(const values *v) { return 1 + R4 / R3; }
static double rp(const values *v) { return R1 * R2 / (R1 + R2); }

FIGURE(w_equal, 1 / sqrt(R1 * R2 * C1 * C2))
FIGURE(skl_q, 1
                  / ((1 - k3(v)) * sqrt(R1 * C1 / (R2 * C2)) + sqrt(R1 * C2 / (R2 * C1))
                     + sqrt(R2 * C2 / (R1 * C1))))
FIGURE(skh_q, 1
                  / ((1 - k3(v)) * sqrt(R2 * C2 / (R1 * C1)) + sqrt(R1 * C2 / (R2 * C1))
                     + sqrt(R1 * C1 / (R2 * C2))))
FIGURE(mfl_w, 1 / sqrt(R2 * R3 * C1 * C2))
FIGURE(mfl_q, sqrt(C1 / C2) / (sqrt(R2 * R3) / R1 + sqrt(R3 / R2) + sqrt(R2 / R3)))
FIGURE(mfl_gain, -R3 / R1)
FIGURE(mfh_w, 1 / sqrt(R1 * R2 * C2 * C3))
FIGURE(mfh_q, sqrt(R2 / R1) * sqrt(C2 * C3) / (C1 + C2 + C3))
FIGURE(mfh_gain, -C1 / C3)
FIGURE(mfb_w, 1 / sqrt(rp(v) * R3 * C1 * C2))
FIGURE(mfb_q, sqrt(R3 / rp(v)) * sqrt(C1 * C2) / (C1 + C2))
FIGURE(mfb_gain, -R3 * C1 / (R1 * (C1 + C2)))
FIGURE(sv_w, sqrt(R3 / (R2 * R6 * R7 * C1 * C2)))
FIGURE(sv_q, (R4 + R5) / R5 / (sv_w(v) * R2 * R7 * C2 * (1 / R1 + 1 / R2 + 1 / R3)))
FIGURE(svl_gain, -R2 / R1)
FIGURE(svb_gain, (R4 + R5) / (R5 * R1 * (1 / R1 + 1 / R2 + 1 / R3)))
FIGURE(svh_gain, -R3 / R1)
FIGURE(tt_w, sqrt(R5 / (R3 * R4 * R6 * C1 * C2)))
FIGURE(tt_q, tt_w(v) * R2 * C1)
FIGURE(ttl_gain, R4 * R6 / (R1 * R5))
FIGURE(ttb_gain, -R2 / R1)
FIGURE(bt_q, sqrt(R1 * R2 * C1 * C2) / (R1 * (C1 + C2) + R2 * C2))
FIGURE(bt_gain, R1 * (C1 + C2) / (R1 * (C1 + C2) + R2 * C2))
FIGURE(ap_q, sqrt(R2 / R1) * sqrt(C1 * C2) / (C1 + C2))
FIGURE(ap_gain, R4 / (R3 + R4))

static const struct row {
    const char *kind;
    int r, c;
    figure w0, q, gain;
    int where;
} rows[] = {
    {"sallen-key-lowpass", 4, 2, w_equal, skl_q, k3, DC},
    {"sallen-key-highpass", 4, 2, w_equal, skh_q, k3, TOP},
    {"mfb-lowpass", 3, 2, mfl_w, mfl_q, mfl_gain, DC},
    {"mfb-highpass", 2, 3, mfh_w, mfh_q, mfh_gain, TOP},
    {"mfb-bandpass", 3, 2, mfb_w, mfb_q, mfb_gain, CENTRE},
    {"state-variable-lowpass", 7, 2, sv_w, sv_q, svl_gain, DC},
    {"state-variable-bandpass", 7, 2, sv_w, sv_q, svb_gain, CENTRE},
    {"state-variable-highpass", 7, 2, sv_w, sv_q, svh_gain, TOP},
    {"two-integrator-lowpass", 6, 2, tt_w, tt_q, ttl_gain, DC},
    {"two-integrator-bandpass", 6, 2, tt_w, tt_q, ttb_gain, CENTRE},
    {"bridged-t", 2, 2, w_equal, bt_q, bt_gain, CENTRE},
    {"all-pass-2", 4, 2, w_equal, ap_q, ap_gain, DC},
};

static double between(double low, double high)
{
    return low * pow(high / low, (double)random() / (double)RAND_MAX);
}

static void check(const struct row *row)
{
    static char names[16][16];
    values v = {{0}, {0}};
    pw_cell_value list[16];
    pw_messages messages = {.file = "cell"};
    pw_roots roots;
    int n = 0;
    for (int i = 0; i < row->r + row->c; i++, n++) {
        bool resistor = i < row->r;
        double *value = resistor ? &v.R[i + 1] : &v.C[i + 1 - row->r];
        *value = resistor ? between(1e3, 1e5) : between(1e-9, 1e-7);
        snprintf(names[n], sizeof names[n], "%c%d", resistor ? 'R' : 'C',
                 resistor ? i + 1 : i + 1 - row->r);
        list[n] = (pw_cell_value){.name = names[n], .value = *value};
    }
    pw_cell cell = {.kind = row->kind, .value = list, .values = n};
    assert_int_equal(pw_analog_from_cell(&cell, &roots, &messages), PW_OK);
    assert_int_equal(roots.poles, 2);
    double product = creal(roots.pole[0] * roots.pole[1]),
           sum = -creal(roots.pole[0] + roots.pole[1]);
    double w0 = sqrt(product), q = w0 / sum;
    double complex s = row->where == DC ? 0 : row->where == CENTRE ? CMPLX(0, w0) : 1e9 * w0;
    double complex gain = pw_roots_at(&roots, s);
    if (fabs(w0 / row->w0(&v) - 1) > 1e-11 || fabs(q / row->q(&v) - 1) > 1e-9 * (1 + fabs(q))
        || cabs(gain - row->gain(&v)) > 1e-7 * fabs(row->gain(&v)))
        fail_msg("%s: w0 %g for %g, Q %g for %g, gain %g for %g", row->kind, w0, row->w0(&v), q,
                 row->q(&v), creal(gain), row->gain(&v));
    pw_messages_free(&messages);
}

static void design_formulas(void **state)
{
    (void)state;
    srandom(8);
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++)
        for (int draw = 0; draw < 30; draw++) check(&rows[i]);
}

/* The band-pass of Sallen and Key with equal parts: Q = sqrt 2 / (4 - K), gain K / (4 - K). */
static void equal_sallen_key_bandpass(void **state)
{
    (void)state;
    for (double k = 1.5; k < 4; k += 0.5) {
        pw_cell_value list[] = {
            {.name = "R1", .value = 1e4},          {.name = "R2", .value = 1e4},
            {.name = "R3", .value = 1e4},          {.name = "C1", .value = 1e-8},
            {.name = "C2", .value = 1e-8},         {.name = "R4", .value = 1e4},
            {.name = "R5", .value = 1e4 * (k - 1)}};
        pw_cell cell = {.kind = "sallen-key-bandpass", .value = list, .values = 7};
        pw_messages messages = {.file = "cell"};
        pw_roots roots;
        assert_int_equal(pw_analog_from_cell(&cell, &roots, &messages), PW_OK);
        double w0 = sqrt(creal(roots.pole[0] * roots.pole[1])),
               sum = -creal(roots.pole[0] + roots.pole[1]);
        assert_true(fabs(w0 / (sqrt(2) * 1e4) - 1) < 1e-12);
        assert_true(fabs(w0 / sum / (sqrt(2) / (4 - k)) - 1) < 1e-12);
        assert_true(cabs(pw_roots_at(&roots, CMPLX(0, w0)) - k / (4 - k)) < 1e-10);
        pw_messages_free(&messages);
    }
}

/* Where equal RC stages are 3 dB down, in corners of one stage: what show --cells prints. */
static void ladders_of_equal_stages(void **state)
{
    (void)state;
    static const double slower[] = {1, 2.67, 5.15, 8.44};
    for (int n = 1; n <= 4; n++) {
        pw_cell_value list[] = {{.name = "R1", .value = 1e4}, {.name = "C1", .value = 1e-8},
                                {.name = "stages", .value = n}};
        pw_cell cell = {.kind = "rc-ladder", .value = list, .values = 3};
        pw_messages messages = {.file = "cell"};
        pw_roots roots;
        assert_int_equal(pw_analog_from_cell(&cell, &roots, &messages), PW_OK);
        double gain = cabs(pw_roots_at(&roots, CMPLX(0, 1e4 / slower[n - 1])));
        assert_true(fabs(gain - sqrt(0.5)) < 1e-3);
        pw_messages_free(&messages);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(design_formulas), cmocka_unit_test(equal_sallen_key_bandpass),
        cmocka_unit_test(ladders_of_equal_stages),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
