/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The cascade: sections in order, over a block or for one sample. */
#include "simulate/simulate.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "simulate/inner.h"

static bool is_fixed(const pw_realisation *realisation)
{
    return realisation->sample == PW_Q15 || realisation->sample == PW_Q31;
}

void pw_simulation_reset(pw_simulation *sim, const pw_realisation *realisation)
{
    memset(sim, 0, sizeof *sim);
    sim->realisation = realisation;
}

/* Section after section over the whole block: the same results as sample after sample, because no
 * section looks at anything but the output of the one before. */
void pw_simulation_run_words(pw_simulation *sim, const int32_t *in, int32_t *out, size_t n)
{
    const pw_realisation *r = sim->realisation;
    pw_word_rules rules = pw_word_rules_of(r);
    if (in != out && n) memmove(out, in, n * sizeof *out);
    for (int k = 0; k < r->count; k++)
        for (size_t i = 0; i < n; i++)
            out[i] = pw_fixed_step(&r->section[k], &rules, sim->state[k], out[i], &sim->clipped,
                                   NULL);
}

void pw_simulation_run_floats(pw_simulation *sim, const double *in, double *out, size_t n)
{
    const pw_realisation *r = sim->realisation;
    bool single = r->sample == PW_FLOAT32;
    for (size_t i = 0; i < n; i++) out[i] = single ? (double)(float)in[i] : in[i];
    for (int k = 0; k < r->count; k++)
        pw_float_run(&r->section[k], single, sim->fstate[k], out, out, n);
}

void pw_simulation_settle(pw_simulation *sim, double x)
{
    const pw_realisation *r = sim->realisation;
    bool fixed = is_fixed(r);
    pw_word_rules rules = pw_word_rules_of(r);
    pw_simulation_reset(sim, r);
    for (int k = 0; k < r->count; k++)
        if (pw_section_integrates(&r->section[k], fixed)) return;
    for (int k = 0; k < r->count; k++) {
        if (fixed)
            x = pw_fixed_settle(&r->section[k], &rules, sim->state[k], (int32_t)x);
        else
            x = pw_float_settle(&r->section[k], r->sample == PW_FLOAT32, sim->fstate[k], x);
    }
}

/* The value of one node from what its section's step left behind. */
static double node_value(const char *name, int32_t y, const int64_t *state,
                         const pw_fixed_trace *trace)
{
    static const char *const known[] = {
        "output", "u1", "u2", "accumulator", "u1 accumulator", "u2 accumulator"};
    int section, at = 0;
    if (sscanf(name, "section %d %n", &section, &at) < 1 || !at) return NAN;
    for (int i = 0; i < 6; i++) {
        if (strcmp(name + at, known[i])) continue;
        if (i >= 3) return ldexp((double)trace->acc[i - 3], -trace->fraction[i - 3]);
        return i == 0 ? (double)y : (double)state[i - 1];
    }
    return NAN;
}

void pw_simulation_step_nodes(pw_simulation *sim, int32_t x, int32_t *y, double *node_out)
{
    const pw_realisation *r = sim->realisation;
    pw_word_rules rules = pw_word_rules_of(r);
    double unit = 1 / -(double)rules.low;
    for (int i = 0; i < r->nodes; i++) node_out[i] = NAN;
    for (int k = 0; k < r->count; k++) {
        pw_fixed_trace trace = {{0}, {0}};
        x = pw_fixed_step(&r->section[k], &rules, sim->state[k], x, &sim->clipped, &trace);
        for (int i = 0; i < r->nodes; i++)
            if (r->node[i].section == k + 1)
                node_out[i] = unit * node_value(r->node[i].name, x, sim->state[k], &trace);
    }
    *y = x;
}
