/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analog/circuit_exact.h"

#include <string.h>

#include "analog/circuit_prime.h"

#define A(i, j) a[(i) * n + (j)]

typedef struct exact_net { const pw_net *net; uint64_t p, s0, *value; } exact_net;

/* ---- The numbers of the equations ---- */

static uint64_t number(const pw_value *v, const double *scale, const uint64_t *value, uint64_t p)
{
    uint64_t x = pw_prime_decimal(v->x, p);
    if (scale && v->part >= 0) x = pw_prime_mul(x, pw_prime_decimal(scale[v->part], p), p);
    switch (v->kind) {
    case PW_VALUE_ONE: return 1;
    case PW_VALUE_PLAIN: return x;
    case PW_VALUE_INVERSE: return pw_prime_inverse(x, p);
    case PW_VALUE_CYCLE: return pw_prime_inverse(pw_prime_mul(x, PW_PRIME_TWO_PI, p), p);
    case PW_VALUE_MUTUAL:
        return pw_prime_mul(x, pw_prime_mul(pw_prime_root(value[v->inductor[0]], p),
                                            pw_prime_root(value[v->inductor[1]], p), p), p);
    }
    return 0;
}

/* Coupled inductances must be squares in the field, for sqrt(L1 L2) to be in it. */
static bool has_roots(const pw_net *net, const double *scale, uint64_t p)
{
    for (int i = 0; i < net->values; i++) {
        if (net->value[i].kind != PW_VALUE_MUTUAL) continue;
        for (int k = 0; k < 2; k++) {
            const pw_value *l = &net->value[net->value[i].inductor[k]];
            uint64_t x = number(l, scale, NULL, p), r = pw_prime_root(x, p);
            if (pw_prime_mul(r, r, p) != x) return false;
        }
    }
    return true;
}

static void begin(const pw_net *net, const double *scale, double s0, pw_arena *arena, exact_net *e)
{
    e->net = net;
    e->p = pw_prime_next(UINT64_C(1) << 61);
    while (!has_roots(net, scale, e->p)) e->p = pw_prime_next(e->p);
    e->s0 = pw_prime_decimal(s0, e->p);
    e->value = pw_arena_take(arena, (size_t)(net->values + 1) * sizeof *e->value);
    for (int i = 0; i < net->values; i++)
        e->value[i] = number(&net->value[i], scale, e->value, e->p);
}

/* ---- Matrices ---- */

static void add(uint64_t *at, uint64_t x, bool minus, uint64_t p)
{
    *at = minus ? pw_prime_sub(*at, x, p) : pw_prime_sub(*at, p - x, p);
}

static void add_store(const exact_net *e, uint64_t *a, int n, int left, int right, uint64_t x)
{
    for (int i = 0; i < 2; i++)
        for (int j = 0; j < 2; j++) {
            int row = e->net->store[left].row[i], column = e->net->store[right].column[j];
            if (row >= 0 && column >= 0) add(&A(row, column), x, i != j, e->p);
        }
}

/* G + s0 C, or its bordered form, n by n. */
static void fill(const exact_net *e, bool bordered, int n, uint64_t *a)
{
    const pw_net *net = e->net;
    for (int i = 0; i < net->entries; i++) {
        const pw_entry *t = &net->entry[i];
        add(&A(t->row, t->column), e->value[t->value], t->sign < 0, e->p);
    }
    for (int i = 0; i < net->stores; i++)
        add_store(e, a, n, i, i, pw_prime_mul(e->s0, e->value[net->store[i].value], e->p));
    for (int i = 0; i < net->mutuals; i++) {
        const pw_mutual *m = &net->mutual[i];
        uint64_t x = pw_prime_mul(e->s0, e->value[m->value], e->p);
        add_store(e, a, n, m->store[0], m->store[1], x);
        add_store(e, a, n, m->store[1], m->store[0], x);
    }
    if (!bordered) return;
    A(net->input, n - 1) = 1;
    for (int k = 0; k < 2; k++)
        if (net->output[k] >= 0) A(n - 1, net->output[k]) = k ? e->p - 1 : 1;
}

/* Gauss-Jordan on n rows and wide columns; pivots are sought in the first n columns. The rank;
 * pivot_column[row] says where each of the first rank rows has its 1. */
