/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The float half of cascade.h. Four sections have 20 words and 8 delays, which with three values on
 * their way fill the 32 registers of a floating-point unit: so four sections are one pass. Four
 * samples a turn pay for the loop. The operations and their order are those of the step. */
#include "emit/cascade.h"

#define GROUP 4
#define TURN 4

bool pw_cascade_floats_fit(const pw_cascade *cascade)
{
    const pw_realisation *r = cascade->realisation;
    if (r->sample != PW_FLOAT32 || !cascade->target->has_float || cascade->target->instructions == PW_ANY) return false;
    for (int i = 0; i < r->count; i++)
        if (r->section[i].structure != PW_TRANSPOSED_2 || r->section[i].order < 1) return false;
    return r->count > 0;
}

static void locals(const pw_words *w, pw_code *in)
{
    pw_put(in, "const @ b0_# = $_b0_#, b1_# = $_b1_#, a1_# = $_a1_#;");
    if (w->order == 2) pw_put(in, "const @ b2_# = $_b2_#, a2_# = $_a2_#;");
    pw_put(in, w->order == 2 ? "@ s1_# = s->s1_#, s2_# = s->s2_#;" : "@ s1_# = s->s1_#;");
}

/* x and y take turns: the output of a section is the input of the next. */
static void sample(const pw_realisation *r, int from, int to, int at, const char *in, pw_code *loop)
{
    pw_arena *arena = loop->arena;
    pw_put(loop, pw_arena_print(arena, "x = %s[i + %d];", in, at));
    for (int i = from; i < to; i++) {
        pw_code *g = pw_section_group(loop, i + 1);
        const char *x = (i - from) % 2 ? "y" : "x", *y = (i - from) % 2 ? "x" : "y";
        pw_put(g, pw_arena_print(arena, "%s = s1_# + b0_# * %s;", y, x));
        if (r->section[i].order == 2) {
            pw_put(g, pw_arena_print(arena, "s1_# = (s2_# + b1_# * %s) - a1_# * %s;", x, y));
            pw_put(g, pw_arena_print(arena, "s2_# = b2_# * %s - a2_# * %s;", x, y));
        } else pw_put(g, pw_arena_print(arena, "s1_# = b1_# * %s - a1_# * %s;", x, y));
    }
    pw_put(loop, pw_arena_print(arena, "out[i + %d] = %s;", at, (to - from) % 2 ? "y" : "x"));
}

static void group(const pw_realisation *r, int from, int to, pw_code *f)
{
    pw_code *block = pw_block(f, "", "");
    for (int i = from; i < to; i++) locals(&r->section[i], pw_section_group(block, i + 1));
    pw_put(block, "@ x, y;");
    pw_code *loop = pw_block(block, "for (i = 0; i < whole; i += 4)", "");
    for (int k = 0; k < TURN; k++) sample(r, from, to, k, from ? "out" : "in", loop);
    for (int i = from; i < to; i++)
        pw_put(pw_section_group(block, i + 1), r->section[i].order == 2 ? "s->s1_# = s1_#, s->s2_# = s2_#;" : "s->s1_# = s1_#;");
}

void pw_cascade_floats(const pw_cascade *cascade, pw_code *file)
{
    const pw_realisation *r = cascade->realisation;
    pw_blank(file);
    pw_comment_line(file, "Four sections at a time over the whole block, words and delays in registers.");
    pw_code *f = pw_function(file, "void $_block($_state *s, const @ *in, @ *out, size_t n)");
    pw_put(f, "const size_t whole = n - n % 4;");
    pw_put(f, "size_t i;");
    for (int from = 0; from < r->count; from += GROUP)
        group(r, from, from + GROUP < r->count ? from + GROUP : r->count, f);
    pw_put(f, "for (i = whole; i < n; i++) out[i] = $_cascade(s, in[i]);");
}
