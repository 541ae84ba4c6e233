/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Every cell against its closed form over random part values. The forms are written out here as
 * the books named beside them give them; the program solves the nodal equations instead. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <cmocka.h>

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "analog/cell.h"
#include "analog/circuit.h"
#include "analog/model.h"

typedef double complex cx;
typedef struct values { double R[8], C[8], L[8]; } values;      /* by number; 0: left out */
typedef cx (*form)(cx s, const values *v);

static double parallel(double a, double b) { return b > 0 ? a * b / (a + b) : a; }

/* Horowitz and Hill, The Art of Electronics, 3rd ed., 1.7 */
static cx rc_lowpass(cx s, const values *v) { return 1 / (1 + s * v->R[1] * v->C[1]); }
static cx rc_highpass(cx s, const values *v)
{
    return s * v->R[1] * v->C[1] / (1 + s * v->R[1] * v->C[1]);
}
static cx rl_lowpass(cx s, const values *v) { return 1 / (1 + s * v->L[1] / v->R[1]); }
static cx rl_highpass(cx s, const values *v)
{
    return s * v->L[1] / v->R[1] / (1 + s * v->L[1] / v->R[1]);
}

/* Ogata, Modern Control Engineering, ch. 6: lead alpha = R2/(R1+R2), T = R1 C; lag */
static cx lead(cx s, const values *v)
{
    double alpha = v->R[2] / (v->R[1] + v->R[2]), t = v->R[1] * v->C[1];
    return alpha * (1 + s * t) / (1 + s * alpha * t);
}

static cx lag(cx s, const values *v)
{
    return (1 + s * v->R[2] * v->C[1]) / (1 + s * (v->R[1] + v->R[2]) * v->C[1]);
}

/* Bridged T: nodal analysis by hand */
static cx bridged_t(cx s, const values *v)
{
    cx common =
        s * s * v->R[1] * v->R[2] * v->C[1] * v->C[2] + 1 + s * v->R[1] * (v->C[1] + v->C[2]);
    return common / (common + s * v->R[2] * v->C[2]);
}

/* Franco, Design with Operational Amplifiers, 3rd ed., ch. 3: first-order active filters */
static cx inverting(cx s, const values *v)
{
    return -v->R[2] / v->R[1] / (1 + s * v->R[2] * v->C[1]);
}

static cx non_inverting(cx s, const values *v)
{
    double ratio = v->R[2] > 0 ? v->R[3] / v->R[2] : 0;
    return (1 + ratio / (1 + s * v->R[3] * v->C[2])) / (1 + s * v->R[1] * v->C[1]);
}

static cx integrator(cx s, const values *v)
{
    cx y = s * v->C[1] + (v->R[2] > 0 ? 1 / v->R[2] : 0);
    return -1 / (v->R[1] * y);
}

static cx differentiator(cx s, const values *v)
{
    return -s * v->R[2] * v->C[1] / ((1 + s * v->R[1] * v->C[1]) * (1 + s * v->R[2] * v->C[2]));
}

/* Ogata, ch. 3, table of op-amp controllers: PI */
static cx integrator_lead_zero(cx s, const values *v)
{
    return -(1 + s * v->R[2] * v->C[1]) / (s * v->R[1] * v->C[1]);
}

/* Franco, ch. 11; Venable 1983: the three error amplifiers */
static cx type_1(cx s, const values *v) { return -1 / (s * v->R[1] * v->C[1]); }

static cx type_2(cx s, const values *v)
{
    double sum = v->C[1] + v->C[2], series = v->C[1] * v->C[2] / sum;
    return -(1 + s * v->R[2] * v->C[1]) / (s * v->R[1] * sum * (1 + s * v->R[2] * series));
}

static cx type_3(cx s, const values *v)
{
    double sum = v->C[2] + v->C[3], series = v->C[2] * v->C[3] / sum;
    return -(1 + s * (v->R[1] + v->R[2]) * v->C[1]) * (1 + s * v->R[3] * v->C[2])
           / (s * v->R[1] * sum * (1 + s * v->R[2] * v->C[1]) * (1 + s * v->R[3] * series));
}

