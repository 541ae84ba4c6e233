/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Realises digital models given as JSON, one a line on standard input, and prints what was found,
 * one JSON object a line. Keys: poles, zeros ([re, im], conjugates both), factor, sample,
 * bits, structure, scaling, rate, peak, band, truncate, wrap, probe (a length), in, out (volts). */
#include <jansson.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "words/realisation.h"

static int word_in(const char *word, const char *const *list, int n, int otherwise)
{
    for (int i = 0; word && i < n; i++)
        if (strcmp(word, list[i]) == 0)
            return i;
    return otherwise;
}

static double number(json_t *o, const char *key, double otherwise)
{
    json_t *v = json_object_get(o, key);
    return json_is_number(v) ? json_number_value(v) : otherwise;
}

static int roots(json_t *list, double complex *to)
{
    size_t i;
    json_t *v;
    json_array_foreach(list, i, v)
        to[i] = CMPLX(json_number_value(json_array_get(v, 0)), json_number_value(json_array_get(v, 1)));
    return (int)json_array_size(list);
}

static void read_stage(json_t *in, pw_stage *stage, pw_digital *digital)
{
    static const char *const samples[] = {"float32", "float64", "q31", "q15"};
    static const char *const structures[] = {"auto", "direct-1", "direct-1-shaped", "transposed-2", "coupled"};
    static const char *const scalings[] = {"l1", "linf", "l2", "none"};
    memset(stage, 0, sizeof *stage);
    memset(digital, 0, sizeof *digital);
    pw_arithmetic *a = &stage->arithmetic;
    a->sample = word_in(json_string_value(json_object_get(in, "sample")), samples, 4, PW_Q15);
    a->structure = word_in(json_string_value(json_object_get(in, "structure")), structures, 5, 0);
    a->scaling = word_in(json_string_value(json_object_get(in, "scaling")), scalings, 4, 0);
    a->coefficient_bits = (int)number(in, "bits", a->sample == PW_Q15 ? 16 : 32);
    if (a->sample < PW_Q31)
        a->coefficient_bits = 0;
    a->truncate = number(in, "truncate", 0) != 0;
    a->wrap = number(in, "wrap", 0) != 0;
    a->as_listed = number(in, "as-listed", 0) != 0;
    stage->rate_hz = number(in, "rate", 48000);
    stage->input.full_scale = number(in, "in", 1);
    stage->output.full_scale = number(in, "out", 1);
    stage->input.peak = number(in, "peak", 1) * stage->input.full_scale;
    stage->limits.floor_db = 60;
    stage->limits.band_hz[0] = stage->rate_hz / 10000;
    stage->limits.band_hz[1] = stage->rate_hz * 0.4;
    json_t *band = json_object_get(in, "band");
    for (size_t i = 0; i < json_array_size(band); i++)
        stage->limits.band_hz[i] = json_number_value(json_array_get(band, i));
    double noise = number(in, "noise-limit", 0), magnitude = number(in, "magnitude-limit", 0);
    stage->limits.noise_db = (pw_given){noise, noise != 0, {0, 0}};
    stage->limits.magnitude_db = (pw_given){magnitude, magnitude != 0, {0, 0}};
    digital->z.poles = roots(json_object_get(in, "poles"), digital->z.pole);
    digital->z.zeros = roots(json_object_get(in, "zeros"), digital->z.zero);
    digital->z.factor = number(in, "factor", 1);
}

static json_t *real(double v) { return isfinite(v) ? json_real(v) : json_null(); }

static json_t *list_of(const double *v, int n)
{
    json_t *list = json_array();
    for (int i = 0; i < n; i++)
        json_array_append_new(list, real(v[i]));
    return list;
}

static json_t *words_json(const pw_realisation *r, int k)
{
    const pw_words *w = &r->section[k];
    const pw_section *s = &r->ideal[k];
    return json_pack("{s:i,s:i,s:o,s:o,s:[i,i,i],s:[i,i],s:i,s:i,s:i,s:i,s:[i,i,i,i,i,i,i],s:b,s:b,s:o,s:o,s:o}",
        "structure", w->structure, "order", w->order,
        "b", list_of(w->realised_b, 3), "a", list_of(w->realised_a, 3),
        "bw", w->b[0], w->b[1], w->b[2], "aw", w->a[1], w->a[2],
        "bf", w->b_fraction, "af", w->a_fraction, "k1", w->k1, "k2", w->k2,
        "coupled", w->sigma, w->omega, w->g, w->c1, w->c2, w->d, w->c_fraction,
        "cannot_clip", w->cannot_clip, "fits_32", w->fits_32,
        "ib", list_of(s->b, 3), "ia", list_of(s->a, 3), "gain", real(s->gain));
}

