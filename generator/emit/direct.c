/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Portable kernels with the words in the code: gain, direct-1, direct-1-shaped.
 *
 * Terms whose word is 0 are left out, and with them the state that only they would read. The
 * accumulator is the narrowest that is proved to be wide enough. */
#include <math.h>

#include "emit/fixed.h"
#include "simulate/simulate.h"

enum { X1, X2, Y1, Y2, E1, E2, MEMBERS };

/* Where a section keeps its words: in members of its own, or, where kernels of the part take the
 * blocks, in the array of four that those read. */
static const char *const own[MEMBERS] = {"s->x1_#", "s->x2_#", "s->y1_#",
                                         "s->y2_#", "s->e1_#", "s->e2_#"};
static const char *const shared[MEMBERS] = {"s->d[`][0]", "s->d[`][1]", "s->d[`][2]",
                                            "s->d[`][3]", NULL,         NULL};

static const char *factor(const pw_emission *e, int k)
{
    return e->part_kernels ? shared[k] : own[k];
}

static int align_of(const pw_words *w) { return w->b_fraction - w->a_fraction; }

static bool is_shaped(const pw_words *w)
{
    return w->structure == PW_DIRECT_1_SHAPED && (w->k1 || w->k2) && w->a_fraction > 0;
}

pw_accumulator pw_direct_accumulator(const pw_emission *e, const pw_words *w)
{
    if (pw_direct_reach(e, w) < ldexp(1, 31)) return PW_ACC_32;
    bool products_fit = e->bits == 16 && e->r->coefficient_bits == 16;
    if (products_fit && w->fits_32 && align_of(w) == 0) return PW_ACC_MODULO;
    return PW_ACC_64;
}

const char *pw_direct_member(const pw_emission *e, const pw_words *w, int k)
{
    const bool kept[MEMBERS] = {
        w->b[1] || w->b[2],    w->b[2], w->a[1] || w->a[2], w->a[2], is_shaped(w),
        is_shaped(w) && w->k2,
    };
    return k < MEMBERS && kept[k] ? factor(e, k) + 3 : NULL;
}

void pw_direct_fields(const pw_emission *e, const pw_words *w, pw_code *in)
{
    static const char *const note[MEMBERS] = {
        "input of section %d, a sample ago",
        "two samples ago",
        "output of section %d, a sample ago",
        "two samples ago",
        "what rounding left, in units of the accumulator",
        "a sample before",
    };
    if (e->part_kernels) {
        if (in->section == 1)
            pw_put_with(
                in, pw_arena_print(e->arena, "@ d[%d][4];", e->r->count),
                "x1 x2 y1 y2 of each section: its input and output, one and two samples ago");
        return;
    }
    for (int k = 0; k < MEMBERS; k++) {
        const char *member = pw_direct_member(e, w, k);
        if (!member) continue;
        const char *line = pw_arena_print(e->arena, "%s %s;", k < E1 ? "@" : "int32_t", member);
        const char *meaning = k == X1   ? pw_arena_print(e->arena, note[X1], in->section)
                              : k == Y1 ? pw_arena_print(e->arena, note[Y1], in->section)
                                        : note[k];
        pw_put_with(in, line, meaning);
    }
}

int64_t pw_direct_gain_sum(const pw_words *w) { return (int64_t)w->b[0] + w->b[1] + w->b[2]; }

static int64_t rest_of(const pw_words *w)
{
    return (INT64_C(1) << w->a_fraction) + w->a[1] + w->a[2];
}

static void settle_constants(const pw_emission *e, const pw_words *w, pw_code *in)
{
    if (e->integrates || w->order == 0 || pw_direct_gain_sum(w) == 0) return;
    pw_fixed_constant(e, in, "b", pw_direct_gain_sum(w), 0, "b0 + b1 + b2, for a constant input");
    pw_fixed_constant(e, in, "rest", rest_of(w), 0, "2^shift + a1 + a2, for a constant output");
}

/* Beside a sum modulo 2^32 it has the sum's type: gcc warns of a short constant that is cast there. */
static void half_constant(const pw_emission *e, const pw_words *w, pw_code *in)
{
    int64_t half = INT64_C(1) << (w->a_fraction - 1);
    const char *note = "half a step of the output";
    if (pw_direct_accumulator(e, w) != PW_ACC_MODULO) pw_fixed_constant(e, in, "half", half, 0, note);
    else pw_constant(in, "static const uint32_t $_half_#", pw_word(half), note);
}

