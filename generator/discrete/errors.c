/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Errors between two responses, judged where the analog magnitude is above the floor. */
#include "discrete/errors.h"

#include <math.h>
#include <stdlib.h>

#include "base/arena.h"

typedef enum error_kind { MAGNITUDE, PHASE, DELAY } error_kind;

typedef struct comparison {
    const pw_side *judge, *truth, *other;
    double least;                /* of the judge's magnitude */
    double bottom;               /* levels below count as this */
    error_kind kind;
} comparison;

static double level_error(double complex truth, double complex other, double bottom)
{
    double from = fmax(cabs(truth), bottom), to = fmax(cabs(other), bottom);
    if (from == to) return 0;
    if (from == 0 || to == 0 || !isfinite(from) || !isfinite(to)) return PW_WORST_DB;
    return fmin(fabs(20 * log10(to / from)), PW_WORST_DB);
}

static double phase_error(double complex truth, double complex other, double bottom)
{
    if (cabs(truth) < bottom || cabs(other) < bottom) return 0;
    double complex turn = other * conj(truth / cabs(truth));
    if (!(cabs(turn) > 0) || !isfinite(cabs(turn))) return 0;   /* no phase at a zero or a pole */
    return fabs(carg(turn)) * 180 / M_PI;
}

static double error_of(const comparison *c, double hz, double complex truth, double complex other)
{
    if (c->kind == MAGNITUDE) return level_error(truth, other, c->bottom);
    if (c->kind == PHASE) return phase_error(truth, other, c->bottom);
    return fabs(c->other->delay(c->other->context, hz) - c->truth->delay(c->truth->context, hz));
}

/* < 0 below the floor. */
static double error_at(const void *context, double hz)
{
    const comparison *c = context;
    double complex judge = c->judge->at(c->judge->context, hz);
    if (cabs(judge) < c->least) return -1;
    if (c->kind == DELAY) return error_of(c, hz, 0, 0);
    double complex truth = c->judge == c->truth ? judge : c->truth->at(c->truth->context, hz);
    return error_of(c, hz, truth, c->other->at(c->other->context, hz));
}

static double judged_level(const void *context, double hz)
{
    const pw_side *judge = context;
    return cabs(judge->at(judge->context, hz));
}

static void sample_side(const pw_side *side, const pw_grid *grid, double complex *out)
{
    for (int i = 0; i < grid->count; i++) out[i] = side->at(side->context, grid->hz[i]);
}

static pw_error_peak worst(const pw_grid *grid, const comparison *c, const double *judge,
                           const double complex *truth, const double complex *other, double *value)
{
    for (int i = 0; i < grid->count; i++)
        value[i] = judge[i] < c->least ? -1 : error_of(c, grid->hz[i], truth[i], other[i]);
    return pw_grid_follow(grid, value, error_at, c);
}

void pw_compare(const pw_grid *grid, const pw_side *judge, const pw_side *truth,
                const pw_side *other, double floor_db, pw_error_figures *out)
{
    size_t n = (size_t)grid->count;
    double *level = pw_take(2 * n * sizeof *level), *value = level + n;
    double complex *truths = pw_take(2 * n * sizeof *truths), *others = truths + n;
    for (size_t i = 0; i < n; i++) level[i] = judged_level(judge, grid->hz[i]);
    double top = pw_grid_follow(grid, level, judged_level, judge).max;
    sample_side(truth, grid, truths);
    sample_side(other, grid, others);
    comparison c = {.judge = judge, .truth = truth, .other = other, .kind = MAGNITUDE};
    if (isfinite(top)) {
        c.least = top * pow(10, -floor_db / 20);
        c.bottom = top * pow(10, -2 * floor_db / 20);
    }
    out->magnitude_db = worst(grid, &c, level, truths, others, value);
    c.kind = PHASE;
    out->phase_deg = worst(grid, &c, level, truths, others, value);
    out->delay_s = (pw_error_peak){0, grid->low};
    c.kind = DELAY;
    if (truth->delay && other->delay)
        out->delay_s = worst(grid, &c, level, truths, others, value);
    free(level);
    free(truths);
}

/* ---- digital against analog ---- */

typedef struct digital_context { const pw_roots *z; double rate_hz; } digital_context;

static double complex analog_response(const void *context, double hz)
{
    return pw_analog_at(context, hz);
}

static double complex digital_response(const void *context, double hz)
{
    const digital_context *d = context;
    return pw_digital_at(d->z, d->rate_hz, hz);
}

void pw_compare_digital(const pw_roots *analog, const pw_roots *z, double rate_hz,
                        const double band_hz[2], double floor_db, pw_error_figures *out)
{
    digital_context context = {z, rate_hz};
    pw_side truth = {analog_response, NULL, analog}, other = {digital_response, NULL, &context};
    pw_grid grid;
    pw_grid_make(&grid, band_hz[0], band_hz[1]);
    pw_grid_add_analog(&grid, analog);
    pw_grid_add_digital(&grid, z, rate_hz);
    pw_grid_sort(&grid);
    pw_compare(&grid, &truth, &truth, &other, floor_db, out);
    pw_grid_free(&grid);
}
