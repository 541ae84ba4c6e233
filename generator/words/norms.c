/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "words/norms.h"

#include <float.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>
#include "base/arena.h"

#define OUTWARD (1.0L + 1e-9L)   /* covers the rounding of the closed forms themselves */
#define RELATIVE 0.003L          /* a tail below this part of the sum ends the run */
#define LONGEST (1L << 26)       /* samples */
#define BLOCK 1024

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
} runner;

static void add(runner *r, pw_place place, long double v)
{
    r->sum[place] += fabsl(v);
    r->square[place] += v * v;
    r->dc[place] += v;
}

static void run_direct(const pw_line *s, runner *r, long double *v, int n)
{
    long double b0 = s->b[0], b1 = s->b[1], b2 = s->b[2], a1 = s->a[1], a2 = s->a[2];
    long double x1 = r->x1, x2 = r->x2, y1 = r->y1, y2 = r->y2;
    long double sum = 0, square = 0, dc = 0;
    for (int i = 0; i < n; i++) {
        long double y = b0 * v[i] + b1 * x1 + b2 * x2 - a2 * y2 - a1 * y1;
        x2 = x1, x1 = v[i], y2 = y1, y1 = y, v[i] = y;
        sum += fabsl(y), square += y * y, dc += y;
    }
    r->x1 = x1, r->x2 = x2, r->y1 = y1, r->y2 = y2;
    r->sum[0] += sum, r->square[0] += square, r->dc[0] += dc;
}

static void run_coupled(const pw_line *s, runner *r, long double *v, int n)
{
    long double u1 = r->y1, u2 = r->y2;
    for (int i = 0; i < n; i++) {
        long double y = s->c1 * u1 + s->c2 * u2 + s->d * v[i];
        long double new1 = s->sigma * u1 - s->omega * u2 + s->g1 * v[i];
        long double new2 = s->omega * u1 + s->sigma * u2 + s->g2 * v[i];
        add(r, PW_PLACE_OUTPUT, y), add(r, PW_PLACE_U1, new1), add(r, PW_PLACE_U2, new2);
        u1 = new1, u2 = new2, v[i] = y;
    }
    r->y1 = u1, r->y2 = u2;
}

/* Tails of every node from the states after a block; input: what may still come from before. */
static long double close_section(const pw_line *s, runner *r, long double input)
{
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
                               long double input_error, long double error[PW_PLACES])
{
    const long double unit = 8 * LDBL_EPSILON;
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

static void conclude(const pw_line *line, int count, const runner *r, long samples,
                     pw_norm out[][PW_PLACES])
{
    long double input_error = 0, input_sum = 1;
    for (int k = 0; k < count; k++) {
        long double error[PW_PLACES] = {0};
        input_error = rounding_of(&line[k], &r[k], input_sum, input_error, error);
        for (int place = 0; place < (line[k].coupled ? PW_PLACES : 1); place++) {
            long double sum = r[k].sum[place];
            long double slack = error[place] * OUTWARD + sum * (long double)samples * LDBL_EPSILON;
            pw_norm *o = &out[k][place];
            o->l1 = (sum + r[k].tail[place] + slack) * (1 + 8 * LDBL_EPSILON);
            o->l1_low = fmaxl(0, sum - slack) * (1 - 8 * LDBL_EPSILON);
            o->l2 = sqrtl(r[k].square[place]);
            o->dc = r[k].dc[place];
        }
        input_sum = r[k].sum[PW_PLACE_OUTPUT];
    }
}

void pw_norms_run(const pw_line *line, int count, pw_norm out[][PW_PLACES])
{
    runner *r = pw_take((size_t)count * sizeof *r);
    memset(r, 0, (size_t)count * sizeof *r);
    memset(out, 0, (size_t)count * sizeof *out);
    long double block[BLOCK] = {1};
    long samples = 0;
    int n = 32;
    bool done = false;
    while (!done) {
        long double tail = 0;
        for (int k = 0; k < count; k++) {
            (line[k].coupled ? run_coupled : run_direct)(&line[k], &r[k], block, n);
            tail = close_section(&line[k], &r[k], tail);
        }
        samples += n;
        done = samples >= LONGEST || settled(line, count, r) || isinf(tail);
        n = n < BLOCK / 2 ? 2 * n : BLOCK;
        memset(block, 0, sizeof block);
    }
    conclude(line, count, r, samples, out);
    free(r);
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