/* Horowitz and Hill, 4.3, 8.11 */
static cx charge_amplifier(cx s, const values *v)
{
    return -s * v->C[1] * v->R[2] / ((1 + s * v->R[1] * v->C[1]) * (1 + s * v->R[2] * v->C[2]));
}

static cx transimpedance(cx s, const values *v) { return -v->R[1] / (1 + s * v->R[1] * v->C[1]); }

/* Shelving: plateaus R3/R1 and so on by inspection, corners by hand */
static cx shelving_low(cx s, const values *v)
{
    return -(v->R[2] + v->R[3] / (1 + s * v->R[3] * v->C[1])) / v->R[1];
}

static cx shelving_high(cx s, const values *v)
{
    return -v->R[3] * (1 / v->R[1] + s * v->C[1] / (1 + s * v->R[2] * v->C[1]));
}

/* Franco, example 3.6 */
static cx phono(cx s, const values *v)
{
    cx feedback = v->R[2] / (1 + s * v->R[2] * v->C[2]) + v->R[3] / (1 + s * v->R[3] * v->C[3]);
    cx leg = v->R[1] + (v->C[1] > 0 ? 1 / (s * v->C[1]) : 0);
    return 1 + feedback / leg;
}

/* Franco, examples 3.8 and 3.11; Sallen and Key 1955 */
static cx sallen_key_lowpass(cx s, const values *v)
{
    double k = v->R[3] > 0 ? 1 + v->R[4] / v->R[3] : 1;
    return k / (1 + s * (v->R[1] * v->C[1] * (1 - k) + v->R[1] * v->C[2] + v->R[2] * v->C[2])
                + s * s * v->R[1] * v->R[2] * v->C[1] * v->C[2]);
}

static cx sallen_key_highpass(cx s, const values *v)
{
    double k = v->R[3] > 0 ? 1 + v->R[4] / v->R[3] : 1;
    cx square = s * s * v->R[1] * v->R[2] * v->C[1] * v->C[2];
    return k * square
           / (1 + s * (v->R[1] * (v->C[1] + v->C[2]) + v->R[2] * v->C[2] * (1 - k)) + square);
}

static cx sallen_key_bandpass(cx s, const values *v)
{
    double k = v->R[4] > 0 ? 1 + v->R[5] / v->R[4] : 1;
    double r1 = v->R[1], r2 = v->R[2], r3 = v->R[3], c1 = v->C[1], c2 = v->C[2];
    return k * s / (r1 * c1)
           / (s * s + s * (1 / (r1 * c1) + 1 / (r2 * c1) + 1 / (r2 * c2) + (1 - k) / (r3 * c1))
              + (r1 + r3) / (r1 * r2 * r3 * c1 * c2));
}

/* Franco, example 3.16, and the sections beside it; Williams and Taylor */
static cx mfb_lowpass(cx s, const values *v)
{
    return -v->R[3] / v->R[1]
           / (1 + s * v->C[2] * (v->R[2] + v->R[3] + v->R[2] * v->R[3] / v->R[1])
              + s * s * v->R[2] * v->R[3] * v->C[1] * v->C[2]);
}

static cx mfb_highpass(cx s, const values *v)
{
    cx square = s * s * v->R[1] * v->R[2] * v->C[2] * v->C[3];
    return -v->C[1] / v->C[3] * square / (1 + s * v->R[1] * (v->C[1] + v->C[2] + v->C[3]) + square);
}

static cx mfb_bandpass(cx s, const values *v)
{
    double rp = parallel(v->R[1], v->R[2]);
    return -s * v->R[3] * v->C[1] * rp / v->R[1]
           / (1 + s * rp * (v->C[1] + v->C[2]) + s * s * rp * v->R[3] * v->C[1] * v->C[2]);
}

