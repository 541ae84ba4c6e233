/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analog/spread_model.h"

#include <math.h>
#include <string.h>

#include <gsl/gsl_eigen.h>

struct gsl_reduced {
    gsl_eigen_nonsymm_workspace *space;
    gsl_matrix *matrix;
    gsl_vector_complex *value;
};

void pw_reduced_make(const pw_net *net, double s0, pw_arena *arena, pw_reduced *out)
{
    size_t n = (size_t)net->unknowns, m = (size_t)net->stores;
    *out = (pw_reduced){.net = net, .s0 = s0, .n = (int)n, .m = (int)m};
    out->value = pw_arena_take(arena, (size_t)net->values * sizeof(double));
    out->a = pw_arena_take(arena, n * n * sizeof(double));
    out->row_scale = pw_arena_take(arena, n * sizeof(double));
    out->x = pw_arena_take(arena, n * sizeof(double));
    out->M = pw_arena_take(arena, (m * m + 1) * sizeof(double));
    out->t = pw_arena_take(arena, (m * m + m + 1) * sizeof(double));
    out->p = pw_arena_take(arena, (m + 1) * sizeof(double));
    out->q = pw_arena_take(arena, (m + 1) * sizeof(double));
    out->pivot = pw_arena_take(arena, n * sizeof(int));
    out->work = pw_arena_take(arena, (m * m + 1) * sizeof(double complex));
    out->solution = pw_arena_take(arena, (m + 1) * sizeof(double complex));
    out->second = pw_arena_take(arena, (m + 1) * sizeof(double complex));
    if (!m) return;
    out->eigen = pw_arena_take(arena, sizeof *out->eigen);
    out->eigen->space = gsl_eigen_nonsymm_alloc(m);
    out->eigen->matrix = gsl_matrix_alloc(m, m);
    out->eigen->value = gsl_vector_complex_alloc(m);
}

void pw_reduced_free(pw_reduced *r)
{
    if (!r->eigen) return;
    gsl_eigen_nonsymm_free(r->eigen->space);
    gsl_matrix_free(r->eigen->matrix);
    gsl_vector_complex_free(r->eigen->value);
    r->eigen = NULL;
}

/* ---- The equations at s0 ---- */

static void add_store(pw_reduced *r, int left, int right, double x)
{
    for (int i = 0; i < 2; i++)
        for (int j = 0; j < 2; j++) {
            int row = r->net->store[left].row[i], column = r->net->store[right].column[j];
            if (row >= 0 && column >= 0) r->a[row * r->n + column] += i == j ? x : -x;
        }
}

static void fill(pw_reduced *r)
{
    const pw_net *net = r->net;
    memset(r->a, 0, (size_t)(r->n * r->n) * sizeof *r->a);
    for (int i = 0; i < net->entries; i++) {
        const pw_entry *e = &net->entry[i];
        r->a[e->row * r->n + e->column] += e->sign * r->value[e->value];
    }
    for (int i = 0; i < net->stores; i++) add_store(r, i, i, r->s0 * r->value[net->store[i].value]);
    for (int i = 0; i < net->mutuals; i++) {
        const pw_mutual *m = &net->mutual[i];
        add_store(r, m->store[0], m->store[1], r->s0 * r->value[m->value]);
        add_store(r, m->store[1], m->store[0], r->s0 * r->value[m->value]);
    }
}

static int find_pivot(const pw_reduced *r, int k)
{
    int best = -1;
    double most = 0;
    for (int i = k; i < r->n; i++) {
        double size = fabs(r->a[i * r->n + k]) * r->row_scale[i];
        if (size > most) {
            most = size;
            best = i;
        }
    }
    return best;
}

/* LU with scaled partial pivoting; rows are swapped whole. */
static bool factor(pw_reduced *r)
{
    int n = r->n;
    for (int i = 0; i < n; i++) {
        double most = 0;
        for (int j = 0; j < n; j++) most = fmax(most, fabs(r->a[i * n + j]));
        r->row_scale[i] = most > 0 ? 1 / most : 1;
    }
    for (int k = 0; k < n; k++) {
        int p = r->pivot[k] = find_pivot(r, k);
        if (p < 0) return false;
        double *top = r->a + k * n, *found = r->a + p * n;
        for (int j = 0; j < n && p != k; j++) {
            double t = found[j];
            found[j] = top[j];
            top[j] = t;
        }
        r->row_scale[p] = r->row_scale[k];
        for (int i = k + 1; i < n; i++) {
            double *row = r->a + i * n;
            if (row[k] == 0) continue;
            double f = row[k] /= top[k];
            for (int j = k + 1; j < n; j++) row[j] -= f * top[j];
        }
    }
    return true;
}

