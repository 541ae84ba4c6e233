/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "report/json_value.h"
#include "twin/say.h"

static void number(json_t *o, const char *key, double value)
{
    pw_json_put(o, key, pw_json_number(value));
}
static void whole(json_t *o, const char *key, int64_t value)
{
    pw_json_put(o, key, json_integer((json_int_t)value));
}

static json_t *residual(const pw_residual *r, double lsb, double rate)
{
    json_t *o = json_object();
    number(o, "rms_v", r->rms);
    number(o, "peak_v", r->peak);
    number(o, "rms_lsb", r->rms / lsb);
    number(o, "peak_lsb", r->peak / lsb);
    number(o, "peak_at_s", (double)r->peak_at / rate);
    return o;
}

static json_t *flat(const pw_flat *f)
{
    json_t *o = json_object();
    whole(o, "runs", f->runs);
    whole(o, "samples", f->samples);
    return o;
}

static json_t *record(const pw_comparison *c, double rate)
{
    json_t *o = json_object();
    whole(o, "frames", c->frames);
    whole(o, "skipped", c->skipped);
    pw_json_put(o, "at_rest", json_boolean(c->at_rest));
    number(o, "delay_samples", c->delay_samples);
    number(o, "delay_s", c->delay_samples / rate);
    number(o, "gain", c->gain);
    number(o, "gain_db", 20 * log10(fabs(c->gain)));
    number(o, "offset_v", c->offset);
    number(o, "output_rms_v", c->output_rms);
    number(o, "lsb_v", c->lsb);
    pw_json_put(o, "difference", residual(&c->raw, c->lsb, rate));
    pw_json_put(o, "residual", residual(&c->left, c->lsb, rate));
    number(o, "normalised_error", c->normalised);
    pw_json_put(o, "flat_input", flat(&c->flat_input));
    pw_json_put(o, "flat_output", flat(&c->flat_output));
    whole(o, "twin_clipped", (int64_t)c->clipped);
    whole(o, "inputs_beyond_full_scale", (int64_t)c->outside);
    whole(o, "twin_at_rails", (int64_t)c->railed);
    whole(o, "segment", c->segment);
    number(o, "averages", c->averages);
    return o;
}

static json_t *reference(const pw_reference_figures *f, double lsb, double rate)
{
    json_t *o = json_object();
    pw_json_put(o, "hold", json_string(f->linear ? "linear" : "zero"));
    pw_json_put(o, "twin_error", residual(&f->error, lsb, rate));
    pw_json_put(o, "twin_error_without_hold", residual(&f->error_aligned, lsb, rate));
    pw_json_put(o, "board_error", residual(&f->board, lsb, rate));
    number(o, "hold_delay_samples", f->hold_delay_samples);
    number(o, "edge_hz", f->edge_hz);
    number(o, "edge_droop_db", f->edge_droop_db);
    return o;
}

static json_t *point(const pw_points *points, const pw_point *p)
{
    json_t *o = json_object();
    bool judged = p->excited && points->allowed != PW_ALLOWED_NOTHING;
    number(o, "hz", p->hz);
    pw_json_put(o, "excited", json_boolean(p->excited));
    number(o, "db", p->excited ? p->db : NAN);
    number(o, "deg", p->excited ? p->deg : NAN);
    number(o, "band_db", p->excited ? p->band_db : NAN);
    number(o, "band_deg", p->excited ? p->band_deg : NAN);
    number(o, "coherence", p->coherence);
    number(o, "twin_db", p->twin_db);
    number(o, "twin_deg", p->twin_deg);
    number(o, "analog_db", p->analog_db);
    number(o, "analog_deg", p->analog_deg);
    number(o, "low_db", p->low_db);
    number(o, "high_db", p->high_db);
    number(o, "low_deg", p->low_deg);
    number(o, "high_deg", p->high_deg);
    pw_json_put(o, "inside", judged ? json_boolean(p->inside) : json_null());
    return o;
}

