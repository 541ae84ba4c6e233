/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Which form writes which section, and what forms share. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "emit/emission.h"
#include "simulate/simulate.h"

/* In order of preference. */
static const pw_form *const tables[] = {
    pw_forms_runtime,
    pw_forms_fixed,
    pw_forms_float,
};

static const pw_form *choose(const pw_emission *e, const pw_words *w)
{
    for (size_t t = 0; t < sizeof tables / sizeof tables[0]; t++)
        for (const pw_form *form = tables[t]; form->name; form++)
            if (form->fits(e, w)) return form;
    return NULL;
}

/* Standalone fixed-point code all of whose sections have kernels keeps its state as those read it.
 * */
static bool all_kernels(const pw_emission *e)
{
    const pw_cascade cascade = {.realisation = e->r, .target = e->target};
    return e->standalone && e->fixed && pw_cascade_fits_all(&cascade);
}

void pw_emission_begin(pw_emission *e, const pw_results *results, pw_arena *arena)
{
    static const char *const type[] = {"float", "double", "int32_t", "int16_t"};
    static const char *const family[] = {"f32", "f64", "q31", "q15"};
    static const int bits[] = {0, 0, 32, 16};
    const pw_realisation *r = &results->realisation;
    *e = (pw_emission){
        .results = results,
        .r = r,
        .target = &results->target,
        .stage = results->stage->name,
        .type = type[r->sample],
        .family = family[r->sample],
        .bits = bits[r->sample],
        .fixed = bits[r->sample] > 0,
        .standalone = results->stage->arithmetic.standalone,
        .single = r->sample == PW_FLOAT32,
        .arena = arena,
    };
    for (int k = 0; k < r->count; k++) {
        e->form[k] = choose(e, &r->section[k]);
        e->integrates = e->integrates || pw_section_integrates(&r->section[k], e->fixed);
        e->counts = e->counts || !r->section[k].cannot_clip;
    }
    e->counts = e->fixed && (e->counts || !e->standalone);
    e->part_kernels = all_kernels(e);
}

double pw_direct_reach(const pw_emission *e, const pw_words *w)
{
    double largest = ldexp(1, e->bits - 1);
    double p = largest * (fabs((double)w->b[0]) + fabs((double)w->b[1]) + fabs((double)w->b[2]));
    int right = w->b_fraction - w->a_fraction;
    double in = right > 0 ? p + ldexp(1, right - 1) : ldexp(p, -right);
    double aligned = right > 0 ? ldexp(p, -right) + 1 : ldexp(p, -right);
    double error = ldexp(1, w->a_fraction);
    double acc = aligned + largest * (fabs((double)w->a[1]) + fabs((double)w->a[2]))
                 + error * (fabs((double)w->k1) + fabs((double)w->k2))
                 + ldexp(1, w->a_fraction - 1);
    return fmax(in, acc);
}

const char *pw_reach_note(const pw_emission *e, double reach)
{
    int power;
    frexp(reach, &power);
    return pw_arena_print(e->arena, "at most %.4g < 2^%d, whatever the samples", reach, power);
}

const char *pw_bound_note(const pw_emission *e, int section, const char *node)
{
    char name[sizeof e->r->node[0].name];
    snprintf(name, sizeof name, "section %d %s", section, node);
    for (int i = 0; i < e->r->nodes; i++) {
        const pw_node *n = &e->r->node[i];
        if (strcmp(n->name, name)) continue;
        if (!isfinite(n->bound)) return "an integrator: no bound, it clamps";
        return pw_arena_print(e->arena, "proved: |%s| <= %.6g of full scale%s", node, n->bound,
                              e->r->input_peak < 1 ? " for inputs within the peak" : "");
    }
    return "";
}

const char *pw_word_note(const pw_emission *e, const char *name, double realised)
{
    char value[PW_NUMBER_ROOM];
    return pw_arena_print(e->arena, "%s = %s", name, pw_shortest(value, realised));
}
