/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "words/arrange.h"
#include "words/cycles.h"
#include "words/job.h"

#include <math.h>
#include <string.h>

static void insert_gain(pw_job *j, int at, long double gain)
{
    pw_realisation *r = j->out;
    for (int k = r->count; k > at; k--) {
        r->ideal[k] = r->ideal[k - 1];
        j->gain[k] = j->gain[k - 1];
    }
    r->ideal[at] = (pw_section){.gain = 1};
    pw_section_expand(&r->ideal[at]);
    j->gain[at] = gain;
    r->count++;
}

/* Fraction bits of a that this section cannot do without: where its poles come near to 1 or -1 or
 * the circle, a step of a should move them by 1e-5 of that distance at most. One bit below what
 * the words could hold is always let go, more than four never. */
static int needed_fraction(const pw_format *format, const pw_section *s)
{
    int full = pw_pole_fraction(format, s), least = full - 4 > 1 ? full - 4 : 1;
    double gap = fmin(fmin(1 + s->a[1] + s->a[2], 1 - s->a[1] + s->a[2]), 1 - s->a[2]);
    int need = pw_section_has_integrator(s) || !(gap > 0) ? least : (int)ceil(-log2(2e-5 * gap));
    need = need < least ? least : need;
    return need < full - 1 ? need : full > 1 ? full - 1 : 1;
}

/* The gain of section k that lets its poles keep the fraction bits they need: int64_t holds no
 * more. */
static long double gain_that_fits(const pw_job *j, int k)
{
    const pw_section *s = &j->out->ideal[k];
    double b = fabs(s->b[0]) + fabs(s->b[1]) + fabs(s->b[2]), a = fabs(s->a[1]) + fabs(s->a[2]);
    double room = ldexp(1, 64 - j->format.sample_bits - needed_fraction(&j->format, s)) - a - 0.01;
    return room / b;
}

/* A gain too large for a section stands in a section of its own: in front where the signal has the
 * room, else behind. */
static void split_gains(pw_job *j)
{
    pw_realisation *r = j->out;
    for (int k = 0; k < r->count && r->count < PW_MAX_SECTIONS; k++) {
        long double most = gain_that_fits(j, k), excess = fabsl(j->gain[k]) / most;
        if (r->ideal[k].order == 0 || excess <= 1)
            continue;
        long double room = k == 0 ? 0.999L * j->format.largest / r->input_peak : 1;
        if (room > 2) {
            long double front = fminl(room, excess * 1.001L);
            j->gain[k] /= front;
            insert_gain(j, k, front);
            k++;
            excess /= front;
        }
        if (excess > 1 && r->count < PW_MAX_SECTIONS) {
            j->gain[k] /= excess;
            insert_gain(j, k + 1, excess);
            k++;
        }
    }
}

static void ideal_gains(pw_job *j)
{
    pw_realisation *r = j->out;
    long double back = 1 / powl((long double)r->input_full_scale / r->output_full_scale,
                                1.0L / r->count);
    for (int k = 0; k < r->count; k++) {
        r->ideal[k].gain = (double)(j->gain[k] * back);
        pw_section_expand(&r->ideal[k]);
    }
}

static double input_code(const pw_port *input, const pw_format *format)
{
    if (!format->fixed) return 0;
    double code = input->bits ? ldexp(input->high - input->low, -input->bits) / input->full_scale
        : 0;
    return fmax(code, format->lsb);
}

static void set_up(pw_job *j, const pw_stage *stage, const pw_digital *digital, pw_realisation *out,
                   pw_messages *messages)
{
    *j = (pw_job){.stage = stage, .messages = messages, .out = out};
    j->format = pw_format_of(&stage->arithmetic);
    memset(out, 0, sizeof *out);
    out->sample = stage->arithmetic.sample;
    out->coefficient_bits = j->format.word_bits;
    out->truncate = stage->arithmetic.truncate;
    out->wrap = stage->arithmetic.wrap;
    out->scaling = stage->arithmetic.scaling;
    out->input_full_scale = stage->input.full_scale;
    out->output_full_scale = stage->output.full_scale;
    double peak = stage->input.peak / stage->input.full_scale;
    out->input_peak = peak > 0 && peak < 1 ? peak : 1;
    out->input_code = input_code(&stage->input, &j->format);
    out->structure_why = "";
    j->factor = digital->z.factor * out->input_full_scale / out->output_full_scale;
    pw_band_make(stage, &digital->z, &j->band);
}

static pw_status attempt(const pw_stage *stage, const pw_digital *digital, long double margin,
                         pw_realisation *out, pw_messages *messages)
{
    pw_job j;
    set_up(&j, stage, digital, out, messages);
    pw_sections sections;
    pw_arrange_context context = {
        .shaped = j.format.fixed && stage->arithmetic.structure != PW_DIRECT_1,
        .step = j.format.fixed ? ldexp(1, 2 - j.format.word_bits) : 0,
        .factor = (double)fabsl(j.factor) * out->input_peak,
    };
    pw_order_sections(&digital->z, stage->arithmetic.as_listed, &context, &sections,
                      &out->order_why);
    out->count = sections.count;
    memcpy(out->ideal, sections.list, sizeof sections.list);
    pw_scale_gains(&j.format, out, j.factor, margin, j.gain);
    if (j.format.fixed)
        split_gains(&j);
    memcpy(j.start_gain, j.gain, sizeof j.gain);
    pw_status status = pw_job_choose(&j);
    if (status != PW_OK) {
        pw_job_free(&j);
        return status;
    }
    pw_integrators_time(&j.proof, out);
    pw_cycles_find(&j.proof, out);
    pw_job_free(&j);
    out->enough_bits = pw_job_enough_bits(&j);
    ideal_gains(&j);
    return PW_OK;
}

#define MARGIN 0.999L            /* room for rounding and for the words' own deviation */
#define MOST_TIGHTER 1.25        /* beyond it, it is not the words that fill the node */

/* How far the fullest output that scaling was to keep within its word is above it; 1: none is. */
static double overshoot(const pw_format *format, const pw_realisation *r)
{
    double most = 1;
    for (int k = 0; k + 1 < r->count; k++) {     /* node k is the output of section k */
        if (r->node[k].integrates)
            break;
        double over = r->node[k].bound / format->largest;
        if (over > most && over < MOST_TIGHTER)
            most = over;
    }
    return most;
}

pw_status pw_realise(const pw_stage *stage, const pw_roots *analog, const pw_digital *digital,
                     const pw_target *target, pw_realisation *out, pw_messages *messages)
{
    (void)analog, (void)target;
    pw_format format = pw_format_of(&stage->arithmetic);
    long double margin = MARGIN;
    for (int tries = 3;;) {
        pw_status status = attempt(stage, digital, margin, out, messages);
        if (status != PW_OK || --tries == 0 || !format.fixed
            || stage->arithmetic.scaling != PW_SCALING_L1)
            return status;
        double over = overshoot(&format, out);
        if (over <= 1)
            return status;
        margin *= 0.9995L / over;    /* short words moved the poles: scale again, a little lower */
    }
}
