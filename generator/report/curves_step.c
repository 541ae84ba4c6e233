/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/curves.h"

#include <gsl/gsl_blas.h>
#include <gsl/gsl_linalg.h>
#include <math.h>
#include <string.h>

#define SETTLE 6.0            /* time constants of the slowest pole that are shown */
#define APART 50.0            /* slowest over fastest: from here on time is logarithmic */
#define PER_OCTAVE 12
#define POINTS 300            /* of a curve that does not ring for long */
#define PER_CYCLE 16          /* points of one that does */
#define FEW_CYCLES 6.0
#define MOST_SAMPLES 4e6      /* that the digital side is run for */

/* ---- the analog stage as a chain of blocks ---- */

/* (b2 s^2 + b1 s + b0) / (s^2 + a1 s + a0) in s over w; order 1: (b1 s + b0) / (s + a0). */
typedef struct block { int order; double w, a0, a1, b0, b1, b2; } block;

/* Roots sorted out: pairs first, then real ones. */
typedef struct sorted { double complex pair[PW_MAX_ROOTS]; double real[PW_MAX_ROOTS]; int pairs,
                       reals; } sorted;

static void sort_out(const double complex *root, int n, sorted *out)
{
    out->pairs = out->reals = 0;
    for (int i = 0; i < n; i++) {
        if (cimag(root[i]) > 0) out->pair[out->pairs++] = root[i];
        else if (cimag(root[i]) == 0) out->real[out->reals++] = creal(root[i]);
    }
}

static int make_poles(const sorted *poles, double fallback, block *list)
{
    int n = 0;
    for (int i = 0; i < poles->pairs; i++) {
        double w = cabs(poles->pair[i]);
        list[n++] = (block){.order = 2, .w = w, .a0 = 1, .a1 = -2 * creal(poles->pair[i]) / w};
    }
    for (int i = 0; i + 1 < poles->reals; i += 2) {
        double p = poles->real[i], q = poles->real[i + 1], w = fmax(fabs(p), fabs(q));
        if (w == 0) w = fallback;
        list[n++] = (block){.order = 2, .w = w, .a0 = p / w * (q / w), .a1 = -(p + q) / w};
    }
    if (poles->reals % 2) {
        double p = poles->real[poles->reals - 1], w = p != 0 ? fabs(p) : fallback;
        list[n++] = (block){.order = 1, .w = w, .a0 = -p / w};
    }
    return n;
}

/* Gives each block zeros while there are any. Returns log of the factor's share that the scaling
 * by w takes: K prod w^(zeros - poles). */
static double make_zeros(const sorted *zeros, int n, block *list)
{
    int pair = 0, real = 0;
    double log_gain = 0;
    for (int i = 0; i < n; i++) {
        block *b = &list[i];
        int used = 0;
        b->b0 = 1;
        if (b->order == 2 && pair < zeros->pairs) {
            double complex z = zeros->pair[pair++] / b->w;
            b->b0 = creal(z) * creal(z) + cimag(z) * cimag(z);
            b->b1 = -2 * creal(z);
            b->b2 = 1;
            used = 2;
        } else
            for (; used < b->order && real < zeros->reals; used++) {
                double z = zeros->real[real++] / b->w;
                b->b2 = b->b1;
                b->b1 = b->b0 - z * b->b1;
                b->b0 *= -z;
            }
        log_gain += (used - b->order) * log(b->w);
    }
    return log_gain;
}

/* One block's rows of x' = A x + B u, with u the last state, and its output as a row over states.
 * drive: the row that drives this block; replaced by the row of its output. */
