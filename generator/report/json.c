/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/json.h"

#include <math.h>

#include "report/json_value.h"
#include "report/phrases.h"
#include "report/tolerance.h"

/* ---- transform ---- */

static json_t *prewarp(pw_prewarp kind, double hz)
{
    if (kind == PW_PREWARP_EACH_SECTION) return json_string("each-section");
    return pw_json_number_if(kind == PW_PREWARP_AT, hz);
}

/* As the stage file spells it; null for other methods than matched-z. */
static json_t *infinity(pw_method method, pw_infinity zeros)
{
    static const char *const word[] = {"nyquist", "keep-one", "keep"};
    return method == PW_MATCHED_Z ? pw_json_text(word[zeros]) : json_null();
}

static json_t *transform(const pw_digital *digital)
{
    json_t *o = json_object(), *tried = json_array();
    for (int i = 0; i < digital->candidates; i++) {
        const pw_candidate *c = &digital->candidate[i];
        json_t *row = json_object();
        pw_json_put(row, "method", pw_json_text(pw_method_word(c->method)));
        pw_json_put(row, "magnitude_error_db",
                    pw_json_number_if(c->possible, c->magnitude_error_db));
        pw_json_put(row, "phase_error_deg", pw_json_number_if(c->possible, c->phase_error_deg));
        pw_json_put(row, "prewarp_hz", prewarp(c->prewarp, c->prewarp_hz));
        pw_json_put(row, "zeros_at_infinity", infinity(c->method, c->zeros_at_infinity));
        pw_json_put(row, "possible", json_boolean(c->possible));
        json_array_append_new(tried, row);
    }
    pw_json_put(o, "method", pw_json_text(pw_method_word(digital->method)));
    pw_json_put(o, "prewarp_hz", prewarp(digital->prewarp, digital->prewarp_hz));
    pw_json_put(o, "match_gain_hz",
                pw_json_number_if(digital->gain_matched, digital->match_gain_hz));
    pw_json_put(o, "zeros_at_infinity", infinity(digital->method, digital->zeros_at_infinity));
    pw_json_put(o, "candidates", tried);
    return o;
}

/* ---- words ---- */

static json_t *coupled_words(const pw_words *w)
{
    json_t *o = json_object();
    pw_json_put(o, "sigma", json_integer(w->sigma));
    pw_json_put(o, "omega", json_integer(w->omega));
    pw_json_put(o, "g", json_integer(w->g));
    pw_json_put(o, "fraction_bits", json_integer(w->a_fraction));
    pw_json_put(o, "c1", json_integer(w->c1));
    pw_json_put(o, "c2", json_integer(w->c2));
    pw_json_put(o, "d", json_integer(w->d));
    pw_json_put(o, "c_fraction_bits", json_integer(w->c_fraction));
    return o;
}

static json_t *realised(const pw_words *w, bool fixed)
{
    json_t *o = json_object();
    bool coupled = w->structure == PW_COUPLED, direct = fixed && !coupled;
    pw_json_put(o, "b", pw_json_numbers(w->realised_b, 3));
    pw_json_put(o, "a", pw_json_numbers(w->realised_a, 3));
    pw_json_put(o, "b_words", direct ? pw_json_integers(w->b, 3) : json_null());
    pw_json_put(o, "a_words", direct ? pw_json_integers(w->a + 1, 2) : json_null());
    pw_json_put(o, "b_fraction_bits", direct ? json_integer(w->b_fraction) : json_null());
    pw_json_put(o, "a_fraction_bits", direct ? json_integer(w->a_fraction) : json_null());
    pw_json_put(o, "structure", pw_json_text(pw_structure_word(w->structure)));
    pw_json_put(o, "words", fixed && coupled ? coupled_words(w) : json_null());
    pw_json_put(o, "error_feedback", fixed && w->structure == PW_DIRECT_1_SHAPED
        ? pw_json_integers((int32_t[]){w->k1, w->k2}, 2) : json_null());
    pw_json_put(o, "cannot_clip", fixed ? json_boolean(w->cannot_clip) : json_null());
    pw_json_put(o, "accumulator_bits", fixed ? json_integer(w->fits_32 ? 32 : 64) : json_null());
    return o;
}

static json_t *sections(const pw_realisation *r)
{
    json_t *list = json_array();
    for (int i = 0; i < r->count; i++) {
        json_t *o = json_object(), *ideal = json_object();
        pw_json_put(ideal, "b", pw_json_numbers(r->ideal[i].b, 3));
        pw_json_put(ideal, "a", pw_json_numbers(r->ideal[i].a, 3));
        pw_json_put(o, "ideal", ideal);
        pw_json_put(o, "realised", realised(&r->section[i], pw_is_fixed(r)));
        json_array_append_new(list, o);
    }
    return list;
}