static json_t *worst(const pw_points *points)
{
    if (points->worst < 0) return json_null();
    const pw_point *p = &points->list[points->worst];
    json_t *o = json_object();
    number(o, "hz", p->hz);
    number(o, "error_db", p->db - (isnan(p->twin_db) ? p->analog_db : p->twin_db));
    number(o, "error_deg", p->deg - (isnan(p->twin_deg) ? p->analog_deg : p->twin_deg));
    return o;
}

static json_t *envelope(const pw_points *points)
{
    if (points->allowed == PW_ALLOWED_NOTHING) return json_null();
    json_t *o = json_object();
    bool spread = points->allowed == PW_ALLOWED_TOLERANCES;
    pw_json_put(o, "from", json_string(spread ? "tolerances" : "limits"));
    pw_json_put(o, "draws", spread ? json_integer(points->draws) : json_null());
    pw_json_put(o, "seed", spread ? json_integer((json_int_t)points->seed) : json_null());
    whole(o, "judged", points->judged);
    whole(o, "inside", points->inside);
    number(o, "share", points->judged ? (double)points->inside / points->judged : NAN);
    return o;
}

static json_t *combination(const pw_fit *fit, int k)
{
    json_t *o = json_object(), *of = json_object();
    number(o, "singular_value", fit->singular[k]);
    pw_json_put(o, "held", json_boolean(k >= fit->found));
    for (int i = 0; i < fit->count; i++) number(of, fit->parameter[i].name, fit->direction[k][i]);
    pw_json_put(o, "of", of);
    return o;
}

static json_t *calibration(const pw_fit *fit, const char *written)
{
    json_t *o = json_object(), *list = json_array(), *combinations = json_array();
    for (int i = 0; i < fit->count; i++) {
        const pw_fitted *f = &fit->parameter[i];
        json_t *p = json_object();
        pw_json_put(p, "name", pw_json_text(f->name));
        pw_json_put(p, "path", pw_json_text(f->path));
        number(p, "nominal", f->nominal);
        number(p, "value", f->value);
        number(p, "standard_error", f->whole_error);
        number(p, "standard_error_of_data", f->error);
        number(p, "held_share", f->held);
        pw_json_put(p, "at_bound", json_boolean(f->at_bound));
        json_array_append_new(list, p);
        json_array_append_new(combinations, combination(fit, i));
    }
    pw_json_put(o, "parameters", list);
    pw_json_put(o, "combinations", combinations);
    whole(o, "told_apart", fit->found);
    number(o, "largest_correlation", fit->correlation_most);
    number(o, "delay_s", fit->delay ? fit->delay_s : NAN);
    number(o, "rms_before_db", fit->before_db);
    number(o, "rms_after_db", fit->after_db);
    number(o, "largest_after_db", fit->after_most_db);
    whole(o, "points", fit->points);
    pw_json_put(o, "written", written ? json_string(written) : json_null());
    return o;
}

void pw_twin_json(const pw_twin_found *found, pw_text *out)
{
    const pw_stage *stage = found->results->stage;
    const pw_comparison *c = found->comparison;
    json_t *o = json_object(), *list = json_array();
    pw_json_put(o, "format", json_string("polewright-twin-1"));
    pw_json_put(o, "stage", pw_json_text(stage->name));
    number(o, "rate_hz", stage->rate_hz);
    pw_json_put(o, "record", c ? record(c, stage->rate_hz) : json_null());
    pw_json_put(o, "reference",
                c && c->reference.given ? reference(&c->reference, c->lsb, stage->rate_hz)
                                        : json_null());
    for (int i = 0; found->points && i < found->points->count; i++)
        json_array_append_new(list, point(found->points, &found->points->list[i]));
    pw_json_put(o, "points", list);
    pw_json_put(o, "worst", found->points ? worst(found->points) : json_null());
    pw_json_put(o, "envelope", found->points ? envelope(found->points) : json_null());
    pw_json_put(o, "calibration",
                found->fit ? calibration(found->fit, found->written) : json_null());
    pw_json_put(o, "verdict", json_string(pw_twin_verdict(found->points)));
    pw_json_write(o, out);
}
