/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analog/sensitivity_adjoint.h"

#include <math.h>

typedef long double complex long_complex;

typedef struct factored {
    pw_arena arena;
    const pw_net *net;
    const pw_quad *value;
    int n, *pivot;
    long_complex *a;
} factored;

static long double size1(long_complex z) { return fabsl(creall(z)) + fabsl(cimagl(z)); }

/* ---- LU of the equations at s, bordered or not ---- */

static void fill(factored *f, bool bordered, long_complex s)
{
    int n = f->net->unknowns, wide = n + 1;
    long_complex *full = pw_arena_take(&f->arena, (size_t)(n * wide) * sizeof *full);
    pw_net_fill(f->net, f->value, s, full);
    f->n = n + bordered;
    f->a = pw_arena_take(&f->arena, (size_t)(f->n * f->n) * sizeof *f->a);
    f->pivot = pw_arena_take(&f->arena, (size_t)f->n * sizeof *f->pivot);
    for (int i = 0; i < n; i++)
        for (int j = 0; j < f->n; j++) f->a[i * f->n + j] = full[i * wide + j];
    for (int k = 0; k < 2 && bordered; k++)
        if (f->net->output[k] >= 0) f->a[n * f->n + f->net->output[k]] = k ? -1 : 1;
}

static int find_pivot(const factored *f, const long double *scale, int k)
{
    int best = k;
    for (int i = k + 1; i < f->n; i++)
        if (size1(f->a[i * f->n + k]) * scale[i] > size1(f->a[best * f->n + k]) * scale[best])
            best = i;
    return best;
}

/* A vanishing pivot is replaced by rounding's own size, which is what inverse iteration needs. */
static void factor(factored *f)
{
    int n = f->n;
    long double *scale = pw_arena_take(&f->arena, (size_t)n * sizeof *scale);
    for (int i = 0; i < n; i++) {
        for (int j = 0; j < n; j++) scale[i] = fmaxl(scale[i], size1(f->a[i * n + j]));
        scale[i] = scale[i] > 0 ? 1 / scale[i] : 1;
    }
    for (int k = 0; k < n; k++) {
        int p = f->pivot[k] = find_pivot(f, scale, k);
        long_complex *top = f->a + k * n, *found = f->a + p * n;
        for (int j = 0; j < n && p != k; j++) {
            long_complex t = found[j];
            found[j] = top[j];
            top[j] = t;
        }
        scale[p] = scale[k];
        if (size1(top[k]) * scale[p] < 1e-25L) top[k] = 1e-21L / scale[p];
        for (int i = k + 1; i < n; i++) {
            long_complex *row = f->a + i * n;
            if (row[k] == 0) continue;
            long_complex m = row[k] /= top[k];
            for (int j = k + 1; j < n; j++)
                if (top[j] != 0) row[j] -= m * top[j];
        }
    }
}

static void solve(const factored *f, long_complex *x)
{
    int n = f->n;
    for (int k = 0; k < n; k++) {
        long_complex t = x[f->pivot[k]];
        x[f->pivot[k]] = x[k];
        x[k] = t;
    }
    for (int i = 0; i < n; i++)
        for (int j = 0; j < i; j++) x[i] -= f->a[i * n + j] * x[j];
    for (int i = n - 1; i >= 0; i--) {
        for (int j = i + 1; j < n; j++) x[i] -= f->a[i * n + j] * x[j];
        x[i] /= f->a[i * n + i];
    }
}

static void solve_transposed(const factored *f, long_complex *x)
{
    int n = f->n;
    for (int i = 0; i < n; i++) {
        for (int j = 0; j < i; j++) x[i] -= f->a[j * n + i] * x[j];
        x[i] /= f->a[i * n + i];
    }
    for (int i = n - 1; i >= 0; i--)
        for (int j = i + 1; j < n; j++) x[i] -= f->a[j * n + i] * x[j];
    for (int k = n - 1; k >= 0; k--) {
        long_complex t = x[f->pivot[k]];
        x[f->pivot[k]] = x[k];
        x[k] = t;
    }
}

static void begin(const pw_net *net, bool bordered, long_complex s, factored *f)
{
    *f = (factored){.net = net};
    pw_quad *value = pw_arena_take(&f->arena, (size_t)net->values * sizeof *value);
    pw_net_values_quad(net, NULL, value);
    f->value = value;
    fill(f, bordered, s);
    factor(f);
}

