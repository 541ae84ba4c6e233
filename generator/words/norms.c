/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "words/norms.h"

#include <float.h>
#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>
#include "base/arena.h"

#define OUTWARD (1.0L + 1e-9L)   /* covers the rounding of the closed forms themselves */
#define RELATIVE 0.0025L         /* a tail below this part of the sum ends the run */
#define LONGEST (1L << 25)       /* samples times sections */
#define HOPELESS (1L << 18)      /* samples, where LONGEST is too few to settle */
#define BLOCK 1024
#define FADED 1e-200L

/* ---- closed forms of one section ---- */

/* Real poles of z^2 + a1 z + a2, a1^2 >= 4 a2, the product of (1 - |p|) without cancellation. */
static long double real_gap(long double a1, long double a2)
{
    if (a2 >= 0)
        return 1 - fabsl(a1) + a2;
    long double root = sqrtl(a1 * a1 / 4 - a2);
    return (1 - fabsl(root - a1 / 2)) * (1 - fabsl(root + a1 / 2));
}

static long double pair_gap(long double a2)      /* 1 - r of a complex pair */
{
    return (1 - a2) / (1 + sqrtl(a2));
}

void pw_line_close(pw_line *line)
{
    if (line->coupled) {
        long double r2 = line->sigma * line->sigma + line->omega * line->omega;
        line->all_pole = r2 < 1 ? OUTWARD / pair_gap(r2) : INFINITY;
        return;
    }
    long double a1 = line->a[1], a2 = line->a[2], split = a1 * a1 / 4 - a2;
    bool stable = a2 < 1 && fabsl(a1) < 1 + a2;
    if (!stable) {
        line->all_pole = INFINITY;
    } else if (a2 == 0) {
        line->all_pole = OUTWARD / (1 - fabsl(a1));
    } else if (split >= 0) {
        line->all_pole = OUTWARD / real_gap(a1, a2);
    } else {
        long double gap = pair_gap(a2), sine = sqrtl(-split / a2);
        line->all_pole = OUTWARD / (gap * fmaxl(gap, sine));
    }
}

/* >= sum of |y[n]|, n >= 0, of the free response of 1/A that had y1 = y[-1], y2 = y[-2]. */
static long double free_tail(const pw_line *line, long double y1, long double y2)
{
    if (y1 == 0 && y2 == 0)
        return 0;
    long double a1 = line->a[1], a2 = line->a[2];
    long double plain = (fabsl(a1 * y1 + a2 * y2) + fabsl(a2 * y1)) * line->all_pole, fine;
    if (a2 == 0)
        return plain;
    long double split = a1 * a1 / 4 - a2;
    long double root = sqrtl(fabsl(split)), blur = 1e-18L * (fabsl(y1) + fabsl(y2));
    if (split == 0)
        return plain;
    if (split < 0) {
        long double sine = (fabsl(a2 * y2 + a1 / 2 * y1) + blur) / root;
        fine = hypotl(y1, sine) * sqrtl(a2) / pair_gap(a2);
    } else {
        long double p = -a1 / 2 + root, q = -a1 / 2 - root;
        fine = (fabsl(y1 - q * y2) + blur) * p * p / (2 * root * (1 - fabsl(p)))
             + (fabsl(y1 - p * y2) + blur) * q * q / (2 * root * (1 - fabsl(q)));
    }
    return fminl(plain, fine * (1 + 1e-18L / fabsl(split))) * OUTWARD;
}

/* ---- the run ---- */

typedef struct runner {
    long double x1, x2, y1, y2;  /* direct; coupled: u1, u2 in y1, y2 */
    long double sum[PW_PLACES], square[PW_PLACES], dc[PW_PLACES], tail[PW_PLACES];
    long double peak[PW_PLACES];
} runner;

/* Doubles side by side: the compiler may not reorder sums by itself. */
typedef double lanes __attribute__((vector_size(16), aligned(8), may_alias));
typedef int64_t marks __attribute__((vector_size(16)));

