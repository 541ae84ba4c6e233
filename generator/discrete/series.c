/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Method: the impulse response of N(s)/prod(s - p_i) is the divided difference of N(s) e^(s t) on
 * the poles, whether they are apart, near or equal. By Leibniz' rule it is
 *     h(t) = sum_j N[p_0 .. p_j] E_t[p_j .. p_last],
 * N[..] being Newton's coefficients of N (a recurrence without division), and by Opitz' theorem
 * the table E_1[p_i .. p_j] of e^s is an upper triangular matrix whose powers are the tables of
 * e^(k s): the samples follow one another by a product of this matrix and a vector. Equal poles
 * stand together, so that a difference of equal ends is a derivative, e^p/k!.
 * Accuracy: cancellation is paid for by the number of bits; the caller raises it until the result
 * stands still.
 * Source: G. Opitz, ZAMM 44 (1964), T52-T54; A. McCurdy, K. C. Ng, B. N. Parlett, Mathematics of
 * Computation 43 (1984), 501-528. */
#include "discrete/series.h"

typedef struct table { pw_many entry; int n; } table;     /* entry i, j at i n + j, i <= j */

static mpc_ptr entry(const table *t, int i, int j)
{
    return t->entry.at[i * t->n + j];
}

/* The poles with equal ones side by side. */
static void gather(const pw_transfer *transfer, double complex *node)
{
    bool taken[PW_MAX_ROOTS + 1] = {false};
    int n = 0;
    for (int i = 0; i < transfer->poles; i++)
        for (int k = i; k < transfer->poles && !taken[i]; k++) {
            if (k > i && (taken[k] || transfer->pole[k] != transfer->pole[i])) continue;
            node[n++] = transfer->pole[k];
            if (k > i) taken[k] = true;
        }
}

/* In units of one sample. */
static void scaled(mpc_ptr out, double complex s, double rate_hz)
{
    mpc_set_d_d(out, creal(s), cimag(s), MPC_RNDNN);
    mpfr_div_d(mpc_realref(out), mpc_realref(out), rate_hz, MPFR_RNDN);
    mpfr_div_d(mpc_imagref(out), mpc_imagref(out), rate_hz, MPFR_RNDN);
}

static void exponentials(const double complex *node, const pw_many *s, table *e)
{
    mpc_t below;
    mpc_init2(below, s->bits);
    for (int i = 0; i < e->n; i++) mpc_exp(entry(e, i, i), s->at[i], MPC_RNDNN);
    for (int width = 1; width < e->n; width++)
        for (int i = 0, j = width; j < e->n; i++, j++) {
            if (node[i] == node[j]) {
                mpc_div_ui(entry(e, i, j), entry(e, i, j - 1), (unsigned long)width, MPC_RNDNN);
                continue;
            }
            mpc_sub(below, s->at[j], s->at[i], MPC_RNDNN);
            mpc_sub(entry(e, i, j), entry(e, i + 1, j), entry(e, i, j - 1), MPC_RNDNN);
            mpc_div(entry(e, i, j), entry(e, i, j), below, MPC_RNDNN);
        }
    mpc_clear(below);
}

/* Newton's coefficients of prod(s - zero): (s - z) w_j = w_(j+1) + (p_j - z) w_j. */
static void newton(const pw_transfer *transfer, const pw_many *s, double rate_hz, pw_many *c)
{
    mpc_t z, term;
    mpc_init2(z, s->bits);
    mpc_init2(term, s->bits);
    mpc_set_ui(c->at[0], 1, MPC_RNDNN);
    for (int i = 0; i < transfer->zeros; i++) {
        scaled(z, transfer->zero[i], rate_hz);
        mpc_set(c->at[i + 1], c->at[i], MPC_RNDNN);
        for (int j = i; j >= 0; j--) {
            mpc_sub(term, s->at[j], z, MPC_RNDNN);
            mpc_mul(c->at[j], c->at[j], term, MPC_RNDNN);
            if (j > 0) mpc_add(c->at[j], c->at[j], c->at[j - 1], MPC_RNDNN);
        }
    }
    mpc_clear(z);
    mpc_clear(term);
}