/* ---- y' dA v ---- */

static void add(const pw_net *net, int index, long_complex term, long_complex *move)
{
    const pw_value *v = &net->value[index];
    if (v->kind == PW_VALUE_MUTUAL)
        for (int k = 0; k < 2; k++) add(net, v->inductor[k], term / 2, move);
    bool inverse = v->kind == PW_VALUE_INVERSE || v->kind == PW_VALUE_CYCLE;
    if (v->part >= 0) move[v->part] += inverse ? -term : term;
}

static long_complex across(const long_complex *x, const int *pair)
{
    return (pair[0] >= 0 ? x[pair[0]] : 0) - (pair[1] >= 0 ? x[pair[1]] : 0);
}

/* move[part] += y' (dA / d ln part) v; returns y' C v. */
static long_complex form(const factored *f, long_complex s, const long_complex *y,
                         const long_complex *v, long_complex *move)
{
    const pw_net *net = f->net;
    long_complex sum = 0;
    for (int i = 0; i < net->entries; i++) {
        const pw_entry *e = &net->entry[i];
        add(net, e->value, e->sign * y[e->row] * v[e->column] * (long double)f->value[e->value],
            move);
    }
    for (int i = 0; i < net->stores; i++) {
        const pw_store *t = &net->store[i];
        long_complex term =
            across(y, t->row) * across(v, t->column) * (long double)f->value[t->value];
        add(net, t->value, s * term, move);
        sum += term;
    }
    for (int i = 0; i < net->mutuals; i++) {
        const pw_store *a = &net->store[net->mutual[i].store[0]],
                       *b = &net->store[net->mutual[i].store[1]];
        long_complex term =
            across(y, a->row) * across(v, b->column) + across(y, b->row) * across(v, a->column);
        term *= (long double)f->value[net->mutual[i].value];
        add(net, net->mutual[i].value, s * term, move);
        sum += term;
    }
    return sum;
}

static void normalise(int n, long_complex *x)
{
    long double most = 0;
    for (int i = 0; i < n; i++) most = fmaxl(most, size1(x[i]));
    for (int i = 0; i < n; i++) x[i] /= most;
}

bool pw_adjoint_root(const pw_net *net, bool zero, long double complex s, long double complex *move)
{
    factored f;
    begin(net, zero, s, &f);
    size_t bytes = (size_t)f.n * sizeof(long_complex);
    long_complex *v = pw_arena_take(&f.arena, bytes), *y = pw_arena_take(&f.arena, bytes);
    for (int i = 0; i < f.n; i++) {                      /* nothing special about these numbers */
        v[i] = CMPLXL(1 + 0.37L * sinl(i + 1), 0.21L * cosl(3 * i));
        y[i] = CMPLXL(1 + 0.29L * cosl(2 * i), 0.33L * sinl(i + 2));
    }
    for (int pass = 0; pass < 3; pass++) {
        solve(&f, v);
        normalise(f.n, v);
        solve_transposed(&f, y);
        normalise(f.n, y);
    }
    for (int i = 0; i < net->circuit->parts; i++) move[i] = 0;
    long_complex slope = form(&f, s, y, v, move);
    for (int i = 0; i < net->circuit->parts; i++) move[i] = -move[i] / slope;
    bool good = isfinite(creall(slope)) && slope != 0;
    pw_arena_free(&f.arena);
    return good;
}

bool pw_adjoint_gain(const pw_net *net, long double complex s, long double complex *move)
{
    factored f;
    begin(net, false, s, &f);
    size_t bytes = (size_t)f.n * sizeof(long_complex);
    long_complex *x = pw_arena_take(&f.arena, bytes), *y = pw_arena_take(&f.arena, bytes);
    x[net->input] = 1;
    for (int k = 0; k < 2; k++)
        if (net->output[k] >= 0) y[net->output[k]] = k ? -1 : 1;
    solve(&f, x);
    solve_transposed(&f, y);
    long_complex h = across(x, net->output);
    for (int i = 0; i < net->circuit->parts; i++) move[i] = 0;
    form(&f, s, y, x, move);
    for (int i = 0; i < net->circuit->parts; i++) move[i] = -move[i] / h;
    bool good = h != 0 && isfinite(creall(h)) && isfinite(cimagl(h));
    pw_arena_free(&f.arena);
    return good;
}
