/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Emits C, vectors and self-test for realisations given as words, one JSON object a line on
 * standard input, each into the directory "dir". Keys: dir, name, about, sample, bits, standalone,
 * truncate, wrap, length, seed, peak, rate, target, input and output (low high zero bits rails),
 * sections: list of {structure, order, b, a, bf, af, k} or {sigma, omega, g, c1, c2, d, af, cf},
 * with cannot_clip and fits_32, or for floats {structure, order, b, a}; state: list of six numbers
 * a section. Prints for each: the clips of every signal, the tolerance and the estimate of cost, as
 * JSON, and "plays": for each of the list "settle" what the simulation gives for the inputs "x", a
 * list, after settling there (null: from rest), with its clips. */
#include <jansson.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "emit/emit.h"
#include "emit/signals.h"
#include "emit/vectors.h"
#include "simulate/simulate.h"
#include "target/cost.h"

static double number(json_t *o, const char *key, double otherwise)
{
    json_t *v = json_object_get(o, key);
    return json_is_number(v) ? json_number_value(v) : otherwise;
}

static double item(json_t *o, const char *key, size_t i)
{
    return json_number_value(json_array_get(json_object_get(o, key), i));
}

static int word_of(json_t *o, const char *key, const char *const *list, int n)
{
    const char *word = json_string_value(json_object_get(o, key));
    for (int i = 0; word && i < n; i++)
        if (!strcmp(word, list[i])) return i;
    return 0;
}

static void read_section(json_t *o, bool fixed, pw_words *w)
{
    static const char *const structures[] = {"auto", "direct-1", "direct-1-shaped", "transposed-2",
                                             "coupled"};
    w->structure = (pw_structure)word_of(o, "structure", structures, 5);
    w->order = (int)number(o, "order", 2);
    for (size_t k = 0; k < 3; k++) {
        if (fixed)
            w->b[k] = (int32_t)item(o, "b", k);
        else
            w->fb[k] = item(o, "b", k);
        if (fixed && k) w->a[k] = (int32_t)item(o, "a", k - 1);
        if (!fixed) w->fa[k] = k ? item(o, "a", k - 1) : 1;
    }
    w->b_fraction = (int)number(o, "bf", 0);
    w->a_fraction = (int)number(o, "af", 0);
    w->k1 = (int32_t)item(o, "k", 0);
    w->k2 = (int32_t)item(o, "k", 1);
    w->sigma = (int32_t)number(o, "sigma", 0);
    w->omega = (int32_t)number(o, "omega", 0);
    w->g = (int32_t)number(o, "g", 0);
    w->c1 = (int32_t)number(o, "c1", 0);
    w->c2 = (int32_t)number(o, "c2", 0);
    w->d = (int32_t)number(o, "d", 0);
    w->c_fraction = (int)number(o, "cf", 0);
    w->cannot_clip = number(o, "cannot_clip", 0) != 0;
    w->fits_32 = number(o, "fits_32", 0) != 0;
    for (int k = 0; k < 3; k++) {
        w->realised_b[k] = fixed ? ldexp(w->b[k], -w->b_fraction) : w->fb[k];
        w->realised_a[k] = fixed ? ldexp(w->a[k], -w->a_fraction) : w->fa[k];
    }
}

static void read_realisation(json_t *o, pw_realisation *r)
{
    static const char *const samples[] = {"float32", "float64", "q31", "q15"};
    json_t *list = json_object_get(o, "sections"), *state = json_object_get(o, "state");
    r->sample = (pw_sample)word_of(o, "sample", samples, 4);
    bool fixed = r->sample == PW_Q31 || r->sample == PW_Q15;
    r->coefficient_bits = (int)number(o, "bits", 0);
    r->truncate = number(o, "truncate", 0) != 0;
    r->wrap = number(o, "wrap", 0) != 0;
    r->count = (int)json_array_size(list);
    for (int k = 0; k < r->count; k++)
        read_section(json_array_get(list, (size_t)k), fixed, &r->section[k]);
    r->input_peak = number(o, "peak", 1);
    r->input_full_scale = r->output_full_scale = 1;
    r->first_clip_input = INFINITY;
    r->nodes = 1;
    snprintf(r->node[0].name, sizeof r->node[0].name, "section %d output", r->count);
    r->node[0].section = r->count;
    r->node[0].bound = 1;
    r->limit_cycle.has_state = json_is_array(state);
    for (int k = 0; json_is_array(state) && k < r->count; k++)
        for (size_t i = 0; i < 6; i++)
            r->limit_cycle.state[k][i] = (int64_t)json_number_value(
                json_array_get(json_array_get(state, (size_t)k), i));
}

static void read_port(json_t *o, const char *key, pw_port *port)
{
    json_t *p = json_object_get(o, key);
    port->full_scale = 1;
    if (!p) return;
    port->given = true;
    port->low = number(p, "low", 0);
    port->high = number(p, "high", 1);
    port->zero = number(p, "zero", 0);
    port->bits = (int)number(p, "bits", 0);
    port->has_rails = json_is_array(json_object_get(p, "rails"));
    for (size_t i = 0; i < 2 && port->has_rails; i++) port->rail[i] = item(p, "rails", i);
    port->full_scale = fmax(port->high - port->zero, port->zero - port->low);
}

