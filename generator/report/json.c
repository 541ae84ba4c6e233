/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/json.h"

#include <jansson.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#define DIGITS 17             /* a double reads back exactly */
#define EXACT_INTEGER 9.0e15  /* below 2^53: every integer is a double */

static void put(json_t *object, const char *key, json_t *value)
{
    if (json_object_set_new(object, key, value)) {
        fprintf(stderr, "polewright: no memory for the JSON report\n");
        exit(PW_FAILED);
    }
}

static json_t *number(double value)
{
    return isfinite(value) ? json_real(value) : json_null();
}

static json_t *number_if(bool there, double value)
{
    return there ? number(value) : json_null();
}

/* A count of samples: whole where a double can tell. */
static json_t *count(double value)
{
    if (fabs(value) < EXACT_INTEGER) return json_integer((json_int_t)ceil(value));
    return number(value);
}

static json_t *text(const char *value)
{
    return json_string(value ? value : "");
}

static json_t *numbers(const double *value, int n)
{
    json_t *list = json_array();
    for (int i = 0; i < n; i++) json_array_append_new(list, number(value[i]));
    return list;
}

static json_t *integers(const int32_t *value, int n)
{
    json_t *list = json_array();
    for (int i = 0; i < n; i++) json_array_append_new(list, json_integer(value[i]));
    return list;
}

static json_t *complexes(const double complex *value, int n)
{
    json_t *list = json_array();
    for (int i = 0; i < n; i++)
        json_array_append_new(list, numbers((double[]){creal(value[i]), cimag(value[i])}, 2));
    return list;
}

static json_t *roots(const pw_roots *model)
{
    json_t *o = json_object();
    put(o, "poles", complexes(model->pole, model->poles));
    put(o, "zeros", complexes(model->zero, model->zeros));
    put(o, "factor", number((double)model->factor));
    put(o, "log10_factor", number((double)log10l(fabsl(model->factor))));
    return o;
}

/* ---- transform ---- */

static json_t *prewarp(pw_prewarp kind, double hz)
{
    if (kind == PW_PREWARP_EACH_SECTION) return json_string("each-section");
    return number_if(kind == PW_PREWARP_AT, hz);
}

static json_t *transform(const pw_digital *digital)
{
    json_t *o = json_object(), *tried = json_array();
    for (int i = 0; i < digital->candidates; i++) {
        const pw_candidate *c = &digital->candidate[i];
        json_t *row = json_object();
        put(row, "method", text(pw_method_word(c->method)));
        put(row, "magnitude_error_db", number_if(c->possible, c->magnitude_error_db));
        put(row, "phase_error_deg", number_if(c->possible, c->phase_error_deg));
        put(row, "prewarp_hz", prewarp(c->prewarp, c->prewarp_hz));
        put(row, "possible", json_boolean(c->possible));
        json_array_append_new(tried, row);
    }
    put(o, "method", text(pw_method_word(digital->method)));
    put(o, "prewarp_hz", prewarp(digital->prewarp, digital->prewarp_hz));
    put(o, "match_gain_hz", number_if(digital->gain_matched, digital->match_gain_hz));
    put(o, "candidates", tried);
    return o;
}

/* ---- words ---- */

static json_t *coupled_words(const pw_words *w)
{
    json_t *o = json_object();
    put(o, "sigma", json_integer(w->sigma));
    put(o, "omega", json_integer(w->omega));
    put(o, "g", json_integer(w->g));
    put(o, "fraction_bits", json_integer(w->a_fraction));
    put(o, "c1", json_integer(w->c1));
    put(o, "c2", json_integer(w->c2));
    put(o, "d", json_integer(w->d));
    put(o, "c_fraction_bits", json_integer(w->c_fraction));
    return o;
}

static json_t *realised(const pw_words *w, bool fixed)
{
    json_t *o = json_object();
    bool coupled = w->structure == PW_COUPLED, direct = fixed && !coupled;
    put(o, "b", numbers(w->realised_b, 3));
    put(o, "a", numbers(w->realised_a, 3));
    put(o, "b_words", direct ? integers(w->b, 3) : json_null());
    put(o, "a_words", direct ? integers(w->a + 1, 2) : json_null());
    put(o, "b_fraction_bits", direct ? json_integer(w->b_fraction) : json_null());
    put(o, "a_fraction_bits", direct ? json_integer(w->a_fraction) : json_null());
    put(o, "structure", text(pw_structure_word(w->structure)));
    put(o, "words", fixed && coupled ? coupled_words(w) : json_null());
    put(o, "error_feedback", fixed && w->structure == PW_DIRECT_1_SHAPED
        ? integers((int32_t[]){w->k1, w->k2}, 2) : json_null());
    put(o, "cannot_clip", fixed ? json_boolean(w->cannot_clip) : json_null());
    put(o, "accumulator_bits", fixed ? json_integer(w->fits_32 ? 32 : 64) : json_null());
    return o;
}