static int eliminate(int n, int wide, uint64_t *a, int *pivot_column, uint64_t p)
{
    int rank = 0;
    for (int column = 0; column < n && rank < n; column++) {
        int row = rank;
        while (row < n && !a[row * wide + column]) row++;
        if (row == n) continue;
        uint64_t *top = a + rank * wide, *found = a + row * wide;
        for (int j = 0; j < wide; j++) {
            uint64_t t = found[j];
            found[j] = top[j];
            top[j] = t;
        }
        uint64_t over = pw_prime_inverse(top[column], p);
        for (int j = column; j < wide; j++) top[j] = pw_prime_mul(top[j], over, p);
        for (int i = 0; i < n; i++) {
            uint64_t f = a[i * wide + column];
            if (i == rank || !f) continue;
            for (int j = column; j < wide; j++)
                if (top[j])
                    a[i * wide + j] = pw_prime_sub(a[i * wide + j], pw_prime_mul(f, top[j], p), p);
        }
        pivot_column[rank++] = column;
    }
    return rank;
}

/* M = D V' (G + s0 C)^-1 U, m by m. false: singular. */
static bool reduce(const exact_net *e, bool bordered, uint64_t *reduced)
{
    const pw_net *net = e->net;
    int n = net->unknowns + bordered, m = net->stores, wide = n + m, pivot[PW_MAX_UNKNOWNS + 1];
    pw_arena arena = {0};
    uint64_t *square = pw_arena_take(&arena, (size_t)(n * n) * sizeof *square);
    uint64_t *a = pw_arena_take(&arena, (size_t)(n * wide) * sizeof *a);
    uint64_t *t = pw_arena_take(&arena, (size_t)(m * m + 1) * sizeof *t);
    fill(e, bordered, n, square);
    for (int i = 0; i < n; i++) memcpy(a + i * wide, square + i * n, (size_t)n * sizeof *a);
    for (int k = 0; k < m; k++)
        for (int side = 0; side < 2; side++)
            if (net->store[k].row[side] >= 0)
                add(&a[net->store[k].row[side] * wide + n + k], 1, side, e->p);
    bool regular = eliminate(n, wide, a, pivot, e->p) == n;
    for (int k = 0; regular && k < m; k++)
        for (int side = 0; side < 2; side++)
            for (int j = 0; j < m && net->store[k].column[side] >= 0; j++)
                add(&t[k * m + j], a[net->store[k].column[side] * wide + n + j], side, e->p);
    for (int k = 0; regular && k < m; k++)
        for (int j = 0; j < m; j++)
            reduced[k * m + j] = pw_prime_mul(e->value[net->store[k].value], t[k * m + j], e->p);
    for (int i = 0; regular && i < net->mutuals; i++)
        for (int side = 0; side < 2; side++)
            for (int j = 0; j < m; j++)
                add(&reduced[net->mutual[i].store[side] * m + j],
                    pw_prime_mul(e->value[net->mutual[i].value],
                                 t[net->mutual[i].store[!side] * m + j], e->p), false, e->p);
    pw_arena_free(&arena);
    return regular;
}

/* ---- Ranks of powers ---- */

/* How many ranks each further power of the m by m matrix a loses, until none. */
static int lost_ranks(int n, const uint64_t *a, int *lost, uint64_t p)
{
    pw_arena arena = {0};
    size_t bytes = (size_t)(n * n + 1) * sizeof *a;
    uint64_t *basis = pw_arena_take(&arena, bytes), *image = pw_arena_take(&arena, bytes);
    int steps = 0, pivot[PW_MAX_STORES], rank = n; /* rows of basis span the row space of a^k */
    for (int i = 0; i < n; i++) basis[i * n + i] = 1;
    for (;;) {
        memset(image, 0, bytes);
        for (int i = 0; i < rank; i++)
            for (int k = 0; k < n; k++)
                for (int j = 0; j < n && basis[i * n + k]; j++)
                    if (A(k, j))
                        image[i * n + j] = pw_prime_sub(
                            image[i * n + j], p - pw_prime_mul(basis[i * n + k], A(k, j), p), p);
        int now = eliminate(n, n, image, pivot, p);
        if (now == rank) break;
        lost[steps++] = rank - now;
        rank = now;
        memcpy(basis, image, bytes);
    }
    pw_arena_free(&arena);
    return steps;
}

/* ---- The characteristic polynomial ---- */

static void to_hessenberg(int n, uint64_t *a, uint64_t p)
{
    for (int k = 0; k + 2 < n; k++) {
        int row = k + 1;
        while (row < n && !A(row, k)) row++;
        if (row == n) continue;
        for (int j = 0; j < n && row != k + 1; j++) {
            uint64_t t = A(row, j);
            A(row, j) = A(k + 1, j);
            A(k + 1, j) = t;
        }
        for (int i = 0; i < n && row != k + 1; i++) {
            uint64_t t = A(i, row);
            A(i, row) = A(i, k + 1);
            A(i, k + 1) = t;
        }
        uint64_t over = pw_prime_inverse(A(k + 1, k), p);
        for (int i = k + 2; i < n; i++) {
            uint64_t f = pw_prime_mul(A(i, k), over, p);
            for (int j = k; j < n && f; j++)
                A(i, j) = pw_prime_sub(A(i, j), pw_prime_mul(f, A(k + 1, j), p), p);
            for (int j = 0; j < n && f; j++)
                A(j, k + 1) = pw_prime_sub(A(j, k + 1), p - pw_prime_mul(f, A(j, i), p), p);
        }
    }
}

