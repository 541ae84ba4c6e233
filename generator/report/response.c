/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/response.h"

#include <math.h>
#include <stdbool.h>
#include <stdlib.h>

#include "discrete/errors.h"
#include "discrete/longs.h"

typedef struct sides {
    const pw_roots *analog;
    const pw_digital *digital;
    const pw_realisation *realisation;
    double rate_hz;
} sides;

static double complex circle(double rate_hz, double hz)
{
    double angle = 2 * M_PI * (hz / rate_hz);
    return pw_complex(cos(angle), sin(angle));
}

double complex pw_realised_response(const pw_realisation *realisation, double rate_hz, double hz)
{
    double complex z = circle(rate_hz, hz), product = 1;
    for (int k = 0; k < realisation->count; k++) {
        const pw_words *words = &realisation->section[k];
        product *= pw_section_at(words->realised_b, words->realised_a, z);
    }
    return product * (realisation->output_full_scale / realisation->input_full_scale);
}

double pw_realised_group_delay(const pw_realisation *realisation, double rate_hz, double hz)
{
    double complex z = circle(rate_hz, hz);
    double samples = 0;
    for (int k = 0; k < realisation->count; k++) {
        const pw_words *words = &realisation->section[k];
        samples += pw_section_group_delay(words->realised_b, words->realised_a, z);
    }
    return samples / rate_hz;
}

static double complex analog_at(const void *context, double hz)
{
    return pw_analog_at(((const sides *)context)->analog, hz);
}

static double analog_delay(const void *context, double hz)
{
    return pw_analog_group_delay(((const sides *)context)->analog, hz);
}

static double complex digital_at(const void *context, double hz)
{
    const sides *all = context;
    return pw_digital_at(&all->digital->z, all->rate_hz, hz);
}

static double digital_delay(const void *context, double hz)
{
    const sides *all = context;
    return pw_digital_group_delay(&all->digital->z, all->rate_hz, hz);
}

static double complex realised_at(const void *context, double hz)
{
    const sides *all = context;
    return pw_realised_response(all->realisation, all->rate_hz, hz);
}

static double realised_delay(const void *context, double hz)
{
    const sides *all = context;
    return pw_realised_group_delay(all->realisation, all->rate_hz, hz);
}

/* The roots of c0 z^2 + c1 z + c2, as a model's poles, for the grid alone. */
static void add_quadratic(pw_roots *roots, const double c[3])
{
    if (c[0] == 0 || c[2] == 0 || roots->poles + 2 > PW_MAX_ROOTS) return;
    double half = -c[1] / (2 * c[0]), product = c[2] / c[0], under = half * half - product;
    if (under < 0) {
        roots->pole[roots->poles++] = pw_complex(half, sqrt(-under));
        return;
    }
    double larger = half + copysign(sqrt(under), half);
    roots->pole[roots->poles++] = larger;
    roots->pole[roots->poles++] = product / larger;
}

/* The words may have moved the roots away from the digital ones. */
static void add_realised(pw_grid *grid, const pw_realisation *realisation, double rate_hz)
{
    for (int k = 0; k < realisation->count; k++) {
        pw_roots roots = {.poles = 0};
        add_quadratic(&roots, realisation->section[k].realised_a);
        add_quadratic(&roots, realisation->section[k].realised_b);
        pw_grid_add_digital(grid, &roots, rate_hz);
    }
}

static void make_grid(const pw_stage *stage, const sides *all, pw_grid *grid)
{
    pw_grid_make(grid, stage->limits.band_hz[0], stage->limits.band_hz[1]);
    pw_grid_add_analog(grid, all->analog);
    pw_grid_add_digital(grid, &all->digital->z, all->rate_hz);
    add_realised(grid, all->realisation, all->rate_hz);
    pw_grid_sort(grid);
}

static double decibels(double complex value)
{
    return fmin(fmax(20 * log10(cabs(value)), -PW_WORST_DB), PW_WORST_DB);
}

static double degrees(double complex value)
{
    return value == 0 ? 0 : carg(value) * 180 / M_PI;
}

