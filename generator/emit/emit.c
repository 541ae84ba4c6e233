/* SPDX-License-Identifier: GPL-3.0-or-later */
/* <stage>.h and <stage>.c, and the runtime files that go with them. */
#include "emit/emit.h"

#include <string.h>

#include "emit/emission.h"
#include "simulate/simulate.h"

/* An include guard: the stage's name in capitals. */
static const char *guard_of(const pw_emission *e)
{
    char *guard = pw_arena_print(e->arena, "%s_H", e->stage);
    for (char *c = guard; *c; c++)
        if (*c >= 'a' && *c <= 'z') *c = (char)(*c - 'a' + 'A');
    return guard;
}

static bool has_state(const pw_emission *e)
{
    for (int k = 0; k < e->r->count; k++)
        for (int i = 0; i < 6; i++)
            if (e->form[k]->member(e, &e->r->section[k], i)) return true;
    return e->counts;
}

/* 16-bit states that Arm's kernels read as words, with no counter that would align them. */
static bool read_as_words(const pw_emission *e)
{
    return e->part_kernels && e->r->sample == PW_Q15 && !e->counts && e->target->has_dsp;
}

static void state_struct(const pw_emission *e, pw_code *file)
{
    pw_code *comment = pw_comment(file);
    pw_prose(comment, "The state of one channel. Reset it, or settle it, before its first sample.");
    if (read_as_words(e)) pw_prose(comment, "It is read in words of 32 bits, and starts at one.");
    const char *after = read_as_words(e) ? " __attribute__((aligned(4))) $_state;" : " $_state;";
    pw_code *members = pw_block(file, "typedef struct", after);
    for (int k = 0; k < e->r->count; k++)
        e->form[k]->fields(e, &e->r->section[k], pw_section_group(members, k + 1));
    if (e->counts)
        pw_put_with(members, "uint32_t clipped;",
                    pw_arena_print(e->arena, "see %s_clipped", e->stage));
    if (!has_state(e)) pw_put_with(members, "char none;", "a gain keeps nothing");
}

static bool has_structure(const pw_emission *e, pw_structure structure)
{
    for (int k = 0; k < e->r->count; k++)
        if (e->r->section[k].structure == structure) return true;
    return false;
}

static void settle_comment(const pw_emission *e, pw_code *comment)
{
    if (e->integrates) {
        pw_prose(comment,
                 "This stage integrates: no steady state goes with a constant input, so settle"
                 " does what reset does.");
        return;
    }
    pw_prose(comment,
             "The state as if x had been there for ever, so that a filter starts without a thump.");
    if (e->fixed && has_structure(e, PW_DIRECT_1_SHAPED))
        pw_prose(comment,
                 "The error that is fed back then keeps the output moving by a unit or so.");
    if (e->fixed) pw_prose(comment, "Also clears the count of clips.");
}

static void prototypes(const pw_emission *e, pw_code *file)
{
    pw_put_with(file, "void $_reset($_state *s);", "at rest, as if 0 had been there for ever");
    pw_put_with(file, "@ $_step($_state *s, @ x);", "one sample");
    pw_put_with(file, "void $_block($_state *s, const @ *in, @ *out, size_t n);", "in may be out");
    pw_blank(file);
    settle_comment(e, pw_comment(file));
    pw_put(file, "void $_settle($_state *s, @ x);");
    if (!e->fixed) return;
    pw_blank(file);
    pw_comment_line(file, !e->counts
                              ? "How many times a node clipped since reset: always 0, no node can."
                          : e->r->wrap ? "How many times a node wrapped since reset, modulo 2^32."
                                       : "How many times a node clipped since reset, modulo 2^32.");
    pw_put(file, "uint32_t $_clipped(const $_state *s);");
}

static void header_file(const pw_emission *e, pw_code *header)
{
    const char *guard = guard_of(e);
    pw_comment_line(header, "SPDX-License-Identifier: 0BSD");
    pw_story(e, pw_comment(header));
    pw_directive(header, pw_arena_print(e->arena, "#ifndef %s", guard));
    pw_directive(header, pw_arena_print(e->arena, "#define %s", guard));
    pw_blank(header);
    pw_directive(header, "#include <stddef.h>");
    pw_directive(header, "#include <stdint.h>");
    if (!e->standalone) {
        pw_blank(header);
        pw_directive(header, pw_arena_print(e->arena, "#include \"pw_%s.h\"", e->family));
        pw_blank(header);
        pw_directive(header, "#if PW_RUNTIME_FORMAT != 1");
        pw_directive(header, "#error \"$ was made for format 1 of the runtime: build it again, or "
                             "take the pw_ files that were made with it\"");
        pw_directive(header, "#endif");
    }
    pw_blank(header);
    pw_extern_c(header, true);
    pw_blank(header);
    state_struct(e, header);
    pw_blank(header);
    prototypes(e, header);
}

static void close_header(pw_code *header)
{
    pw_blank(header);
    pw_extern_c(header, false);
    pw_directive(header, "#endif");
}

