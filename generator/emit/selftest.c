/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The vectors as C arrays and the function that runs them. Each signal goes through step and, cut
 * into blocks of changing length, through block; both must give the expected samples. */
#include <ctype.h>
#include <math.h>

#include "emit/emission.h"
#include "emit/signals.h"
#include "emit/vectors.h"

typedef struct pw_selftest {
    pw_emission e;
    pw_vector vector[PW_SIGNALS];
    int n;
    double shift, tolerance; /* floats: what contraction does, what is accepted */
    const char *capitals; /* the stage's name in capitals */
} pw_selftest;

static const char *capitals_of(const pw_emission *e)
{
    char *name = pw_arena_copy(e->arena, e->stage);
    for (char *c = name; *c; c++) *c = (char)toupper((unsigned char)*c);
    return name;
}

/* "full_scale_square" */
static const char *array_name(const pw_emission *e, pw_signal signal)
{
    char *name = pw_arena_copy(e->arena, pw_signal_word(signal));
    for (char *c = name; *c; c++)
        if (*c == '-') *c = '_';
    return name;
}

static void arrays(const pw_selftest *t, pw_code *source)
{
    for (int i = 0; i < t->n; i++) {
        const pw_vector *v = &t->vector[i];
        const char *name = array_name(&t->e, v->signal);
        pw_blank(source);
        for (int expected = 0; expected < 2; expected++) {
            const char *head = pw_arena_print(t->e.arena, "static const @ $_%s_%s[%ld]", name,
                                              expected ? "expected" : "input", v->n);
            if (t->e.fixed)
                pw_array_words(source, head, expected ? v->out_words : v->in_words, v->n);
            else
                pw_array_reals(source, head, expected ? v->out_reals : v->in_reals, v->n,
                               t->e.single);
        }
    }
}

/* Sets the state that the silence starts from; what is not named stays 0. */
static void start_function(const pw_selftest *t, pw_code *source)
{
    const pw_realisation *r = t->e.r;
    pw_blank(source);
    pw_comment_line(
        source,
        "The state that the silence starts from: the worst zero-input cycle that was found.");
    pw_code *f = pw_function(source, "static void start_silence($_state *s)");
    for (int k = 0; k < r->count; k++) {
        pw_code *group = pw_section_group(f, k + 1);
        for (int i = 0; i < 6; i++) {
            const char *member = t->e.form[k]->member(&t->e, &r->section[k], i);
            int64_t value = r->limit_cycle.state[k][i];
            if (member && value)
                pw_assign(group, pw_arena_print(t->e.arena, "s->%s", member), pw_word(value));
        }
    }
    if (!f->first) pw_put(f, "(void)s;");
}

static void check_function(pw_code *source)
{
    pw_blank(source);
    pw_comment_line(source, "1 + the index of the first sample at which step or block differs, or "
                            "0. Both states start alike.");
    pw_code *f = pw_function(
        source, "static long check($_state *by_step, const @ *input, const @ *expected, long n)");
    pw_put(f, "$_state by_block = *by_step;");
    pw_put(f, "@ out[16];");
    pw_put(f, "long done = 0, size = 1;");
    pw_code *loop = pw_block(f, "while (done < n)", "");
    pw_put(loop, "long i;");
    pw_put(loop, "if (size > n - done) size = n - done;");
    pw_put(loop, "$_block(&by_block, input + done, out, (size_t)size);");
    pw_code *inner = pw_block(loop, "for (i = 0; i < size; i++)", "");
    pw_put(inner, "const @ y = $_step(by_step, input[done + i]);");
    pw_put(inner, "if (differs(y, expected[done + i]) || differs(out[i], expected[done + i])) "
                  "return 1 + done + i;");
    pw_put(loop, "done += size;");
    pw_put(loop, "size = size % 16 + 1;");
    pw_put(f, "return 0;");
}

static void differs_function(const pw_selftest *t, pw_code *source)
{
    if (!t->e.fixed) {
        pw_directive(source, pw_arena_print(t->e.arena, "#ifndef %s_TOLERANCE", t->capitals));
        pw_constant(source, "static const @ tolerance", pw_real(t->tolerance, t->e.single),
                    "see the header");
        pw_directive(source, "#else");
        pw_put(source, pw_arena_print(t->e.arena, "static const @ tolerance = (@)%s_TOLERANCE;",
                                      t->capitals));
        pw_directive(source, "#endif");
        pw_blank(source);
    }
    pw_code *f = pw_function(source, "static int differs(@ y, @ expected)");
    if (t->e.fixed) {
        pw_put(f, "return y != expected;");
        return;
    }
    pw_put(f, "const @ d = y - expected;");
    pw_put_with(f, "return !(d <= tolerance && -d <= tolerance);", "a NaN differs");
}