/* det(x I - a), lowest power first; a in Hessenberg form (Golub and Van Loan, 7.4: expansion along
 * the last column of each leading block). */
static void characteristic(int n, const uint64_t *a, uint64_t *out, uint64_t p)
{
    pw_arena arena = {0};
    int wide = n + 1;
    uint64_t *c = pw_arena_take(&arena, (size_t)(wide * wide) * sizeof *c);
    c[0] = 1;
    for (int k = 1; k <= n; k++) {
        uint64_t *row = c + k * wide, chain = 1;
        for (int j = 0; j < k; j++) row[j + 1] = c[(k - 1) * wide + j];
        for (int i = k - 1; i >= 0; i--) {
            uint64_t f = pw_prime_mul(A(i, k - 1), chain, p);
            for (int j = 0; j <= i && f; j++)
                row[j] = pw_prime_sub(row[j], pw_prime_mul(f, c[i * wide + j], p), p);
            if (i) chain = pw_prime_mul(chain, A(i, i - 1), p);
        }
    }
    memcpy(out, c + n * wide, (size_t)wide * sizeof *out);
    pw_arena_free(&arena);
}

/* det(I + x M), lowest power first, trimmed. */
static void find_polynomial(int m, uint64_t *reduced, pw_exact *out)
{
    uint64_t c[PW_MAX_STORES + 1];
    to_hessenberg(m, reduced, out->prime);
    characteristic(m, reduced, c, out->prime);
    for (int k = 0; k <= m; k++) {
        uint64_t x = c[m - k];
        out->poly[k] = k % 2 && x ? out->prime - x : x;
    }
    out->degree = m;
    while (out->degree > 0 && !out->poly[out->degree]) out->degree--;
}

void pw_exact_analyse(const pw_net *net, const double *scale, double s0, bool bordered,
                      pw_exact *out)
{
    pw_arena arena = {0};
    exact_net e;
    int m = net->stores;
    memset(out, 0, sizeof *out);
    begin(net, scale, s0, &arena, &e);
    uint64_t *reduced = pw_arena_take(&arena, (size_t)(m * m + 1) * sizeof *reduced);
    uint64_t *shifted = pw_arena_take(&arena, (size_t)(m * m + 1) * sizeof *shifted);
    out->m = m;
    out->prime = e.p;
    out->regular = reduce(&e, bordered, reduced);
    if (out->regular) {
        uint64_t at_zero = pw_prime_inverse(e.s0, e.p);
        memcpy(shifted, reduced, (size_t)(m * m) * sizeof *shifted);
        for (int i = 0; i < m; i++)
            shifted[i * m + i] = pw_prime_sub(shifted[i * m + i], at_zero, e.p);
        out->infinite_steps = lost_ranks(m, reduced, out->infinite, e.p);
        out->zero_steps = lost_ranks(m, shifted, out->zero, e.p);
        out->finite = m;
        for (int i = 0; i < out->infinite_steps; i++) out->finite -= out->infinite[i];
        for (int i = 0; i < out->zero_steps; i++) out->finite -= out->zero[i];
        find_polynomial(m, reduced, out);
        pw_prime_multiplicities(out->poly, out->degree, out->repeated, e.p);
    }
    pw_arena_free(&arena);
}

int pw_exact_common(const pw_exact *left, const pw_exact *right)
{
    return pw_prime_common(left->poly, left->degree, right->poly, right->degree, left->prime);
}

int pw_exact_undetermined(const pw_net *net, double s0, bool *which)
{
    pw_arena arena = {0};
    exact_net e;
    int n = net->unknowns, pivot[PW_MAX_UNKNOWNS + 1];
    begin(net, NULL, s0, &arena, &e);
    uint64_t *a = pw_arena_take(&arena, (size_t)(n * n + 1) * sizeof *a);
    bool *bound = pw_arena_take(&arena, (size_t)(n + 1) * sizeof *bound);
    fill(&e, false, n, a);
    int rank = eliminate(n, n, a, pivot, e.p);
    for (int i = 0; i < rank; i++) bound[pivot[i]] = true;
    for (int j = 0; j < n; j++) {
        if (bound[j]) continue;
        which[j] = true;
        for (int i = 0; i < rank; i++)
            if (A(i, j)) which[pivot[i]] = true;
    }
    pw_arena_free(&arena);
    return n - rank;
}
