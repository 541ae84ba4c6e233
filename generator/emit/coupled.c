/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The portable kernel of the coupled form (a rotation), words in the code. Always in 64 bits. */
#include <math.h>

#include "emit/fixed.h"
#include "simulate/simulate.h"

const char *pw_coupled_member(const pw_emission *e, const pw_words *w, int k)
{
    (void)e, (void)w;
    return k == 0 ? "u1_#" : k == 1 ? "u2_#" : NULL;
}

void pw_coupled_fields(const pw_emission *e, const pw_words *w, pw_code *in)
{
    (void)w;
    pw_put_with(in, "@ u1_#;",
                pw_arena_print(e->arena, "rotating state of section %d", in->section));
    pw_put(in, "@ u2_#;");
}

/* gain = high 2^31 + low, so that its product with a sample fits 64 bits by parts. */
static void steady_constants(const pw_emission *e, const pw_words *w, pw_code *in)
{
    static const char *const high[] = {"u1_high", "u2_high"}, *const low[] = {"u1_low", "u2_low"};
    int64_t gain[2];
    int fraction;
    if (e->integrates) return;
    pw_coupled_steady(w, gain, &fraction);
    for (int i = 0; i < 2; i++) {
        const char *note = pw_arena_print(
            e->arena, "for a constant input u%d is %.9g times it: 2^31 high + low", i + 1,
            ldexp((double)gain[i], -fraction));
        pw_fixed_constant(e, in, high[i], gain[i] >> 31, 0, note);
        pw_fixed_constant(e, in, low[i], gain[i] & INT32_MAX, 0,
                          pw_arena_print(e->arena, "with %d fraction bits", fraction));
    }
    pw_fixed_constant(e, in, "steady_shift", fraction - 31, 0,
                      "fraction bits of the gains, less 31");
}

void pw_coupled_constants(const pw_emission *e, const pw_words *w, pw_code *in)
{
    pw_fixed_constant(e, in, "sigma", w->sigma, w->a_fraction, NULL);
    pw_fixed_constant(e, in, "omega", w->omega, w->a_fraction, NULL);
    pw_fixed_constant(e, in, "g", w->g, w->a_fraction, NULL);
    pw_fixed_constant(e, in, "c1", w->c1, w->c_fraction, NULL);
    pw_fixed_constant(e, in, "c2", w->c2, w->c_fraction, NULL);
    pw_fixed_constant(e, in, "d", w->d, w->c_fraction, NULL);
    pw_fixed_constant(e, in, "shift", w->a_fraction, 0, "fraction bits of sigma, omega and g");
    pw_fixed_constant(e, in, "c_shift", w->c_fraction, 0, "fraction bits of c1, c2 and d");
    if (!e->r->truncate && w->a_fraction > 0)
        pw_fixed_constant(e, in, "half", INT64_C(1) << (w->a_fraction - 1), 0, "half a step of u");
    if (!e->r->truncate && w->c_fraction > 0)
        pw_fixed_constant(e, in, "c_half", INT64_C(1) << (w->c_fraction - 1), 0,
                          "half a step of the output");
    steady_constants(e, w, in);
}

static double reach(const pw_emission *e, int64_t a, int64_t b, int64_t c, int fraction)
{
    double words = fabs((double)a) + fabs((double)b) + fabs((double)c);
    return ldexp(words, e->bits - 1) + ldexp(1, fraction - 1);
}

/* "const int64_t NAME = (SUM + half) >> shift;" */
static void rounded(const pw_emission *e, pw_code *body, const char *name, const char *sum,
                    const char *half, const char *by, int fraction, double most)
{
    const char *text = *sum ? sum : "0";
    if (!e->r->truncate && fraction > 0) text = pw_arena_print(e->arena, "%s + %s", text, half);
    if (fraction > 0) text = pw_arena_print(e->arena, "(%s) >> %s", text, by);
    pw_put_with(body, pw_arena_print(e->arena, "const int64_t %s = %s;", name, text),
                pw_reach_note(e, most));
}