/* ---- response ---- */

static json_t *peak(const pw_error_peak *p)
{
    json_t *o = json_object();
    pw_json_put(o, "max", pw_json_number(p->max));
    pw_json_put(o, "at_hz", pw_json_number(p->at_hz));
    return o;
}

static json_t *errors(const pw_error_figures *e)
{
    json_t *o = json_object();
    pw_json_put(o, "magnitude_db", peak(&e->magnitude_db));
    pw_json_put(o, "phase_deg", peak(&e->phase_deg));
    pw_json_put(o, "delay_s", peak(&e->delay_s));
    return o;
}

static json_t *response(const pw_response *r)
{
    json_t *o = json_object(), *table = json_array();
    pw_json_put(o, "band_hz", pw_json_numbers(r->band_hz, 2));
    pw_json_put(o, "transform_error", errors(&r->transform));
    pw_json_put(o, "quantisation_error", errors(&r->quantisation));
    pw_json_put(o, "total_error", errors(&r->total));
    for (int i = 0; i < r->rows; i++) {
        const pw_response_row *row = &r->row[i];
        json_t *line = json_object();
        pw_json_put(line, "hz", pw_json_number(row->hz));
        pw_json_put(line, "analog_db", pw_json_number(row->analog_db));
        pw_json_put(line, "analog_deg", pw_json_number(row->analog_deg));
        pw_json_put(line, "digital_db", pw_json_number(row->digital_db));
        pw_json_put(line, "digital_deg", pw_json_number(row->digital_deg));
        pw_json_put(line, "analog_delay_s", pw_json_number(row->analog_delay_s));
        pw_json_put(line, "digital_delay_s", pw_json_number(row->digital_delay_s));
        json_array_append_new(table, line);
    }
    pw_json_put(o, "table", table);
    return o;
}

/* ---- range, noise, cost ---- */

static json_t *nodes(const pw_realisation *r)
{
    json_t *list = json_array();
    for (int i = 0; i < r->nodes; i++) {
        const pw_node *n = &r->node[i];
        json_t *o = json_object();
        pw_json_put(o, "name", pw_json_text(n->name));
        pw_json_put(o, "section", json_integer(n->section));
        pw_json_put(o, "bound", pw_json_number(n->bound));
        pw_json_put(o, "full_scale", json_real(1.0));
        pw_json_put(o, "headroom_db", pw_json_number(n->headroom_db));
        pw_json_put(o, "can_clip", json_boolean(n->can_clip));
        pw_json_put(o, "integrates", json_boolean(n->integrates));
        pw_json_put(o, "samples_to_clip", pw_json_count(n->samples_to_clip));
        pw_json_put(o, "samples_to_clip_one_code", pw_json_count(n->samples_to_clip_code));
        pw_json_put(o, "headroom_bits", pw_json_number(n->headroom_db / (20 * log10(2))));
        pw_json_put(o, "peak_gain", pw_json_number(n->peak_gain));
        json_array_append_new(list, o);
    }
    return list;
}

static json_t *first_clip(const pw_realisation *r)
{
    json_t *o = json_object();
    bool known = r->nodes > 0 && r->worst_node >= 0 && r->worst_node < r->nodes;
    pw_json_put(o, "node", known ? pw_json_text(r->node[r->worst_node].name) : json_null());
    pw_json_put(o, "input", pw_json_number(r->first_clip_input));
    return o;
}

static json_t *noise(const pw_noise *n)
{
    json_t *o = json_object();
    pw_json_put(o, "output_rms_lsb", pw_json_number_if(n->given, n->output_rms_lsb));
    pw_json_put(o, "output_offset_lsb", pw_json_number_if(n->given, n->output_offset_lsb));
    pw_json_put(o, "output_dbfs", pw_json_number_if(n->given, n->output_dbfs));
    pw_json_put(o, "snr_db", pw_json_number_if(n->given, n->snr_db));
    pw_json_put(o, "grows", json_boolean(n->grows));
    pw_json_put(o, "effective_bits", pw_json_number_if(n->given, n->effective_bits));
    pw_json_put(o, "input_quantisation_rms_lsb",
                pw_json_number_if(n->given, n->input_quantisation_rms_lsb));
    pw_json_put(o, "growth_lsb2_per_sample",
                pw_json_number_if(n->given, n->growth_lsb2_per_sample));
    return o;
}

static json_t *limit_cycle(const pw_limit_cycle *l)
{
    json_t *o = json_object();
    pw_json_put(o, "bound_lsb", pw_json_number_if(l->given, l->bound_lsb));
    pw_json_put(o, "found_lsb", pw_json_number_if(l->given, l->found_lsb));
    pw_json_put(o, "found_period", l->given ? json_integer(l->found_period) : json_null());
    return o;
}

