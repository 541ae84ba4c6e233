/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "twin/spectrum.h"

#include <math.h>

#include "report/response.h"

#define ABOVE_LEAKAGE 4
#define WIDEST_BAND 6.0          /* dB */
#define BINS_OF_ONE (35.0 / 18)  /* 1 + 2 (2/3)^2 + 2 (1/6)^2: a Hann window correlates its bins */
#define SIGMAS 1.96              /* 95 % of a normal distribution */

int pw_spectrum_segment(int64_t samples)
{
    int n = 64;
    if (samples < 8 * n) return 0;
    while (n < 32768 && 16 * (int64_t)n <= samples) n *= 2;
    return n;
}

typedef struct sums { double xx, r, yy, rr, hz; double complex ry; int bins; } sums;

/* Adds a bin with the twin's output made that of like: both responses are known. */
static void add_bin(const pw_results *results, const pw_roots *like, const pw_welch *w,
                    double delay, int k, sums *s)
{
    double rate = results->stage->rate_hz, hz = rate * k / w->n;
    double complex twin = pw_realised_response(&results->realisation, rate, hz);
    double complex to_like = pw_analog_at(like, hz) / twin;
    double rr = w->rr[k] * creal(to_like * conj(to_like));
    s->xx += w->xx[k];
    s->r += w->rr[k];
    if (twin == 0 || !isfinite(rr)) return;
    s->yy += w->yy[k];
    s->rr += rr;
    s->ry += conj(to_like) * w->ry[k] * cexp(CMPLX(0, 2 * M_PI * k / w->n * delay));
    s->hz += hz * rr;
}

static sums gather(const pw_results *results, const pw_roots *like, const pw_welch *w, double delay,
                   int from, int to)
{
    sums s = {.bins = to - from};
    for (int k = from; k < to; k++) add_bin(results, like, w, delay, k, &s);
    s.hz = s.rr > 0 ? s.hz / s.rr : results->stage->rate_hz * (from + to - 1) / 2 / w->n;
    return s;
}

static bool is_excited(const pw_welch *w, const sums *s, int middle, double averages,
                       const pw_point *p)
{
    double by_chance = 1 - pow(0.05, 1 / fmax(1e-9, averages - 1));
    return s->xx > ABOVE_LEAKAGE * s->bins * pw_welch_leakage(w, w->xx, middle)
           && s->r > ABOVE_LEAKAGE * s->bins * pw_welch_leakage(w, w->rr, middle)
           && averages > 1 && p->coherence > by_chance && p->band_db < WIDEST_BAND;
}

static pw_point make_point(const pw_results *results, const pw_roots *like, const pw_welch *w,
                           double delay, int from, int to)
{
    sums s = gather(results, like, w, delay, from, to);
    pw_point p = {.hz = s.hz, .db = NAN, .deg = NAN, .band_db = INFINITY, .band_deg = INFINITY};
    pw_point_models(results, &p);
    if (!(s.rr > 0) || !(s.yy > 0)) return p;
    double averages = pw_welch_averages(w) * fmax(1, s.bins / BINS_OF_ONE);
    double complex ratio = s.ry / s.rr;
    p.coherence = fmin(1, creal(s.ry * conj(s.ry)) / (s.rr * s.yy));
    double relative = sqrt((1 - p.coherence) / (2 * averages * p.coherence));
    p.band_db = SIGMAS * relative * 20 / M_LN10;
    p.band_deg = SIGMAS * relative * 180 / M_PI;
    double complex h = ratio * pw_analog_at(like, s.hz);
    p.db = 20 * log10(cabs(h));
    p.deg = carg(h) * 180 / M_PI;
    p.deg -= 360 * round((p.deg - p.analog_deg) / 360);
    p.excited = is_excited(w, &s, (from + to) / 2, averages, &p);
    return p;
}

void pw_spectrum_points(const pw_results *results, const pw_roots *like, const pw_welch *welch,
                        double delay, pw_arena *arena, pw_points *out)
{
    const double *band = results->stage->limits.band_hz;
    double step = results->stage->rate_hz / welch->n;
    int first = (int)fmax(2, ceil(band[0] / step)),
        last = (int)fmin(welch->bins - 2, floor(band[1] / step));
    out->list = pw_arena_take(arena, PW_POINTS * sizeof *out->list);
    out->count = 0;
    if (last < first) return;
    double ratio = (last + 0.5) / (first - 0.5);
    for (int i = 0, from = first; i < PW_POINTS; i++) {
        int to = (int)ceil((first - 0.5) * pow(ratio, (i + 1.0) / PW_POINTS));
        if (to > last + 1 || i == PW_POINTS - 1) to = last + 1;
        if (to <= from) continue;
        out->list[out->count++] = make_point(results, like, welch, delay, from, to);
        from = to;
    }
}