/* Kerwin, Huelsman, Newcomb 1967; Franco, example 3.18 */
static cx state_variable(cx s, const values *v, cx numerator)
{
    double k = v->R[5] / (v->R[4] + v->R[5]), sum = 1 / v->R[1] + 1 / v->R[2] + 1 / v->R[3];
    return numerator * v->R[2] / v->R[1]
           / (1 + s * k * v->R[2] * v->R[7] * v->C[2] * sum
              + s * s * v->R[2] / v->R[3] * v->R[6] * v->R[7] * v->C[1] * v->C[2]);
}
static cx kerwin_low(cx s, const values *v) { return state_variable(s, v, -1); }
static cx kerwin_band(cx s, const values *v) { return state_variable(s, v, s * v->R[7] * v->C[2]); }

static cx kerwin_high(cx s, const values *v)
{
    return state_variable(s, v, -s * s * v->R[6] * v->R[7] * v->C[1] * v->C[2]);
}

/* Tow 1968, Thomas 1971; Franco, ch. 3 */
static cx two_integrator(cx s, const values *v, cx numerator)
{
    double invert = v->R[4] / v->R[5];
    return numerator * v->R[6] / v->R[1]
           / (1 + s * v->R[3] * v->R[6] * v->C[2] * invert / v->R[2]
              + s * s * v->R[3] * v->R[6] * v->C[1] * v->C[2] * invert);
}
static cx tow_low(cx s, const values *v) { return two_integrator(s, v, v->R[4] / v->R[5]); }

static cx tow_band(cx s, const values *v)
{
    return two_integrator(s, v, -s * v->R[3] * v->C[2] * v->R[4] / v->R[5]);
}

/* Franco, ch. 3: the phase shifter */
static cx all_pass_1(cx s, const values *v)
{
    return (1 - s * v->R[3] * v->C[1] * v->R[2] / v->R[1]) / (1 + s * v->R[3] * v->C[1]);
}

/* Delyiannis 1969, nodal analysis by hand */
static cx all_pass_2(cx s, const values *v)
{
    double k = v->R[4] / (v->R[3] + v->R[4]), sum = v->R[1] * (v->C[1] + v->C[2]);
    cx square = s * s * v->R[1] * v->R[2] * v->C[1] * v->C[2];
    return (k * (1 + s * sum + square) - s * v->C[1] * v->R[2] * (1 - k)) / (1 + s * sum + square);
}

/* Ladders: continued fractions from the far end (Van Valkenburg, Network Analysis, ch. 11), as a
 * chain of two-port matrices: a b; c d. */
typedef struct chain { cx a, b, c, d; } chain;

static void series(chain *t, cx z) { t->b += t->a * z; t->d += t->c * z; }
static void shunt(chain *t, cx y) { t->a += t->b * y; t->c += t->d * y; }

static cx rc_ladder(cx s, const values *v)
{
    chain t = {1, 0, 0, 1};
    for (int i = 1; i <= 5; i++) {
        series(&t, v->R[i]);
        shunt(&t, s * v->C[i]);
    }
    return 1 / t.a;
}

static cx ladder(cx s, const values *v, int high, int tee)
{
    chain t = {1, 0, 0, 1};
    series(&t, v->R[1]);
    for (int i = 1; i <= 3; i++) {
        cx y = high ? 1 / (s * v->L[i]) : s * v->C[i], z = high ? 1 / (s * v->C[i]) : s * v->L[i];
        if (tee) series(&t, z);
        shunt(&t, y);
        if (!tee) series(&t, z);
    }
    if (v->R[2] > 0) shunt(&t, 1 / v->R[2]);
    return 1 / t.a;
}
static cx ladder_low(cx s, const values *v) { return ladder(s, v, 0, 0); }
static cx ladder_low_t(cx s, const values *v) { return ladder(s, v, 0, 1); }
static cx ladder_high(cx s, const values *v) { return ladder(s, v, 1, 0); }
static cx ladder_high_t(cx s, const values *v) { return ladder(s, v, 1, 1); }

typedef struct row { const char *kind; int r, c, l; form form; const char *optional; } row;

