/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Portable floating-point kernels with the words in the code. Parentheses and order are part of the
 * arithmetic: no term is left out or moved. */
#include "emit/emission.h"

static bool is_float(const pw_emission *e, const pw_words *w)
{
    (void)w;
    return !e->fixed;
}

static bool is_gain(const pw_emission *e, const pw_words *w)
{
    return is_float(e, w) && w->order == 0;
}
static bool is_direct(const pw_emission *e, const pw_words *w)
{
    return is_float(e, w) && w->structure == PW_DIRECT_1;
}

static void constants(const pw_emission *e, const pw_words *w, pw_code *in)
{
    const bool second = w->order == 2, first = w->order >= 1;
    const struct {
        bool used;
        const char *name;
        double value;
    } word[] = {
        {true, "b0", w->fb[0]},  {first, "b1", w->fb[1]},  {second, "b2", w->fb[2]},
        {first, "a1", w->fa[1]}, {second, "a2", w->fa[2]},
    };
    for (int k = 0; k < 5; k++) {
        const char *declaration = pw_arena_print(e->arena, "static const @ $_%s_#", word[k].name);
        if (word[k].used)
            pw_constant(in, declaration, pw_real(word[k].value, e->single),
                        pw_arena_print(e->arena, "%s of section %d", word[k].name, in->section));
    }
}

static const char *transposed_member(const pw_emission *e, const pw_words *w, int k)
{
    static const char *const name[] = {"s1_#", "s2_#"};
    (void)e;
    return k < w->order ? name[k] : NULL;
}

static void transposed_fields(const pw_emission *e, const pw_words *w, pw_code *in)
{
    pw_put_with(in, "@ s1_#;", pw_arena_print(e->arena, "delays of section %d", in->section));
    if (w->order == 2) pw_put(in, "@ s2_#;");
}

static void transposed_step(const pw_emission *e, const pw_words *w, pw_code *body)
{
    (void)e;
    pw_put(body, "const @ y = s->s1_# + $_b0_# * x;");
    if (w->order == 2) {
        pw_put(body, "s->s1_# = (s->s2_# + $_b1_# * x) - $_a1_# * y;");
        pw_put(body, "s->s2_# = $_b2_# * x - $_a2_# * y;");
    } else {
        pw_put(body, "s->s1_# = $_b1_# * x - $_a1_# * y;");
    }
    pw_put(body, "return y;");
}

/* y for a constant x, by the sums that the simulation takes. */
static void rest(const pw_words *w, pw_code *body)
{
    pw_put(body, w->order == 2 ? "const @ above = $_b0_# + $_b1_# + $_b2_#;"
                               : "const @ above = $_b0_# + $_b1_#;");
    pw_put(body,
           w->order == 2 ? "const @ below = 1 + $_a1_# + $_a2_#;" : "const @ below = 1 + $_a1_#;");
    pw_put(body, "const @ y = above / below * x;");
}

static void transposed_settle(const pw_emission *e, const pw_words *w, pw_code *body)
{
    (void)e;
    rest(w, body);
    pw_put(body, "s->s1_# = y - $_b0_# * x;");
    if (w->order == 2) pw_put(body, "s->s2_# = $_b2_# * x - $_a2_# * y;");
    pw_put(body, "return y;");
}

static const char *direct_member(const pw_emission *e, const pw_words *w, int k)
{
    static const char *const name[] = {"x1_#", "x2_#", "y1_#", "y2_#"};
    (void)e;
    return k < 4 && (w->order == 2 || k % 2 == 0) ? name[k] : NULL;
}

static void direct_fields(const pw_emission *e, const pw_words *w, pw_code *in)
{
    for (int k = 0; k < 4; k++) {
        const char *member = direct_member(e, w, k);
        if (!member) continue;
        pw_put_with(in, pw_arena_print(e->arena, "@ %s;", member),
                    pw_arena_print(e->arena, "%s of section %d, %s ago", k < 2 ? "input" : "output",
                                   in->section, k % 2 ? "two samples" : "a sample"));
    }
}

static void direct_step(const pw_emission *e, const pw_words *w, pw_code *body)
{
    (void)e;
    if (w->order == 2) {
        pw_put(body, "const @ y = $_b0_# * x + $_b1_# * s->x1_# + $_b2_# * s->x2_# - $_a1_# * "
                     "s->y1_# - $_a2_# * s->y2_#;");
        pw_put(body, "s->x2_# = s->x1_#;");
        pw_put(body, "s->y2_# = s->y1_#;");
    } else {
        pw_put(body, "const @ y = $_b0_# * x + $_b1_# * s->x1_# - $_a1_# * s->y1_#;");
    }
    pw_put(body, "s->x1_# = x;");
    pw_put(body, "s->y1_# = y;");
    pw_put(body, "return y;");
}

static void direct_settle(const pw_emission *e, const pw_words *w, pw_code *body)
{
    (void)e;
    rest(w, body);
    pw_put(body, "s->x1_# = x;");
    pw_put(body, "s->y1_# = y;");
    if (w->order == 2) {
        pw_put(body, "s->x2_# = x;");
        pw_put(body, "s->y2_# = y;");
    }
    pw_put(body, "return y;");
}

static void gain_fields(const pw_emission *e, const pw_words *w, pw_code *in)
{
    (void)e, (void)w, (void)in;
}
static const char *gain_member(const pw_emission *e, const pw_words *w, int k)
{
    (void)e, (void)w, (void)k;
    return NULL;
}

static void gain_step(const pw_emission *e, const pw_words *w, pw_code *body)
{
    (void)e, (void)w;
    pw_put(body, "(void)s;");
    pw_put(body, "return $_b0_# * x;");
}

const pw_form pw_forms_float[] = {
    {.name = "gain",
     .fits = is_gain,
     .fields = gain_fields,
     .constants = constants,
     .step = gain_step,
     .settle = gain_step,
     .member = gain_member},
    {.name = "direct form 1",
     .fits = is_direct,
     .fields = direct_fields,
     .constants = constants,
     .step = direct_step,
     .settle = direct_settle,
     .member = direct_member},
    {.name = "direct form 2, transposed",
     .fits = is_float,
     .fields = transposed_fields,
     .constants = constants,
     .step = transposed_step,
     .settle = transposed_settle,
     .member = transposed_member},
    {.name = NULL},
};
