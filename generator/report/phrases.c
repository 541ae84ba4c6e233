/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/phrases.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "report/figures.h"

#define NO_OFFSET 1e-4        /* LSB: less is not worth a figure */

const char *const pw_cautions[] = {
    "The analog anti-alias filter and the protection in hardware stay: this code replaces neither.",
    "Stability of a closed loop is to be shown on the real plant.",
    "Nothing here is certified. Where the stage sits in a machine that can hurt someone (a power"
    " converter, a motor drive, a medical or a hearing instrument, a vibration or noise exposure"
    " meter), the governing standards and local codes come first, and the review of a licensed or"
    " qualified engineer.",
    NULL,
};

const char pw_caution_short[] =
    "keep anti-alias filter and hardware protection; prove loops on the plant; not certified";

bool pw_is_fixed(const pw_realisation *realisation)
{
    return realisation->sample == PW_Q15 || realisation->sample == PW_Q31;
}

void pw_phrase_verdict(const pw_results *results, pw_text *out)
{
    int failed = 0, n = results->limits;
    for (int i = 0; i < n; i++) failed += !results->limit[i].met;
    if (!n) pw_text_add(out, "no limit was given, so none is judged");
    else if (failed) pw_text_print(out, "%d of %d limit%s %s NOT MET", failed, n, n == 1 ? "" : "s",
                                   failed == 1 ? "is" : "are");
    else if (n == 1) pw_text_add(out, "the one limit is met");
    else pw_text_print(out, "all %d limits are met", n);
}

void pw_phrase_prewarp(pw_prewarp prewarp, double hz, pw_text *out)
{
    char buffer[PW_FIGURE_ROOM];
    if (prewarp == PW_PREWARP_EACH_SECTION) pw_text_add(out, "each section prewarped");
    else if (prewarp == PW_PREWARP_AT)
        pw_text_print(out, "prewarped at %s", pw_figure(buffer, hz, "Hz"));
    else pw_text_add(out, "no prewarp");
}

void pw_phrase_transform(const pw_digital *digital, pw_text *out)
{
    char buffer[PW_FIGURE_ROOM];
    pw_text_add(out, pw_method_word(digital->method));
    if (digital->method == PW_BILINEAR) {
        pw_text_add(out, ", ");
        pw_phrase_prewarp(digital->prewarp, digital->prewarp_hz, out);
    }
    if (digital->method == PW_MATCHED_Z && digital->zeros_at_infinity == PW_INFINITY_KEEP)
        pw_text_add(out, ", zeros at infinity kept");
    if (digital->method == PW_MATCHED_Z && digital->zeros_at_infinity == PW_INFINITY_KEEP_ONE)
        pw_text_add(out, ", one zero at infinity kept");
    if (digital->gain_matched)
        pw_text_print(out, ", gain matched at %s", pw_figure(buffer, digital->match_gain_hz, "Hz"));
}

void pw_phrase_candidate(const pw_candidate *c, pw_text *out)
{
    static const char *const zeros[] = {"zeros at infinity to half the rate",
                                        "one zero at infinity kept", "zeros at infinity kept"};
    if (!c->possible) pw_text_add(out, "does not exist");
    else if (c->method == PW_BILINEAR) pw_phrase_prewarp(c->prewarp, c->prewarp_hz, out);
    else if (c->method == PW_MATCHED_Z) pw_text_add(out, zeros[c->zeros_at_infinity]);
}

void pw_phrase_choice(const pw_digital *digital, pw_text *out)
{
    char figure[PW_FIGURE_ROOM], phase[PW_FIGURE_ROOM];
    const pw_candidate *next = &digital->candidate[1];
    if (digital->candidates < 2) return;
    pw_text_print(out, "best of %d tried", digital->candidates);
    if (next->possible)
        pw_text_print(out, ", next %s with %s and %s", pw_method_word(next->method),
                      pw_figure(figure, next->magnitude_error_db, "dB"),
                      pw_figure(phase, next->phase_error_deg, "deg"));
}