static const row rows[] = {
    {"rc-lowpass", 1, 1, 0, rc_lowpass, ""},
    {"rc-highpass", 1, 1, 0, rc_highpass, ""},
    {"rl-lowpass", 1, 0, 1, rl_lowpass, ""},
    {"rl-highpass", 1, 0, 1, rl_highpass, ""},
    {"lead", 2, 1, 0, lead, ""},
    {"lag", 2, 1, 0, lag, ""},
    {"bridged-t", 2, 2, 0, bridged_t, ""},
    {"rc-ladder", 5, 5, 0, rc_ladder, ""},
    {"rlc-ladder-lowpass", 2, 3, 3, ladder_low, ""},
    {"rlc-ladder-lowpass-t", 2, 3, 3, ladder_low_t, ""},
    {"rlc-ladder-highpass", 2, 3, 3, ladder_high, ""},
    {"rlc-ladder-highpass-t", 2, 3, 3, ladder_high_t, ""},
    {"rlc-ladder-lowpass-t", 2, 3, 3, ladder_low_t, "R2"},
    {"inverting", 2, 1, 0, inverting, ""},
    {"inverting", 2, 1, 0, inverting, "C1"},
    {"non-inverting", 3, 2, 0, non_inverting, ""},
    {"non-inverting", 3, 2, 0, non_inverting, "C2"},
    {"non-inverting", 3, 2, 0, non_inverting, "R2 R3 C2"},
    {"integrator", 2, 1, 0, integrator, ""},
    {"integrator", 2, 1, 0, integrator, "R2"},
    {"integrator-lead-zero", 2, 1, 0, integrator_lead_zero, ""},
    {"compensator-type-1", 1, 1, 0, type_1, ""},
    {"compensator-type-2", 2, 2, 0, type_2, ""},
    {"compensator-type-3", 3, 3, 0, type_3, ""},
    {"differentiator", 2, 2, 0, differentiator, ""},
    {"differentiator", 2, 2, 0, differentiator, "C2"},
    {"charge-amplifier", 2, 2, 0, charge_amplifier, ""},
    {"charge-amplifier", 2, 2, 0, charge_amplifier, "R1"},
    {"transimpedance", 1, 1, 0, transimpedance, ""},
    {"shelving-low", 3, 1, 0, shelving_low, ""},
    {"shelving-high", 3, 1, 0, shelving_high, ""},
    {"phono-equaliser", 3, 3, 0, phono, ""},
    {"phono-equaliser", 3, 3, 0, phono, "C1"},
    {"sallen-key-lowpass", 4, 2, 0, sallen_key_lowpass, ""},
    {"sallen-key-lowpass", 4, 2, 0, sallen_key_lowpass, "R3 R4"},
    {"sallen-key-highpass", 4, 2, 0, sallen_key_highpass, ""},
    {"sallen-key-highpass", 4, 2, 0, sallen_key_highpass, "R3 R4"},
    {"sallen-key-bandpass", 5, 2, 0, sallen_key_bandpass, ""},
    {"sallen-key-bandpass", 5, 2, 0, sallen_key_bandpass, "R4 R5"},
    {"mfb-lowpass", 3, 2, 0, mfb_lowpass, ""},
    {"mfb-highpass", 2, 3, 0, mfb_highpass, ""},
    {"mfb-bandpass", 3, 2, 0, mfb_bandpass, ""},
    {"mfb-bandpass", 3, 2, 0, mfb_bandpass, "R2"},
    {"state-variable-lowpass", 7, 2, 0, kerwin_low, ""},
    {"state-variable-bandpass", 7, 2, 0, kerwin_band, ""},
    {"state-variable-highpass", 7, 2, 0, kerwin_high, ""},
    {"two-integrator-lowpass", 6, 2, 0, tow_low, ""},
    {"two-integrator-bandpass", 6, 2, 0, tow_band, ""},
    {"all-pass-1", 3, 1, 0, all_pass_1, ""},
    {"all-pass-2", 4, 2, 0, all_pass_2, ""},
};
#define ROWS ((int)(sizeof rows / sizeof rows[0]))

static double between(double low, double high)
{
    return low * pow(high / low, (double)random() / (double)RAND_MAX);
}

