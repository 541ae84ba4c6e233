/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Equations -> roots in quadruple precision. */
#define __STDC_WANT_IEC_60559_TYPES_EXT__ 1      /* strtof128, hypotf128 */
#include "analog/circuit.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "analog/circuit_exact.h"
#include "analog/circuit_quad.h"
#include "base/text.h"

typedef _Complex _Float128 quad_complex;

typedef struct roots { int n; pw_quad re[PW_MAX_STORES], im[PW_MAX_STORES]; } roots;

typedef struct pencil {
    const pw_net *net;
    const pw_quad *value;
    pw_quad s0;
    bool bordered;
} pencil;

static pw_quad decimal(double x)
{
    char text[PW_NUMBER_ROOM];
    return strtof128(pw_shortest(text, x), NULL);
}

/* ---- The m by m matrix ---- */

static void add_store(const pw_net *net, pw_quad *a, int n, int left, int right, pw_quad x)
{
    for (int i = 0; i < 2; i++)
        for (int j = 0; j < 2; j++) {
            int row = net->store[left].row[i], column = net->store[right].column[j];
            if (row >= 0 && column >= 0) a[row * n + column] += i == j ? x : -x;
        }
}

/* G + s0 C, or [G + s0 C, b; c', 0], n by n, over zeros. */
static void fill(const pencil *p, int n, pw_quad *a)
{
    const pw_net *net = p->net;
    for (int i = 0; i < net->entries; i++) {
        const pw_entry *e = &net->entry[i];
        a[e->row * n + e->column] += e->sign * p->value[e->value];
    }
    for (int i = 0; i < net->stores; i++)
        add_store(net, a, n, i, i, p->s0 * p->value[net->store[i].value]);
    for (int i = 0; i < net->mutuals; i++) {
        const pw_mutual *m = &net->mutual[i];
        add_store(net, a, n, m->store[0], m->store[1], p->s0 * p->value[m->value]);
        add_store(net, a, n, m->store[1], m->store[0], p->s0 * p->value[m->value]);
    }
    if (!p->bordered) return;
    a[net->input * n + n - 1] = 1;
    for (int k = 0; k < 2; k++)
        if (net->output[k] >= 0) a[(n - 1) * n + net->output[k]] = k ? -1 : 1;
}

/* Column j of V' A^-1 U, by one solve. */
static void one_column(const pencil *p, int n, const pw_quad *lu, const int *pivot, int j,
                       pw_quad *out)
{
    pw_quad x[PW_MAX_UNKNOWNS + 1] = {0};
    int m = p->net->stores;
    for (int side = 0; side < 2; side++)
        if (p->net->store[j].row[side] >= 0) x[p->net->store[j].row[side]] = side ? -1 : 1;
    pw_quad_lu_solve(n, lu, pivot, x);
    for (int k = 0; k < m; k++) {
        const int *column = p->net->store[k].column;
        out[k * m + j] = (column[0] >= 0 ? x[column[0]] : 0) - (column[1] >= 0 ? x[column[1]] : 0);
    }
}

static void times_d(const pencil *p, const pw_quad *t, pw_quad *out)
{
    const pw_net *net = p->net;
    int m = net->stores;
    for (int k = 0; k < m; k++)
        for (int j = 0; j < m; j++) out[k * m + j] = p->value[net->store[k].value] * t[k * m + j];
    for (int i = 0; i < net->mutuals; i++)
        for (int side = 0; side < 2; side++)
            for (int j = 0; j < m; j++)
                out[net->mutual[i].store[side] * m + j] +=
                    p->value[net->mutual[i].value] * t[net->mutual[i].store[!side] * m + j];
}

/* M = D V' A(s0)^-1 U, and H(s0) where the form is not bordered. */
static bool reduce(const pencil *p, pw_quad *reduced, pw_quad *transfer)
{
    int n = p->net->unknowns + p->bordered, m = p->net->stores, pivot[PW_MAX_UNKNOWNS + 1];
    pw_quad x[PW_MAX_UNKNOWNS + 1] = {0};
    pw_arena arena = {0};
    pw_quad *a = pw_arena_take(&arena, (size_t)(n * n) * sizeof *a);
    pw_quad *t = pw_arena_take(&arena, (size_t)(m * m + 1) * sizeof *t);
    fill(p, n, a);
    bool regular = pw_quad_lu(n, a, pivot);
    if (regular) {
        for (int j = 0; j < m; j++) one_column(p, n, a, pivot, j, t);
        times_d(p, t, reduced);
        x[p->net->input] = 1;
        pw_quad_lu_solve(n, a, pivot, x);
        const int *out = p->net->output;
        *transfer = (out[0] >= 0 ? x[out[0]] : 0) - (out[1] >= 0 ? x[out[1]] : 0);
    }
    pw_arena_free(&arena);
    return regular;
}

/* ---- Roots of one pencil ---- */

static pw_quad size_of(const roots *r, int i) { return hypotf128(r->re[i], r->im[i]); }

