/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "twin/exact.h"

#include <math.h>
#include <string.h>

#include <gsl/gsl_linalg.h>

#define MOST_STATES (PW_MAX_ROOTS + 2)

/* ---- The exponential of a matrix ---- */

static void multiply(const double *a, const double *b, int n, double *out)
{
    memset(out, 0, (size_t)(n * n) * sizeof *out);
    for (int i = 0; i < n; i++)
        for (int k = 0; k < n; k++) {
            double v = a[i * n + k];
            if (v != 0)
                for (int j = 0; j < n; j++) out[i * n + j] += v * b[k * n + j];
        }
}

static double norm1(const double *a, int n)
{
    double most = 0;
    for (int j = 0; j < n; j++) {
        double sum = 0;
        for (int i = 0; i < n; i++) sum += fabs(a[i * n + j]);
        most = fmax(most, sum);
    }
    return most;
}

/* sum += c0 I + c2 A2 + c4 A4 + c6 A6 */
static void combine(const double *const power[3], int n, const double c[4], double *sum)
{
    for (int i = 0; i < n * n; i++)
        sum[i] += c[1] * power[0][i] + c[2] * power[1][i] + c[3] * power[2][i];
    for (int i = 0; i < n; i++) sum[i * n + i] += c[0];
}

/* Solves (v - u) x = v + u. */
static void divide(double *u, double *v, int n, double *x)
{
    int sign;
    gsl_permutation *p = gsl_permutation_alloc((size_t)n);
    for (int i = 0; i < n * n; i++) {
        double above = v[i] + u[i];
        v[i] -= u[i];
        u[i] = above;
    }
    gsl_matrix_view lu = gsl_matrix_view_array(v, (size_t)n, (size_t)n);
    gsl_linalg_LU_decomp(&lu.matrix, p, &sign);
    for (int j = 0; j < n; j++) {
        gsl_vector_view b = gsl_vector_view_array_with_stride(u + j, (size_t)n, (size_t)n);
        gsl_vector_view out = gsl_vector_view_array_with_stride(x + j, (size_t)n, (size_t)n);
        gsl_linalg_LU_solve(&lu.matrix, p, &b.vector, &out.vector);
    }
    gsl_permutation_free(p);
}

void pw_matrix_exponential(double *a, int n, double *out)
{
    static const double b[] = {
        64764752532480000, 32382376266240000, 7771770303897600, 1187353796428800, 129060195264000,
        10559470521600, 670442572800, 33522128640, 1323241920, 40840800, 960960, 16380, 182, 1};
    const double reach = 5.371920351148152;      /* theta 13 of Higham's table 2.3 */
    pw_arena arena = {0};
    size_t bytes = (size_t)(n * n) * sizeof(double);
    double *m[6], norm = norm1(a, n);
    for (int i = 0; i < 6; i++) m[i] = pw_arena_take(&arena, bytes);
    int squarings = norm > reach ? (int)ceil(log2(norm / reach)) : 0;
    for (int i = 0; i < n * n; i++) a[i] = ldexp(a[i], -squarings);
    multiply(a, a, n, m[0]);
    multiply(m[0], m[0], n, m[1]);
    multiply(m[0], m[1], n, m[2]);
    const double *const power[] = {m[0], m[1], m[2]};
    combine(power, n, (const double[]){0, b[9], b[11], b[13]}, m[3]);
    multiply(m[2], m[3], n, m[4]);
    combine(power, n, (const double[]){b[1], b[3], b[5], b[7]}, m[4]);
    multiply(a, m[4], n, m[5]);                  /* U */
    memset(m[3], 0, bytes);
    combine(power, n, (const double[]){0, b[8], b[10], b[12]}, m[3]);
    multiply(m[2], m[3], n, m[4]);               /* V */
    combine(power, n, (const double[]){b[0], b[2], b[4], b[6]}, m[4]);
    divide(m[5], m[4], n, out);
    for (int i = 0; i < squarings; i++) {
        multiply(out, out, n, m[0]);
        memcpy(out, m[0], bytes);
    }
    pw_arena_free(&arena);
}