void pw_phrase_arithmetic(const pw_realisation *r, pw_text *out)
{
    pw_text_add(out, pw_sample_word(r->sample));
    if (!pw_is_fixed(r)) return;
    pw_text_print(out, ", %d-bit coefficients, %s, %s, %s scaling", r->coefficient_bits,
                  r->truncate ? "truncates" : "rounds to nearest", r->wrap ? "wraps" : "saturates",
                  pw_scaling_word(r->scaling));
}

/* "2 sections of direct-1", or "3 sections, 2 direct-1 and 1 coupled". */
static void add_structures(const pw_realisation *r, pw_text *out)
{
    char buffer[PW_FIGURE_ROOM];
    int count[PW_COUPLED + 1] = {0};
    for (int i = 0; i < r->count; i++) count[r->section[i].structure]++;
    pw_text_add(out, pw_count(buffer, r->count, "section"));
    const char *before = ", ";
    for (int k = 0; k <= PW_COUPLED; k++) {
        if (count[k] && count[k] == r->count)
            pw_text_print(out, " of %s", pw_structure_word((pw_structure)k));
        else if (count[k]) {
            pw_text_print(out, "%s%d %s", before, count[k], pw_structure_word((pw_structure)k));
            before = " and ";
        }
    }
}

void pw_phrase_stage(const pw_results *results, pw_text *out)
{
    char buffer[PW_FIGURE_ROOM];
    const pw_realisation *r = &results->realisation;
    pw_text_add(out, pw_count(buffer, results->analog.poles, "pole"));
    pw_text_print(out, " and %s", pw_count(buffer, results->analog.zeros, "zero"));
    pw_text_print(out, " at %s; ", pw_figure(buffer, results->stage->rate_hz, "Hz"));
    pw_phrase_transform(&results->digital, out);
    pw_text_add(out, "; ");
    add_structures(r, out);
    pw_text_print(out, " in %s", pw_sample_word(r->sample));
    if (pw_is_fixed(r)) pw_text_print(out, " with %d-bit coefficients", r->coefficient_bits);
}

void pw_phrase_peak(const pw_error_peak *peak, const char *unit, pw_text *out)
{
    char value[PW_FIGURE_ROOM], at[PW_FIGURE_ROOM];
    pw_text_add(out, pw_figure(value, peak->max, unit));
    if (isfinite(peak->max) && peak->max > 0)
        pw_text_print(out, " at %s", pw_figure(at, peak->at_hz, "Hz"));
}

/* ---- limits ---- */

typedef struct limit_name { const char *key, *name, *asked; } limit_name;

static const limit_name *name_of(const pw_limit_row *row)
{
    static const limit_name names[] = {
        {"magnitude", "magnitude error", "at most %s"}, {"phase", "phase error", "at most %s"},
        {"delay", "delay error", "at most %s"}, {"noise", "round-off noise", "%s"},
        {"overflow", "overflow", "forbidden"}, {"cycles", "cycles a sample", "at most %s"},
        {"flash", "flash", "at most %s"}, {"ram", "RAM", "at most %s"}, {NULL, NULL, "%s"}};
    const limit_name *n = names;
    while (n->key && strcmp(n->key, row->name)) n++;
    return n;
}

static void add_asked(const char *pattern, const char *figure, pw_text *out)
{
    const char *here = strstr(pattern, "%s");
    if (!here) {
        pw_text_add(out, pattern);
        return;
    }
    pw_text_add_bytes(out, pattern, (size_t)(here - pattern));
    pw_text_add(out, figure);
}

static const pw_error_peak *peak_of(const pw_results *results, const char *limit)
{
    const pw_error_figures *total = &results->response.total;
    if (!strcmp(limit, "magnitude")) return &total->magnitude_db;
    if (!strcmp(limit, "phase")) return &total->phase_deg;
    if (!strcmp(limit, "delay")) return &total->delay_s;
    return NULL;
}