/* v = E v, E upper triangular; in place from the top. */
static void advance(const table *e, pw_many *v)
{
    mpc_t term;
    mpc_init2(term, v->bits);
    for (int i = 0; i < e->n; i++) {
        mpc_mul(v->at[i], v->at[i], entry(e, i, i), MPC_RNDNN);
        for (int j = i + 1; j < e->n; j++) {
            mpc_mul(term, entry(e, i, j), v->at[j], MPC_RNDNN);
            mpc_add(v->at[i], v->at[i], term, MPC_RNDNN);
        }
    }
    mpc_clear(term);
}

static void samples(const table *e, const pw_many *c, pw_many *h)
{
    pw_many v;
    mpc_t term;
    pw_many_make(&v, e->n, h->bits);
    mpc_init2(term, h->bits);
    mpc_set_ui(v.at[e->n - 1], 1, MPC_RNDNN);
    for (int k = 0; k < h->count; k++) {
        if (k > 0) advance(e, &v);
        for (int j = 0; j < e->n; j++) {
            mpc_mul(term, c->at[j], v.at[j], MPC_RNDNN);
            mpc_add(h->at[k], h->at[k], term, MPC_RNDNN);
        }
        mpfr_set_ui(mpc_imagref(h->at[k]), 0, MPFR_RNDN);
    }
    mpc_clear(term);
    pw_many_free(&v);
}

/* prod(1 - e^p x), lowest power first. */
static void denominator(const table *e, pw_many *d)
{
    mpc_t term;
    mpc_init2(term, d->bits);
    mpc_set_ui(d->at[0], 1, MPC_RNDNN);
    for (int i = 0; i < e->n; i++)
        for (int k = i + 1; k > 0; k--) {
            mpc_mul(term, entry(e, i, i), d->at[k - 1], MPC_RNDNN);
            mpc_sub(d->at[k], d->at[k], term, MPC_RNDNN);
        }
    for (int k = 0; k < d->count; k++) mpfr_set_ui(mpc_imagref(d->at[k]), 0, MPFR_RNDN);
    mpc_clear(term);
}

static void convolve(const pw_many *d, const pw_many *h, bool halve_first, pw_many *b)
{
    int n = d->count - 1;
    mpc_t term;
    mpc_init2(term, b->bits);
    for (int k = 0; k <= n; k++) {
        for (int i = 0; i <= k && k < n; i++) {
            mpc_mul(term, d->at[i], h->at[k - i], MPC_RNDNN);
            mpc_add(b->at[k], b->at[k], term, MPC_RNDNN);
        }
        if (!halve_first) continue;
        mpc_mul(term, d->at[k], h->at[0], MPC_RNDNN);
        mpc_div_2ui(term, term, 1, MPC_RNDNN);
        mpc_sub(b->at[k], b->at[k], term, MPC_RNDNN);
    }
    mpc_clear(term);
}

void pw_series_numerator(const pw_transfer *transfer, double rate_hz, bool halve_first, long bits,
                         pw_many *b)
{
    double complex node[PW_MAX_ROOTS + 1];
    int n = transfer->poles;
    pw_many s, c, h, d;
    table e = {.n = n};
    gather(transfer, node);
    pw_many_make(&s, n, bits);
    pw_many_make(&c, n, bits);
    pw_many_make(&h, n, bits);
    pw_many_make(&d, n + 1, bits);
    pw_many_make(b, n + 1, bits);
    pw_many_make(&e.entry, n * n, bits);
    for (int i = 0; i < n; i++) scaled(s.at[i], node[i], rate_hz);
    exponentials(node, &s, &e);
    newton(transfer, &s, rate_hz, &c);
    samples(&e, &c, &h);
    denominator(&e, &d);
    convolve(&d, &h, halve_first, b);
    pw_many_free(&s);
    pw_many_free(&c);
    pw_many_free(&h);
    pw_many_free(&d);
    pw_many_free(&e.entry);
}