static bool is_fixed(const pw_realisation *r)
{
    return r->sample == PW_Q15 || r->sample == PW_Q31;
}

static json_t *sections(const pw_realisation *r)
{
    json_t *list = json_array();
    for (int i = 0; i < r->count; i++) {
        json_t *o = json_object(), *ideal = json_object();
        put(ideal, "b", numbers(r->ideal[i].b, 3));
        put(ideal, "a", numbers(r->ideal[i].a, 3));
        put(o, "ideal", ideal);
        put(o, "realised", realised(&r->section[i], is_fixed(r)));
        json_array_append_new(list, o);
    }
    return list;
}

/* ---- response ---- */

static json_t *peak(const pw_error_peak *p)
{
    json_t *o = json_object();
    put(o, "max", number(p->max));
    put(o, "at_hz", number(p->at_hz));
    return o;
}

static json_t *errors(const pw_error_figures *e)
{
    json_t *o = json_object();
    put(o, "magnitude_db", peak(&e->magnitude_db));
    put(o, "phase_deg", peak(&e->phase_deg));
    put(o, "delay_s", peak(&e->delay_s));
    return o;
}

static json_t *response(const pw_response *r)
{
    json_t *o = json_object(), *table = json_array();
    put(o, "band_hz", numbers(r->band_hz, 2));
    put(o, "transform_error", errors(&r->transform));
    put(o, "quantisation_error", errors(&r->quantisation));
    put(o, "total_error", errors(&r->total));
    for (int i = 0; i < r->rows; i++) {
        const pw_response_row *row = &r->row[i];
        json_t *line = json_object();
        put(line, "hz", number(row->hz));
        put(line, "analog_db", number(row->analog_db));
        put(line, "analog_deg", number(row->analog_deg));
        put(line, "digital_db", number(row->digital_db));
        put(line, "digital_deg", number(row->digital_deg));
        put(line, "analog_delay_s", number(row->analog_delay_s));
        put(line, "digital_delay_s", number(row->digital_delay_s));
        json_array_append_new(table, line);
    }
    put(o, "table", table);
    return o;
}

/* ---- range, noise, cost ---- */

static json_t *nodes(const pw_realisation *r)
{
    json_t *list = json_array();
    for (int i = 0; i < r->nodes; i++) {
        const pw_node *n = &r->node[i];
        json_t *o = json_object();
        put(o, "name", text(n->name));
        put(o, "section", json_integer(n->section));
        put(o, "bound", number(n->bound));
        put(o, "full_scale", json_real(1.0));
        put(o, "headroom_db", number(n->headroom_db));
        put(o, "can_clip", json_boolean(n->can_clip));
        put(o, "integrates", json_boolean(n->integrates));
        put(o, "samples_to_clip", count(n->samples_to_clip));
        put(o, "samples_to_clip_one_code", count(n->samples_to_clip_code));
        put(o, "headroom_bits", number(n->headroom_db / (20 * log10(2))));
        put(o, "peak_gain", number(n->peak_gain));
        json_array_append_new(list, o);
    }
    return list;
}

static json_t *first_clip(const pw_realisation *r)
{
    json_t *o = json_object();
    bool known = r->nodes > 0 && r->worst_node >= 0 && r->worst_node < r->nodes;
    put(o, "node", known ? text(r->node[r->worst_node].name) : json_null());
    put(o, "input", number(r->first_clip_input));
    return o;
}

static json_t *noise(const pw_noise *n)
{
    json_t *o = json_object();
    put(o, "output_rms_lsb", number_if(n->given, n->output_rms_lsb));
    put(o, "output_offset_lsb", number_if(n->given, n->output_offset_lsb));
    put(o, "output_dbfs", number_if(n->given, n->output_dbfs));
    put(o, "snr_db", number_if(n->given, n->snr_db));
    put(o, "grows", json_boolean(n->grows));
    put(o, "effective_bits", number_if(n->given, n->effective_bits));
    put(o, "input_quantisation_rms_lsb", number_if(n->given, n->input_quantisation_rms_lsb));
    put(o, "growth_lsb2_per_sample", number_if(n->given, n->growth_lsb2_per_sample));
    return o;
}

