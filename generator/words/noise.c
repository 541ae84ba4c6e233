/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "words/noise.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>
#include "base/arena.h"

double pw_feedback_power(const double a[3], int k1, int k2)
{
    long double a1 = a[1], a2 = a[2], b1 = -k1, b2 = -k2;
    if (a2 == 0 && a1 == -1)
        return k1 == 1 && k2 == 0 ? 1 : INFINITY;
    long double e = 1 + a2, below = (1 - a2) * (e - a1) * (e + a1);
    if (!(below > 0))
        return INFINITY;
    long double square = 1 + b1 * b1 + b2 * b2, next = 2 * (b1 + b1 * b2), second = 2 * b2;
    return (double)((square * e - next * a1 + second * (a1 * a1 - a2 * e)) / below);
}

/* ---- one source ---- */

typedef struct source { double variance, mean; } source;   /* LSB^2, LSB, at the place of
                                                              rounding */

static int trailing_zeros(int64_t word)
{
    return word == 0 ? 62 : __builtin_ctzll((unsigned long long)word);
}

/* Fraction bits that really reach the rounding. */
static int live_bits(const pw_words *w)
{
    int least = w->b_fraction > w->a_fraction ? 0 : 62;
    for (int k = 0; k < 3; k++) {
        int zeros = trailing_zeros(w->b[k]) + w->a_fraction - w->b_fraction;
        least = zeros < least ? zeros : least;
        zeros = k ? trailing_zeros(w->a[k]) : 62;
        least = zeros < least ? zeros : least;
    }
    return least >= w->a_fraction ? 0 : w->a_fraction - least;
}

static source rounding_source(const pw_format *format, int bits)
{
    double step = ldexp(1, -bits);
    source s = {(1 - step * step) / 12, format->truncate ? -(1 - step) / 2 : step / 2};
    if (bits == 0)
        s = (source){0, 0};
    return s;
}

/* ---- the way to the output where integrators stand on it ---- */

/* Takes a factor (1 - 1/z) out of b where it is there exactly. */
static bool take_zero(pw_line *line)
{
    if (line->coupled || line->b[0] + line->b[1] + line->b[2] != 0)
        return false;
    line->b[1] = -line->b[2];
    line->b[2] = 0;
    return true;
}

static void take_pole(pw_line *line)         /* exactly 1 */
{
    line->a[1] = -line->a[2];
    line->a[2] = 0;
    pw_line_close(line);
}

/* Cancels every integrator of a chain with an exact zero at 1 of it; returns how many stay. */
static int cancel_integrators(pw_line *chain, int n)
{
    int left = 0;
    for (int k = 0; k < n; k++) {
        while (!chain[k].coupled && 1 + chain[k].a[1] + chain[k].a[2] == 0) {
            bool found = false;
            for (int j = 0; j < n && !found; j++)
                found = take_zero(&chain[j]);
            take_pole(&chain[k]);
            left += !found;
        }
    }
    for (int k = 0; k < n; k++)
        pw_line_own(&chain[k]);
    return left;
}

typedef struct route_end { double l2, dc; int integrators; } route_end;

/* From line first in the place of section from to the output. Where integrators stay, dc is that
 * of the rest: what the output grows by for each unit. */
static route_end to_output(const pw_paths *paths, int from, const pw_line *first)
{
    int n = paths->count - from;
    pw_line *chain = pw_take((size_t)n * sizeof *chain);
    pw_norm (*norm)[PW_PLACES] = pw_take((size_t)n * sizeof *norm);
    memcpy(chain, &paths->line[from], (size_t)n * sizeof *chain);
    chain[0] = *first;
    route_end end = {.integrators = cancel_integrators(chain, n)};
    pw_norms_run(chain, n, norm);
    end.l2 = (double)norm[n - 1][0].l2;
    end.dc = (double)norm[n - 1][0].dc;
    free(chain);
    free(norm);
    return end;
}