void pw_phrase_limit(const pw_results *results, const pw_limit_row *row, pw_text *name,
                     pw_text *asked, pw_text *found)
{
    char figure[PW_FIGURE_ROOM];
    const limit_name *known = name_of(row);
    const pw_error_peak *peak = peak_of(results, row->name);
    pw_text_add(name, known->name ? known->name : row->name);
    add_asked(known->asked, pw_figure(figure, row->limit, row->unit), asked);
    if (peak) pw_phrase_peak(peak, row->unit, found);
    else if (!strcmp(row->name, "overflow"))
        pw_text_print(found, "%s can clip",
                      row->value > 0 ? pw_count(figure, lrint(row->value), "node") : "no node");
    else if (!strcmp(row->name, "noise") && !results->realisation.noise.given)
        pw_text_add(found, "floats, which have no figure");
    else if (isnan(row->value)) pw_text_add(found, "no figure, for this target has no model");
    else if (!strcmp(row->name, "cycles"))
        pw_text_print(found, "about %s", pw_figure(figure, row->value, pw_cost_unit(results)));
    else pw_text_add(found, pw_figure(figure, row->value, row->unit));
}

/* ---- range, noise, cost ---- */

static double room_of(const pw_node *node)
{
    return node->integrates ? -INFINITY : node->headroom_db;
}

void pw_nodes_by_headroom(const pw_realisation *r, int order[PW_MAX_NODES])
{
    for (int i = 0; i < r->nodes; i++) {
        int at = i;
        for (; at && room_of(&r->node[order[at - 1]]) > room_of(&r->node[i]); at--)
            order[at] = order[at - 1];
        order[at] = i;
    }
}

/* "0.8 of full scale (1.32 V)" */
static void add_level(const pw_realisation *r, double level, pw_text *out)
{
    char volts[PW_FIGURE_ROOM];
    pw_text_print(out, "%.3g of full scale (%s)", level,
                  pw_figure(volts, level * r->input_full_scale, "V"));
}

static void add_first_clip(const pw_realisation *r, bool now, pw_text *out)
{
    if (!isfinite(r->first_clip_input) || r->first_clip_input > 1) {
        if (r->input_peak < 1) pw_text_add(out, "; none at full scale either");
        return;
    }
    pw_text_print(out, "; %sthe first can clip from ", now ? "" : "beyond that ");
    add_level(r, r->first_clip_input, out);
}

static void add_fullest(const pw_realisation *r, pw_text *out)
{
    const pw_node *fullest = &r->node[r->worst_node];
    pw_text_print(out, "; the fullest is %s at %.3g of full scale", fullest->name, fullest->bound);
}

static void add_integrators(int integrating, int clipping, pw_text *out)
{
    char buffer[PW_FIGURE_ROOM];
    if (integrating == 1) pw_text_add(out, "1 node integrates up to the clamp; ");
    else pw_text_print(out, "%d nodes integrate up to the clamp; ", integrating);
    if (clipping) pw_text_print(out, "%s beside can clip", pw_count(buffer, clipping, "node"));
    else pw_text_add(out, "proved: no other node can clip");
}

void pw_phrase_range(const pw_results *results, pw_text *out)
{
    char buffer[PW_FIGURE_ROOM];
    const pw_realisation *r = &results->realisation;
    int clipping = 0, integrating = 0;
    for (int i = 0; i < r->nodes; i++) {
        clipping += r->node[i].can_clip && !r->node[i].integrates;
        integrating += r->node[i].integrates;
    }
    if (!pw_is_fixed(r)) {
        pw_text_add(out, "floats do not clip");
        if (r->nodes && !integrating) add_fullest(r, out);
    } else if (integrating) add_integrators(integrating, clipping, out);
    else {
        if (clipping) pw_text_print(out, "%s can clip", pw_count(buffer, clipping, "node"));
        else {
            pw_text_add(out, "proved: no node can clip for any input up to ");
            add_level(r, r->input_peak, out);
        }
        if (r->nodes) add_fullest(r, out);
        add_first_clip(r, clipping, out);
    }
}