static pw_quad distance(const roots *a, int i, const roots *b, int j)
{
    return hypotf128(a->re[i] - b->re[j], a->im[i] - b->im[j]);
}

/* Of the roots not yet done, the k nearest to root i, i itself first: their indices; how far. */
static pw_quad nearest(const roots *r, const bool *done, int i, int k, int *group)
{
    bool taken[PW_MAX_STORES] = {false};
    pw_quad far = 0;
    group[0] = i;
    taken[i] = true;
    for (int g = 1; g < k; g++) {
        int best = -1;
        for (int j = 0; j < r->n; j++)
            if (!done[j] && !taken[j]
                && (best < 0 || distance(r, i, r, j) < distance(r, i, r, best)))
                best = j;
        if (best < 0) return HUGE_VAL_F128;
        group[g] = best;
        taken[best] = true;
        far = distance(r, i, r, best);
    }
    return far / size_of(r, i);
}

static void average(roots *r, bool *done, const int *group, int k)
{
    pw_quad re = 0, im = 0;
    for (int g = 0; g < k; g++) {
        re += r->re[group[g]] / k;
        im += r->im[group[g]] / k;
    }
    for (int g = 0; g < k; g++) {
        r->re[group[g]] = re;
        r->im[group[g]] = im;
        done[group[g]] = true;
    }
}

/* The computed images of a k-fold root lie on a small circle about it, and their mean is far more
 * accurate than each (Wilkinson 1965, ch. 2). How many there are is known exactly. */
static void join_repeated(roots *r, const pw_exact *exact, int at_zero)
{
    bool done[PW_MAX_STORES] = {false};
    int group[PW_MAX_STORES], least_group[PW_MAX_STORES];
    for (int k = exact->m; k >= 2; k--)
        for (int left = exact->repeated[k] - (at_zero == k); left > 0; left--) {
            pw_quad least = HUGE_VAL_F128;
            for (int i = 0; i < r->n; i++) {
                pw_quad far = done[i] ? HUGE_VAL_F128 : nearest(r, done, i, k, group);
                if (far >= least) continue;
                least = far;
                memcpy(least_group, group, sizeof group);
            }
            if (least < HUGE_VAL_F128) average(r, done, least_group, k);
        }
}

/* Real and imaginary parts below the arithmetic's own noise are 0. */
static void snap(roots *r)
{
    for (int i = 0; i < r->n; i++) {
        pw_quad least = 1e-22f128 * size_of(r, i);
        if (fabsf128(r->re[i]) < least) r->re[i] = 0;
        if (fabsf128(r->im[i]) < least) r->im[i] = 0;
    }
}

static bool find_roots(const pencil *p, const pw_exact *exact, pw_quad *reduced, roots *out)
{
    int m = exact->m, at_zero = 0;
    for (int i = 0; i < exact->infinite_steps; m -= exact->infinite[i++])
        pw_quad_deflate(m, exact->infinite[i], reduced);
    for (int i = 0; i < m; i++) reduced[i * m + i] -= 1 / p->s0;
    for (int i = 0; i < exact->zero_steps; m -= exact->zero[i++]) {
        pw_quad_deflate(m, exact->zero[i], reduced);
        at_zero += exact->zero[i];
    }
    pw_quad re[PW_MAX_STORES], im[PW_MAX_STORES];
    if (!pw_quad_eigenvalues(m, reduced, re, im)) return false;
    out->n = m;
    for (int i = 0; i < m; i++) {           /* s = s0 nu / (nu + 1/s0), nu = mu - 1/s0 */
        pw_quad a = re[i] + 1 / p->s0, b = im[i], over = p->s0 / (a * a + b * b);
        out->re[i] = (re[i] * a + im[i] * b) * over;
        out->im[i] = im[i] == 0 ? 0 : (im[i] * a - re[i] * b) * over;
    }
    join_repeated(out, exact, at_zero);
    for (int i = 0; i < at_zero; i++, out->n++) out->re[out->n] = out->im[out->n] = 0;
    snap(out);
    return true;
}

/* ---- Both together ---- */

static void remove_root(roots *r, int i)
{
    r->n--;
    memmove(r->re + i, r->re + i + 1, (size_t)(r->n - i) * sizeof *r->re);
    memmove(r->im + i, r->im + i + 1, (size_t)(r->n - i) * sizeof *r->im);
}

/* Takes out the common pairs, nearest first. */
static void remove_hidden(roots *p, roots *z, int common, pw_quad_roots *out)
{
    for (out->hidden = 0; out->hidden < common; out->hidden++) {
        int bi = 0, bj = 0;
        pw_quad least = HUGE_VAL_F128;
        for (int i = 0; i < p->n; i++)
            for (int j = 0; j < z->n; j++) {
                pw_quad size = size_of(p, i) + size_of(z, j);
                pw_quad far = size == 0 ? 0 : distance(p, i, z, j) / size;
                if (far >= least) continue;
                least = far;
                bi = i;
                bj = j;
            }
        out->hidden_root[out->hidden] = (double)p->re[bi] + I * (double)p->im[bi];
        remove_root(p, bi);
        remove_root(z, bj);
    }
}

