/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the fixed-point kernels say alike. */
#include "emit/fixed.h"

#include <math.h>

const char *pw_accumulator_type(pw_accumulator acc)
{
    return acc == PW_ACC_64 ? "int64_t" : acc == PW_ACC_32 ? "int32_t" : "uint32_t";
}

static const char *smallest_type(int64_t value)
{
    if (value >= INT16_MIN && value <= INT16_MAX) return "int16_t";
    return value >= INT32_MIN && value <= INT32_MAX ? "int32_t" : "int64_t";
}

void pw_fixed_constant(const pw_emission *e, pw_code *in, const char *name, int64_t value,
                       int fraction, const char *note)
{
    if (value == 0) return;
    if (!note) note = pw_word_note(e, name, ldexp((double)value, -fraction));
    pw_constant(in, pw_arena_print(e->arena, "static const %s $_%s_#", smallest_type(value), name),
                pw_word(value), note);
}

const char *pw_fixed_term(const pw_emission *e, const char *sum, char sign, pw_accumulator acc,
                          int64_t value, const char *name, const char *factor)
{
    const char *lead = *sum ? (sign == '-' ? " - " : " + ") : (sign == '-' ? "-" : "");
    if (value == 0) return sum;
    if (acc == PW_ACC_MODULO)
        return pw_arena_print(e->arena, "%s%s(uint32_t)((int32_t)$_%s_# * %s)", sum, lead, name,
                              factor);
    return pw_arena_print(e->arena, "%s%s(%s)$_%s_# * %s", sum, lead, pw_accumulator_type(acc),
                          name, factor);
}

static void counting_helper(const pw_emission *e, pw_code *file)
{
    const char *comment = e->r->wrap ? "v modulo the word; values outside are counted."
                                     : "v clamped to the word; values outside are counted.";
    if (!pw_once(file, "into_word")) return;
    pw_blank(file);
    pw_comment_line(file, comment);
    pw_code *f = pw_function(file, "static @ $_into_word($_state *s, int64_t v)");
    pw_put(f, pw_arena_print(e->arena, "if (v >= INT%d_MIN && v <= INT%d_MAX) return (@)v;",
                             e->bits, e->bits));
    pw_put(f, "s->clipped++;");
    if (!e->r->wrap) {
        pw_put(f,
               pw_arena_print(e->arena, "return v < 0 ? INT%d_MIN : INT%d_MAX;", e->bits, e->bits));
        return;
    }
    const char *half = e->bits == 16 ? "0x8000" : "0x80000000",
               *mask = e->bits == 16 ? "0xffff" : "0xffffffff";
    pw_put(f, pw_arena_print(e->arena, "v = (int64_t)(((uint64_t)v + %su) & %su);", half, mask));
    pw_put(f, pw_arena_print(e->arena, "return (@)(v - (int64_t)%s);", half));
}

static void clamp_helper(const pw_emission *e, pw_code *file)
{
    if (!pw_once(file, "clamp")) return;
    pw_blank(file);
    pw_code *f = pw_function(file, "static @ $_clamp(int64_t v)");
    pw_put(f, pw_arena_print(e->arena, "if (v > INT%d_MAX) return INT%d_MAX;", e->bits, e->bits));
    pw_put(f,
           pw_arena_print(e->arena, "return v < INT%d_MIN ? INT%d_MIN : (@)v;", e->bits, e->bits));
}

static void ratio_helper(const pw_emission *e, pw_code *file)
{
    const char *comment = e->r->truncate ? "The floor of p / d, for d > 0."
                                         : "p / d to the nearest, half up, for d > 0.";
    if (!pw_once(file, "ratio")) return;
    pw_blank(file);
    pw_comment_line(file, comment);
    pw_code *f = pw_function(file, "static int64_t $_ratio(int64_t p, int64_t d)");
    if (!e->r->truncate) pw_put(f, "p += d >> 1;");
    pw_put(f, "return p % d < 0 ? p / d - 1 : p / d;");
}

void pw_fixed_helpers(const pw_emission *e, const pw_words *w, pw_code *file)
{
    if (!w->cannot_clip) counting_helper(e, file);
    bool direct = w->structure != PW_COUPLED && w->order > 0;
    if (e->integrates || (direct && pw_direct_gain_sum(w) == 0)) return; /* settle needs none */
    clamp_helper(e, file);
    if (direct) ratio_helper(e, file);
}

void pw_fixed_into_word(const pw_emission *e, const pw_words *w, pw_code *body, const char *name,
                        const char *v, const char *node)
{
    const char *note = pw_bound_note(e, body->section, node);
    const char *line = w->cannot_clip
                           ? pw_arena_print(e->arena, "const @ %s = (@)%s;", name, v)
                           : pw_arena_print(e->arena, "const @ %s = $_into_word(s, %s);", name, v);
    pw_put_with(body, line, *note ? note : NULL);
}
