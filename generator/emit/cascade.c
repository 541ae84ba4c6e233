/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "emit/cascade.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

typedef struct made { const char *text, *name; } made;   /* kernels already emitted */

typedef struct builder {
    const pw_cascade *c;
    pw_arena *arena;
    pw_code *file;
    pw_kernel kernel[PW_MAX_SECTIONS];
    const char *name[PW_MAX_SECTIONS];   /* of the kernel; null: the section has none */
    made made[2 * PW_MAX_SECTIONS];
    int mades;
} builder;

static int sections_that_fit(const pw_cascade *cascade)
{
    pw_arena arena = {0};
    int fit = 0;
    for (int i = 0; i < cascade->realisation->count && cascade->target->instructions != PW_ANY; i++) {
        pw_kernel kernel;
        fit += pw_kernel_choose(cascade->realisation, i, cascade->target, &arena, &kernel);
    }
    pw_arena_free(&arena);
    return fit;
}

bool pw_cascade_fits(const pw_cascade *cascade) { return sections_that_fit(cascade) > 0; }

bool pw_cascade_fits_all(const pw_cascade *cascade)
{
    return cascade->realisation->count > 0 && sections_that_fit(cascade) == cascade->realisation->count;
}

/* Emits a kernel, or finds the same one that an earlier section has; its name. */
static pw_status function(builder *b, const pw_kernel *k, const char *form, const char **name)
{
    pw_text text = {0};
    pw_status status = pw_kernel_text(k, "", form, &text);
    for (int i = 0; !status && i < b->mades; i++)
        if (!strcmp(b->made[i].text, pw_text_string(&text))) {
            *name = b->made[i].name;
            pw_text_free(&text);
            return PW_OK;
        }
    if (!status) {
        *name = pw_arena_print(b->arena, "%s_%s_%d", b->file->stage, k->kernel, b->mades + 1);
        b->made[b->mades++] = (made){pw_arena_copy(b->arena, pw_text_string(&text)), *name};
        pw_text_free(&text);
        status = pw_kernel_text(k, *name, form, &text);
        pw_blank(b->file);
        pw_raw(b->file, pw_arena_copy(b->arena, pw_text_string(&text)));
    }
    pw_text_free(&text);
    return status;
}

static pw_status kernel_of(builder *b, int i)
{
    const char *form = NULL;
    pw_status status = PW_OK;
    if (b->kernel[i].needs_form) {
        pw_kernel plain;
        (void)pw_kernel_form(b->c->realisation, i, b->arena, &plain);
        pw_template_set(&plain.values, "attribute", "__attribute__((used, noinline)) ");
        status = function(b, &plain, NULL, &form);
    }
    return status ? status : function(b, &b->kernel[i], form, &b->name[i]);
}

static void table(builder *b, int i)
{
    const pw_kernel *k = &b->kernel[i];
    pw_code *group = pw_section_group(b->file, i + 1);
    pw_comment_line(group, pw_arena_print(b->arena, "Section %d: %s%s.", i + 1, k->why,
                                          k->clamps ? "" : "; it cannot clip, so nothing is clamped"));
    if (!k->words) return;
    int32_t *words = pw_arena_take(b->arena, sizeof k->word);
    memcpy(words, k->word, sizeof k->word);
    pw_array_words(group, pw_arena_print(b->arena, "static const int32_t $_words_#[%d]", k->words), words, k->words);
}

static const char *call_text(builder *b, int i, const char *state)
{
    const pw_kernel *k = &b->kernel[i];
    return pw_arena_print(b->arena, "%s%s(%s, %s%s, out, whole);", k->clamps ? "s->clipped += " : "(void)", b->name[i], state,
                          k->words ? "$_words_#, " : "", i ? "out" : "in");
}

/* Members of a struct are no array: they go through one, in which a kernel may count on its place. */
static void call(builder *b, int i, pw_code *body)
{
    pw_code *group = pw_section_group(body, i + 1);
    if (b->c->array) {
        pw_put(group, call_text(b, i, "s->d[`]"));
        return;
    }
    const pw_words *w = &b->c->realisation->section[i];
    pw_code *block = pw_block(group, "", "");
    const char *member[4], *values = "";
    for (int m = 0; m < 4; m++) {
        member[m] = b->c->member(b->c->of, w, m);
        values = pw_arena_print(b->arena, "%s%s%s", values, m ? ", " : "", member[m] ? member[m] : "0");
    }
    pw_put(block, pw_arena_print(b->arena, "@ d[4] = {%s};", values));
    pw_put(block, call_text(b, i, "d"));
    for (int m = 0; m < 4; m++)
        if (member[m]) pw_put(block, pw_arena_print(b->arena, "%s = d[%d];", member[m], m));
}

static void calls(builder *b)
{
    int multiple = 1, count = b->c->realisation->count;
    for (int i = 0; i < count; i++)
        if (b->name[i] && b->kernel[i].multiple > multiple) multiple = b->kernel[i].multiple;
    pw_code *f = pw_function(b->file, "void $_block($_state *s, const @ *in, @ *out, size_t n)");
    pw_put(f, pw_arena_print(b->arena, "const size_t whole = n - n %% %d;", multiple));
    pw_put(f, "size_t i;");
    pw_code *body = pw_block(f, "if (whole > 0)", "");
    for (int i = 0; i < count; i++) {
        if (b->name[i]) call(b, i, body);
        else pw_put(pw_section_group(body, i + 1),
                    pw_arena_print(b->arena, "for (i = 0; i < whole; i++) out[i] = $_section_#(s, %s[i]);", i ? "out" : "in"));
    }
    pw_put(f, "for (i = whole; i < n; i++) out[i] = $_cascade(s, in[i]);");
}

pw_status pw_cascade_emit(const pw_cascade *cascade, pw_code *file)
{
    builder *b = pw_arena_take(file->arena, sizeof *b);
    *b = (builder){.c = cascade, .arena = file->arena, .file = file};
    pw_status status = PW_OK;
    for (int i = 0; !status && i < cascade->realisation->count; i++)
        if (pw_kernel_choose(cascade->realisation, i, cascade->target, b->arena, &b->kernel[i]))
            status = kernel_of(b, i);
    pw_blank(file);
    for (int i = 0; !status && i < cascade->realisation->count; i++)
        if (b->name[i]) table(b, i);
    pw_blank(file);
    if (!status) calls(b);
    return status;
}