static void read_stage(json_t *o, pw_stage *stage, pw_results *results)
{
    const char *about = json_string_value(json_object_get(o, "about"));
    stage->name = json_string_value(json_object_get(o, "name"));
    stage->about = about ? about : "";
    stage->rate_hz = number(o, "rate", 48000);
    stage->arithmetic.standalone = number(o, "standalone", 0) != 0;
    stage->limits.band_hz[0] = stage->rate_hz / 10000;
    stage->limits.band_hz[1] = stage->rate_hz * 0.4;
    stage->vectors.length = (int)number(o, "length", 100);
    stage->vectors.seed = (uint64_t)number(o, "seed", 1);
    for (int s = 0; s < PW_SIGNALS; s++) stage->vectors.want[s] = true;
    memset(stage->sha256, '0', 64);
    read_port(o, "input", &stage->input);
    read_port(o, "output", &stage->output);
    read_realisation(o, &results->realisation);
    results->stage = stage;
    results->digital.method = PW_BILINEAR;
    results->analog = (pw_roots){.poles = 1, .pole = {-1000}, .factor = 1000};
    results->cost.cycles_per_sample = NAN;
}

/* What the simulation makes of the list x, after settling at settle or from rest (null). */
static json_t *play(json_t *list, json_t *settle, const pw_realisation *r)
{
    json_t *y = json_array(), *v;
    pw_simulation sim;
    size_t i;
    pw_simulation_reset(&sim, r);
    if (json_is_number(settle)) pw_simulation_settle(&sim, json_number_value(settle));
    json_array_foreach(list, i, v) {
        if (r->sample == PW_Q15 || r->sample == PW_Q31) {
            int32_t word = (int32_t)json_number_value(v);
            pw_simulation_run_words(&sim, &word, &word, 1);
            json_array_append_new(y, json_integer(word));
        } else {
            double real = json_number_value(v);
            pw_simulation_run_floats(&sim, &real, &real, 1);
            json_array_append_new(y, json_real(real));
        }
    }
    return json_pack("{s:o, s:I}", "y", y, "clips", (json_int_t)sim.clipped);
}

static json_t *plays(json_t *o, const pw_realisation *r)
{
    json_t *all = json_array(), *settle;
    size_t i;
    json_array_foreach(json_object_get(o, "settle"), i, settle)
        json_array_append_new(all, play(json_object_get(o, "x"), settle, r));
    return all;
}

static pw_status emit(json_t *o, pw_results *results)
{
    pw_fileset set = {0};
    pw_status status = pw_emit_c(results, &set);
    if (!status) status = pw_emit_vectors(results, &set);
    if (!status) status = pw_emit_selftest(results, &set);
    if (!status) status = pw_fileset_write(&set, json_string_value(json_object_get(o, "dir")));
    pw_fileset_free(&set);
    return status;
}

static json_t *tell(const pw_results *results)
{
    json_t *clips = json_object();
    pw_vector v[PW_SIGNALS];
    for (int s = 0; s < PW_SIGNALS; s++) {
        pw_vector_make(results, (pw_signal)s, &v[s]);
        json_object_set_new(clips, pw_signal_word((pw_signal)s),
                            json_integer((json_int_t)v[s].clipped));
    }
    double shift = pw_contraction_shift(results, v, PW_SIGNALS);
    pw_cost cost;
    pw_cost_estimate(results->stage, &results->realisation, &results->target, &cost);
    double tolerance = pw_float_tolerance(results, v, PW_SIGNALS, shift);
    for (int s = 0; s < PW_SIGNALS; s++) pw_vector_free(&v[s]);
    return json_pack("{s:o, s:f, s:f, s:I, s:I, s:I}", "clips", clips, "tolerance", tolerance, "cycles",
                     isfinite(cost.cycles_per_sample) ? cost.cycles_per_sample : 0.0, "flash", (json_int_t)cost.flash_bytes,
                     "ram", (json_int_t)cost.ram_bytes, "stack", (json_int_t)cost.stack_bytes);
}

int main(void)
{
    static char line[1 << 20];
    while (fgets(line, sizeof line, stdin)) {
        json_t *o = json_loads(line, 0, NULL), *out;
        pw_results *results = calloc(1, sizeof *results);
        pw_stage *stage = calloc(1, sizeof *stage);
        if (!o || !results || !stage) return 2;
        pw_messages messages = {.file = "probe"};
        const char *target = json_string_value(json_object_get(o, "target"));
        if (target && pw_target_read(target, (pw_where){0, 0}, &results->target, &messages))
            return 2;
        read_stage(o, stage, results);
        if (emit(o, results)) return 3;
        out = tell(results);
        json_object_set_new(out, "plays", plays(o, &results->realisation));
        json_dumpf(out, stdout, JSON_REAL_PRECISION(17));
        putchar('\n');
        fflush(stdout);
        json_decref(out);
        json_decref(o);
        free(results);
        free(stage);
    }
    return 0;
}