void pw_direct_constants(const pw_emission *e, const pw_words *w, pw_code *in)
{
    static const char *const b_name[] = {"b0", "b1", "b2"}, *const a_name[] = {"", "a1", "a2"};
    int align = align_of(w), shift = w->a_fraction;
    for (int k = 0; k < 3; k++) pw_fixed_constant(e, in, b_name[k], w->b[k], w->b_fraction, NULL);
    for (int k = 1; k < 3; k++) pw_fixed_constant(e, in, a_name[k], w->a[k], w->a_fraction, NULL);
    if (is_shaped(w)) {
        pw_fixed_constant(e, in, "k1", w->k1, 0, "weight of the last rounding error");
        pw_fixed_constant(e, in, "k2", w->k2, 0, "weight of the one before");
    }
    pw_fixed_constant(e, in, "shift", shift, 0, "fraction bits of a and of the accumulator");
    if (align > 0) {
        pw_fixed_constant(e, in, "align", align, 0, "fraction bits that b has more");
        pw_fixed_constant(e, in, "align_half", INT64_C(1) << (align - 1), 0,
                          "half of its last bit");
    }
    if (align < 0)
        pw_fixed_constant(e, in, "align", INT64_C(1) << -align, 0,
                          "2^(fraction bits that b has fewer)");
    if (!e->r->truncate && shift > 0) half_constant(e, w, in);
    settle_constants(e, w, in);
}

/* acc becomes p 2^(a_fraction - b_fraction). */
static void align_statement(const pw_words *w, pw_code *body, const char *name)
{
    const char *right = *name == 'p' ? "p = (p + $_align_half_#) >> $_align_#;"
                                     : "acc = (acc + $_align_half_#) >> $_align_#;";
    if (align_of(w) > 0) pw_put(body, right);
    if (align_of(w) < 0) pw_put(body, *name == 'p' ? "p *= $_align_#;" : "acc *= $_align_#;");
}

/* The products of b, aligned, less those of a, plus the errors fed back: in acc. */
static void accumulate(const pw_emission *e, const pw_words *w, pw_accumulator acc, pw_code *body)
{
    const char *p = "", *rest = "acc";
    p = pw_fixed_term(e, p, '+', acc, w->b[0], "b0", "x");
    p = pw_fixed_term(e, p, '+', acc, w->b[1], "b1", factor(e, X1));
    p = pw_fixed_term(e, p, '+', acc, w->b[2], "b2", factor(e, X2));
    pw_put_with(
        body, pw_arena_print(e->arena, "%s acc = %s;", pw_accumulator_type(acc), *p ? p : "0"),
        acc == PW_ACC_MODULO ? "modulo 2^32: its last value fits 32 bits, whatever the samples"
                             : pw_reach_note(e, pw_direct_reach(e, w)));
    align_statement(w, body, "acc");
    rest = pw_fixed_term(e, rest, '-', acc, w->a[1], "a1", factor(e, Y1));
    rest = pw_fixed_term(e, rest, '-', acc, w->a[2], "a2", factor(e, Y2));
    if (is_shaped(w)) {
        rest = pw_fixed_term(e, rest, '+', acc, w->k1, "k1", factor(e, E1));
        rest = pw_fixed_term(e, rest, '+', acc, w->k2, "k2", factor(e, E2));
    }
    const char *note = pw_bound_note(e, body->section, "accumulator");
    if (rest[3])
        pw_put_with(body, pw_arena_print(e->arena, "acc = %s;", rest), *note ? note : NULL);
}

static void round_off(const pw_emission *e, const pw_words *w, pw_accumulator acc, pw_code *body)
{
    const char *wide = acc == PW_ACC_64 ? "int64_t" : "int32_t";
    const char *sum = e->r->truncate || w->a_fraction == 0 ? "acc" : "(acc + $_half_#)";
    const char *cast = acc == PW_ACC_MODULO ? "(int32_t)" : "";
    const char *by = w->a_fraction > 0 ? " >> $_shift_#" : "";
    pw_put(body, pw_arena_print(e->arena, "const %s v = %s%s%s;", wide, cast, sum, by));
}

/* "s->TO = FROM;" where the section keeps it. */
static void keep(const pw_emission *e, const pw_words *w, pw_code *body, int to, const char *from)
{
    if (pw_direct_member(e, w, to))
        pw_put(body, pw_arena_print(e->arena, "%s = %s;", factor(e, to), from));
}