/* Real ones and the upper half of pairs, each followed by its exact conjugate, slow ones first. */
static int arrange(const roots *r, pw_quad *re, pw_quad *im)
{
    bool done[PW_MAX_STORES] = {false};
    int n = 0;
    for (;;) {
        int best = -1;
        for (int i = 0; i < r->n; i++)
            if (!done[i] && r->im[i] >= 0 && (best < 0 || size_of(r, i) < size_of(r, best)))
                best = i;
        if (best < 0) return n;
        done[best] = true;
        re[n] = r->re[best];
        im[n++] = r->im[best];
        if (r->im[best] == 0) continue;
        re[n] = r->re[best];
        im[n++] = -r->im[best];
    }
}

static pw_quad find_factor(const pw_quad_roots *r, pw_quad s0, pw_quad transfer)
{
    quad_complex product = transfer;
    for (int i = 0; i < r->poles; i++) {
        product *= s0 - (r->pole_re[i] + r->pole_im[i] * (quad_complex)I);
        if (i < r->zeros) product /= s0 - (r->zero_re[i] + r->zero_im[i] * (quad_complex)I);
    }
    for (int i = r->poles; i < r->zeros; i++)
        product /= s0 - (r->zero_re[i] + r->zero_im[i] * (quad_complex)I);
    return crealf128(product);
}

typedef struct workspace {
    pw_arena arena;
    pw_quad *value, *reduced;
    pw_exact denominator, numerator;
    roots pole, zero;
} workspace;

static pw_solved solve_at(const pw_net *net, double s0, workspace *w, pw_quad_roots *out)
{
    pencil p = {net, w->value, decimal(s0), false};
    pw_quad transfer = 0, unused;
    if (!reduce(&p, w->reduced, &transfer)) return PW_SOLVED_NO_CONVERGENCE;
    if (!find_roots(&p, &w->denominator, w->reduced, &w->pole)) return PW_SOLVED_NO_CONVERGENCE;
    p.bordered = true;
    if (!reduce(&p, w->reduced, &unused)) return PW_SOLVED_NO_CONVERGENCE;
    if (!find_roots(&p, &w->numerator, w->reduced, &w->zero)) return PW_SOLVED_NO_CONVERGENCE;
    remove_hidden(&w->pole, &w->zero, pw_exact_common(&w->denominator, &w->numerator), out);
    out->poles = arrange(&w->pole, out->pole_re, out->pole_im);
    out->zeros = arrange(&w->zero, out->zero_re, out->zero_im);
    if (out->poles != w->pole.n || out->zeros != w->zero.n) return PW_SOLVED_NO_CONVERGENCE;
    out->factor = find_factor(out, p.s0, transfer);
    return PW_SOLVED;
}

pw_solved pw_net_solve(const pw_net *net, const double *scale, pw_quad_roots *out)
{
    static const double try[] = {1, 3.7, 0.29, 17.3};
    workspace *w = pw_take(sizeof *w);
    pw_solved solved = PW_SOLVED_SINGULAR;
    w->value = pw_arena_take(&w->arena, (size_t)(net->values + 1) * sizeof *w->value);
    w->reduced =
        pw_arena_take(&w->arena, (size_t)(net->stores * net->stores + 1) * sizeof *w->reduced);
    pw_net_values_quad(net, scale, w->value);
    for (int i = 0; i < 4 && solved != PW_SOLVED; i++) {
        double s0 = try[i] * pw_net_reference(net);
        pw_exact_analyse(net, scale, s0, false, &w->denominator);
        if (!w->denominator.regular) continue;
        pw_exact_analyse(net, scale, s0, true, &w->numerator);
        solved = w->numerator.regular ? solve_at(net, s0, w, out) : PW_SOLVED_NO_TRANSFER;
    }
    pw_arena_free(&w->arena);
    free(w);
    return solved;
}

int pw_net_undetermined(const pw_net *net, bool *which)
{
    bool all[PW_MAX_UNKNOWNS] = {false};
    int count = 0;
    pw_exact_undetermined(net, pw_net_reference(net), all);
    for (int i = 0; i < net->nodes; i++) {
        which[i] = all[i] && net->node[i];
        count += which[i];
    }
    return count;
}

/* ---- Rounding ---- */

static void round_roots(const pw_quad *re, const pw_quad *im, int n, double complex *out)
{
    for (int i = 0; i < n; i++) out[i] = CMPLX((double)re[i], (double)im[i]);
}

bool pw_quad_roots_round(const pw_quad_roots *from, pw_roots *to)
{
    *to = (pw_roots){.poles = from->poles, .zeros = from->zeros};
    if (from->poles > PW_MAX_ROOTS || from->zeros > PW_MAX_ROOTS) return false;
    round_roots(from->pole_re, from->pole_im, from->poles, to->pole);
    round_roots(from->zero_re, from->zero_im, from->zeros, to->zero);
    to->factor = (long double)from->factor;
    return isfinite(to->factor) && to->factor != 0;
}