static void fill_row(const sides *all, double hz, pw_response_row *row)
{
    double complex analog = analog_at(all, hz), realised = realised_at(all, hz);
    row->hz = hz;
    row->analog_db = decibels(analog);
    row->analog_deg = degrees(analog);
    row->digital_db = decibels(realised);
    row->digital_deg = degrees(realised);
    row->analog_delay_s = analog_delay(all, hz);
    row->digital_delay_s = realised_delay(all, hz);
}

static void add_row(pw_response *out, const double span[2], double hz)
{
    if (hz > span[0] && hz < span[1] && out->rows < PW_RESPONSE_ROWS) out->row[out->rows++].hz = hz;
}

/* What lies between two log-spaced rows would be missing in a plot: the neighbourhood of narrow pairs. */
static void add_pair(pw_response *out, const double span[2], double complex root)
{
    static const double away[] = {-6, -3, -1.5, -0.7, -0.3, 0, 0.3, 0.7, 1.5, 3, 6};
    double hz = fabs(cimag(root)) / (2 * M_PI), half_width = fabs(creal(root)) / (2 * M_PI);
    if (cimag(root) <= 0 || half_width > hz / 6) return;
    bool on_axis = half_width < hz * 1e-3;       /* there the curve is a spike, as high as one looks closely */
    half_width = fmax(half_width, hz * 1e-3);
    for (size_t i = 0; i < sizeof away / sizeof *away; i++)
        if (!on_axis || fabs(away[i]) >= 1) add_row(out, span, hz + away[i] * half_width);
}

static void add_peaks(pw_response *out, const double span[2])
{
    const pw_error_figures *const list[] = {&out->total, &out->quantisation, &out->transform};
    for (int i = 0; i < 3; i++) {
        add_row(out, span, list[i]->magnitude_db.at_hz);
        add_row(out, span, list[i]->phase_deg.at_hz);
        add_row(out, span, list[i]->delay_s.at_hz);
    }
}

static int by_frequency(const void *a, const void *b)
{
    double left = ((const pw_response_row *)a)->hz, right = ((const pw_response_row *)b)->hz;
    return (left > right) - (left < right);
}

static void add_between(const pw_roots *analog, const double span[2], pw_response *out)
{
    add_peaks(out, span);
    for (int i = 0; i < analog->zeros; i++) add_pair(out, span, analog->zero[i]);
    for (int i = 0; i < analog->poles; i++) add_pair(out, span, analog->pole[i]);
    qsort(out->row, (size_t)out->rows, sizeof *out->row, by_frequency);
    int kept = 1;
    for (int i = 1; i < out->rows; i++)
        if (out->row[i].hz > out->row[kept - 1].hz * (1 + 1e-9)) out->row[kept++].hz = out->row[i].hz;
    out->rows = kept;
}

static void fill_table(const sides *all, pw_response *out)
{
    double high = fmin(2 * out->band_hz[1], 0.495 * all->rate_hz);
    if (high < out->band_hz[1]) high = out->band_hz[1];
    double low = out->band_hz[0] > 0 ? out->band_hz[0] / 2 : high * 1e-5;
    out->rows = PW_RESPONSE_SPACED;
    for (int i = 0; i < out->rows; i++)
        out->row[i].hz = low * pow(high / low, (double)i / (PW_RESPONSE_SPACED - 1));
    add_between(all->analog, (const double[]){low, high}, out);
    for (int i = 0; i < out->rows; i++) fill_row(all, out->row[i].hz, &out->row[i]);
}

void pw_response_analyse(const pw_stage *stage, const pw_roots *analog, const pw_digital *digital,
                         const pw_realisation *realisation, pw_response *out)
{
    sides all = {analog, digital, realisation, stage->rate_hz};
    pw_side truth = {analog_at, analog_delay, &all};
    pw_side made = {digital_at, digital_delay, &all};
    pw_side realised = {realised_at, realised_delay, &all};
    double floor_db = stage->limits.floor_db;
    pw_grid grid;
    out->band_hz[0] = stage->limits.band_hz[0];
    out->band_hz[1] = stage->limits.band_hz[1];
    make_grid(stage, &all, &grid);
    pw_compare(&grid, &truth, &truth, &made, floor_db, &out->transform);
    pw_compare(&grid, &truth, &made, &realised, floor_db, &out->quantisation);
    pw_compare(&grid, &truth, &truth, &realised, floor_db, &out->total);
    pw_grid_free(&grid);
    fill_table(&all, out);
}