static json_t *limit_cycle(const pw_limit_cycle *l)
{
    json_t *o = json_object();
    put(o, "bound_lsb", number_if(l->given, l->bound_lsb));
    put(o, "found_lsb", number_if(l->given, l->found_lsb));
    put(o, "found_period", l->given ? json_integer(l->found_period) : json_null());
    return o;
}

static json_t *cost(const pw_results *results)
{
    const pw_cost *c = &results->cost;
    json_t *o = json_object();
    put(o, "target", text(results->target.name));
    put(o, "sections", json_integer(c->sections));
    put(o, "multiplies_per_sample", json_integer(c->multiplies_per_sample));
    put(o, "cycles_per_sample", number(c->cycles_per_sample));
    put(o, "flash_bytes", json_integer(c->flash_bytes));
    put(o, "ram_bytes", json_integer(c->ram_bytes));
    put(o, "stack_bytes", json_integer(c->stack_bytes));
    return o;
}

static json_t *limits(const pw_results *results)
{
    json_t *list = json_array();
    for (int i = 0; i < results->limits; i++) {
        const pw_limit_row *l = &results->limit[i];
        json_t *o = json_object();
        put(o, "name", text(l->name));
        put(o, "limit", number(l->limit));
        put(o, "value", number(l->value));
        put(o, "unit", text(l->unit));
        put(o, "met", json_boolean(l->met));
        json_array_append_new(list, o);
    }
    return list;
}

/* ---- what was asked for ---- */

static json_t *arithmetic(const pw_realisation *r)
{
    json_t *o = json_object();
    put(o, "sample", text(pw_sample_word(r->sample)));
    put(o, "coefficient_bits", is_fixed(r) ? json_integer(r->coefficient_bits) : json_null());
    put(o, "rounding", is_fixed(r) ? text(r->truncate ? "truncate" : "nearest") : json_null());
    put(o, "overflow", is_fixed(r) ? text(r->wrap ? "wrap" : "saturate") : json_null());
    put(o, "scaling", text(pw_scaling_word(r->scaling)));
    put(o, "structure_why", text(r->structure_why));
    put(o, "order_why", text(r->order_why));
    return o;
}

static json_t *signal(const pw_realisation *r)
{
    json_t *o = json_object();
    put(o, "input_full_scale_v", number(r->input_full_scale));
    put(o, "output_full_scale_v", number(r->output_full_scale));
    put(o, "input_peak_v", number(r->input_peak * r->input_full_scale));
    return o;
}

static int add_bytes(const char *bytes, size_t n, void *out)
{
    pw_text_add_bytes(out, bytes, n);
    return 0;
}

void pw_report_json(const pw_results *results, pw_text *out)
{
    const pw_stage *stage = results->stage;
    const pw_realisation *r = &results->realisation;
    json_t *o = json_object();
    put(o, "format", text("polewright-report-1"));
    put(o, "stage", text(stage->name));
    put(o, "about", text(stage->about));
    put(o, "rate_hz", number(stage->rate_hz));
    put(o, "version", text(PW_VERSION));
    put(o, "stage_file_sha256", text(stage->sha256));
    put(o, "analog", roots(&results->analog));
    put(o, "transform", transform(&results->digital));
    put(o, "digital", roots(&results->digital.z));
    put(o, "arithmetic", arithmetic(r));
    put(o, "signal", signal(r));
    put(o, "sections", sections(r));
    put(o, "response", response(&results->response));
    put(o, "nodes", nodes(r));
    put(o, "first_clip", first_clip(r));
    put(o, "noise", noise(&r->noise));
    put(o, "limit_cycle", limit_cycle(&r->limit_cycle));
    put(o, "cost", cost(results));
    put(o, "loop", json_null());
    put(o, "limits", limits(results));
    put(o, "verdict", text(results->met ? "met" : "not met"));
    json_dump_callback(o, add_bytes, out, JSON_INDENT(2) | JSON_REAL_PRECISION(DIGITS));
    pw_text_add(out, "\n");
    json_decref(o);
}