static route_end end_of(const pw_paths *paths, int from, const pw_route *route,
                        const pw_line *first)
{
    if (route->reach < paths->count)
        return to_output(paths, from, first);
    const pw_norm *norm = &route->norm[paths->count - 1 - from][PW_PLACE_OUTPUT];
    return (route_end){(double)norm->l2, (double)norm->dc, 0};
}

/* ---- sums ---- */

typedef struct total { double variance, mean, growth; } total;

static void add_source(total *t, source s, route_end end)
{
    if (end.integrators == 0) {
        t->variance += s.variance * end.l2 * end.l2;
        t->mean += s.mean * end.dc;
    } else if (s.variance > 0 && end.dc != 0) {
        t->growth += end.integrators == 1 ? s.variance * end.dc * end.dc : INFINITY;
    }
}

static void add_shift(pw_proof *p, const pw_words *w, int j, total *t)
{
    int shift = w->b_fraction - w->a_fraction;
    if (w->structure == PW_COUPLED || shift <= 0)
        return;
    double unit = ldexp(1, -w->a_fraction), step = ldexp(1, -shift);
    source s = {unit * unit * (1 - step * step) / 12, unit * step / 2};
    long double crude = pw_paths_shift_bound(&p->paths, j, p->paths.count - 1);
    if (isfinite((double)crude) && s.variance * (double)(crude * crude) < 1e-4 * t->variance)
        return;
    pw_line first = pw_paths_shift_line(&p->paths, j);
    add_source(t, s, end_of(&p->paths, j, pw_paths_shift(&p->paths, j), &first));
}

static total section_noise(pw_proof *p, const pw_words *w, int j)
{
    total t = {0};
    bool coupled = w->structure == PW_COUPLED;
    for (int s = 0; s < (coupled ? PW_SOURCES : 1); s++) {
        int bits = coupled ? (s == PW_SOURCE_OUTPUT ? w->c_fraction : w->a_fraction) : live_bits(w);
        const pw_route *route = pw_paths_source(&p->paths, w, j, s);
        pw_line first = pw_paths_source_line(&p->paths, w, j, s);
        add_source(&t, rounding_source(&p->format, bits), end_of(&p->paths, j, route, &first));
    }
    add_shift(p, w, j, &t);
    return t;
}

static double input_noise(pw_proof *p, const pw_stage *stage)
{
    double step = 1;
    if (stage->input.given && stage->input.bits > 0)
        step = fmax(1, ldexp((stage->input.high - stage->input.low) / stage->input.full_scale,
                             -stage->input.bits) / p->format.lsb);
    route_end end = end_of(&p->paths, 0, pw_paths_input(&p->paths, 0), &p->paths.line[0]);
    return end.integrators ? INFINITY : step / sqrt(12) * end.l2;
}

void pw_noise_find(pw_proof *proof, const pw_stage *stage, pw_realisation *r, double *share)
{
    pw_noise *n = &r->noise;
    memset(n, 0, sizeof *n);
    if (!proof->format.fixed)
        return;
    total sum = {0};
    for (int j = 0; j < r->count; j++) {
        total t = section_noise(proof, &r->section[j], j);
        sum.variance += t.variance, sum.mean += t.mean, sum.growth += t.growth;
        if (share)
            share[j] = t.growth > 0 ? INFINITY : t.variance;
    }
    n->given = true;
    n->output_rms_lsb = sqrt(sum.variance);
    n->output_offset_lsb = sum.mean;
    n->snr_db = 20 * log10(1 / (proof->format.lsb * sqrt(2) * n->output_rms_lsb));
    n->output_dbfs = -n->snr_db;
    n->effective_bits = (n->snr_db - 10 * log10(1.5)) / (20 * log10(2));
    n->input_quantisation_rms_lsb = input_noise(proof, stage);
    n->growth_lsb2_per_sample = sum.growth;
    n->grows = sum.growth > 0;
}