/* What standalone code asks of the machine; the runtime has its own checks. */
static void machine_checks(const pw_emission *e, pw_code *file)
{
    if (!e->standalone) return;
    pw_blank(file);
    if (e->fixed) {
        pw_directive(file, "#if !defined(INT16_MAX) || !defined(INT32_MAX) || !defined(INT64_MAX)");
        pw_directive(file, "#error \"$ needs int16_t, int32_t and int64_t: use a compiler with "
                           "C99's <stdint.h>\"");
        pw_directive(file, "#endif");
        pw_put(file, "typedef char $_needs_a_compiler_whose_right_shift_is_arithmetic"
                     "[((int32_t)-3 >> 1) == -2 && ((int64_t)-3 >> 1) == -2 ? 1 : -1];");
    } else if (e->single) {
        pw_put(file, "typedef char $_needs_an_ieee_float_of_32_bits_use_sample_q15_or_q31"
                     "[sizeof(float) == 4 && FLT_MANT_DIG == 24 ? 1 : -1];");
    } else {
        pw_put(file, "typedef char $_needs_a_double_of_64_bits_use_sample_float32_or_q31"
                     "[sizeof(double) == 8 && DBL_MANT_DIG == 53 ? 1 : -1];");
    }
}

static void sections(const pw_emission *e, pw_code *file)
{
    for (int k = 0; k < e->r->count; k++) {
        const pw_words *w = &e->r->section[k];
        const pw_form *form = e->form[k];
        if (form->helpers) form->helpers(e, w, file);
    }
    for (int k = 0; k < e->r->count; k++) {
        const pw_words *w = &e->r->section[k];
        const pw_form *form = e->form[k];
        pw_code *group = pw_section_group(file, k + 1);
        pw_blank(group);
        pw_comment_line(group,
                        pw_arena_print(e->arena, "---- Section %d: %s, order %d ----", k + 1,
                                       e->standalone ? form->name : pw_structure_word(w->structure),
                                       w->order));
        pw_blank(group);
        form->constants(e, w, group);
        if (form->step) {
            pw_blank(group);
            form->step(e, w, pw_function(group, "static inline @ $_section_#($_state *s, @ x)"));
        }
        if (!e->integrates) {
            pw_blank(group);
            form->settle(e, w, pw_function(group, "static @ $_settle_#($_state *s, @ x)"));
        }
    }
}

static bool all_step(const pw_emission *e)
{
    for (int k = 0; k < e->r->count; k++)
        if (!e->form[k]->step || e->form[k]->block) return false;
    return true;
}

/* The block works on a copy of the state, so that the compiler may keep it in registers though out
 * might point into it. */
static void block_of_steps(pw_code *file)
{
    pw_code *f = pw_function(file, "void $_block($_state *s, const @ *in, @ *out, size_t n)");
    pw_put(f, "$_state local = *s;");
    pw_put(f, "size_t i;");
    pw_put(f, "for (i = 0; i < n; i++) out[i] = $_cascade(&local, in[i]);");
    pw_put(f, "*s = local;");
}

static const char *member_of(const void *of, const pw_words *w, int k)
{
    const pw_emission *e = of;
    const char *name = e->form[w - e->r->section]->member(e, w, k);
    return name ? pw_arena_print(e->arena, "s->%s", name) : NULL;
}

/* The step in the instructions of the part, or the plain one; floats have both, because a compiler may
 * be told to pass them in other registers. */
static pw_status step(const pw_emission *e, const pw_cascade *kernels, pw_code *file)
{
    pw_text text = {0};
    bool done = false, floats = pw_cascade_floats_fit(kernels);
    pw_status status = e->part_kernels ? pw_kernel_step(e->r, e->target, e->stage, &text, &done)
                     : floats ? pw_kernel_step_float(e->r, e->target, e->stage, &text, &done) : PW_OK;
    if (done) pw_raw(file, pw_arena_copy(e->arena, pw_text_string(&text)));
    if (!done || floats) pw_put(pw_function(file, "@ $_step($_state *s, @ x)"), "return $_cascade(s, x);");
    if (done && floats) pw_directive(file, "#endif");
    pw_text_free(&text);
    return status;
}

/* Sample by sample: every section has a step. On a part with kernels these make the block. */
static pw_status stepping(const pw_emission *e, pw_code *file)
{
    const pw_cascade kernels = {e->r, e->target, e->part_kernels, member_of, e};
    pw_blank(file);
    pw_code *f = pw_function(file, "static inline @ $_cascade($_state *s, @ x)");
    for (int k = 0; k < e->r->count; k++)
        pw_put(pw_section_group(f, k + 1), "x = $_section_#(s, x);");
    pw_put(f, "return x;");
    pw_blank(file);
    pw_status status = step(e, &kernels, file);
    if (status) return status;
    if (pw_cascade_fits(&kernels)) return pw_cascade_emit(&kernels, file);
    pw_blank(file);
    if (pw_cascade_floats_fit(&kernels))
        pw_cascade_floats(&kernels, file);
    else
        block_of_steps(file);
    return PW_OK;
}