static void output_sum(const pw_emission *e, const pw_words *w, pw_code *body, const char *u1,
                       const char *u2)
{
    const char *y = pw_fixed_term(e, "", '+', PW_ACC_64, w->c1, "c1", u1);
    y = pw_fixed_term(e, y, '+', PW_ACC_64, w->c2, "c2", u2);
    y = pw_fixed_term(e, y, '+', PW_ACC_64, w->d, "d", "x");
    rounded(e, body, "v", y, "$_c_half_#", "$_c_shift_#", w->c_fraction,
            reach(e, w->c1, w->c2, w->d, w->c_fraction));
}

void pw_coupled_step(const pw_emission *e, const pw_words *w, pw_code *body)
{
    const char *v1 = pw_fixed_term(e, "", '+', PW_ACC_64, w->sigma, "sigma", "u1");
    v1 = pw_fixed_term(e, v1, '-', PW_ACC_64, w->omega, "omega", "u2");
    v1 = pw_fixed_term(e, v1, '+', PW_ACC_64, w->g, "g", "x");
    const char *v2 = pw_fixed_term(e, "", '+', PW_ACC_64, w->omega, "omega", "u1");
    v2 = pw_fixed_term(e, v2, '+', PW_ACC_64, w->sigma, "sigma", "u2");
    pw_put(body, "const @ u1 = s->u1_#, u2 = s->u2_#;");
    if (!w->sigma && !w->omega) pw_put(body, "(void)u1, (void)u2;");
    if (!w->g && !w->d) pw_put(body, "(void)x;");
    output_sum(e, w, body, "u1", "u2");
    rounded(e, body, "v1", v1, "$_half_#", "$_shift_#", w->a_fraction,
            reach(e, w->sigma, w->omega, w->g, w->a_fraction));
    rounded(e, body, "v2", v2, "$_half_#", "$_shift_#", w->a_fraction,
            reach(e, w->sigma, w->omega, 0, w->a_fraction));
    pw_fixed_into_word(e, w, body, "y", "v", "output");
    pw_fixed_into_word(e, w, body, "new1", "v1", "u1");
    pw_fixed_into_word(e, w, body, "new2", "v2", "u2");
    pw_put(body, "s->u1_# = new1;");
    pw_put(body, "s->u2_# = new2;");
    pw_put(body, "return y;");
}

/* (high 2^31 + low) x, rounded: the low 31 bits of the product cannot reach the rounding. */
static const char *steady_product(const pw_emission *e, int64_t gain, const char *high,
                                  const char *low)
{
    const char *sum = pw_fixed_term(e, "", '+', PW_ACC_64, gain >> 31, high, "x");
    if (gain & INT32_MAX)
        sum = pw_arena_print(e->arena, "%s%s(((int64_t)$_%s_# * x) >> 31)", sum, *sum ? " + " : "",
                             low);
    return *sum ? sum : "0";
}

void pw_coupled_settle(const pw_emission *e, const pw_words *w, pw_code *body)
{
    int64_t gain[2];
    int fraction;
    pw_coupled_steady(w, gain, &fraction);
    const char *p1 = steady_product(e, gain[0], "u1_high", "u1_low");
    const char *p2 = steady_product(e, gain[1], "u2_high", "u2_low");
    pw_put(body, "const int64_t half = (int64_t)1 << ($_steady_shift_# - 1);");
    pw_put(body, pw_arena_print(e->arena, "const int64_t p1 = %s;", p1));
    pw_put(body, pw_arena_print(e->arena, "const int64_t p2 = %s;", p2));
    pw_put(body, "const @ u1 = $_clamp((p1 + half) >> $_steady_shift_#);");
    pw_put(body, "const @ u2 = $_clamp((p2 + half) >> $_steady_shift_#);");
    output_sum(e, w, body, "u1", "u2");
    pw_put(body, "s->u1_# = u1;");
    pw_put(body, "s->u2_# = u2;");
    pw_put(body, "return $_clamp(v);");
}