static void remember(const pw_emission *e, const pw_words *w, pw_accumulator acc, pw_code *body)
{
    keep(e, w, body, X2, factor(e, X1));
    keep(e, w, body, X1, "x");
    keep(e, w, body, Y2, factor(e, Y1));
    keep(e, w, body, Y1, "y");
    if (!is_shaped(w)) return;
    keep(e, w, body, E2, factor(e, E1));
    keep(e, w, body, E1,
         acc == PW_ACC_64 ? "y == v ? (int32_t)(acc - v * ((int64_t)1 << $_shift_#)) : 0"
         : acc == PW_ACC_32
             ? "y == v ? acc - v * ((int32_t)1 << $_shift_#) : 0"
             : "y == v ? (int32_t)(acc - (uint32_t)v * ((uint32_t)1 << $_shift_#)) : 0");
}

/* What a function of a section without state, or without input, leaves unused. */
static void spare_parameters(const pw_emission *e, const pw_words *w, pw_code *body)
{
    bool state = false;
    for (int k = 0; k < MEMBERS; k++) state = state || pw_direct_member(e, w, k);
    if (!state) pw_put(body, "(void)s;");
    if (!w->b[0] && !w->b[1] && !w->b[2]) pw_put(body, "(void)x;");
}

static void direct_step(const pw_emission *e, const pw_words *w, pw_code *body)
{
    spare_parameters(e, w, body);
    pw_accumulator acc = pw_direct_accumulator(e, w);
    accumulate(e, w, acc, body);
    round_off(e, w, acc, body);
    pw_fixed_into_word(e, w, body, "y", "v", "output");
    remember(e, w, acc, body);
    pw_put(body, "return y;");
}

/* A gain has no state: its steady output is one step's, uncounted. */
static void gain_settle(const pw_emission *e, const pw_words *w, pw_code *body)
{
    spare_parameters(e, w, body);
    pw_accumulator acc = pw_direct_accumulator(e, w);
    accumulate(e, w, acc, body);
    round_off(e, w, acc, body);
    pw_put(body, "return $_clamp(v);");
}

void pw_direct_settle(const pw_emission *e, const pw_words *w, pw_code *body)
{
    if (w->order == 0) {
        gain_settle(e, w, body);
        return;
    }
    spare_parameters(e, w, body);
    if (pw_direct_gain_sum(w) == 0) {
        pw_put(body, "const @ y = 0;");
    } else {
        pw_put(body, "int64_t p = (int64_t)$_b_# * x;");
        align_statement(w, body, "p");
        pw_put(body, "const @ y = $_clamp($_ratio(p, $_rest_#));");
    }
    keep(e, w, body, X1, "x");
    keep(e, w, body, X2, "x");
    keep(e, w, body, Y1, "y");
    keep(e, w, body, Y2, "y");
    pw_put(body, "return y;");
}

/* ---- the table ---- */

static bool gain_fits(const pw_emission *e, const pw_words *w)
{
    return e->fixed && w->order == 0 && w->structure != PW_COUPLED;
}

static bool direct_fits(const pw_emission *e, const pw_words *w)
{
    return e->fixed && (w->structure == PW_DIRECT_1 || w->structure == PW_DIRECT_1_SHAPED);
}

static bool coupled_fits(const pw_emission *e, const pw_words *w)
{
    return e->fixed && w->structure == PW_COUPLED;
}

const pw_form pw_forms_fixed[] = {
    {.name = "gain",
     .fits = gain_fits,
     .fields = pw_direct_fields,
     .constants = pw_direct_constants,
     .helpers = pw_fixed_helpers,
     .step = direct_step,
     .settle = pw_direct_settle,
     .member = pw_direct_member},
    {.name = "direct form 1",
     .fits = direct_fits,
     .fields = pw_direct_fields,
     .constants = pw_direct_constants,
     .helpers = pw_fixed_helpers,
     .step = direct_step,
     .settle = pw_direct_settle,
     .member = pw_direct_member},
    {.name = "coupled form",
     .fits = coupled_fits,
     .fields = pw_coupled_fields,
     .constants = pw_coupled_constants,
     .helpers = pw_fixed_helpers,
     .step = pw_coupled_step,
     .settle = pw_coupled_settle,
     .member = pw_coupled_member},
    {.name = NULL},
};