/* ---- Roots as a chain of parts ---- */

/* (s^z + n1 s + n0) / (s^p + d1 s + d0) as monic polynomials; p 1 or 2, z <= p. */
typedef struct part { int p, z; double complex pole[2], zero[2]; } part;

static int chain(const pw_roots *r, part *list)
{
    int count = 0, single = -1;
    for (int i = 0; i < r->poles; i++) {         /* pairs, and real ones two by two */
        if (cimag(r->pole[i]) != 0) {
            list[count++] = (part){.p = 2, .pole = {r->pole[i], r->pole[i + 1]}};
            i++;
        } else if (single >= 0) {
            list[single].pole[list[single].p++] = r->pole[i];
            single = -1;
        } else {
            single = count;
            list[count++] = (part){.p = 1, .pole = {r->pole[i]}};
        }
    }
    for (int i = 0; i < r->zeros; i++) {
        if (cimag(r->zero[i]) == 0) continue;
        int k = 0;
        while (list[k].p < 2 || list[k].z) k++;
        list[k].z = 2;
        list[k].zero[0] = r->zero[i];
        list[k].zero[1] = r->zero[++i];
    }
    for (int i = 0, k = 0; i < r->zeros; i++) {
        if (cimag(r->zero[i]) != 0) continue;
        while (list[k].z == list[k].p) k++;
        list[k].zero[list[k].z++] = r->zero[i];
    }
    return count;
}

static void monic(const double complex *root, int n, double *c1, double *c0)
{
    *c1 = n == 2 ? -creal(root[0] + root[1]) : 0;
    *c0 = n == 2 ? creal(root[0] * root[1]) : n == 1 ? -creal(root[0]) : 1;
}

/* The whole's state space so far; its output is c x + d u. */
typedef struct space { int n, room; double *a, *b, *c, d; } space;

/* Puts a part behind it. Each part's time is scaled by its fastest pole, so that its states are
 * alike in size. */
static void append(space *s, const part *q, double gain)
{
    double w = 0, d1, d0, n1, n0;
    part k = *q;
    for (int i = 0; i < k.p; i++) w = fmax(w, cabs(k.pole[i]));
    if (w == 0) w = 1;
    for (int i = 0; i < k.p; i++) k.pole[i] /= w;
    for (int i = 0; i < k.z; i++) k.zero[i] /= w;
    gain *= pow(w, k.z - k.p);
    monic(k.pole, k.p, &d1, &d0);
    monic(k.zero, k.z, &n1, &n0);
    double through = k.z == k.p ? 1 : 0, c[2];
    if (k.p == 2) {              /* x1' = x2, x2' = -d0 x1 - d1 x2 + u */
        double lead = k.z == 2 ? n1 : k.z == 1 ? 1 : 0;
        c[0] = n0 - through * d0;
        c[1] = lead - through * d1;
    } else c[0] = n0 - through * d0;
    int at = s->n, room = s->room;
    int last = at + k.p - 1;
    if (k.p == 2) s->a[at * room + last] = w;
    s->a[last * room + at] = -w * d0;
    if (k.p == 2) s->a[last * room + last] = -w * d1;
    for (int j = 0; j < at; j++) s->a[last * room + j] = w * gain * s->c[j];
    s->b[last] = w * gain * s->d;
    for (int j = 0; j < at; j++) s->c[j] *= gain * through;
    s->d *= gain * through;
    for (int i = 0; i < k.p; i++) s->c[at + i] = c[i];
    s->n += k.p;
}

static void make_space(const pw_roots *analog, double rate_hz, space *s)
{
    part list[PW_MAX_ROOTS];
    pw_roots r = *analog;
    for (int i = 0; i < r.poles; i++) r.pole[i] /= rate_hz;
    for (int i = 0; i < r.zeros; i++) r.zero[i] /= rate_hz;
    long double factor = r.factor * powl(rate_hz, (long double)r.zeros - r.poles);
    int parts = chain(&r, list);
    double each = parts ? (double)powl(fabsl(factor), 1.0L / parts) : 1;
    s->d = factor < 0 ? -1 : 1;
    if (!parts) s->d = (double)factor;
    for (int i = 0; i < parts; i++) append(s, &list[i], each);
}

