/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "target/cost.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "emit/kernel.h"

void pw_cost_model_read(pw_settings *settings, pw_arena *arena, pw_cost_model **out, pw_messages *messages)
{
    pw_cost_model model = {pw_arena_take(arena, (size_t)(settings->rows + 1) * sizeof *model.figure), 0};
    for (int i = 0; i < settings->rows; i++) {
        pw_setting *s = &settings->row[i];
        if (strncmp(s->key, "cost.", 5)) continue;
        char *end;
        double value = strtod(s->text, &end);
        s->used = true;
        if (end == s->text || *end || !isfinite(value))
            pw_error(messages, s->at, "'%s' is no number; expected a figure of the cost model", s->text);
        else model.figure[model.figures++] = (pw_cost_figure){s->key + 5, value};
    }
    *out = NULL;
    if (!model.figures) return;
    *out = pw_arena_take(arena, sizeof **out);
    **out = model;
}

static bool is_fixed(const pw_realisation *r)
{
    return r->sample == PW_Q15 || r->sample == PW_Q31;
}

static int sample_bytes(const pw_realisation *r)
{
    return r->sample == PW_Q15 ? 2 : r->sample == PW_FLOAT64 ? 8 : 4;
}

static int multiplies(const pw_words *w, bool fixed)
{
    int zero = 0, total = w->structure == PW_COUPLED ? 8 : w->order == 2 ? 5 : w->order == 1 ? 3 : 1;
    if (fixed && w->structure == PW_COUPLED) zero = (w->c1 == 0) + (w->c2 == 0) + (w->d == 0);
    else if (fixed && w->order == 2) zero = (w->b[1] == 0) + (w->b[2] == 0) + (w->a[1] == 0) + (w->a[2] == 0);
    return total - zero;
}

/* Words of state in samples: the two delays on each side, the error words of a shaped section. */
static int state_words(const pw_words *w)
{
    if (w->structure == PW_TRANSPOSED_2 || w->structure == PW_COUPLED) return 2;
    return w->order == 0 ? 0 : 4;
}

/* The columns of a row of the model. */
enum { SECTION, PROVED, RIGHT, BOTH, FIRST, ONE_ERROR, CASCADE, FLASH_SECTION, FLASH_KERNEL, PROVED_SECTION, PROVED_KERNEL, FLASH_REST, STACK, COLUMNS };

/* The row of this name; false where the model has none. Values of a list stand as rows of one name. */
static bool row_of(const pw_cost_model *model, const char *name, double row[COLUMNS])
{
    int n = 0;
    for (int i = 0; i < model->figures && n < COLUMNS; i++)
        if (!strcmp(model->figure[i].name, name)) row[n++] = model->figure[i].value;
    return n == COLUMNS;
}

/* How the row of a section is called: "q15-16-direct-1", "runtime-float32-transposed-2". A 16-bit section
 * whose sum needs 64 bits costs what one with 32-bit words does. */
static const char *row_name(const pw_stage *stage, const pw_realisation *r, int section, pw_arena *arena)
{
    const pw_words *w = &r->section[section];
    pw_structure structure = w->order == 0 ? PW_DIRECT_1 : w->structure;
    const char *code = stage->arithmetic.standalone ? "" : "runtime-";
    pw_kernel form;
    if (!is_fixed(r) || structure != PW_DIRECT_1)
        return pw_arena_print(arena, "%s%s-%s", code, pw_sample_word(r->sample), pw_structure_word(structure));
    if (r->wrap && r->sample == PW_Q15 && stage->arithmetic.standalone) return "q15-wrap-direct-1";
    bool narrow = r->coefficient_bits == 16 && (r->sample == PW_Q31 || !stage->arithmetic.standalone
                                                || (pw_kernel_form(r, section, arena, &form) && form.narrow));
    return pw_arena_print(arena, "%s%s-%d-%s", code, pw_sample_word(r->sample), narrow ? 16 : 32, pw_structure_word(structure));
}

/* Kernels for AVR have their words in the code and leave out what a zero byte would multiply: so many
 * cycles less. */
