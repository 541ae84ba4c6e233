/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "words/paths.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>
#include "base/arena.h"

void pw_line_of_words(const pw_words *w, pw_line *line)
{
    *line = (pw_line){.coupled = w->structure == PW_COUPLED};
    for (int k = 0; k < 3; k++) {
        line->b[k] = w->realised_b[k];
        line->a[k] = w->realised_a[k];
    }
    if (line->coupled) {
        line->sigma = ldexpl(w->sigma, -w->a_fraction);
        line->omega = ldexpl(w->omega, -w->a_fraction);
        line->g1 = ldexpl(w->g, -w->a_fraction);
        line->c1 = ldexpl(w->c1, -w->c_fraction);
        line->c2 = ldexpl(w->c2, -w->c_fraction);
        line->d = ldexpl(w->d, -w->c_fraction);
    }
    pw_line_close(line);
}

void pw_paths_make(const pw_realisation *r, pw_paths *out)
{
    memset(out, 0, sizeof *out);
    out->count = r->count;
    for (int k = 0; k < r->count; k++) {
        pw_line_of_words(&r->section[k], &out->line[k]);
        out->integrates[k] = isinf((double)out->line[k].all_pole);
        pw_line_own(&out->line[k]);
    }
}

static void route_free(pw_route *route)
{
    free(route->norm);
    route->norm = NULL;
}

void pw_paths_free(pw_paths *paths)
{
    for (int k = 0; k < paths->count; k++) {
        route_free(&paths->input[k]);
        route_free(&paths->shift[k]);
        route_free(&paths->settle[k]);
        for (int s = 0; s < PW_SOURCES; s++)
            route_free(&paths->source[k][s]);
    }
    paths->count = 0;
}

/* One past the last section from k on that a response reaches before an integrator. */
static int reach_from(const pw_paths *paths, int k)
{
    while (k < paths->count && !paths->integrates[k])
        k++;
    return k;
}

/* first: stands for section from. */
static void run(pw_paths *paths, int from, const pw_line *first, pw_route *route)
{
    bool stuck = isinf((double)first->all_pole);
    route->reach = stuck ? from : reach_from(paths, from + 1);
    int n = route->reach - from;
    route->norm = pw_take((size_t)(n > 0 ? n : 1) * sizeof *route->norm);
    if (n == 0)
        return;
    pw_line *chain = pw_take((size_t)n * sizeof *chain);
    chain[0] = *first;
    memcpy(chain + 1, &paths->line[from + 1], (size_t)(n - 1) * sizeof *chain);
    pw_norms_run(chain, n, route->norm);
    free(chain);
}

const pw_route *pw_paths_input(pw_paths *paths, int from)
{
    if (!paths->input[from].norm)
        run(paths, from, &paths->line[from], &paths->input[from]);
    return &paths->input[from];
}

static pw_line direct_source(const pw_line *line, long double k1, long double k2)
{
    pw_line s = *line;
    s.b[0] = 1, s.b[1] = -k1, s.b[2] = -k2;
    /* An integrator whose error is fed back whole: (1 - 1/z) / (1 - 1/z) is 1 exactly. */
    if (s.a[2] == 0 && s.a[1] == -1 && k1 == 1 && k2 == 0) {
        s.b[1] = s.a[1] = 0;
        pw_line_close(&s);
    }
    return s;
}

pw_line pw_paths_source_line(const pw_paths *paths, const pw_words *w, int section,
                             pw_source source)
{
    pw_line s = paths->line[section];
    if (source != PW_SOURCE_OUTPUT) {
        s.g1 = source == PW_SOURCE_U1, s.g2 = source == PW_SOURCE_U2, s.d = 0;
    } else if (s.coupled) {
        s = (pw_line){.b = {1}, .a = {1}};
        pw_line_close(&s);
    } else {
        bool shaped = w->structure == PW_DIRECT_1_SHAPED;
        s = direct_source(&s, shaped ? w->k1 : 0, shaped ? w->k2 : 0);
    }
    return s;
}

const pw_route *pw_paths_source(pw_paths *paths, const pw_words *w, int section, pw_source source)
{
    pw_route *route = &paths->source[section][source];
    if (!route->norm) {
        pw_line s = pw_paths_source_line(paths, w, section, source);
        run(paths, section, &s, route);
    }
    return route;
}

pw_line pw_paths_shift_line(const pw_paths *paths, int section)
{
    return direct_source(&paths->line[section], 0, 0);
}

const pw_route *pw_paths_shift(pw_paths *paths, int section)
{
    if (!paths->shift[section].norm) {
        pw_line s = pw_paths_shift_line(paths, section);
        run(paths, section, &s, &paths->shift[section]);
    }
    return &paths->shift[section];
}

/* The free response from y1 = y2 = 1 is that to an impulse through -(a1 + a2) - a2/z. */
const pw_route *pw_paths_settle(pw_paths *paths, int section)
{
    if (!paths->settle[section].norm) {
        pw_line s = paths->line[section];
        s.b[0] = -(s.a[1] + s.a[2]), s.b[1] = -s.a[2], s.b[2] = 0;
        run(paths, section, &s, &paths->settle[section]);
    }
    return &paths->settle[section];
}

long double pw_paths_shift_bound(const pw_paths *paths, int j, int k)
{
    long double bound = paths->line[j].all_pole;
    for (int i = j + 1; i <= k; i++)
        bound *= paths->line[i].own;
    return bound;
}