/* ---- Steps ---- */

static void discretise(pw_exact *e, const space *s)
{
    int n = s->n, m = n + 2;
    pw_arena arena = {0};
    double *whole = pw_arena_take(&arena, (size_t)(m * m) * sizeof *whole);
    double *power = pw_arena_take(&arena, (size_t)(m * m) * sizeof *power);
    for (int i = 0; i < n; i++) {
        memcpy(whole + i * m, s->a + i * s->room, (size_t)n * sizeof *whole);
        whole[i * m + n] = s->b[i];
    }
    whole[n * m + n + 1] = 1;
    pw_matrix_exponential(whole, m, power);
    for (int i = 0; i < n; i++) {
        memcpy(e->phi + i * n, power + i * m, (size_t)n * sizeof *power);
        e->gamma[i] = power[i * m + n];
        e->ramp[i] = power[i * m + n + 1];
    }
    pw_arena_free(&arena);
}

void pw_exact_begin(const pw_roots *analog, double rate_hz, bool linear, pw_exact *out)
{
    *out = (pw_exact){.linear = linear, .u = NAN};
    size_t row = MOST_STATES * sizeof(double);
    pw_arena *a = &out->arena;
    space s = {.room = PW_MAX_ROOTS,
               .a = pw_arena_take(a, PW_MAX_ROOTS * row),
               .b = pw_arena_take(a, row),
               .c = pw_arena_take(a, row)};
    make_space(analog, rate_hz, &s);
    out->n = s.n;
    out->c = s.c;
    out->d = s.d;
    out->a = s.a;
    out->b = s.b;
    out->integrates = pw_analog_integrators(analog) > 0;
    out->phi = pw_arena_take(a, MOST_STATES * row);
    out->gamma = pw_arena_take(a, row);
    out->ramp = pw_arena_take(a, row);
    out->x = pw_arena_take(a, row);
    out->next = pw_arena_take(a, row);
    discretise(out, &s);
}

void pw_exact_settle(pw_exact *exact, double u)
{
    int n = exact->n, sign;
    memset(exact->x, 0, (size_t)n * sizeof *exact->x);
    exact->u = NAN;
    if (exact->integrates || !n) return;
    gsl_matrix *a = gsl_matrix_alloc((size_t)n, (size_t)n);
    gsl_permutation *p = gsl_permutation_alloc((size_t)n);
    for (int i = 0; i < n; i++) {
        for (int j = 0; j < n; j++)
            gsl_matrix_set(a, (size_t)i, (size_t)j, exact->a[i * PW_MAX_ROOTS + j]);
        exact->next[i] = -exact->b[i] * u;
    }
    gsl_vector_view b = gsl_vector_view_array(exact->next, (size_t)n),
                    x = gsl_vector_view_array(exact->x, (size_t)n);
    gsl_linalg_LU_decomp(a, p, &sign);
    gsl_linalg_LU_solve(a, p, &b.vector, &x.vector);
    gsl_permutation_free(p);
    gsl_matrix_free(a);
}

double pw_exact_step(pw_exact *exact, double u)
{
    int n = exact->n;
    double y = exact->d * u;
    if (!isnan(exact->u)) {
        double slope = exact->linear ? u - exact->u : 0;
        for (int i = 0; i < n; i++) {
            double sum = exact->gamma[i] * exact->u + exact->ramp[i] * slope;
            for (int j = 0; j < n; j++) sum += exact->phi[i * n + j] * exact->x[j];
            exact->next[i] = sum;
        }
        memcpy(exact->x, exact->next, (size_t)n * sizeof *exact->x);
    }
    exact->u = u;
    for (int j = 0; j < n; j++) y += exact->c[j] * exact->x[j];
    return y;
}

void pw_exact_end(pw_exact *exact) { pw_arena_free(&exact->arena); }