static void add_block(const block *b, int at, gsl_matrix *a, double *drive)
{
    int n = (int)a->size1, last = at + b->order - 1;
    double out[2 * PW_MAX_ROOTS + 1] = {0};
    for (int k = 0; k < n; k++) gsl_matrix_set(a, (size_t)last, (size_t)k, b->w * drive[k]);
    double direct = b->order == 2 ? b->b2 : b->b1;
    for (int k = 0; k < n; k++) out[k] = direct * drive[k];
    if (b->order == 2) {
        gsl_matrix_set(a, (size_t)at, (size_t)last, b->w);
        *gsl_matrix_ptr(a, (size_t)last, (size_t)at) -= b->w * b->a0;
        *gsl_matrix_ptr(a, (size_t)last, (size_t)last) -= b->w * b->a1;
        out[at] += b->b0 - b->b2 * b->a0;
        out[last] += b->b1 - b->b2 * b->a1;
    } else {
        *gsl_matrix_ptr(a, (size_t)last, (size_t)last) -= b->w * b->a0;
        out[last] += b->b0 - b->b1 * b->a0;
    }
    memcpy(drive, out, (size_t)n * sizeof *out);
}

/* The chain with its held input as the last state; c is the row of the output. */
static gsl_matrix *make_chain(const pw_roots *analog, double fallback, double *c)
{
    block list[PW_MAX_ROOTS];
    sorted poles, zeros;
    sort_out(analog->pole, analog->poles, &poles);
    sort_out(analog->zero, analog->zeros, &zeros);
    int n = make_poles(&poles, fallback, list), at = 0;
    double log_gain = make_zeros(&zeros, n, list) + (double)logl(fabsl(analog->factor));
    gsl_matrix *a = gsl_matrix_calloc((size_t)analog->poles + 1, (size_t)analog->poles + 1);
    memset(c, 0, ((size_t)analog->poles + 1) * sizeof *c);
    c[analog->poles] = copysign(exp(log_gain), (double)(analog->factor < 0 ? -1 : 1));
    for (int i = 0; i < n; at += list[i++].order) add_block(&list[i], at, a, c);
    return a;
}

/* ---- marching ---- */

typedef struct march { gsl_matrix *step, *spare; gsl_vector *state,
                      *next; const double *row; } march;

static double output(const march *m)
{
    double y = 0;
    for (size_t k = 0; k < m->state->size; k++) y += m->row[k] * gsl_vector_get(m->state, k);
    return y;
}

static void advance(march *m)
{
    gsl_blas_dgemv(CblasNoTrans, 1, m->step, m->state, 0, m->next);
    gsl_vector *old = m->state;
    m->state = m->next;
    m->next = old;
}

static void square(march *m)
{
    gsl_blas_dgemm(CblasNoTrans, CblasNoTrans, 1, m->step, m->step, 0, m->spare);
    gsl_matrix *old = m->step;
    m->step = m->spare;
    m->spare = old;
}

/* From t = 0 in steps of first; with octaves, the step doubles after each PER_OCTAVE of them, so
 * that it stays near a twelfth of the time that has passed. */
static void march_on(march *m, double first, pw_step_curve *out)
{
    double t = 0, step = first;
    for (int i = 0; i < out->analogs; i++) {
        out->analog_t[i] = t;
        out->analog[i] = output(m);
        if (out->logarithmic && i > PER_OCTAVE && (i - 1) % PER_OCTAVE == 0) {
            square(m);
            step *= 2;
        }
        advance(m);
        t += step;
    }
}

static pw_status analog_curve(const pw_roots *analog, double rate_hz, double first,
                              pw_step_curve *out)
{
    double row[PW_MAX_ROOTS + 1];
    size_t n = (size_t)analog->poles + 1;
    gsl_matrix *a = make_chain(analog, rate_hz, row);
    march m = {gsl_matrix_alloc(n, n), gsl_matrix_alloc(n, n), gsl_vector_calloc(n),
               gsl_vector_calloc(n), row};
    gsl_matrix_scale(a, first);
    int failed = gsl_linalg_exponential_ss(a, m.step, GSL_PREC_DOUBLE);
    gsl_vector_set(m.state, n - 1, 1);
    if (!failed) march_on(&m, first, out);
    for (int i = 0; i < out->analogs; i++) failed |= !isfinite(out->analog[i]);
    gsl_matrix_free(a);
    gsl_matrix_free(m.step);
    gsl_matrix_free(m.spare);
    gsl_vector_free(m.state);
    gsl_vector_free(m.next);
    return failed ? PW_FAILED : PW_OK;
}

