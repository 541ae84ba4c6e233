/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Vectors as CSV. */
#include "emit/vectors.h"

#include <stdio.h>

#include "emit/signals.h"
#include "report/figures.h"

static void put_integer(pw_text *out, int64_t value)
{
    char digits[24], *end = digits + sizeof digits, *c = end;
    uint64_t rest = value < 0 ? -(uint64_t)value : (uint64_t)value;
    do *--c = (char)('0' + rest % 10);
    while (rest /= 10);
    if (value < 0) *--c = '-';
    pw_text_add_bytes(out, c, (size_t)(end - c));
}

static void put_real(pw_text *out, double value, bool single)
{
    char buffer[PW_NUMBER_ROOM];
    pw_text_add(out, single ? pw_shortest_float(buffer, (float)value) : pw_shortest(buffer, value));
}

static void put_samples(const pw_vector *v, bool single, pw_text *out)
{
    pw_text_add(out, "n,input,expected\n");
    for (long i = 0; i < v->n; i++) {
        put_integer(out, i);
        pw_text_add_bytes(out, ",", 1);
        if (v->in_words)
            put_integer(out, v->in_words[i]);
        else
            put_real(out, v->in_reals[i], single);
        pw_text_add_bytes(out, ",", 1);
        if (v->in_words)
            put_integer(out, v->out_words[i]);
        else
            put_real(out, v->out_reals[i], single);
        pw_text_add_bytes(out, "\n", 1);
    }
}

/* What makes this signal the one it is. */
static void put_kind(const pw_results *results, const pw_vector *v, pw_text *out)
{
    char from[PW_NUMBER_ROOM], to[PW_NUMBER_ROOM];
    pw_text_print(out, "# signal: %s", pw_signal_word(v->signal));
    if (v->hz_end > 0)
        pw_text_print(out, ", from %s Hz to %s Hz", pw_shortest(from, v->hz),
                      pw_shortest(to, v->hz_end));
    else if (v->hz > 0)
        pw_text_print(out, ", %s Hz", pw_shortest(from, v->hz));
    if (v->signal == PW_SIGNAL_NOISE)
        pw_text_print(out, ", seed %llu", (unsigned long long)results->stage->vectors.seed);
    pw_text_print(out, ", peak %s of full scale\n",
                  pw_shortest(from, v->signal == PW_SIGNAL_FULL_SCALE_SQUARE
                                        ? 1
                                        : results->realisation.input_peak));
}

/* The state that silence starts from, by the names of the arithmetic. */
static void put_state(const pw_realisation *r, pw_text *out)
{
    static const char *const direct[] = {"x1", "x2", "y1", "y2", "e1", "e2"}, *const coupled[] = {
                                                                                  "u1", "u2"};
    for (int k = 0; k < r->count; k++) {
        bool rotates = r->section[k].structure == PW_COUPLED;
        int n = rotates ? 2 : r->section[k].structure == PW_DIRECT_1_SHAPED ? 6 : 4;
        if (r->section[k].order == 0) continue;
        pw_text_print(out, "# start: section %d", k + 1);
        for (int i = 0; i < n; i++)
            pw_text_print(out, " %s=%lld", rotates ? coupled[i] : direct[i],
                          (long long)r->limit_cycle.state[k][i]);
        pw_text_add(out, "\n");
    }
}

static void put_head(const pw_results *results, const pw_vector *v, pw_text *out)
{
    const pw_realisation *r = &results->realisation;
    char rate[PW_NUMBER_ROOM], in[PW_NUMBER_ROOM], to[PW_NUMBER_ROOM];
    const char *one = r->sample == PW_Q15 ? "32768" : r->sample == PW_Q31 ? "2147483648" : "1";
    pw_text_print(out, "# polewright %s, stage %s, rate %s Hz\n", PW_VERSION, results->stage->name,
                  pw_shortest(rate, results->stage->rate_hz));
    put_kind(results, v, out);
    pw_text_print(
        out, "# units: %s samples; scale: %s stands for %s V at the input and %s V at the output\n",
        pw_sample_word(r->sample), one, pw_shortest(in, r->input_full_scale),
        pw_shortest(to, r->output_full_scale));
    if (v->from_state)
        put_state(r, out);
    else
        pw_text_add(out, "# start: at rest\n");
    if (v->in_words) pw_text_print(out, "# clips: %llu\n", (unsigned long long)v->clipped);
}

pw_status pw_emit_vectors(const pw_results *results, pw_fileset *out)
{
    bool single = results->realisation.sample == PW_FLOAT32;
    for (int s = 0; s < PW_SIGNALS; s++) {
        char name[64];
        pw_vector v;
        if (!results->stage->vectors.want[s]) continue;
        snprintf(name, sizeof name, "vectors/%s.csv", pw_signal_word((pw_signal)s));
        pw_text *file = pw_fileset_add(out, name);
        pw_vector_make(results, (pw_signal)s, &v);
        put_head(results, &v, file);
        put_samples(&v, single, file);
        pw_vector_free(&v);
    }
    return PW_OK;
}