static void solve(pw_reduced *r)
{
    int n = r->n;
    double *x = r->x;
    for (int k = 0; k < n; k++) {
        double t = x[r->pivot[k]];
        x[r->pivot[k]] = x[k];
        x[k] = t;
    }
    for (int i = 0; i < n; i++)
        for (int j = 0; j < i; j++) x[i] -= r->a[i * n + j] * x[j];
    for (int i = n - 1; i >= 0; i--) {
        for (int j = i + 1; j < n; j++) x[i] -= r->a[i * n + j] * x[j];
        x[i] /= r->a[i * n + i];
    }
}

static double across(const pw_reduced *r, const int *pair)
{
    return (pair[0] >= 0 ? r->x[pair[0]] : 0) - (pair[1] >= 0 ? r->x[pair[1]] : 0);
}

/* wide columns: out = D t */
static void times_d(const pw_reduced *r, const double *t, int wide, double *out)
{
    const pw_net *net = r->net;
    for (int k = 0; k < r->m; k++)
        for (int j = 0; j < wide; j++)
            out[k * wide + j] = r->value[net->store[k].value] * t[k * wide + j];
    for (int i = 0; i < net->mutuals; i++)
        for (int side = 0; side < 2; side++)
            for (int j = 0; j < wide; j++)
                out[net->mutual[i].store[side] * wide + j] +=
                    r->value[net->mutual[i].value] * t[net->mutual[i].store[!side] * wide + j];
}

/* ---- Hessenberg form: M, p and q under the same orthogonal similarity ---- */

static void reflect(pw_reduced *r, int k, double *v, double beta)
{
    int m = r->m;
    for (int j = 0; j < m; j++) {
        double dot = 0;
        for (int i = k; i < m; i++) dot += v[i] * r->M[i * m + j];
        for (int i = k; i < m; i++) r->M[i * m + j] -= beta * dot * v[i];
    }
    for (int i = 0; i < m; i++) {
        double dot = 0;
        for (int j = k; j < m; j++) dot += v[j] * r->M[i * m + j];
        for (int j = k; j < m; j++) r->M[i * m + j] -= beta * dot * v[j];
    }
    double *both[] = {r->p, r->q};
    for (int b = 0; b < 2; b++) {
        double dot = 0;
        for (int i = k; i < m; i++) dot += v[i] * both[b][i];
        for (int i = k; i < m; i++) both[b][i] -= beta * dot * v[i];
    }
}

static void to_hessenberg(pw_reduced *r)
{
    int m = r->m;
    double *v = r->t;
    for (int k = 0; k + 2 < m; k++) {
        double norm = 0;
        for (int i = k + 1; i < m; i++) norm = hypot(norm, v[i] = r->M[i * m + k]);
        if (norm == 0) continue;
        if (v[k + 1] > 0) norm = -norm;
        v[k + 1] -= norm;
        reflect(r, k + 1, v, -1 / (norm * v[k + 1]));
        for (int i = k + 2; i < m; i++) r->M[i * m + k] = 0;
    }
}

bool pw_reduced_set(pw_reduced *r, const double *scale)
{
    int n = r->n, m = r->m;
    pw_net_values(r->net, scale, r->value);
    fill(r);
    if (!factor(r)) return false;
    for (int j = 0; j < m; j++) {
        const int *row = r->net->store[j].row;
        memset(r->x, 0, (size_t)n * sizeof *r->x);
        for (int side = 0; side < 2; side++)
            if (row[side] >= 0) r->x[row[side]] = side ? -1 : 1;
        solve(r);
        for (int k = 0; k < m; k++) r->t[k * m + j] = across(r, r->net->store[k].column);
        r->p[j] = across(r, r->net->output);
    }
    times_d(r, r->t, m, r->M);
    memset(r->x, 0, (size_t)n * sizeof *r->x);
    r->x[r->net->input] = 1;
    solve(r);
    for (int k = 0; k < m; k++) r->t[k] = across(r, r->net->store[k].column);
    times_d(r, r->t, 1, r->q);
    r->h0 = across(r, r->net->output);
    to_hessenberg(r);
    return true;
}