static double spared_by_zero_bytes(const pw_realisation *r, int section, const pw_target *target, pw_arena *arena)
{
    const pw_words *w = &r->section[section];
    const int32_t word[5] = {w->b[0], w->b[1], w->a[1], w->b[2], w->a[2]};
    pw_kernel kernel;
    int zero = 0, bytes = r->sample == PW_Q31 ? 4 : 2;
    if (target->instructions != PW_AVR || !pw_kernel_choose(r, section, target, arena, &kernel)) return 0;
    if (strcmp(kernel.file, "avr")) return 0;
    for (int i = 0; i < (w->order == 2 ? 5 : 3); i++)
        for (int k = 0; k < bytes; k++) zero += ((uint32_t)abs(word[i]) >> 8 * k & 0xFFu) == 0;
    return zero * (bytes == 4 ? 24.0 : 9.0);
}

static double section_cycles(const pw_words *w, const double row[COLUMNS])
{
    double total = row[SECTION];
    if (w->order == 0) return fmax(1, total / 2 + row[FIRST]);
    bool right = w->structure != PW_COUPLED && w->b_fraction > w->a_fraction;
    if (w->cannot_clip) total += row[PROVED];
    if (right) total += row[RIGHT] + (w->cannot_clip ? row[BOTH] : 0);
    if (w->structure == PW_DIRECT_1_SHAPED && w->k2 == 0) total += row[ONE_ERROR];
    return w->order == 1 ? total + row[FIRST] : total;
}

/* Whether an earlier section has the same kernel, so that this one needs no code of its own. */
static bool same_kernel(const pw_realisation *r, int section, const pw_target *target, pw_arena *arena)
{
    pw_kernel mine, other;
    if (!pw_kernel_choose(r, section, target, arena, &mine)) return true;
    for (int i = 0; i < section; i++)
        if (pw_kernel_choose(r, i, target, arena, &other) && pw_kernel_same(&mine, &other)) return true;
    return false;
}

/* Whether an earlier section has the same row: what a cascade of that kind costs as such counts once. */
static bool row_seen(const pw_stage *stage, const pw_realisation *r, int section, pw_arena *arena)
{
    const char *mine = row_name(stage, r, section, arena);
    for (int i = 0; i < section; i++)
        if (!strcmp(mine, row_name(stage, r, i, arena))) return true;
    return false;
}

static void from_model(const pw_stage *stage, const pw_realisation *r, const pw_target *target, pw_cost *out)
{
    pw_arena arena = {0};
    double total = 0, cascade = 0, flash = 0, rest = 0, stack = 0, row[COLUMNS];
    for (int i = 0; i < r->count; i++) {
        if (!row_of(target->cost, row_name(stage, r, i, &arena), row)) {
            pw_arena_free(&arena);
            return;
        }
        total += section_cycles(&r->section[i], row);
        if (stage->arithmetic.standalone) total -= spared_by_zero_bytes(r, i, target, &arena);
        if (!row_seen(stage, r, i, &arena)) cascade += row[CASCADE];
        bool proved = r->section[i].cannot_clip;
        flash += row[proved ? PROVED_SECTION : FLASH_SECTION];
        if (stage->arithmetic.standalone && !same_kernel(r, i, target, &arena))
            flash += row[proved ? PROVED_KERNEL : FLASH_KERNEL];
        rest = fmax(rest, row[FLASH_REST]);
        stack = fmax(stack, row[STACK]);
    }
    pw_arena_free(&arena);
    out->cycles_per_sample = total + cascade;
    out->flash_bytes = lround(flash + rest);
    out->stack_bytes = lround(stack);
}

void pw_cost_estimate(const pw_stage *stage, const pw_realisation *realisation, const pw_target *target,
                      pw_cost *out)
{
    const pw_realisation *r = realisation;
    int words = 0;
    *out = (pw_cost){.sections = r->count, .cycles_per_sample = NAN, .flash_bytes = -1};
    for (int i = 0; i < r->count; i++) {
        out->multiplies_per_sample += multiplies(&r->section[i], is_fixed(r));
        words += state_words(&r->section[i]);
    }
    out->ram_bytes = (long)words * sample_bytes(r) + (is_fixed(r) ? 4 : 0);
    for (int i = 0; i < r->count; i++)
        if (r->section[i].structure == PW_DIRECT_1_SHAPED) out->ram_bytes += 8;      /* two errors, 32 bits each */
    if (target->cost) from_model(stage, r, target, out);
}
