/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "words/job.h"

#include <complex.h>
#include <math.h>

/* exp(j theta) - 1 and 1 - exp(-j theta), exact to an ulp for small angles. */
static double complex less_one(double theta)
{
    double s = sin(theta / 2), c = cos(theta / 2);
    return CMPLX(-2 * s * s, 2 * s * c);
}

double complex pw_ideal_response(const pw_section *section, double theta)
{
    double complex step = less_one(theta), h = section->gain;
    for (int k = 0; k < section->zeros; k++)
        h *= step + (1 - section->zero[k]);
    for (int k = 0; k < section->poles; k++)
        h /= step + (1 - section->pole[k]);
    return h;
}

/* c0 + c1/z + c2/z^2 = (c0 + c1 + c2) - (c1 + 2 c2) t + c2 t^2 with t = 1 - 1/z. */
static double complex polynomial(long double c0, long double c1, long double c2, double complex t)
{
    return (double)(c0 + c1 + c2) - (double)(c1 + 2 * c2) * t + (double)c2 * t * t;
}

static double complex coupled_response(const pw_words *w, double complex step)
{
    long double unit_a = ldexpl(1, -w->a_fraction), unit_c = ldexpl(1, -w->c_fraction);
    long double omega = w->omega * unit_a, gap = 1 - w->sigma * unit_a;
    double complex from_sigma = step + (double)gap;           /* z - sigma */
    double complex below = from_sigma * from_sigma + (double)(omega * omega);
    double complex above = (double)(w->c1 * unit_c) * from_sigma + (double)(w->c2 * unit_c * omega);
    return (double)(w->d * unit_c) + (double)(w->g * unit_a) * above / below;
}

static double complex words_at(const pw_words *w, double complex step, double complex z)
{
    if (w->structure == PW_COUPLED)
        return coupled_response(w, step);
    const double *b = w->realised_b, *a = w->realised_a;
    double complex t = step / z;
    return polynomial(b[0], b[1], b[2], t) / polynomial(1, a[1], a[2], t);
}

double complex pw_words_response(const pw_words *words, double theta)
{
    return words_at(words, less_one(theta), cexp(CMPLX(0, theta)));
}

double complex pw_realised_at(const pw_realisation *realisation, double complex z)
{
    double complex h = 1;
    for (int k = 0; k < realisation->count; k++)
        h *= words_at(&realisation->section[k], z - 1, z);
    return h;
}

/* ---- the grid and the deviation ---- */

static void grid_add(const pw_stage *stage, pw_band *grid, double hz)
{
    if (hz < stage->limits.band_hz[0] || hz > stage->limits.band_hz[1])
        return;
    if (grid->count == (int)(sizeof grid->hz / sizeof *grid->hz))
        return;
    grid->hz[grid->count] = hz;
    grid->theta[grid->count++] = 2 * M_PI * hz / stage->rate_hz;
}

static double log_model(const pw_roots *z, double theta)
{
    double complex step = less_one(theta);
    double sum = 0;
    for (int k = 0; k < z->zeros; k++)
        sum += log(cabs(step + (1 - z->zero[k])));
    for (int k = 0; k < z->poles; k++)
        sum -= log(cabs(step + (1 - z->pole[k])));
    return sum;
}

static void judge(const pw_stage *stage, const pw_roots *z, pw_band *band)
{
    double size[160], largest = -INFINITY;
    for (int i = 0; i < band->count; i++) {
        size[i] = log_model(z, band->theta[i]);
        largest = fmax(largest, size[i]);
    }
    for (int i = 0; i < band->count; i++) {
        band->level[i] = exp(size[i] - largest);
        band->judged[i] = size[i] >= largest - stage->limits.floor_db * M_LN10 / 20;
    }
}

void pw_band_make(const pw_stage *stage, const pw_roots *z, pw_band *out)
{
    const double *band = stage->limits.band_hz;
    const int steps = 64;
    out->count = 0;
    for (int k = 0; k <= steps; k++)
        grid_add(stage, out, k == steps ? band[1]
                 : band[0] * pow(band[1] / band[0], k / (double)steps));
    for (int k = 0; k < z->poles; k++) {        /* the response turns fastest near a pole */
        double angle = fabs(carg(z->pole[k])), width = fabs(log(cabs(z->pole[k])));
        double hz = stage->rate_hz / (2 * M_PI);
        if (cimag(z->pole[k]) >= 0) {
            grid_add(stage, out, (angle - width) * hz);
            grid_add(stage, out, angle * hz);
            grid_add(stage, out, (angle + width) * hz);
        }
    }
    judge(stage, z, out);
}

static void keep_peak(pw_error_peak *peak, double value, double hz)
{
    if (value > peak->max)
        *peak = (pw_error_peak){value, hz};
}

static double complex section_ratio(const pw_job *job, int k, double theta)
{
    return pw_words_response(&job->out->section[k], theta)
         / ((double)job->gain[k] * pw_ideal_response(&job->out->ideal[k], theta));
}

double pw_section_bend(const pw_job *job, int k)
{
    double worst = 0;
    for (int i = 0; i < job->band.count; i++)
        if (job->band.judged[i])
            worst = fmax(worst, job->band.level[i] * cabs(section_ratio(job, k,
                                                                        job->band.theta[i]) - 1));
    return 20 / M_LN10 * worst;
}

double pw_bend(const pw_job *job)
{
    double worst = 0;
    for (int i = 0; i < job->band.count; i++) {
        double complex ratio = 1;
        for (int k = 0; k < job->out->count; k++)
            ratio *= section_ratio(job, k, job->band.theta[i]);
        if (job->band.judged[i])
            worst = fmax(worst, job->band.level[i] * cabs(ratio - 1));
    }
    return 20 / M_LN10 * worst;
}

void pw_deviation_monic(pw_job *job)
{
    const pw_band *band = &job->band;
    pw_error_peak *magnitude = &job->out->word_magnitude_db, *phase = &job->out->word_phase_deg;
    *magnitude = *phase = (pw_error_peak){0, band->count ? band->hz[0] : 0};
    for (int i = 0; i < band->count; i++) {
        if (!band->judged[i])
            continue;
        double complex ratio = 1;
        for (int k = 0; k < job->out->count; k++)
            ratio *= section_ratio(job, k, band->theta[i]);
        keep_peak(magnitude, fabs(20 * log10(cabs(ratio))), band->hz[i]);
        keep_peak(phase, fabs(carg(ratio)) * 180 / M_PI, band->hz[i]);
    }
}