typedef struct tallies { lanes sum, square, dc, peak; } tallies;

static inline void tally_lanes(tallies *t, const double *v)
{
    lanes value = *(const lanes *)v, size = (lanes)((marks)value & INT64_MAX);
    marks more = size > t->peak;
    t->peak = (lanes)(((marks)size & more) | ((marks)t->peak & ~more));
    t->sum += size, t->square += value * value, t->dc += value;
}

/* What a block adds to the sums of a place; n is a multiple of 4. */
static void tally_double(runner *r, pw_place place, const double *v, int n)
{
    tallies even = {{0}, {0}, {0}, {0}}, odd = even;
    for (int i = 0; i < n; i += 4) {
        tally_lanes(&even, v + i);
        tally_lanes(&odd, v + i + 2);
    }
    for (int j = 0; j < 2; j++) {
        r->peak[place] = fmaxl(r->peak[place], fmax(even.peak[j], odd.peak[j]));
        r->sum[place] += even.sum[j] + odd.sum[j];
        r->square[place] += even.square[j] + odd.square[j];
        r->dc[place] += even.dc[j] + odd.dc[j];
    }
}

static void tally_long(runner *r, pw_place place, const long double *v, int n)
{
    long double sum = 0, square = 0, dc = 0, peak = 0;
    for (int i = 0; i < n; i++) {
        long double size = v[i] < 0 ? -v[i] : v[i];
        sum += size;
        peak = size > peak ? size : peak;
        square += v[i] * v[i];
        dc += v[i];
    }
    r->peak[place] = peak > r->peak[place] ? peak : r->peak[place];
    r->sum[place] += sum, r->square[place] += square, r->dc[place] += dc;
}

#define REAL double
#define NAME(name) name##_double
#include "words/norms_loop.h"
#undef REAL
#undef NAME
#define REAL long double
#define NAME(name) name##_long
#include "words/norms_loop.h"

/* Responses that have faded are made zero: denormal numbers are slow. What is lost is below 1e-200
 * with any all_pole that a word can give, and is added by conclude(). */
static void fade(runner *r)
{
    if (fabsl(r->x1) + fabsl(r->x2) + fabsl(r->y1) + fabsl(r->y2) < 1e-280L)
        r->x1 = r->x2 = r->y1 = r->y2 = 0;
}

/* Tails of every node from the states after a block; input: what may still come from before. */
static long double close_section(const pw_line *s, runner *r, long double input)
{
    fade(r);
    long double through = input > 0 ? input * s->own : 0, tail;
    if (s->coupled) {
        long double size = hypotl(r->y1, r->y2);
        long double drive = input > 0 ? input * hypotl(s->g1, s->g2) : 0;
        long double words = size + drive > 0 ? (size + drive) * s->all_pole * OUTWARD : 0;
        r->tail[PW_PLACE_U1] = r->tail[PW_PLACE_U2] = words;
        tail = size > 0 ? size * hypotl(s->c1, s->c2) * s->all_pole * OUTWARD : 0;
    } else {
        long double first = s->b[1] * r->x1 + s->b[2] * r->x2 - s->a[1] * r->y1 - s->a[2] * r->y2;
        long double second = s->b[2] * r->x1 - s->a[1] * first - s->a[2] * r->y1;
        tail = fabsl(first) + fabsl(second) + free_tail(s, second, first);
    }
    r->tail[PW_PLACE_OUTPUT] = tail + through;
    return r->tail[PW_PLACE_OUTPUT];
}