/* Values to three significant digits, as a designer writes them. */
static double rounded(double x)
{
    char text[32];
    snprintf(text, sizeof text, "%.3g", x);
    return strtod(text, NULL);
}

static int add_values(pw_cell_value *out, int n, char letter, int count, double low, double high,
                      const char *left_out, double *store)
{
    static char names[40][16];
    for (int i = 1; i <= count; i++) {
        char *name = names[n];
        snprintf(name, sizeof names[n], "%c%d", letter, i);
        store[i] = 0;
        if (strstr(left_out, name)) continue;
        store[i] = rounded(between(low, high));
        out[n++] = (pw_cell_value){.name = name, .value = store[i]};
    }
    return n;
}

static double worst_difference(const pw_roots *roots, form f, const values *v)
{
    double worst = 0;
    for (int i = 0; i <= 40; i++) {
        cx s = CMPLX(0, pow(10, 1 + 6.5 * i / 40.0)), h = f(s, v), found = pw_roots_at(roots, s);
        double d = cabs(found - h) / cabs(h);
        if (d > worst || isnan(d)) worst = d;
    }
    return worst;
}

static void check_row(const row *r)
{
    for (int draw = 0; draw < 20; draw++) {
        values v = {{0}, {0}, {0}};
        pw_cell_value list[24];
        pw_messages messages = {.file = "cell"};
        pw_roots roots;
        int n = add_values(list, 0, 'R', r->r, 1e3, 1e6, r->optional, v.R);
        n = add_values(list, n, 'C', r->c, 1e-11, 1e-6, r->optional, v.C);
        n = add_values(list, n, 'L', r->l, 1e-4, 1, r->optional, v.L);
        pw_cell cell = {.kind = r->kind, .value = list, .values = n};
        assert_int_equal(pw_analog_from_cell(&cell, &roots, &messages), PW_OK);
        double worst = worst_difference(&roots, r->form, &v);
        if (!(worst < 1e-9)) fail_msg("%s without '%s': off by %.2e", r->kind, r->optional, worst);
        pw_messages_free(&messages);
    }
}

static void closed_forms(void **state)
{
    (void)state;
    srandom(4);
    for (int i = 0; i < ROWS; i++) check_row(&rows[i]);
}

static void every_kind_has_a_closed_form(void **state)
{
    (void)state;
    for (int i = 0; pw_cell_row(i); i++) {
        const char *name = pw_cell_row(i)->name;
        bool found = !strcmp(name, "twin-t") || !strcmp(name, "twin-t-notch");   /* below */
        for (int k = 0; k < ROWS; k++) found |= !strcmp(rows[k].kind, name);
        if (!found) fail_msg("%s is not checked", name);
    }
}

/* Franco, ch. 4: passive twin-T, Q = 1/4; Horowitz and Hill, 6.3: bootstrapped, Q = 1/(4 - 4 k) */
static void check_twin_t(const char *kind, double r4, double r5)
{
    double r = 26530, c = 1e-7, k = r5 > 0 ? r5 / (r4 + r5) : 0;
    pw_cell_value list[] = {{.name = "R1", .value = r}, {.name = "R2", .value = r},
                            {.name = "R3", .value = r / 2}, {.name = "C1", .value = c},
                            {.name = "C2", .value = c}, {.name = "C3", .value = 2 * c},
                            {.name = "R4", .value = r4}, {.name = "R5", .value = r5}};
    pw_cell cell = {.kind = kind, .value = list, .values = r5 > 0 ? 8 : 6};
    pw_messages messages = {.file = "cell"};
    pw_roots roots;
    assert_int_equal(pw_analog_from_cell(&cell, &roots, &messages), PW_OK);
    assert_int_equal(roots.poles, 2);
    assert_int_equal(roots.zeros, 2);
    double w0 = 1 / (r * c), q = 0.25 / (1 - k);
    assert_true(creal(roots.zero[0]) == 0 && fabs(cimag(roots.zero[0]) - w0) < 1e-12 * w0);
    double sum = -creal(roots.pole[0] + roots.pole[1]),
           product = creal(roots.pole[0] * roots.pole[1]);
    assert_true(fabs(product / (w0 * w0) - 1) < 1e-12);
    assert_true(fabs(sqrt(product) / sum / q - 1) < 1e-12);
    pw_messages_free(&messages);
}

