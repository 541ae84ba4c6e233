/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Bounds of nodes. The chain is cut where a clamp can act: what lies behind it starts anew from a
 * signal of at most full scale, since a chain that clips is not linear any more.
 *
 *     |node| <= X * L1(segment input -> node) + sum over rounding sources of half step * L1
 *
 * with X the input's peak, or 1 behind a clamp. */
#include "words/proof.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* ---- rounding ---- */

/* What a source can add to a node, in full scale. Rounding to nearest errs by half a step either
 * way; truncating errs by half a step about an offset of half a step. */
static long double source_reach(const pw_format *format, const pw_norm *norm)
{
    long double half = format->lsb / 2;
    return half * (norm->l1 + (format->truncate ? fabsl(norm->dc) + 0.005L * norm->l1 : 0));
}

/* A filter that was settled starts up to half a step (truncating: one) from rest in y, or in both
 * words. Where rounding itself can keep it there this is nothing new; where the error is fed back,
 * or 1/A is less than one at rest, it is an impulse more. */
static long double settle_from(pw_proof *p, const pw_words *w, int j, int k, pw_place place)
{
    long double off = p->format.lsb * (p->format.truncate ? 1 : 0.5L);
    const pw_line *line = &p->paths.line[j];
    if (w->structure == PW_COUPLED) {
        const pw_route *u1 = pw_paths_source(&p->paths, w, j, PW_SOURCE_U1);
        const pw_route *u2 = pw_paths_source(&p->paths, w, j, PW_SOURCE_U2);
        return off * (u1->norm[k - j][place].peak + u2->norm[k - j][place].peak);
    }
    if (w->order == 0 || (w->structure == PW_DIRECT_1 && fabsl(1 + line->a[1] + line->a[2]) <= 1))
        return 0;
    const pw_route *rest = pw_paths_settle(&p->paths, j);
    return rest->reach > k ? off * rest->norm[k - j][place].peak : INFINITY;
}

static long double settle_at(pw_proof *p, const pw_realisation *r, int from, int k, pw_place place)
{
    long double sum = 0;
    for (int j = from; j <= k; j++)
        sum += settle_from(p, &r->section[j], j, k, place);
    return sum;
}

static long double rounding_at(pw_proof *p, const pw_realisation *r, int from, int k,
                               pw_place place)
{
    long double sum = 0;
    for (int j = from; j <= k; j++) {
        const pw_words *w = &r->section[j];
        bool coupled = w->structure == PW_COUPLED;
        for (int s = 0; s < (coupled ? PW_SOURCES : 1); s++) {
            const pw_route *route = pw_paths_source(&p->paths, w, j, s);
            if (s == PW_SOURCE_OUTPUT && coupled && j == k && place != PW_PLACE_OUTPUT)
                continue;        /* rounding of y does not enter the two words */
            sum += route->reach > k ? source_reach(&p->format, &route->norm[k - j][place])
                                    : INFINITY;
        }
        if (!coupled && w->b_fraction > w->a_fraction)
            sum += ldexpl(p->format.lsb, -w->a_fraction - 1)
                 * pw_paths_shift_bound(&p->paths, j, k);
    }
    return sum;
}

long double pw_proof_rounding(pw_proof *proof, const pw_realisation *r, int section)
{
    for (int k = 0; k <= section; k++)
        if (proof->paths.integrates[k])
            return INFINITY;
    return rounding_at(proof, r, 0, section, PW_PLACE_OUTPUT);
}

/* ---- one section of a segment ---- */

typedef struct section_bound {
    long double gain[PW_PLACES], rounding[PW_PLACES], bound[PW_PLACES];
    bool clips;
} section_bound;