/* >= what rounding can have added to the sum of |error| at each node, up to now. */
static long double rounding_of(const pw_line *s, const runner *r, long double input_sum,
                               long double input_error, long double epsilon,
                               long double error[PW_PLACES])
{
    const long double unit = 8 * epsilon;
    if (s->coupled) {
        long double words = r->sum[PW_PLACE_U1] + r->sum[PW_PLACE_U2];
        long double step = unit * ((fabsl(s->sigma) + fabsl(s->omega)) * words
                                   + (fabsl(s->g1) + fabsl(s->g2)) * input_sum);
        error[PW_PLACE_U1] = error[PW_PLACE_U2] =
            (2 * step + (fabsl(s->g1) + fabsl(s->g2)) * input_error) * s->all_pole;
        error[PW_PLACE_OUTPUT] =
            unit * ((fabsl(s->c1) + fabsl(s->c2)) * words + fabsl(s->d) * input_sum)
            + (fabsl(s->c1) + fabsl(s->c2)) * 2 * step * s->all_pole
            + (input_error > 0 ? input_error * s->own : 0);
    } else {
        long double terms = (fabsl(s->b[0]) + fabsl(s->b[1]) + fabsl(s->b[2])) * input_sum
                          + (fabsl(s->a[1]) + fabsl(s->a[2])) * r->sum[PW_PLACE_OUTPUT];
        bool exact = s->a[1] == 0 && s->a[2] == 0 && s->b[1] == 0 && s->b[2] == 0
                  && (s->b[0] == 1 || s->b[0] == 0);
        error[PW_PLACE_OUTPUT] = exact ? input_error
            : unit * terms * s->all_pole + (input_error > 0 ? input_error * s->own : 0);
    }
    return error[PW_PLACE_OUTPUT];
}

static bool settled(const pw_line *line, int count, const runner *r)
{
    for (int k = 0; k < count; k++)
        for (int place = 0; place < (line[k].coupled ? PW_PLACES : 1); place++)
            if (!(r[k].tail[place] <= RELATIVE * r[k].sum[place]))
                return false;
    return true;
}

/* Returns the largest share that rounding has of a result. */
static long double conclude(const pw_line *line, int count, const runner *r, long samples,
                            long double epsilon, pw_norm out[][PW_PLACES])
{
    long double input_error = 0, input_sum = 1, share = 0;
    for (int k = 0; k < count; k++) {
        long double error[PW_PLACES] = {0};
        input_error = rounding_of(&line[k], &r[k], input_sum, input_error, epsilon, error);
        for (int place = 0; place < (line[k].coupled ? PW_PLACES : 1); place++) {
            long double sum = r[k].sum[place];
            long double slack = error[place] * OUTWARD + sum * (BLOCK * epsilon
                                                            + (long double)samples * LDBL_EPSILON);
            pw_norm *o = &out[k][place];
            o->l1 = (sum + r[k].tail[place] + slack) * (1 + 8 * LDBL_EPSILON) + FADED;
            o->l1_low = fmaxl(0, sum - slack) * (1 - 8 * LDBL_EPSILON);
            o->l2 = sqrtl(r[k].square[place]);
            o->dc = r[k].dc[place];
            o->peak = fmaxl(r[k].peak[place], r[k].tail[place]) + slack + FADED;
            share = sum > 0 ? fmaxl(share, slack / sum) : share;
        }
        input_sum = r[k].sum[PW_PLACE_OUTPUT];
    }
    return share;
}

/* Samples after which a run ends in any case; its tails, then large, still are bounds. */
static long limit_of(const pw_line *line, int count)
{
    double slowest = 1;
    for (int k = 0; k < count; k++) {
        double a1 = (double)line[k].a[1], a2 = (double)line[k].a[2];
        double gap = line[k].coupled ? 1 - hypot((double)line[k].sigma, (double)line[k].omega)
                   : a1 * a1 < 4 * a2 ? (1 - a2) / 2 : (double)real_gap(a1, a2) / 2;
        slowest = fmax(slowest, 1 / gap);
    }
    long most = LONGEST / count;
    return 4 * slowest > (double)most && most > HOPELESS ? HOPELESS : most;
}

