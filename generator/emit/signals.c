/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "emit/signals.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "simulate/simulate.h"

/* What values a signal of this stage may take. */
typedef struct span {
    bool fixed;
    double unit; /* samples to full scale */
    double high, low; /* ends within the peak, in samples */
    double step; /* floats: what inputs are multiples of */
} span;

static span span_of(const pw_realisation *r)
{
    span s = {.fixed = r->sample == PW_Q15 || r->sample == PW_Q31};
    s.unit = r->sample == PW_Q15 ? 32768 : r->sample == PW_Q31 ? 2147483648.0 : 1;
    double peak = r->input_peak * s.unit;
    s.step = s.fixed ? 1 : ldexp(1, ilogb(peak) - 22);
    double whole = fmax(1, floor(peak / s.step)) * s.step;
    s.high = s.fixed ? fmin(whole, s.unit - 1) : whole;
    s.low = -whole;
    return s;
}

static double rounded(const span *s, double value)
{
    return fmin(s->high, fmax(s->low, rint(value / s->step) * s->step));
}

/* splitmix64, published by S. Vigna. */
static uint64_t draw(uint64_t *state)
{
    uint64_t z = *state += UINT64_C(0x9e3779b97f4a7c15);
    z = (z ^ (z >> 30)) * UINT64_C(0xbf58476d1ce4e5b9);
    z = (z ^ (z >> 27)) * UINT64_C(0x94d049bb133111eb);
    return z ^ (z >> 31);
}

static void make_noise(const span *s, uint64_t seed, double *x, long n)
{
    double levels = (s->high - s->low) / s->step + 1;
    for (long i = 0; i < n; i++) {
        double u = (double)(draw(&seed) >> 11) * 0x1p-53;
        x[i] = s->low + floor(u * levels) * s->step;
    }
}

static void make_sine(const span *s, double rate, const double band[2], double *x, long n,
                      pw_vector *v)
{
    double periods = fmax(1, rint(sqrt(band[0] * band[1]) / rate * (double)n));
    if (2 * periods >= (double)n) periods = fmax(1, floor(((double)n - 1) / 2));
    v->hz = periods / (double)n * rate;
    for (long i = 0; i < n; i++) {
        double turn = fmod(periods * (double)i, (double)n) / (double)n;
        x[i] = rounded(s, -s->low * sin(2 * M_PI * turn));
    }
}

static void make_sweep(const span *s, double rate, const double band[2], double *x, long n,
                       pw_vector *v)
{
    v->hz = fmin(fmax(band[0], rate / (double)n), band[1] / 2);
    v->hz_end = band[1];
    long double growth = logl((long double)v->hz_end / v->hz);
    for (long i = 0; i < n; i++) {
        long double t = (long double)i / (long double)n;
        long double turns = v->hz / rate * (long double)n / growth * expm1l(growth * t);
        x[i] = rounded(s, -s->low * (double)sinl(2 * (long double)M_PI * (turns - floorl(turns))));
    }
}

static void make_square(const span *s, double rate, const pw_response *response, double *x, long n,
                        pw_vector *v)
{
    double best = -INFINITY, hz = rate / 4;
    for (int i = 0; i < response->rows; i++) {
        const pw_response_row *row = &response->row[i];
        if (!(row->digital_db > best) || row->hz <= 0) continue;
        best = row->digital_db;
        hz = row->hz;
    }
    double half = fmin(fmax(1, rint(rate / (2 * hz))), fmax(1, floor((double)n / 2)));
    v->hz = rate / (2 * half);
    for (long i = 0; i < n; i++)
        x[i] = (i / (long)half) % 2 ? -s->unit : s->fixed ? s->unit - 1 : s->unit;
}

static void make_input(const pw_results *results, double *x, pw_vector *v)
{
    const pw_realisation *r = &results->realisation;
    const span s = span_of(r);
    double rate = results->stage->rate_hz;
    const double *band = results->stage->limits.band_hz;
    for (long i = 0; i < v->n; i++) x[i] = v->signal == PW_SIGNAL_STEP ? s.high : 0;
    switch (v->signal) {
    case PW_SIGNAL_IMPULSE: x[0] = s.high; break;
    case PW_SIGNAL_SINE: make_sine(&s, rate, band, x, v->n, v); break;
    case PW_SIGNAL_SWEEP: make_sweep(&s, rate, band, x, v->n, v); break;
    case PW_SIGNAL_NOISE: make_noise(&s, results->stage->vectors.seed, x, v->n); break;
    case PW_SIGNAL_FULL_SCALE_SQUARE: make_square(&s, rate, &results->response, x, v->n, v); break;
    case PW_SIGNAL_OVERFLOW_PROBE:
        if (r->nodes > 0) pw_overflow_probe(r, (int)v->n, x);
        for (long i = 0; i < v->n && !s.fixed; i++) x[i] = rounded(&s, x[i]);
        break;
    default: break;
    }
}

static void run_words(const pw_results *results, const double *x, pw_vector *v)
{
    pw_simulation sim;
    const pw_limit_cycle *cycle = &results->realisation.limit_cycle;
    v->in_words = pw_take((size_t)v->n * sizeof *v->in_words);
    v->out_words = pw_take((size_t)v->n * sizeof *v->out_words);
    for (long i = 0; i < v->n; i++) v->in_words[i] = (int32_t)x[i];
    pw_simulation_reset(&sim, &results->realisation);
    v->from_state = v->signal == PW_SIGNAL_SILENCE && cycle->has_state;
    if (v->from_state) memcpy(sim.state, cycle->state, sizeof sim.state);
    pw_simulation_run_words(&sim, v->in_words, v->out_words, (size_t)v->n);
    v->clipped = sim.clipped;
}

void pw_vector_make(const pw_results *results, pw_signal signal, pw_vector *out)
{
    long n = results->stage->vectors.length;
    *out = (pw_vector){.signal = signal, .n = n};
    double *x = pw_take((size_t)n * sizeof *x);
    make_input(results, x, out);
    if (results->realisation.sample == PW_Q15 || results->realisation.sample == PW_Q31) {
        run_words(results, x, out);
        free(x);
        return;
    }
    pw_simulation sim;
    out->in_reals = x;
    out->out_reals = pw_take((size_t)n * sizeof *x);
    pw_simulation_reset(&sim, &results->realisation);
    pw_simulation_run_floats(&sim, out->in_reals, out->out_reals, (size_t)n);
}

void pw_vector_free(pw_vector *v)
{
    free(v->in_words);
    free(v->out_words);
    free(v->in_reals);
    free(v->out_reals);
    *v = (pw_vector){.signal = v->signal};
}