/* ---- Evaluation ---- */

static double size1(double complex z) { return fabs(creal(z)) + fabs(cimag(z)); }

/* z = x / y without the checks for infinities that the language asks of complex division */
static double complex quotient(double complex x, double complex y)
{
    double a = creal(x), b = cimag(x), c = creal(y), d = cimag(y), over = 1 / (c * c + d * d);
    return CMPLX((a * c + b * d) * over, (b * c - a * d) * over);
}

static double complex product(double complex x, double complex y)
{
    double a = creal(x), b = cimag(x), c = creal(y), d = cimag(y);
    return CMPLX(a * c - b * d, a * d + b * c);
}

/* LU of a Hessenberg matrix in place; the multipliers and swaps are kept for substitute(). */
static void eliminate(int m, double complex *w, bool *swapped, double complex *multiplier)
{
    for (int k = 0; k + 1 < m; k++) {
        double complex *top = w + k * m, *low = top + m;
        swapped[k] = size1(low[k]) > size1(top[k]);
        for (int j = k; j < m && swapped[k]; j++) {
            double complex t = top[j];
            top[j] = low[j];
            low[j] = t;
        }
        multiplier[k] = quotient(low[k], top[k]);
        for (int j = k + 1; j < m; j++) low[j] -= product(multiplier[k], top[j]);
    }
}

static void substitute(int m, const double complex *w, const bool *swapped,
                       const double complex *multiplier, double complex *x)
{
    for (int k = 0; k + 1 < m; k++) {
        if (swapped[k]) {
            double complex t = x[k];
            x[k] = x[k + 1];
            x[k + 1] = t;
        }
        x[k + 1] -= product(multiplier[k], x[k]);
    }
    for (int i = m - 1; i >= 0; i--) {
        for (int j = i + 1; j < m; j++) x[i] -= product(w[i * m + j], x[j]);
        x[i] = quotient(x[i], w[i * m + i]);
    }
}

void pw_reduced_at(pw_reduced *r, double complex s, double complex *h, double complex *slope)
{
    int m = r->m;
    double complex x = s - r->s0, multiplier[PW_MAX_STORES], first = 0, second = 0;
    bool swapped[PW_MAX_STORES];
    multiplier[0] = 0;
    swapped[0] = false;
    for (int i = 0; i < m; i++) {
        for (int j = i > 0 ? i - 1 : 0; j < m; j++) r->work[i * m + j] = x * r->M[i * m + j];
        r->work[i * m + i] += 1;
        r->solution[i] = r->q[i];
    }
    eliminate(m, r->work, swapped, multiplier);
    substitute(m, r->work, swapped, multiplier, r->solution);
    memcpy(r->second, r->solution, (size_t)m * sizeof *r->second);
    substitute(m, r->work, swapped, multiplier, r->second);
    for (int i = 0; i < m; i++) {
        first += r->p[i] * r->solution[i];
        second += r->p[i] * r->second[i];
    }
    *h = r->h0 - product(x, first);
    *slope = -second;
}

bool pw_reduced_unstable(pw_reduced *r)
{
    if (!r->m) return false;
    memcpy(r->eigen->matrix->data, r->M, (size_t)(r->m * r->m) * sizeof *r->M);
    if (gsl_eigen_nonsymm(r->eigen->matrix, r->eigen->value, r->eigen->space)) return false;
    for (int i = 0; i < r->m; i++) {
        gsl_complex mu = gsl_vector_complex_get(r->eigen->value, (size_t)i);
        double complex z = CMPLX(GSL_REAL(mu), GSL_IMAG(mu)) * r->s0;
        if (cabs(z) < 1e-9) continue; /* a pole a thousand million times faster */
        double complex s = 1 - 1 / z;
        if (creal(s) > 1e-9 * (1 + cabs(s))) return true;
    }
    return false;
}