static void twin_t_notches(void **state)
{
    (void)state;
    check_twin_t("twin-t", 0, 0);
    check_twin_t("twin-t-notch", 0, 0);
    check_twin_t("twin-t-notch", 1000, 9000);
}

/* A ladder's stages take after the first, unless given. */
static void ladder_of_equal_stages(void **state)
{
    (void)state;
    pw_cell_value list[] = {{.name = "stages", .value = 5}, {.name = "R1", .value = 10e3},
                            {.name = "C1", .value = 1e-8}, {.name = "C3", .value = 4.7e-9}};
    pw_cell cell = {.kind = "rc-ladder", .value = list, .values = 4};
    values v = {{0, 10e3, 10e3, 10e3, 10e3, 10e3}, {0, 1e-8, 1e-8, 4.7e-9, 1e-8, 1e-8}, {0}};
    pw_messages messages = {.file = "cell"};
    pw_roots roots;
    assert_int_equal(pw_analog_from_cell(&cell, &roots, &messages), PW_OK);
    assert_int_equal(roots.poles, 5);
    assert_true(worst_difference(&roots, rc_ladder, &v) < 1e-9);
    pw_messages_free(&messages);
}

static void expect_message(pw_cell *cell, int line, const char *words)
{
    pw_messages messages = {.file = "cell"};
    pw_roots roots;
    char *text = NULL;
    size_t size = 0;
    assert_int_equal(pw_analog_from_cell(cell, &roots, &messages), PW_WRONG);
    FILE *to = open_memstream(&text, &size);
    pw_messages_print(&messages, to, true);
    fclose(to);
    char start[32];
    snprintf(start, sizeof start, "cell:%d:", line);
    if (strncmp(text, start, strlen(start)) || !strstr(text, words)) fail_msg("got: %s", text);
    free(text);
    pw_messages_free(&messages);
}

static void mistakes_are_told(void **state)
{
    (void)state;
    pw_cell_value list[] = {{.name = "R1", .value = 1e3, .at = {4, 9}},
                            {.name = "C2", .value = 1e-9, .at = {5, 9}}};
    pw_cell cell = {
        .kind = "rc-lowpas", .value = list, .values = 2, .at = {2, 3}, .kind_at = {3, 9}};
    expect_message(&cell, 3, "'rc-lowpass'");
    cell.kind = "rc-lowpass";
    expect_message(&cell, 2, "lacks its part 'C1'");
    expect_message(&cell, 2, "has no part 'C2'; expected 'C1'");
    list[1].name = "C1";
    list[1].value = 0;
    expect_message(&cell, 5, "impossible");
    list[1] = (pw_cell_value){.name = "R1", .value = 1, .at = {6, 1}};
    expect_message(&cell, 2, "two values");
    cell.kind = "rc-ladder";
    list[1] = (pw_cell_value){.name = "stages", .value = 2.5, .at = {6, 1}};
    expect_message(&cell, 2, "whole number");
}

static void list_shows_every_kind(void **state)
{
    (void)state;
    pw_text text = {0};
    pw_cells_list(&text);
    for (int i = 0; pw_cell_row(i); i++) {
        const pw_cell_kind *kind = pw_cell_row(i);
        assert_non_null(strstr(pw_text_string(&text), kind->name));
        assert_non_null(strstr(pw_text_string(&text), kind->formula));
        assert_non_null(pw_cell_figures(kind->name));
    }
    assert_non_null(strstr(pw_text_string(&text), "parts: R1 C1 R2 C2 [R3 R4]\n"));
    pw_text_free(&text);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(closed_forms), cmocka_unit_test(every_kind_has_a_closed_form),
        cmocka_unit_test(twin_t_notches), cmocka_unit_test(ladder_of_equal_stages),
        cmocka_unit_test(mistakes_are_told), cmocka_unit_test(list_shows_every_kind),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