static void selftest_function(const pw_selftest *t, pw_code *source)
{
    long base = 0;
    pw_blank(source);
    pw_code *f = pw_function(source, "long $_selftest(void)");
    pw_put(f, "$_state s;");
    pw_put(f, "long bad;");
    for (int i = 0; i < t->n; i++) {
        const pw_vector *v = &t->vector[i];
        const char *name = array_name(&t->e, v->signal);
        pw_put(f, "$_reset(&s);");
        if (v->from_state) pw_put(f, "start_silence(&s);");
        pw_put(f, pw_arena_print(t->e.arena, "bad = check(&s, $_%s_input, $_%s_expected, %ld);",
                                 name, name, v->n));
        pw_put(f, base ? pw_arena_print(t->e.arena, "if (bad) return %ld + bad;", base)
                       : "if (bad) return bad;");
        base += v->n;
    }
    if (!t->n) pw_put(f, "(void)s, (void)bad;");
    pw_put(f, "return 0;");
}

/* As the C prints the tolerance: rounded up, so that the text is never below the bound. */
static double rounded_up(double value, bool single)
{
    if (value == 0) return 0;
    double unit = pow(10, floor(log10(value)) - 2), up = ceil(value / unit) * unit;
    return single ? (double)nextafterf((float)up, INFINITY) : up;
}

static void header_file(const pw_selftest *t, pw_code *header)
{
    long base = 0;
    const char *guard = pw_arena_print(t->e.arena, "%s_SELFTEST_H", t->capitals);
    pw_comment_line(header, "SPDX-License-Identifier: 0BSD");
    pw_code *comment = pw_comment(header);
    pw_prose(comment, "Test vectors of %s and a function that runs them. Made by polewright %s.",
             t->e.stage, PW_VERSION);
    pw_prose(
        comment,
        "Every signal goes through step, and cut into blocks of 1 to 16 samples through block.");
    for (int i = 0; i < t->n; i++) {
        const pw_vector *v = &t->vector[i];
        pw_prose(comment, "  samples %ld to %ld: %s%s", base, base + v->n - 1,
                 pw_signal_word(v->signal),
                 v->from_state ? ", from the state of the worst zero-input cycle" : "");
        base += v->n;
    }
    if (!t->e.fixed) {
        pw_prose(comment,
                 "Expected samples are bit for bit those of code compiled with -ffp-contract=off. "
                 "Contracting"
                 " every multiply-add moves these samples by up to %.3g of full scale (measured); "
                 "%.3g is accepted, four"
                 " times that, for compilers that contract elsewhere. Define %s_TOLERANCE as 0 to "
                 "accept nothing.",
                 t->shift, t->tolerance, t->capitals);
    }
    pw_directive(header, pw_arena_print(t->e.arena, "#ifndef %s", guard));
    pw_directive(header, pw_arena_print(t->e.arena, "#define %s", guard));
    pw_extern_c(header, true);
    pw_blank(header);
    pw_comment_line(header, "0, or 1 + the running index, over all signals in order, of the first "
                            "sample that differs.");
    pw_put(header, "long $_selftest(void);");
    pw_blank(header);
    pw_extern_c(header, false);
    pw_directive(header, "#endif");
}

static void source_file(const pw_selftest *t, pw_code *source)
{
    pw_comment_line(source, "SPDX-License-Identifier: 0BSD");
    pw_comment_line(source, pw_arena_print(t->e.arena,
                                           "Made by polewright %s; what is in here: %s_selftest.h.",
                                           PW_VERSION, t->e.stage));
    pw_directive(source, "#include \"$_selftest.h\"");
    pw_directive(source, "#include \"$.h\"");
    arrays(t, source);
    pw_blank(source);
    if (t->n) differs_function(t, source);
    for (int i = 0; i < t->n; i++)
        if (t->vector[i].from_state) start_function(t, source);
    if (t->n) check_function(source);
    selftest_function(t, source);
}

static void emit_files(const pw_selftest *t, pw_fileset *out)
{
    const pw_emission *e = &t->e;
    pw_code *header = pw_code_file(e->arena, e->stage, e->type);
    pw_code *source = pw_code_file(e->arena, e->stage, e->type);
    header_file(t, header);
    source_file(t, source);
    pw_code_render(header,
                   pw_fileset_add(out, pw_arena_print(e->arena, "%s_selftest.h", e->stage)));
    pw_code_render(source,
                   pw_fileset_add(out, pw_arena_print(e->arena, "%s_selftest.c", e->stage)));
}

pw_status pw_emit_selftest(const pw_results *results, pw_fileset *out)
{
    pw_arena arena = {0};
    pw_selftest t = {.n = 0};
    pw_emission_begin(&t.e, results, &arena);
    t.capitals = capitals_of(&t.e);
    for (int s = 0; s < PW_SIGNALS; s++)
        if (results->stage->vectors.want[s])
            pw_vector_make(results, (pw_signal)s, &t.vector[t.n++]);
    t.shift = pw_contraction_shift(results, t.vector, t.n);
    t.tolerance = rounded_up(pw_float_tolerance(results, t.vector, t.n, t.shift), t.e.single);
    emit_files(&t, out);
    for (int i = 0; i < t.n; i++) pw_vector_free(&t.vector[i]);
    pw_arena_free(&arena);
    return PW_OK;
}
