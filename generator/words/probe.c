/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The input that drives a node to its bound: full scale with the signs of the node's impulse
 * response, backwards. */
#include "words/inner.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>
#include "base/arena.h"

/* One sample through a section in exact terms; the place that is asked for is returned. */
static long double step(const pw_line *s, long double state[4], long double *v, int place)
{
    long double x = *v, out;
    if (s->coupled) {
        out = s->c1 * state[0] + s->c2 * state[1] + s->d * x;
        long double u1 = s->sigma * state[0] - s->omega * state[1] + s->g1 * x;
        long double u2 = s->omega * state[0] + s->sigma * state[1] + s->g2 * x;
        state[0] = u1, state[1] = u2;
    } else {
        out = s->b[0] * x + s->b[1] * state[0] + s->b[2] * state[1]
            - s->a[1] * state[2] - s->a[2] * state[3];
        state[1] = state[0], state[0] = x;
        state[3] = state[2], state[2] = out;
    }
    *v = out;
    return place == PW_PLACE_OUTPUT ? out : state[place - 1];
}

static int place_of(const pw_node *node)
{
    const char *end = node->name + strlen(node->name);
    return strcmp(end - 2, "u1") == 0 ? PW_PLACE_U1 : strcmp(end - 2, "u2") == 0 ? PW_PLACE_U2 : 0;
}

void pw_overflow_probe(const pw_realisation *r, int n, double *input)
{
    const pw_node *node = &r->node[r->worst_node];
    int sections = node->section;
    pw_line *line = pw_take((size_t)sections * sizeof *line);
    long double (*state)[4] = pw_take((size_t)sections * sizeof *state);
    memset(state, 0, (size_t)sections * sizeof *state);
    for (int k = 0; k < sections; k++)
        pw_line_of_words(&r->section[k], &line[k]);
    bool fixed = r->sample == PW_Q15 || r->sample == PW_Q31;
    double scale = r->sample == PW_Q15 ? 32768 : r->sample == PW_Q31 ? 2147483648.0 : 1;
    double high = fixed ? fmin(floor(r->input_peak * scale), scale - 1) : r->input_peak;
    double low = fixed ? -floor(r->input_peak * scale) : -r->input_peak;
    for (int i = 0; i < n; i++) {
        long double v = i == 0, h = 0;
        for (int k = 0; k < sections; k++)
            h = step(&line[k], state[k], &v, k + 1 == sections ? place_of(node) : 0);
        input[n - 1 - i] = h > 0 ? high : h < 0 ? low : 0;
    }
    free(line);
    free(state);
}