static json_t *nodes_json(const pw_realisation *r)
{
    json_t *list = json_array();
    for (int i = 0; i < r->nodes; i++) {
        const pw_node *n = &r->node[i];
        json_array_append_new(list, json_pack("{s:s,s:i,s:o,s:o,s:o,s:b,s:b,s:o,s:o}",
            "name", n->name, "section", n->section, "bound", real(n->bound),
            "headroom_db", real(n->headroom_db), "peak_gain", real(n->peak_gain),
            "can_clip", n->can_clip, "integrates", n->integrates,
            "samples_to_clip", real(n->samples_to_clip),
            "samples_to_clip_code", real(n->samples_to_clip_code)));
    }
    return list;
}

static json_t *result(const pw_realisation *r, int probe)
{
    json_t *sections = json_array(), *o;
    for (int k = 0; k < r->count; k++)
        json_array_append_new(sections, words_json(r, k));
    const pw_noise *n = &r->noise;
    const pw_limit_cycle *c = &r->limit_cycle;
    o = json_pack("{s:o,s:o,s:o,s:i,s:s,s:s,s:o,s:o,s:o}", "sections", sections, "nodes", nodes_json(r),
        "first_clip_input", real(r->first_clip_input), "worst_node", r->worst_node,
        "structure_why", r->structure_why ? r->structure_why : "", "order_why", r->order_why,
        "magnitude_db", real(r->word_magnitude_db.max), "magnitude_hz", real(r->word_magnitude_db.at_hz),
        "phase_deg", real(r->word_phase_deg.max));
    json_object_set_new(o, "noise", json_pack("{s:b,s:o,s:o,s:o,s:o,s:o,s:o,s:o,s:b}",
        "given", n->given, "rms_lsb", real(n->output_rms_lsb), "offset_lsb", real(n->output_offset_lsb),
        "dbfs", real(n->output_dbfs), "snr_db", real(n->snr_db), "bits", real(n->effective_bits),
        "input_rms_lsb", real(n->input_quantisation_rms_lsb), "growth", real(n->growth_lsb2_per_sample),
        "grows", n->grows));
    json_object_set_new(o, "cycle", json_pack("{s:b,s:o,s:o,s:i,s:b}", "given", c->given,
        "bound_lsb", real(c->bound_lsb), "found_lsb", real(c->found_lsb), "period", c->found_period,
        "has_state", c->has_state));
    if (probe > 0) {
        double *x = calloc((size_t)probe, sizeof *x);
        if (!x)
            exit(3);
        pw_overflow_probe(r, probe, x);
        json_object_set_new(o, "probe", list_of(x, probe));
        free(x);
    }
    return o;
}

int main(void)
{
    char *line = NULL;
    size_t room = 0;
    static pw_stage stage;
    static pw_digital digital;
    static pw_realisation r;
    while (getline(&line, &room, stdin) > 0) {
        json_error_t fault;
        json_t *in = json_loads(line, 0, &fault);
        if (!in)
            return fprintf(stderr, "probe_words: %s\n", fault.text), 2;
        read_stage(in, &stage, &digital);
        pw_messages messages = {.file = "probe"};
        pw_status status = pw_realise(&stage, &digital.z, &digital, NULL, &r, &messages);
        json_t *o = status == PW_OK ? result(&r, (int)number(in, "probe", 0)) : json_object();
        json_object_set_new(o, "status", json_integer(status));
        char *text = json_dumps(o, JSON_COMPACT | JSON_REAL_PRECISION(17));
        puts(text);
        fflush(stdout);
        free(text);
        pw_messages_print(&messages, stderr, false);
        pw_messages_free(&messages);
        json_decref(o);
        json_decref(in);
    }
    free(line);
    return 0;
}