/* ---- the digital side ---- */

static double run_sections(const pw_realisation *r, double state[][2], double x)
{
    for (int i = 0; i < r->count; i++) {
        const double *b = r->section[i].realised_b, *a = r->section[i].realised_a;
        double y = b[0] * x + state[i][0];
        state[i][0] = b[1] * x - a[1] * y + state[i][1];
        state[i][1] = b[2] * x - a[2] * y;
        x = y;
    }
    return x;
}

/* Keeps the samples that are due: every stride-th, or each that is a twelfth of an octave on. */
static void digital_curve(const pw_results *results, double span, pw_step_curve *out)
{
    const pw_realisation *r = &results->realisation;
    double state[PW_MAX_SECTIONS][2] = {{0}}, rate = results->stage->rate_hz;
    double samples = fmin(span * rate, MOST_SAMPLES), due = 0;
    double stride = fmax(samples / (out->analogs - 1), 1);
    double x = 1 / r->input_full_scale;
    out->digitals = 0;
    for (long n = 0; n <= (long)samples && out->digitals < PW_CURVE_POINTS; n++) {
        double y = run_sections(r, state, x) * r->output_full_scale;
        if ((double)n < due) continue;
        out->digital_t[out->digitals] = (double)n / rate;
        out->digital[out->digitals++] = y;
        due = out->logarithmic ? fmax((double)n + 1, (double)n * exp2(1.0 / PER_OCTAVE))
                               : due + stride;
    }
}

/* The time constants of the slowest and the fastest root, zeros included where poles are at 0. */
static void find_times(const double complex *root, int n, double *slow, double *fast)
{
    for (int i = 0; i < n; i++) {
        double away = fabs(creal(root[i]));
        if (away == 0) continue;
        *slow = fmax(*slow, 1 / away);
        *fast = fmin(*fast, 1 / away);
    }
}

/* How often the fastest pair swings before it has died down. */
static double find_cycles(const pw_roots *analog, double span, double *hz)
{
    double most = 0;
    for (int i = 0; i < analog->poles; i++) {
        double f = cimag(analog->pole[i]) / (2 * M_PI), away = fabs(creal(analog->pole[i]));
        double cycles = f * fmin(span, SETTLE / away);
        if (f <= 0 || cycles < most) continue;
        most = cycles;
        *hz = f;
    }
    return most;
}

static double choose_span(const pw_roots *analog, double rate_hz, pw_step_curve *out)
{
    double slow = 0, fast = INFINITY, least = 16 / rate_hz, hz = 0;
    find_times(analog->pole, analog->poles, &slow, &fast);
    if (pw_analog_integrators(analog)) find_times(analog->zero, analog->zeros, &slow, &fast);
    if (slow == 0) slow = 100 / rate_hz / SETTLE;
    double span = fmin(fmax(SETTLE * slow, least), MOST_SAMPLES / rate_hz);
    double cycles = find_cycles(analog, span, &hz);
    out->logarithmic = cycles < FEW_CYCLES && slow > APART * fmax(fast, 1 / rate_hz);
    out->analogs = POINTS + 1;
    if (cycles < FEW_CYCLES) return span;
    span = fmin(span, (PW_CURVE_POINTS - 1) / (hz * PER_CYCLE));
    out->analogs = 1 + (int)fmax(POINTS, span * hz * PER_CYCLE);
    return span;
}

pw_status pw_curve_step(const pw_results *results, pw_step_curve *out)
{
    double rate = results->stage->rate_hz, span = choose_span(&results->analog, rate, out);
    double first = span / (out->analogs - 1);
    if (out->logarithmic) {
        first = 0.25 / rate / PER_OCTAVE;
        double octaves = log2(span / (first * PER_OCTAVE));
        out->analogs = (int)fmin(PW_CURVE_POINTS, PER_OCTAVE * (octaves + 1));
    }
    pw_status status = analog_curve(&results->analog, rate, first, out);
    digital_curve(results, out->analog_t[out->analogs - 1], out);
    return status;
}