/* One run in double or in long double; the share that rounding has. */
static long double run(const pw_line *line, int count, bool wide, pw_norm out[][PW_PLACES])
{
    runner *r = pw_take((size_t)count * sizeof *r);
    memset(r, 0, (size_t)count * sizeof *r);
    memset(out, 0, (size_t)count * sizeof *out);
    union { double narrow[BLOCK]; long double wide[BLOCK]; } block;
    long samples = 0, limit = limit_of(line, count);
    int n = 32;
    bool done = false;
    while (!done) {
        long double tail = 0;
        memset(&block, 0, sizeof block);
        if (samples == 0 && wide)
            block.wide[0] = 1;
        else if (samples == 0)
            block.narrow[0] = 1;
        for (int k = 0; k < count; k++) {
            if (wide && line[k].coupled)
                run_coupled_long(&line[k], &r[k], block.wide, n);
            else if (wide)
                run_direct_long(&line[k], &r[k], block.wide, n);
            else if (line[k].coupled)
                run_coupled_double(&line[k], &r[k], block.narrow, n);
            else
                run_direct_double(&line[k], &r[k], block.narrow, n);
            tail = close_section(&line[k], &r[k], tail);
        }
        samples += n;
        done = samples >= limit || settled(line, count, r) || isinf(tail);
        n = n < BLOCK / 2 ? 2 * n : BLOCK;
    }
    long double share = conclude(line, count, r, samples, wide ? LDBL_EPSILON : DBL_EPSILON, out);
    free(r);
    return share;
}

/* ---- results that were found lately ---- */

#define KEPT 64
#define KEPT_SECTIONS 40

typedef struct memory {
    int count;
    pw_line line[KEPT_SECTIONS];
    pw_norm norm[KEPT_SECTIONS][PW_PLACES];
} memory;

static _Thread_local memory *remembered[KEPT];
static _Thread_local int oldest;

static bool same_line(const pw_line *p, const pw_line *q)
{
    for (int k = 0; k < 3; k++)
        if (p->b[k] != q->b[k] || p->a[k] != q->a[k])
            return false;
    return p->coupled == q->coupled && p->sigma == q->sigma && p->omega == q->omega
        && p->g1 == q->g1 && p->g2 == q->g2 && p->c1 == q->c1 && p->c2 == q->c2 && p->d == q->d;
}

static bool recall(const pw_line *line, int count, pw_norm out[][PW_PLACES])
{
    for (int i = 0; i < KEPT; i++) {
        const memory *m = remembered[i];
        int k = 0;
        while (m && m->count >= count && k < count && same_line(&m->line[k], &line[k]))
            k++;
        if (k == count) {        /* the start of a longer chain does as well */
            memcpy(out, m->norm, (size_t)count * sizeof *out);
            return true;
        }
    }
    return false;
}

static void remember(const pw_line *line, int count, pw_norm norm[][PW_PLACES])
{
    if (count > KEPT_SECTIONS)
        return;
    memory **slot = &remembered[oldest];
    oldest = (oldest + 1) % KEPT;
    if (!*slot)
        *slot = pw_take(sizeof **slot);
    (*slot)->count = count;
    memcpy((*slot)->line, line, (size_t)count * sizeof *line);
    memcpy((*slot)->norm, norm, (size_t)count * sizeof *norm);
}

void pw_norms_run(const pw_line *line, int count, pw_norm out[][PW_PLACES])
{
    if (recall(line, count, out))
        return;
    if (run(line, count, false, out) > 2e-3L)
        run(line, count, true, out);
    remember(line, count, out);
}

void pw_line_own(pw_line *line)
{
    pw_norm norm[1][PW_PLACES];
    if (isinf(line->all_pole)) {
        line->own = INFINITY;
        return;
    }
    pw_norms_run(line, 1, norm);
    line->own = norm[0][PW_PLACE_OUTPUT].l1;
}
