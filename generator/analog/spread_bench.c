/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One stage of a spread: its parts placed, its rows beside the nominal ones; and the corners. */
#include <math.h>
#include <string.h>

#include <gsl/gsl_cdf.h>

#include "analog/spread_study.h"

#define LEAST_SCALE 1e-3         /* a part never falls below a thousandth of its value */
#define LEAST_RATIO 1e-20        /* -400 dB */
#define SIGN_STEP 1e-3           /* of the tolerance, for the signs of sensitivities */

void pw_bench_make(const pw_study *study, pw_bench *bench)
{
    *bench = (pw_bench){.study = study};
    size_t n = (size_t)study->circuits;
    bench->model = pw_arena_take(&bench->arena, n * sizeof *bench->model);
    bench->scale = pw_arena_take(&bench->arena, n * sizeof *bench->scale);
    for (int i = 0; i < study->circuits; i++) {
        int parts = study->net[i].circuit->parts;
        pw_reduced_make(&study->net[i], study->s0, &bench->arena, &bench->model[i]);
        bench->scale[i] = pw_arena_take(&bench->arena, (size_t)(parts + 1) * sizeof **bench->scale);
        for (int k = 0; k < parts; k++) bench->scale[i][k] = 1;
    }
}

void pw_bench_free(pw_bench *bench)
{
    for (int i = 0; i < bench->study->circuits; i++) pw_reduced_free(&bench->model[i]);
    pw_arena_free(&bench->arena);
}

bool pw_bench_set(pw_bench *bench, const double *x)
{
    const pw_study *study = bench->study;
    for (int i = 0; i < study->n; i++) {
        const pw_varied *v = &study->varied[i];
        bench->scale[v->circuit][v->part] = fmax(LEAST_SCALE, 1 + v->tolerance * x[i]);
    }
    for (int i = 0; i < study->circuits; i++)
        if (!pw_reduced_set(&bench->model[i], bench->scale[i])) return false;
    return true;
}

pw_change pw_bench_at(pw_bench *bench, int row)
{
    const pw_study *study = bench->study;
    double complex s = CMPLX(0, 2 * M_PI * study->hz[row]), ratio = 1, h, slope;
    double slopes = 0;
    for (int i = 0; i < study->circuits; i++) {
        pw_reduced_at(&bench->model[i], s, &h, &slope);
        ratio *= h / study->nominal[i * study->rows + row];
        slopes += creal(slope / h);
    }
    double size = fmax(LEAST_RATIO, cabs(ratio));
    return (pw_change){log(size), carg(ratio) * 180 / M_PI, study->nominal_slope[row] - slopes};
}

bool pw_bench_unstable(pw_bench *bench)
{
    bool unstable = false;
    for (int i = 0; i < bench->study->circuits; i++)
        unstable |= pw_reduced_unstable(&bench->model[i]);
    return unstable;
}

/* ---- Where a draw stands ---- */

/* Steele, Lea and Flood's SplitMix64 (2014), as a hash of a counter. */
static double uniform(uint64_t seed, uint64_t index)
{
    uint64_t z = seed * UINT64_C(0xd1342543de82ef95) + (index + 1) * UINT64_C(0x9e3779b97f4a7c15);
    z = (z ^ (z >> 30)) * UINT64_C(0xbf58476d1ce4e5b9);
    z = (z ^ (z >> 27)) * UINT64_C(0x94d049bb133111eb);
    return (double)((z ^ (z >> 31)) >> 11) * 0x1p-53;
}

void pw_study_place(const pw_study *study, int64_t draw, const double *points, double *x)
{
    for (int i = 0; i < study->n; i++) {
        double u =
            i < PW_SOBOL_PARTS
                ? points[i] + uniform(study->seed, (uint64_t)i)
                : uniform(study->seed, (uint64_t)(draw + 1) * (uint64_t)study->n + (uint64_t)i);
        u -= floor(u);
        u = fmin(fmax(u, 1e-12), 1 - 1e-12);
        x[i] = study->varied[i].normal ? gsl_cdf_ugaussian_Pinv(u) / 3 : 2 * u - 1;
    }
}

/* ---- Corners ---- */

enum { MAGNITUDE, PHASE, DELAY, QUANTITIES };

static double pick(pw_change c, int quantity)
{
    return quantity == MAGNITUDE ? c.log_ratio * 20 / M_LN10
           : quantity == PHASE   ? c.degrees
                                 : c.delay_s;
}

/* sign[(quantity * rows + row) * n + part] */
static bool find_signs(pw_bench *bench, signed char *sign)
{
    const pw_study *study = bench->study;
    double *x = pw_arena_take(&bench->arena, (size_t)study->n * sizeof *x);
    pw_change *up = pw_arena_take(&bench->arena, (size_t)study->rows * sizeof *up);
    for (int part = 0; part < study->n; part++) {
        x[part] = SIGN_STEP;
        if (!pw_bench_set(bench, x)) return false;
        for (int row = 0; row < study->rows; row++) up[row] = pw_bench_at(bench, row);
        x[part] = -SIGN_STEP;
        if (!pw_bench_set(bench, x)) return false;
        for (int row = 0; row < study->rows; row++) {
            pw_change down = pw_bench_at(bench, row);
            for (int k = 0; k < QUANTITIES; k++)
                sign[(k * study->rows + row) * study->n + part] =
                    pick(up[row], k) >= pick(down, k) ? 1 : -1;
        }
        x[part] = 0;
    }
    return true;
}

static void keep(pw_range *range, bool high, double value)
{
    if (high) range->corner_high = range->nominal + value;
    else range->corner_low = range->nominal + value;
}

static void keep_corner(pw_spread_row *row, int quantity, bool high, pw_change c)
{
    pw_range *range = quantity == MAGNITUDE ? &row->db
                      : quantity == PHASE   ? &row->deg
                                            : &row->delay_s;
    keep(range, high, pick(c, quantity));
}

bool pw_study_corners(const pw_study *study, pw_spread_row *row)
{
    pw_bench bench;
    pw_bench_make(study, &bench);
    size_t n = (size_t)study->n;
    signed char *sign = pw_arena_take(&bench.arena, n * (size_t)(study->rows * QUANTITIES));
    double *x = pw_arena_take(&bench.arena, n * sizeof *x);
    bool good = find_signs(&bench, sign);
    for (int k = 0; k < QUANTITIES; k++)
        for (int high = 0; high < 2; high++)
            for (int i = 0; i < study->rows && good; i++) {
                const signed char *now = sign + (size_t)(k * study->rows + i) * n;
                if (i == 0 || memcmp(now, now - n, n)) {         /* else the model stands already */
                    for (size_t part = 0; part < n; part++) x[part] = high ? now[part] : -now[part];
                    good = pw_bench_set(&bench, x);
                }
                keep_corner(&row[i], k, high, pw_bench_at(&bench, i));
            }
    pw_bench_free(&bench);
    return good;
}
