/* SPDX-License-Identifier: GPL-3.0-or-later */
/* code: runtime. A section is a table of words and a call of a kernel of runtime/. */
#include "emit/emission.h"
#include "simulate/simulate.h"

static bool is_gain(const pw_emission *e, const pw_words *w)
{
    (void)e;
    return w->order == 0 && w->structure != PW_COUPLED;
}
static bool fits_runtime(const pw_emission *e, const pw_words *w)
{
    (void)w;
    return !e->standalone;
}
static bool fits_gain(const pw_emission *e, const pw_words *w)
{
    return !e->standalone && is_gain(e, w);
}

/* The kernel's name in the runtime: "direct", "coupled", "second_transposed". */
static const char *kernel_name(const pw_emission *e, const pw_words *w)
{
    if (is_gain(e, w)) return "gain";
    if (e->fixed) {
        if (w->structure == PW_COUPLED) return "coupled";
        return w->structure == PW_DIRECT_1_SHAPED ? "shaped" : "direct";
    }
    if (w->structure == PW_DIRECT_1) return w->order == 1 ? "first_direct" : "second_direct";
    return w->order == 1 ? "first_transposed" : "second_transposed";
}

static void fields(const pw_emission *e, const pw_words *w, pw_code *in)
{
    const char *state = e->fixed                      ? kernel_name(e, w)
                        : w->structure == PW_DIRECT_1 ? "direct"
                                                      : "transposed";
    if (is_gain(e, w)) return;
    pw_put(in, pw_arena_print(e->arena, "pw_%s_%s_state section_#;", e->family, state));
}

static const char *member(const pw_emission *e, const pw_words *w, int k)
{
    static const char *const direct[] = {"section_#.x1", "section_#.x2", "section_#.y1",
                                         "section_#.y2"};
    static const char *const shaped[] = {"section_#.direct.x1", "section_#.direct.x2",
                                         "section_#.direct.y1", "section_#.direct.y2",
                                         "section_#.e1",        "section_#.e2"};
    static const char *const coupled[] = {"section_#.u1", "section_#.u2"};
    static const char *const transposed[] = {"section_#.s1", "section_#.s2"};
    (void)e;
    switch (w->structure) {
    case PW_COUPLED: return k < 2 ? coupled[k] : NULL;
    case PW_TRANSPOSED_2: return k < 2 && w->order > 0 ? transposed[k] : NULL;
    case PW_DIRECT_1_SHAPED: return k < 6 && w->order > 0 ? shaped[k] : NULL;
    default: return k < 4 && w->order > 0 ? direct[k] : NULL;
    }
}

static void word(const pw_emission *e, pw_code *table, const char *name, int64_t value,
                 int fraction)
{
    double real = (double)value / (double)(INT64_C(1) << fraction);
    pw_entry(table, pw_word(value), pw_word_note(e, name, real));
}

static void flags(const pw_emission *e, pw_code *table)
{
    bool both = e->r->truncate && e->r->wrap;
    pw_put_with(table,
                both             ? "PW_TRUNCATE | PW_WRAP"
                : e->r->truncate ? "PW_TRUNCATE"
                : e->r->wrap     ? "PW_WRAP"
                                 : "0",
                e->r->truncate ? "truncates" : "rounds to nearest");
}

static void fractions(pw_code *table, int b, int a)
{
    pw_entry(table, pw_word(b), "fraction bits of b");
    pw_entry(table, pw_word(a), "fraction bits of a and of the accumulator");
}

static void direct_table(const pw_emission *e, const pw_words *w, pw_code *in)
{
    pw_code *table = pw_block(in, "static const pw_direct $_words_# =", ";");
    if (w->structure == PW_DIRECT_1_SHAPED) {
        table->text = "static const pw_shaped $_words_# =";
        pw_code *outer = table;
        table = pw_block(outer, "", ",");
        pw_entry(outer, pw_word(w->k1), "weight of the last rounding error");
        pw_entry(outer, pw_word(w->k2), "weight of the one before");
    }
    word(e, table, "b0", w->b[0], w->b_fraction);
    word(e, table, "b1", w->b[1], w->b_fraction);
    word(e, table, "b2", w->b[2], w->b_fraction);
    word(e, table, "a1", w->a[1], w->a_fraction);
    word(e, table, "a2", w->a[2], w->a_fraction);
    fractions(table, w->b_fraction, w->a_fraction);
    flags(e, table);
}