/* Section by section over the block; a step is a block of one. */
static void blocking(const pw_emission *e, pw_code *file)
{
    pw_blank(file);
    pw_code *f = pw_function(file, "void $_block($_state *s, const @ *in, @ *out, size_t n)");
    bool needs_s = has_state(e) && (e->fixed || e->r->section[0].order > 0 || e->r->count > 1);
    if (!needs_s) pw_put(f, "(void)s;");
    for (int k = 0; k < e->r->count; k++) {
        const pw_words *w = &e->r->section[k];
        pw_code *group = pw_section_group(f, k + 1);
        const char *in = k == 0 ? "in" : "out";
        if (e->form[k]->block) {
            e->form[k]->block(e, w, in, group);
        } else {
            pw_code *loop = pw_block(group, "for (size_t i = 0; i < n; i++)", "");
            pw_put(loop, pw_arena_print(e->arena, "out[i] = $_section_#(s, %s[i]);", in));
        }
    }
    pw_blank(file);
    f = pw_function(file, "@ $_step($_state *s, @ x)");
    pw_put(f, "$_block(s, &x, &x, 1);");
    pw_put(f, "return x;");
}

static pw_status interface(const pw_emission *e, pw_code *file)
{
    pw_status status = PW_OK;
    pw_blank(file);
    pw_code *f = pw_function(file, "void $_reset($_state *s)");
    pw_put(f, "memset(s, 0, sizeof *s);");
    if (all_step(e))
        status = stepping(e, file);
    else
        blocking(e, file);
    pw_blank(file);
    f = pw_function(file, "void $_settle($_state *s, @ x)");
    pw_put(f, "$_reset(s);");
    if (e->integrates) pw_put(f, "(void)x;");
    for (int k = 0; k < e->r->count && !e->integrates; k++) {
        bool last = k == e->r->count - 1;
        pw_put(pw_section_group(f, k + 1),
               last ? "(void)$_settle_#(s, x);" : "x = $_settle_#(s, x);");
    }
    if (!e->fixed) return status;
    pw_blank(file);
    f = pw_function(file, "uint32_t $_clipped(const $_state *s)");
    if (!e->counts) pw_put(f, "(void)s;");
    pw_put(f, e->counts ? "return s->clipped;" : "return 0;");
    return status;
}

static pw_status source_file(const pw_emission *e, pw_code *source)
{
    pw_comment_line(source, "SPDX-License-Identifier: 0BSD");
    pw_code *comment = pw_comment(source);
    pw_prose(comment, "Made by polewright %s; the story is in %s.h. Build: %s", PW_VERSION,
             e->stage, pw_build_line(e));
    pw_directive(source, "#include \"$.h\"");
    pw_blank(source);
    if (e->standalone && !e->fixed) pw_directive(source, "#include <float.h>");
    pw_directive(source, "#include <string.h>");
    machine_checks(e, source);
    sections(e, source);
    return interface(e, source);
}

static pw_status copy_file(const char *shipped, const char *name, pw_fileset *out)
{
    char path[4096];
    pw_text text = {0};
    pw_status status = pw_data_path(shipped, path, sizeof path);
    if (status == PW_OK) status = pw_file_read(path, 1 << 20, &text);
    if (status == PW_OK) pw_text_add_bytes(pw_fileset_add(out, name), text.data, text.size);
    pw_text_free(&text);
    return status == PW_OK ? PW_OK : PW_FAILED;
}

static pw_status copy_runtime(const pw_emission *e, pw_fileset *out)
{
    const char *header = pw_arena_print(e->arena, "pw_%s.h", e->family);
    const char *source = pw_arena_print(e->arena, "pw_%s.c", e->family);
    pw_status status = copy_file("include/polewright/pw_runtime.h", "pw_runtime.h", out);
    if (status == PW_OK && e->fixed) status = copy_file("runtime/pw_fixed.h", "pw_fixed.h", out);
    if (status == PW_OK)
        status = copy_file(pw_arena_print(e->arena, "runtime/%s", header), header, out);
    if (status == PW_OK)
        status = copy_file(pw_arena_print(e->arena, "runtime/%s", source), source, out);
    return status;
}

static pw_status emit_files(const pw_emission *e, pw_fileset *out)
{
    pw_code *header = pw_code_file(e->arena, e->stage, e->type);
    pw_code *source = pw_code_file(e->arena, e->stage, e->type);
    header_file(e, header);
    pw_status status = source_file(e, source);
    pw_emit_converters(e, header, source);
    close_header(header);
    pw_code_render(header, pw_fileset_add(out, pw_arena_print(e->arena, "%s.h", e->stage)));
    pw_code_render(source, pw_fileset_add(out, pw_arena_print(e->arena, "%s.c", e->stage)));
    return status || e->standalone ? status : copy_runtime(e, out);
}

pw_status pw_emit_c(const pw_results *results, pw_fileset *out)
{
    pw_arena arena = {0};
    pw_emission e;
    pw_emission_begin(&e, results, &arena);
    pw_status status = emit_files(&e, out);
    pw_arena_free(&arena);
    return status;
}
