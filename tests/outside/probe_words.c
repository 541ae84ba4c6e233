/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Realises digital models given as JSON, one a line on standard input, and prints what was found,
 * one JSON object a line. Keys: poles, zeros ([re, im], conjugates both), factor, sample,
 * bits, structure, scaling, rate, peak, band, truncate, wrap, as-listed, in, out (volts),
 * noise-limit, magnitude-limit; and what to do beside: probe (a length: the overflow probe, and
 * the largest value that each node reaches under it), random (a length: the rms of the output
 * against the same words in long double, on random input), input (words: what the simulation gives
 * back). A line {"chain": [{"b": [..], "a": [..]}, ..]} gives the norms from its input to each
 * section. */
#include <jansson.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "simulate/simulate.h"
#include "words/norms.h"
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
        to[i] = CMPLX(json_number_value(json_array_get(v, 0)),
                      json_number_value(json_array_get(v, 1)));
    return (int)json_array_size(list);
}

static void read_stage(json_t *in, pw_stage *stage, pw_digital *digital)
{
    static const char *const samples[] = {"float32", "float64", "q31", "q15"};
    static const char *const structures[] = {"auto", "direct-1", "direct-1-shaped", "transposed-2",
                                             "coupled"};
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
    return json_pack("{s:i,s:i,s:o,s:o,s:[i,i,i],s:[i,i],s:i,s:i,s:i,s:i,s:[i,i,i,i,i,i,i],s:b,s:b,"
                     "s:o,s:o,s:o}",
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

/* ---- runs ---- */

static void *room_for(size_t n, size_t size)
{
    void *p = calloc(n + 1, size);
    if (!p)
        exit(3);
    return p;
}

static double unit(const pw_realisation *r) { return r->sample == PW_Q15 ? 32768 : 2147483648.0; }

static json_t *probe_json(const pw_realisation *r, int n)
{
    double *x = room_for((size_t)n, sizeof *x), *node = room_for((size_t)r->nodes, sizeof *node);
    double *most = room_for((size_t)r->nodes, sizeof *most);
    pw_simulation sim;
    pw_overflow_probe(r, n, x);
    pw_simulation_reset(&sim, r);
    for (int i = 0; i < n; i++) {
        int32_t y;
        pw_simulation_step_nodes(&sim, (int32_t)x[i], &y, node);
        for (int k = 0; k < r->nodes; k++)
            most[k] = fmax(most[k], fabs(node[k]));
    }
    json_t *o = json_pack("{s:o,s:o,s:I}", "input", list_of(x, n), "most", list_of(most, r->nodes),
                          "clipped", (json_int_t)sim.clipped);
    free(x), free(node), free(most);
    return o;
}

static uint64_t draw(uint64_t *s)
{
    *s ^= *s << 13, *s ^= *s >> 7, *s ^= *s << 17;
    return *s;
}

/* One section in long double, from its words. */
static long double exact_step(const pw_words *w, long double s[4], long double x)
{
    if (w->structure == PW_COUPLED) {
        long double a = ldexpl(1, -w->a_fraction), c = ldexpl(1, -w->c_fraction);
        long double y = c * (w->c1 * s[0] + w->c2 * s[1] + w->d * x);
        long double u = a * (w->sigma * s[0] - w->omega * s[1] + w->g * x);
        s[1] = a * (w->omega * s[0] + w->sigma * s[1]);
        s[0] = u;
        return y;
    }
    const double *b = w->realised_b, *a = w->realised_a;
    long double y = b[0] * x + b[1] * s[0] + b[2] * s[1] - a[1] * s[2] - a[2] * s[3];
    s[1] = s[0], s[0] = x, s[3] = s[2], s[2] = y;
    return y;
}

/* Mean and rms about it of the output error in LSB, after a quarter of the run; uniform random
 * input. */
static json_t *random_json(const pw_realisation *r, int n, double level)
{
    long double state[PW_MAX_SECTIONS][4] = {{0}};
    double sum = 0, square = 0;
    uint64_t seed = 20250914;
    pw_simulation sim;
    pw_simulation_reset(&sim, r);
    for (int i = 0; i < n; i++) {
        double u = (double)(draw(&seed) >> 11) * 0x1p-52 - 1;
        int32_t x = (int32_t)rint(u * level * (unit(r) - 1)), y;
        pw_simulation_run_words(&sim, &x, &y, 1);
        long double v = x;
        for (int k = 0; k < r->count; k++)
            v = exact_step(&r->section[k], state[k], v);
        double e = (double)(y - v);
        if (i >= n / 4)
            sum += e, square += e * e;
    }
    double m = n - n / 4, mean = sum / m;
    return json_pack("{s:o,s:o,s:I}", "mean", real(mean), "rms",
                     real(sqrt(square / m - mean * mean)),
                     "clipped", (json_int_t)sim.clipped);
}

static json_t *run_json(const pw_realisation *r, json_t *input)
{
    size_t n = json_array_size(input), i;
    int32_t *x = room_for(n, sizeof *x);
    json_t *v, *o = json_array();
    json_array_foreach(input, i, v)
        x[i] = (int32_t)json_integer_value(v);
    pw_simulation sim;
    pw_simulation_reset(&sim, r);
    pw_simulation_run_words(&sim, x, x, n);
    for (i = 0; i < n; i++)
        json_array_append_new(o, json_integer(x[i]));
    free(x);
    return o;
}

static json_t *chain_json(json_t *chain)
{
    pw_line line[PW_MAX_SECTIONS];
    pw_norm norm[PW_MAX_SECTIONS][PW_PLACES];
    size_t n = json_array_size(chain), i;
    json_t *s, *o = json_array();
    json_array_foreach(chain, i, s) {
        line[i] = (pw_line){.coupled = false};
        for (size_t k = 0; k < 3; k++) {
            line[i].b[k] = json_number_value(json_array_get(json_object_get(s, "b"), k));
            line[i].a[k] = json_number_value(json_array_get(json_object_get(s, "a"), k));
        }
        pw_line_close(&line[i]);
        pw_line_own(&line[i]);
    }
    pw_norms_run(line, (int)n, norm);
    for (i = 0; i < n; i++)
        json_array_append_new(o, json_pack("{s:o,s:o,s:o,s:o}", "l1", real((double)norm[i][0].l1),
            "low", real((double)norm[i][0].l1_low), "l2", real((double)norm[i][0].l2),
            "dc", real((double)norm[i][0].dc)));
    return json_pack("{s:o}", "norms", o);
}

static json_t *result(const pw_realisation *r, json_t *in)
{
    json_t *sections = json_array(), *o;
    int probe = (int)number(in, "probe", 0), random = (int)number(in, "random", 0);
    for (int k = 0; k < r->count; k++)
        json_array_append_new(sections, words_json(r, k));
    const pw_noise *n = &r->noise;
    const pw_limit_cycle *c = &r->limit_cycle;
    o = json_pack("{s:o,s:o,s:o,s:i,s:s,s:s,s:o,s:o,s:o}", "sections", sections, "nodes",
                  nodes_json(r),
        "first_clip_input", real(r->first_clip_input), "worst_node", r->worst_node,
        "structure_why", r->structure_why ? r->structure_why : "", "order_why", r->order_why,
        "magnitude_db", real(r->word_magnitude_db.max), "magnitude_hz",
            real(r->word_magnitude_db.at_hz),
        "phase_deg", real(r->word_phase_deg.max));
    json_object_set_new(o, "noise", json_pack("{s:b,s:o,s:o,s:o,s:o,s:o,s:o,s:o,s:b}",
        "given", n->given, "rms_lsb", real(n->output_rms_lsb), "offset_lsb",
            real(n->output_offset_lsb),
        "dbfs", real(n->output_dbfs), "snr_db", real(n->snr_db), "bits", real(n->effective_bits),
        "input_rms_lsb", real(n->input_quantisation_rms_lsb), "growth",
            real(n->growth_lsb2_per_sample),
        "grows", n->grows));
    json_object_set_new(o, "cycle", json_pack("{s:b,s:o,s:o,s:o,s:i,s:b}", "given", c->given,
        "bound_lsb", real(c->bound_lsb), "found_lsb", real(c->found_lsb), "found_constant_lsb",
            real(c->found_constant_lsb), "period", c->found_period,
        "has_state", c->has_state));
    json_object_set_new(o, "enough_bits", json_integer(r->enough_bits));
    if (probe > 0)
        json_object_set_new(o, "probe", probe_json(r, probe));
    if (random > 0)
        json_object_set_new(o, "random", random_json(r, random, number(in, "level", 0.5)));
    if (json_object_get(in, "input"))
        json_object_set_new(o, "output", run_json(r, json_object_get(in, "input")));
    return o;
}

static json_t *answer(json_t *in)
{
    static pw_stage stage;
    static pw_digital digital;
    static pw_realisation r;
    if (json_object_get(in, "chain"))
        return chain_json(json_object_get(in, "chain"));
    read_stage(in, &stage, &digital);
    pw_messages messages = {.file = "probe"};
    pw_status status = pw_realise(&stage, &digital.z, &digital, NULL, &r, &messages);
    json_t *o = status == PW_OK ? result(&r, in) : json_object();
    json_object_set_new(o, "status", json_integer(status));
    pw_messages_print(&messages, stderr, false);
    pw_messages_free(&messages);
    return o;
}

int main(void)
{
    char *line = NULL;
    size_t room = 0;
    while (getline(&line, &room, stdin) > 0) {
        json_error_t fault;
        json_t *in = json_loads(line, 0, &fault);
        if (!in)
            return fprintf(stderr, "probe_words: %s\n", fault.text), 2;
        json_t *o = answer(in);
        char *text = json_dumps(o, JSON_COMPACT | JSON_REAL_PRECISION(17));
        puts(text);
        fflush(stdout);
        free(text);
        json_decref(o);
        json_decref(in);
    }
    free(line);
    return 0;
}
