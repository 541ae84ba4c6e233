/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "words/proof.h"

#include <math.h>
#include <string.h>

typedef struct job {             /* what the steps of a realisation share */
    const pw_stage *stage;
    const pw_roots *z;
    pw_format format;
    pw_band grid;
    pw_messages *messages;
    pw_realisation *out;
    long double factor;          /* from sample to sample */
    long double gain[PW_MAX_SECTIONS];
} job;

static pw_structure default_structure(const job *j)
{
    pw_structure asked = j->stage->arithmetic.structure;
    if (asked != PW_STRUCTURE_AUTO)
        return asked;
    return j->format.fixed ? PW_DIRECT_1 : PW_TRANSPOSED_2;
}

static void insert_gain(job *j, int at, long double gain)
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

static bool choose_words(job *j, int k)
{
    pw_words *w = &j->out->section[k];
    memset(w, 0, sizeof *w);
    w->structure = default_structure(j);
    w->order = j->out->ideal[k].order;
    if (j->format.fixed)
        return pw_quantise_direct(&j->format, &j->out->ideal[k], j->gain[k], w);
    pw_quantise_float(&j->format, &j->out->ideal[k], j->gain[k], w);
    return true;
}

/* The gain of section k that lets its poles keep all but one bit of their words: int64_t holds no
 * more. */
static long double gain_that_fits(const job *j, int k)
{
    const pw_section *s = &j->out->ideal[k];
    double b = fabs(s->b[0]) + fabs(s->b[1]) + fabs(s->b[2]), a = fabs(s->a[1]) + fabs(s->a[2]);
    int fraction = pw_pole_fraction(&j->format, s) - 1;
    double room = ldexp(1, 64 - j->format.sample_bits - (fraction > 1 ? fraction : 1)) - a - 0.01;
    return room / b;
}

/* A gain too large for a section stands in a section of its own: in front where the signal has the
 * room, else behind. */
static void split_gains(job *j)
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

static pw_status all_words(job *j)
{
    for (int k = 0; k < j->out->count; k++) {
        if (!choose_words(j, k)) {
            pw_error(j->messages, j->stage->arithmetic.at,
                     "the gain of section %d does not fit any word; expected less gain", k + 1);
            return PW_WRONG;
        }
        if (!pw_words_stable(&j->out->section[k])) {
            pw_error(j->messages, j->stage->arithmetic.coefficient_at,
                     "words of %d bits make section %d unstable; expected more bits",
                     j->format.word_bits, k + 1);
            return PW_WRONG;
        }
    }
    return PW_OK;
}

/* Where rounding pushed a scaled node over full scale, its section gives way and the last one makes
 * up for it. True where something moved. */
static bool shrink(job *j)
{
    pw_realisation *r = j->out;
    bool moved = false;
    if (!j->format.fixed || r->scaling != PW_SCALING_L1)
        return false;
    for (int k = 0; k + 1 < r->count; k++) {
        double over = r->node[k].bound / j->format.largest;
        if (!(over > 1) || r->node[k].integrates || over > 2)
            continue;
        j->gain[k] /= over * 1.0005;
        j->gain[k + 1] *= over * 1.0005;
        moved = true;
    }
    return moved;
}

static void ideal_gains(job *j)
{
    pw_realisation *r = j->out;
    long double back = 1 / powl((long double)r->input_full_scale / r->output_full_scale,
                                1.0L / r->count);
    for (int k = 0; k < r->count; k++) {
        r->ideal[k].gain = (double)(j->gain[k] * back);
        pw_section_expand(&r->ideal[k]);
    }
}

static void set_up(job *j, const pw_stage *stage, const pw_digital *digital, pw_realisation *out,
                   pw_messages *messages)
{
    *j = (job){.stage = stage, .z = &digital->z, .messages = messages, .out = out};
    j->format = pw_format_of(&stage->arithmetic);
    memset(out, 0, sizeof *out);
    out->sample = stage->arithmetic.sample;
    out->coefficient_bits = j->format.word_bits;
    out->truncate = stage->arithmetic.truncate;
    out->wrap = stage->arithmetic.wrap;
    out->scaling = stage->arithmetic.scaling;
    out->input_full_scale = stage->input.full_scale;
    out->output_full_scale = stage->output.full_scale;
    out->input_peak = fmin(1, stage->input.peak / stage->input.full_scale);
    out->structure_why = "";
    j->factor = digital->z.factor * out->input_full_scale / out->output_full_scale;
    pw_band_make(stage, &digital->z, &j->grid);
}

pw_status pw_realise(const pw_stage *stage, const pw_roots *analog, const pw_digital *digital,
                     const pw_target *target, pw_realisation *out, pw_messages *messages)
{
    job j;
    (void)analog, (void)target;
    set_up(&j, stage, digital, out, messages);
    pw_sections sections;
    pw_order_sections(&digital->z, stage->arithmetic.as_listed, &sections, &out->order_why);
    out->count = sections.count;
    memcpy(out->ideal, sections.list, sizeof sections.list);
    pw_scale_gains(&j.format, out, j.factor, j.gain);
    if (j.format.fixed)
        split_gains(&j);
    pw_status status = PW_OK;
    for (int round = 0; round < 6; round++) {
        status = all_words(&j);
        if (status != PW_OK)
            return status;
        pw_proof proof;
        pw_proof_start(&j.format, out, &proof);
        pw_prove(&proof, out);
        bool again = round < 5 && shrink(&j);
        pw_proof_end(&proof);
        if (!again)
            break;
    }
    ideal_gains(&j);
    pw_deviation(stage, &j.grid, out);
    return PW_OK;
}