static section_bound bound_section(pw_proof *p, const pw_realisation *r, int from, long double peak,
                                   int k)
{
    section_bound s = {{0}, {0}, {0}, false};
    int places = r->section[k].structure == PW_COUPLED ? PW_PLACES : 1;
    const pw_route *in = pw_paths_input(&p->paths, from);
    for (int place = 0; place < places; place++) {
        bool finite = in->reach > k;
        s.gain[place] = finite ? in->norm[k - from][place].l1 : INFINITY;
        s.rounding[place] = !p->format.fixed ? 0
                          : !finite ? INFINITY
                          : rounding_at(p, r, from, k, place) + settle_at(p, r, from, k, place);
        s.bound[place] = peak * s.gain[place] + s.rounding[place];
        s.clips = s.clips || !(s.bound[place] <= p->format.largest);
    }
    s.clips = s.clips && p->format.fixed;
    return s;
}

/* Over every state and every input up to the given size: the accumulator of y. */
static long double any_state(const pw_format *format, const pw_words *w, long double input)
{
    long double sum = 0;
    if (w->structure == PW_COUPLED)
        return ldexpl(fabsl((long double)w->c1) + fabsl((long double)w->c2)
                      + fabsl((long double)w->d) * input, -w->c_fraction) + format->lsb;
    for (int k = 0; k < 3; k++)
        sum += fabs(w->realised_b[k]) * input + (k ? fabs(w->realised_a[k]) : 0);
    return sum + format->lsb * (1 + abs(w->k1) + abs(w->k2));
}

/* Over every state and every input up to the given size: a word of the rotation, unclamped. */
static long double any_word(const pw_format *format, const pw_words *w, int place,
                            long double input)
{
    long double drive = place == PW_PLACE_U1 ? fabsl((long double)w->g) * input : 0;
    long double turn = fabsl((long double)w->sigma) + fabsl((long double)w->omega);
    return ldexpl(turn + drive, -w->a_fraction) + format->lsb;
}

/* Whether a clamp can act inside the recursion of the rotation: then the linear bounds of the other
 * word and of the output hold no more. The clamp of the output alone is behind it. */
static bool words_clip(const pw_format *format, const pw_words *w, const section_bound *s)
{
    return format->fixed && w->structure == PW_COUPLED
        && !(s->bound[PW_PLACE_U1] <= format->largest && s->bound[PW_PLACE_U2] <= format->largest);
}

/* ---- nodes ---- */

static pw_node *add_node(pw_realisation *r, int section, const char *what)
{
    pw_node *node = &r->node[r->nodes++];
    memset(node, 0, sizeof *node);
    snprintf(node->name, sizeof node->name, "section %d %s", section + 1, what);
    node->section = section + 1;
    node->samples_to_clip = node->samples_to_clip_code = NAN;
    return node;
}

static double outward(long double v)
{
    double d = (double)v;
    return d < v ? nextafter(d, INFINITY) : d;
}

static void fill_node(const pw_format *format, pw_node *node, long double bound, long double gain)
{
    node->bound = outward(bound);
    node->peak_gain = outward(gain);
    node->headroom_db = 20 * log10(format->largest / node->bound);
    node->can_clip = format->fixed && node->bound > format->largest;
}

static void name_nodes(pw_realisation *r)
{
    static const char *const inner[] = {"u1", "u2"};
    r->nodes = 0;
    for (int k = 0; k < r->count; k++)
        add_node(r, k, "output");
    for (int k = 0; k < r->count; k++) {
        if (r->section[k].structure == PW_COUPLED)
            for (int i = 0; i < 2; i++)
                add_node(r, k, inner[i]);
        else if (r->sample == PW_Q15 || r->sample == PW_Q31)
            add_node(r, k, "accumulator");
    }
}

static pw_node *node_of(pw_realisation *r, int section, int which)
{
    for (int i = 0; i < r->nodes; i++)
        if (r->node[i].section == section + 1 && which-- == 0)
            return &r->node[i];
    return NULL;
}

