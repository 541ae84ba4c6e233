/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "emit/cascade.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

typedef struct made { char *text; const char *name; } made;   /* kernels already emitted */

typedef struct builder {
    const pw_realisation *r;
    const pw_target *target;
    const char *prefix;
    pw_arena arena;
    pw_kernel kernel[PW_MAX_SECTIONS];
    const char *name[PW_MAX_SECTIONS];
    made made[2 * PW_MAX_SECTIONS];
    int mades;
    pw_cascade *out;
} builder;

/* Emits a kernel, or finds the same one that an earlier section has; its name. */
static pw_status function(builder *b, const pw_kernel *k, const char *form, const char **name)
{
    pw_text plain = {0};
    pw_status status = pw_kernel_text(k, "", form, &plain);
    for (int i = 0; !status && i < b->mades; i++)
        if (!strcmp(b->made[i].text, pw_text_string(&plain))) {
            *name = b->made[i].name;
            pw_text_free(&plain);
            return PW_OK;
        }
    if (!status) {
        *name = pw_arena_print(&b->arena, "%s_%s_%d", b->prefix, k->kernel, b->mades + 1);
        b->made[b->mades++] = (made){pw_arena_copy(&b->arena, pw_text_string(&plain)), *name};
        status = pw_kernel_text(k, *name, form, &b->out->functions);
        pw_text_add(&b->out->functions, "\n");
    }
    pw_text_free(&plain);
    return status;
}

static pw_status section(builder *b, int i)
{
    const char *form = NULL;
    pw_status status = PW_OK;
    if (b->kernel[i].needs_form) {
        pw_kernel plain;
        (void)pw_kernel_form(b->r, i, &b->arena, &plain);
        pw_template_set(&plain.values, "attribute", "__attribute__((used, noinline)) ");
        status = function(b, &plain, NULL, &form);
    }
    return status ? status : function(b, &b->kernel[i], form, &b->name[i]);
}

static void table(builder *b, int i)
{
    const pw_kernel *k = &b->kernel[i];
    pw_text *t = &b->out->functions;
    if (!k->words) return;
    pw_text_print(t, "static const int32_t %s_words_%d[%d] = {", b->prefix, i + 1, k->words);
    for (int w = 0; w < k->words; w++)
        if (k->word[w] == INT32_MIN) pw_text_print(t, "%sINT32_MIN", w ? ", " : "");
        else pw_text_print(t, "%s%ld", w ? ", " : "", (long)k->word[w]);
    pw_text_print(t, "};   /* section %d: %s%s */\n", i + 1, k->why,
                  k->clamps ? "" : "; it cannot clip, so nothing is clamped");
}

static void calls(builder *b, const char *state, const char *clipped)
{
    pw_text *t = &b->out->body;
    int multiple = 1;
    for (int i = 0; i < b->r->count; i++)
        if (b->kernel[i].multiple > multiple) multiple = b->kernel[i].multiple;
    const char *count = multiple > 1 ? "whole" : "n";
    if (multiple > 1)
        pw_text_print(t, "    const size_t whole = n & ~(size_t)%d;\n    size_t i;\n", multiple - 1);
    pw_text_print(t, "    if (%s) {\n", count);
    for (int i = 0; i < b->r->count; i++) {
        const pw_kernel *k = &b->kernel[i];
        char where[80], words[100] = "";
        snprintf(where, sizeof where, state, i);
        if (k->words) snprintf(words, sizeof words, "%.60s_words_%d, ", b->prefix, i + 1);
        pw_text_print(t, "        %s%s%s(%s, %s%s, out, %s);\n", k->clamps ? clipped : "", k->clamps ? " += " : "(void)",
                      b->name[i], where, words, i ? "out" : "in", count);
    }
    pw_text_add(t, "    }\n");
    if (multiple > 1)
        pw_text_print(t, "    for (i = whole; i < n; i++) out[i] = %s_step(s, in[i]);\n", b->prefix);
}

pw_status pw_cascade_fixed(const pw_realisation *realisation, const pw_target *target, const char *prefix,
                           const char *state, const char *clipped, pw_cascade *out, bool *done)
{
    builder *b = pw_take(sizeof *b);
    *b = (builder){.r = realisation, .target = target, .prefix = prefix, .out = out};
    pw_status status = PW_OK;
    *done = realisation->count > 0;
    for (int i = 0; *done && i < realisation->count; i++)
        *done = pw_kernel_choose(realisation, i, target, &b->arena, &b->kernel[i]);
    for (int i = 0; *done && !status && i < realisation->count; i++) status = section(b, i);
    for (int i = 0; *done && !status && i < realisation->count; i++) table(b, i);
    if (*done && !status) calls(b, state, clipped);
    pw_arena_free(&b->arena);
    free(b);
    return status;
}

void pw_cascade_free(pw_cascade *cascade)
{
    pw_text_free(&cascade->functions);
    pw_text_free(&cascade->body);
}