static void coupled_table(const pw_emission *e, const pw_words *w, pw_code *in)
{
    pw_code *table = pw_block(in, "static const pw_coupled $_words_# =", ";");
    int64_t gain[2] = {0, 0};
    int fraction = 61;
    if (!e->integrates) pw_coupled_steady(w, gain, &fraction);
    word(e, table, "sigma", w->sigma, w->a_fraction);
    word(e, table, "omega", w->omega, w->a_fraction);
    word(e, table, "g", w->g, w->a_fraction);
    word(e, table, "c1", w->c1, w->c_fraction);
    word(e, table, "c2", w->c2, w->c_fraction);
    word(e, table, "d", w->d, w->c_fraction);
    for (int i = 0; i < 2; i++) {
        pw_entry(table, pw_word(gain[i] >> 31),
                 i ? "steady u2 for a constant input, high part"
                   : "steady u1 for a constant input, high part");
        pw_entry(table, pw_word(gain[i] & INT32_MAX), "low part");
    }
    pw_entry(table, pw_word(w->c_fraction), "fraction bits of c1, c2, d");
    pw_entry(table, pw_word(w->a_fraction), "fraction bits of sigma, omega, g");
    pw_entry(table, pw_word(fraction), "fraction bits of the steady gains");
    flags(e, table);
}

static void gain_table(const pw_emission *e, const pw_words *w, pw_code *in)
{
    if (!e->fixed) {
        pw_constant(in, "static const @ $_words_#", pw_real(w->fb[0], e->single), "a gain");
        return;
    }
    pw_code *table = pw_block(in, "static const pw_gain $_words_# =", ";");
    word(e, table, "b", w->b[0], w->b_fraction);
    fractions(table, w->b_fraction, w->a_fraction);
    flags(e, table);
}

static void float_table(const pw_emission *e, const pw_words *w, pw_code *in)
{
    bool second = w->order == 2;
    pw_code *table = pw_block(in,
                              pw_arena_print(e->arena, "static const pw_%s_%s $_words_# =",
                                             e->family, second ? "second" : "first"),
                              ";");
    pw_entry(table, pw_real(w->fb[0], e->single), "b0");
    pw_entry(table, pw_real(w->fb[1], e->single), "b1");
    if (second) pw_entry(table, pw_real(w->fb[2], e->single), "b2");
    pw_entry(table, pw_real(w->fa[1], e->single), "a1");
    if (second) pw_entry(table, pw_real(w->fa[2], e->single), "a2");
}

/* What was proved of the section's nodes, above its table. */
static void bounds(const pw_emission *e, const pw_words *w, pw_code *in)
{
    bool rotates = w->structure == PW_COUPLED;
    const char *const node[] = {"output", rotates ? "u1" : "accumulator", rotates ? "u2" : ""};
    for (int i = 0; i < 3 && e->fixed; i++) {
        const char *note = pw_bound_note(e, in->section, node[i]);
        if (*note) pw_comment_line(in, note);
    }
}

static void constants(const pw_emission *e, const pw_words *w, pw_code *in)
{
    bounds(e, w, in);
    if (is_gain(e, w))
        gain_table(e, w, in);
    else if (!e->fixed)
        float_table(e, w, in);
    else if (w->structure == PW_COUPLED)
        coupled_table(e, w, in);
    else
        direct_table(e, w, in);
}

/* What a kernel is given before in and out: "&$_words_#, &s->section_#". */
static const char *arguments(const pw_emission *e, const pw_words *w)
{
    if (is_gain(e, w)) return e->fixed ? "&$_words_#" : "$_words_#";
    return "&$_words_#, &s->section_#";
}

static void block(const pw_emission *e, const pw_words *w, const char *in, pw_code *body)
{
    pw_put(body,
           pw_arena_print(e->arena, "%spw_%s_%s(%s, %s, out, n);", e->fixed ? "s->clipped += " : "",
                          e->family, kernel_name(e, w), arguments(e, w), in));
}

static void settle(const pw_emission *e, const pw_words *w, pw_code *body)
{
    if (is_gain(e, w)) pw_put(body, "(void)s;");
    if (is_gain(e, w) && !e->fixed)
        pw_put(body, "return $_words_# * x;");
    else
        pw_put(body, pw_arena_print(e->arena, "return pw_%s_%s_settle(%s, x);", e->family,
                                    kernel_name(e, w), arguments(e, w)));
}

const pw_form pw_forms_runtime[] = {
    {.name = "gain",
     .fits = fits_gain,
     .fields = fields,
     .constants = constants,
     .block = block,
     .settle = settle,
     .member = member},
    {.name = "runtime",
     .fits = fits_runtime,
     .fields = fields,
     .constants = constants,
     .block = block,
     .settle = settle,
     .member = member},
    {.name = NULL},
};