static void record(pw_proof *p, pw_realisation *r, int k, const section_bound *s, long double input)
{
    const pw_words *w = &r->section[k];
    bool turned = words_clip(&p->format, w, s);
    long double out = s->bound[PW_PLACE_OUTPUT];
    if (turned)
        out = fmaxl(out, any_state(&p->format, w, input));
    fill_node(&p->format, node_of(r, k, 0), out, s->gain[PW_PLACE_OUTPUT]);
    node_of(r, k, 0)->integrates = p->paths.integrates[k];
    if (w->structure == PW_COUPLED) {
        for (int i = 1; i < PW_PLACES; i++) {
            long double word = s->bound[i];
            if (turned && word <= p->format.largest)
                word = fmaxl(word, any_word(&p->format, w, i, input));
            fill_node(&p->format, node_of(r, k, i), word, s->gain[i]);
        }
    } else if (p->format.fixed) {
        long double acc = s->clips ? any_state(&p->format, w, input)
                                   : out + p->format.lsb * (p->format.truncate ? 1 : 0.5L);
        fill_node(&p->format, node_of(r, k, 1), acc, s->gain[PW_PLACE_OUTPUT]);
        node_of(r, k, 1)->can_clip = s->clips;     /* half a step above a word is still that word */
    }
}

/* ---- the walk along the chain ---- */

/* Visits every section with its segment's start and input size; keep null: only the proof of
 * cannot_clip for inputs of full scale. */
static void walk(pw_proof *p, pw_realisation *r, long double peak, bool keep)
{
    long double size = peak, input = peak;
    int from = 0;
    for (int k = 0; k < r->count; k++) {
        section_bound s = bound_section(p, r, from, size, k);
        if (keep)
            record(p, r, k, &s, fminl(input, 1));
        else
            r->section[k].cannot_clip = p->format.fixed && !s.clips;
        input = s.clips ? 1 : s.bound[PW_PLACE_OUTPUT];
        if (s.clips || p->paths.integrates[k])
            from = k + 1, size = p->format.fixed ? 1 : INFINITY;
    }
}

/* The chain as long as nothing clips; the input level (of full scale) up to which that is so. */
static double linear_walk(pw_proof *p, const pw_realisation *r)
{
    double level = INFINITY;
    int from = 0;
    for (int k = 0; k < r->count && p->format.fixed; k++) {
        section_bound s = bound_section(p, r, from, 1, k);
        p->gain[k] = (double)s.gain[0], p->rounding[k] = (double)s.rounding[0];
        p->inner_gain[k] = (double)fmaxl(s.gain[1], s.gain[2]);
        p->inner_rounding[k] = (double)fmaxl(s.rounding[1], s.rounding[2]);
        int places = r->section[k].structure == PW_COUPLED ? PW_PLACES : 1;
        for (int i = 0; from == 0 && i < places; i++)
            level = fmin(level, (double)((p->format.largest - s.rounding[i]) / s.gain[i]));
        if (p->paths.integrates[k])
            from = k + 1, level = 0;
    }
    return level >= 1 ? INFINITY : fmax(level, 0);
}

static int find_worst(const pw_realisation *r)
{
    int worst = 0;
    for (int i = 1; i < r->nodes; i++)
        if (!strstr(r->node[i].name, "accumulator") && r->node[i].bound > r->node[worst].bound)
            worst = i;
    return worst;
}

void pw_proof_start(const pw_format *format, const pw_realisation *r, pw_proof *out)
{
    out->format = *format;
    pw_paths_make(r, &out->paths);
}

void pw_proof_end(pw_proof *proof)
{
    pw_paths_free(&proof->paths);
}

void pw_prove(pw_proof *proof, pw_realisation *r)
{
    name_nodes(r);
    r->first_clip_input = linear_walk(proof, r);
    walk(proof, r, 1, false);
    walk(proof, r, r->input_peak, true);
    for (int k = 0; k < r->count; k++) {
        pw_words *w = &r->section[k];
        bool fits = w->cannot_clip && w->a_fraction < 15;     /* |acc| <= 2^15 2^14 and a bit */
        w->fits_32 = pw_words_fit_32(&proof->format, w)
                  || (fits && w->structure != PW_COUPLED && proof->format.sample_bits == 16
                      && proof->format.word_bits == 16 && w->b_fraction == w->a_fraction);
    }
    r->worst_node = find_worst(r);
}
