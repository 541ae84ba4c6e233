/* SPDX-License-Identifier: GPL-3.0-or-later */
/* <stage>_step in the instructions of a part: one function for the whole cascade. */
#include <string.h>

#include "emit/kernel.h"

typedef struct stepper {
    const pw_realisation *r;
    const pw_target *target;
    pw_arena arena;
    pw_kernel kernel[PW_MAX_SECTIONS];
    const char *file, *name;
    pw_text *out;
} stepper;

/* Sections all of the same kernel: "dual", or "wide" on 32-bit samples; no clamp that wraps in dual. */
static bool choose(stepper *s)
{
    pw_target core = *s->target;
    core.has_vector = false;                 /* one sample has nothing for lanes */
    if (core.instructions < PW_ARMV7_M || core.instructions > PW_ARMV8_1_M) return false;
    for (int i = 0; i < s->r->count; i++) {
        pw_kernel *k = &s->kernel[i];
        if (!pw_kernel_choose(s->r, i, &core, &s->arena, k) || strcmp(k->kernel, s->kernel[0].kernel)) return false;
    }
    bool dual = !strcmp(s->kernel[0].kernel, "dual");
    if (!dual && (strcmp(s->kernel[0].kernel, "wide") || s->r->sample != PW_Q31)) return false;
    s->file = s->kernel[0].file;
    return s->r->count > 0 && s->r->count < 100;
}

static pw_status part(stepper *s, const char *file, const char *kernel, int section)
{
    pw_template_values values = s->kernel[section].values;
    int bytes = s->r->sample == PW_Q15 ? 2 : 4;
    values.arena = &s->arena;
    pw_template_set(&values, "name", s->name);
    pw_template_set(&values, "number", pw_arena_print(&s->arena, "%02d", section));
    pw_template_set_number(&values, "odd", section % 2);
    pw_template_set_number(&values, "last", section == s->r->count - 1);
    pw_template_set_number(&values, "clipped", 4L * bytes * s->r->count);
    pw_template_set_number(&values, "clipped_ahead", 4L * bytes * (s->r->count - section / 2 * 2));
    return pw_template_expand(file, kernel, &values, s->out);
}

static pw_status word(stepper *s, int32_t value)
{
    pw_template_values values = {.arena = &s->arena};
    pw_template_set_number(&values, "word", value);
    return pw_template_expand("armv7-m", "step_word", &values, s->out);
}

static uint32_t packed(int32_t low, int32_t high)
{
    return ((uint32_t)low & 0xFFFFu) | (uint32_t)high << 16;
}

static int32_t rounding(const pw_realisation *r, const pw_words *w)
{
    int right = w->b_fraction - w->a_fraction;
    int64_t half = r->truncate || w->a_fraction == 0 ? 0 : INT64_C(1) << (w->a_fraction - 1);
    return (int32_t)(right > 0 ? (INT64_C(1) << (right - 1)) + (half << right) : half);
}

/* The words of a section, as its step reads them; of two 16-bit sections the first has both b0. */
static pw_status words(stepper *s, int section)
{
    const pw_words *w = &s->r->section[section];
    const pw_kernel *k = &s->kernel[section];
    pw_status status = PW_OK;
    if (!strcmp(k->kernel, "wide")) {
        for (int i = 0; !status && i < 5; i++) status = word(s, k->word[i]);
        return status;
    }
    int32_t next = section + 1 < s->r->count ? w[1].b[0] : 0;
    if (section % 2 == 0) status = word(s, (int32_t)packed(w->b[0], next));
    const int32_t three[3] = {(int32_t)packed(w->b[1], w->b[2]), (int32_t)packed(-w->a[1], -w->a[2]),
                              rounding(s->r, w)};
    for (int i = 0; !status && i < 3; i++) status = word(s, three[i]);
    return status;
}

pw_status pw_kernel_step(const pw_realisation *realisation, const pw_target *target, const char *name,
                         pw_text *out, bool *done)
{
    stepper s = {.r = realisation, .target = target, .name = name, .out = out};
    int n = realisation->count;
    pw_status status = PW_OK;
    *done = choose(&s);
    if (*done) {
        status = part(&s, s.file, "step_open", 0);
        for (int i = 0; !status && i < n; i++) status = part(&s, s.file, "step_section", i);
        if (!status) status = part(&s, s.file, "step_close", n - 1);
        for (int i = 0; !status && i < n; i++) status = part(&s, s.file, "step_outside", i);
        if (!status) status = part(&s, "armv7-m", "step_words", 0);
        for (int i = 0; !status && i < n; i++) status = words(&s, i);
        if (!status) status = part(&s, "armv7-m", "step_end", 0);
    }
    pw_arena_free(&s.arena);
    return status;
}

static pw_status float_part(const char *kernel, const char *name, int section, int order, pw_text *out)
{
    pw_arena arena = {0};
    pw_template_values v = {.arena = &arena};
    pw_template_set(&v, "name", name);
    pw_template_set_number(&v, "number", section);
    pw_template_set_number(&v, "two", order == 2);
    pw_template_set_number(&v, "odd", section % 2);
    pw_template_set(&v, "x", section % 2 ? "s9" : "s0");
    pw_template_set(&v, "y", section % 2 ? "s0" : "s9");
    pw_status status = pw_template_expand("arm-float", kernel, &v, out);
    pw_arena_free(&arena);
    return status;
}

static pw_status float_word(stepper *s, double value)
{
    union { float real; int32_t bits; } both = {.real = (float)value};
    return word(s, both.bits);
}

pw_status pw_kernel_step_float(const pw_realisation *realisation, const pw_target *target, const char *name,
                               pw_text *out, bool *done)
{
    stepper s = {.r = realisation, .target = target, .name = name, .out = out};
    int n = realisation->count;
    *done = target->instructions >= PW_ARMV7E_M && target->instructions <= PW_ARMV8_1_M && n < 60;
    if (!*done) return PW_OK;
    pw_status status = float_part("step_open", name, 0, 2, out);
    for (int i = 0; !status && i < n; i++) status = float_part("step_section", name, i, realisation->section[i].order, out);
    if (!status) status = float_part("step_close", name, n, 2, out);
    for (int i = 0; !status && i < n; i++) {
        const pw_words *w = &realisation->section[i];
        const double five[5] = {w->fb[0], w->fb[1], w->order == 2 ? w->fb[2] : w->fa[1], w->fa[1], w->fa[2]};
        for (int k = 0; !status && k < (w->order == 2 ? 5 : 3); k++) status = float_word(&s, five[k]);
    }
    if (!status) status = float_part("step_end", name, 0, 2, out);
    pw_arena_free(&s.arena);
    return status;
}