void pw_phrase_integrator(const pw_results *results, const pw_node *node, pw_text *out)
{
    char worst[PW_FIGURE_ROOM], code[PW_FIGURE_ROOM];
    double rate = results->stage->rate_hz;
    pw_text_print(out, "%s integrates", node->name);
    if (!isfinite(node->samples_to_clip)) return;
    pw_text_print(out, ": the worst input takes it to the clamp in %s",
                  pw_samples(worst, node->samples_to_clip, rate));
    if (isfinite(node->samples_to_clip_code))
        pw_text_print(out, ", one code of offset in %s; it leaves the clamp with the first sample"
                      " of the other sign", pw_samples(code, node->samples_to_clip_code, rate));
}

#define CYCLES_RULE 3         /* times the rms: beyond the crest of a noise, more or less */

void pw_phrase_noise(const pw_results *results, pw_text *out)
{
    const pw_noise *n = &results->realisation.noise;
    if (!n->given) {
        pw_text_add(out, "no figure for floats");
        return;
    }
    if (n->grows) {
        pw_text_print(out, "grows without end: its variance by %.3g LSB^2 a sample",
                      n->growth_lsb2_per_sample);
        return;
    }
    double offset = fabs(n->output_offset_lsb) < NO_OFFSET ? 0 : n->output_offset_lsb;
    pw_text_print(out, "%.3g LSB rms at the output (%.1f dBFS), offset %.3g LSB, SNR %.1f dB,"
                  " %.1f effective bits", n->output_rms_lsb, n->output_dbfs, offset, n->snr_db,
                  n->effective_bits);
    /* Rounding passes for white noise only where the words move by many units a sample. */
    if (results->realisation.limit_cycle.found_lsb > CYCLES_RULE * n->output_rms_lsb)
        pw_text_add(out, "; quiet or slow inputs add to it, as Cycles says");
}

void pw_phrase_limit_cycle(const pw_results *results, pw_text *out)
{
    const pw_limit_cycle *l = &results->realisation.limit_cycle;
    if (!l->given) {
        pw_text_add(out, "no figure for floats");
        return;
    }
    if (isfinite(l->bound_lsb))
        pw_text_print(out, "proved at most %.10g LSB; ", ceil(l->bound_lsb * 10) / 10);
    else pw_text_add(out, "no bound after an integrator; ");
    if (!l->found_period) pw_text_add(out, "the search found none");
    else if (l->found_period == 1)
        pw_text_print(out, "the search found a constant of %.4g LSB", l->found_lsb);
    else pw_text_print(out, "the search found %.4g LSB with a period of %d samples", l->found_lsb,
                       l->found_period);
}

const char *pw_cost_unit(const pw_results *results)
{
    return results->target.counts_cycles ? "cycles" : "instructions";
}

void pw_phrase_cost(const pw_results *results, pw_text *out)
{
    const pw_cost *c = &results->cost;
    pw_text_print(out, "%s: ", results->target.name ? results->target.name : "host");
    if (isfinite(c->cycles_per_sample))
        pw_text_print(out, "about %.*g %s and ", c->cycles_per_sample < 1000 ? 3 : 9,
                      c->cycles_per_sample < 1000 ? c->cycles_per_sample : round(c->cycles_per_sample), pw_cost_unit(results));
    pw_text_print(out, "%d %s a sample", c->multiplies_per_sample,
                  c->multiplies_per_sample == 1 ? "multiply" : "multiplies");
    if (c->flash_bytes >= 0) pw_text_print(out, ", %ld bytes of flash", c->flash_bytes);
    pw_text_print(out, ", %ld bytes of RAM a channel", c->ram_bytes);
    if (c->flash_bytes < 0) pw_text_add(out, "; this target has no model of cycles and flash");
    else if (c->stack_bytes) pw_text_print(out, ", %ld of stack", c->stack_bytes);
}