static json_t *cost(const pw_results *results)
{
    const pw_cost *c = &results->cost;
    json_t *o = json_object();
    pw_json_put(o, "target", pw_json_text(results->target.name));
    pw_json_put(o, "sections", json_integer(c->sections));
    pw_json_put(o, "multiplies_per_sample", json_integer(c->multiplies_per_sample));
    pw_json_put(o, "cycles_per_sample", pw_json_number(c->cycles_per_sample));
    pw_json_put(o, "counted", pw_json_text(pw_cost_unit(results)));
    pw_json_put(o, "flash_bytes", c->flash_bytes < 0 ? json_null() : json_integer(c->flash_bytes));
    pw_json_put(o, "ram_bytes", json_integer(c->ram_bytes));
    pw_json_put(o, "stack_bytes", c->flash_bytes < 0 ? json_null() : json_integer(c->stack_bytes));
    return o;
}

static json_t *limits(const pw_results *results)
{
    json_t *list = json_array();
    for (int i = 0; i < results->limits; i++) {
        const pw_limit_row *l = &results->limit[i];
        json_t *o = json_object();
        pw_json_put(o, "name", pw_json_text(l->name));
        pw_json_put(o, "limit", pw_json_number(l->limit));
        pw_json_put(o, "value", pw_json_number(l->value));
        pw_json_put(o, "unit", pw_json_text(l->unit));
        pw_json_put(o, "met", json_boolean(l->met));
        json_array_append_new(list, o);
    }
    return list;
}

/* ---- what was asked for ---- */

static json_t *arithmetic(const pw_realisation *r)
{
    json_t *o = json_object();
    pw_json_put(o, "sample", pw_json_text(pw_sample_word(r->sample)));
    pw_json_put(o, "coefficient_bits", pw_is_fixed(r) ? json_integer(r->coefficient_bits)
                : json_null());
    pw_json_put(o, "rounding", pw_is_fixed(r) ? pw_json_text(r->truncate ? "truncate" : "nearest")
                : json_null());
    pw_json_put(o, "overflow", pw_is_fixed(r) ? pw_json_text(r->wrap ? "wrap" : "saturate")
                : json_null());
    pw_json_put(o, "scaling", pw_json_text(pw_scaling_word(r->scaling)));
    pw_json_put(o, "structure_why", pw_json_text(r->structure_why));
    pw_json_put(o, "order_why", pw_json_text(r->order_why));
    return o;
}

static json_t *signal(const pw_realisation *r)
{
    json_t *o = json_object();
    pw_json_put(o, "input_full_scale_v", pw_json_number(r->input_full_scale));
    pw_json_put(o, "output_full_scale_v", pw_json_number(r->output_full_scale));
    pw_json_put(o, "input_peak_v", pw_json_number(r->input_peak * r->input_full_scale));
    return o;
}

void pw_report_json(const pw_results *results, pw_text *out)
{
    const pw_stage *stage = results->stage;
    const pw_realisation *r = &results->realisation;
    json_t *o = json_object();
    pw_json_put(o, "format", pw_json_text("polewright-report-1"));
    pw_json_put(o, "stage", pw_json_text(stage->name));
    pw_json_put(o, "about", pw_json_text(stage->about));
    pw_json_put(o, "rate_hz", pw_json_number(stage->rate_hz));
    pw_json_put(o, "version", pw_json_text(PW_VERSION));
    pw_json_put(o, "stage_file_sha256", pw_json_text(stage->sha256));
    pw_json_put(o, "analog", pw_json_roots(&results->analog));
    pw_json_put(o, "transform", transform(&results->digital));
    pw_json_put(o, "digital", pw_json_roots(&results->digital.z));
    pw_json_put(o, "arithmetic", arithmetic(r));
    pw_json_put(o, "signal", signal(r));
    pw_json_put(o, "sections", sections(r));
    pw_json_put(o, "response", response(&results->response));
    pw_json_put(o, "nodes", nodes(r));
    pw_json_put(o, "first_clip", first_clip(r));
    pw_json_put(o, "noise", noise(&r->noise));
    pw_json_put(o, "limit_cycle", limit_cycle(&r->limit_cycle));
    pw_json_put(o, "cost", cost(results));
    pw_json_put(o, "spread", pw_json_spread(results));
    pw_json_put(o, "loop", json_null());
    pw_json_put(o, "limits", limits(results));
    pw_json_put(o, "verdict", pw_json_text(results->met ? "met" : "not met"));
    pw_json_write(o, out);
}
