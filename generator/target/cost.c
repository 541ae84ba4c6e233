/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "target/cost.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

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

static double figure(const pw_cost_model *model, const char *name)
{
    for (int i = 0; i < model->figures; i++)
        if (!strcmp(model->figure[i].name, name)) return model->figure[i].value;
    return NAN;
}

static double cycles(const pw_realisation *r, const pw_cost_model *model)
{
    double total = figure(model, "sample");
    for (int i = 0; i < r->count; i++) {
        char name[64];
        snprintf(name, sizeof name, "%s-%s", pw_sample_word(r->sample), pw_structure_word(r->section[i].structure));
        total += figure(model, name);
    }
    return total;
}

void pw_cost_estimate(const pw_stage *stage, const pw_realisation *realisation, const pw_target *target,
                      pw_cost *out)
{
    (void)stage;
    const pw_realisation *r = realisation;
    int words = 0;
    *out = (pw_cost){.sections = r->count, .cycles_per_sample = NAN};
    for (int i = 0; i < r->count; i++) {
        out->multiplies_per_sample += multiplies(&r->section[i], is_fixed(r));
        words += state_words(&r->section[i]) + (r->section[i].structure == PW_DIRECT_1_SHAPED ? 4 : 0);
    }
    out->ram_bytes = (long)words * sample_bytes(r) + (is_fixed(r) ? 4 : 0);
    out->flash_bytes = 400 + (long)r->count * 24;
    out->stack_bytes = 64;
    if (target->cost) out->cycles_per_sample = cycles(r, target->cost);
}
