/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analog/spread.h"

#include <math.h>
#include <pthread.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include <gsl/gsl_qrng.h>

#include "analog/sensitivity.h"
#include "analog/spread_study.h"
#include "base/progress.h"

#define BLOCK 2048               /* draws that are placed, then shared out, at a time */
#define MOST_THREADS 64

/* The least and most of what draws did to a row. */
typedef struct extent { pw_change least, most; } extent;

typedef struct worker {
    pthread_t thread;
    pw_bench bench;
    const double *x;             /* of the block: [draw * n + part] */
    int from, to;                /* draws of the block */
    extent *extent;
    int64_t unstable;
} worker;

/* ---- The study ---- */

static void add_varied(pw_study *study, int circuit)
{
    const pw_circuit *c = study->net[circuit].circuit;
    for (int i = 0; i < c->parts; i++) {
        const pw_part *part = &c->part[i];
        if (!(part->tolerance > 0) || (part->kind == PW_OP_AMP && part->ideal)) continue;
        study->varied[study->n++] = (pw_varied){circuit, i, part->tolerance, part->normal};
    }
}

void pw_study_begin(const pw_stage *stage, const pw_circuit_list *list, const double *hz,
                        int rows, pw_study *study)
{
    int parts = 0;
    for (int i = 0; i < list->count; i++) parts += list->circuit[i].parts;
    study->circuits = list->count;
    study->net = pw_arena_take(&study->arena, (size_t)(list->count + 1) * sizeof *study->net);
    study->varied = pw_arena_take(&study->arena, (size_t)(parts + 1) * sizeof *study->varied);
    study->hz = hz;
    study->rows = rows;
    study->seed = stage->spread.seed;
    study->s0 = 1.37 * 2 * M_PI * sqrt(hz[0] * hz[rows - 1]);
    for (int i = 0; i < list->count; i++) {
        pw_net_make(&list->circuit[i], &study->net[i]);
        add_varied(study, i);
    }
}

void pw_study_end(pw_study *study)
{
    for (int i = 0; i < study->circuits; i++) pw_net_free(&study->net[i]);
    pw_arena_free(&study->arena);
}

/* The nominal stage by the same equations, so that ratios to it are exact where nothing moves. */
bool pw_study_nominal(pw_study *study)
{
    pw_bench bench;
    pw_bench_make(study, &bench);
    size_t rows = (size_t)study->rows;
    double *x = pw_arena_take(&bench.arena, (size_t)(study->n + 1) * sizeof *x);
    study->nominal =
        pw_arena_take(&study->arena, (size_t)study->circuits * rows * sizeof *study->nominal);
    study->nominal_slope = pw_arena_take(&study->arena, rows * sizeof *study->nominal_slope);
    bool good = pw_bench_set(&bench, x);
    for (int i = 0; i < study->circuits && good; i++)
        for (int row = 0; row < study->rows; row++) {
            double complex slope, *h = &study->nominal[i * study->rows + row];
            pw_reduced_at(&bench.model[i], CMPLX(0, 2 * M_PI * study->hz[row]), h, &slope);
            study->nominal_slope[row] += creal(slope / *h);
        }
    pw_bench_free(&bench);
    return good;
}

static void fill_nominal(const pw_roots *analog, pw_spread_row *row, double hz)
{
    double log_magnitude, phase;
    pw_roots_log_at(analog, CMPLX(0, 2 * M_PI * hz), &log_magnitude, &phase);
    double value[] = {log_magnitude * 20 / M_LN10, phase * 180 / M_PI,
                      pw_analog_group_delay(analog, hz)};
    pw_range *range[] = {&row->db, &row->deg, &row->delay_s};
    row->hz = hz;
    for (int k = 0; k < 3; k++)
        *range[k] = (pw_range){value[k], value[k], value[k], value[k], value[k]};
}

/* ---- Draws ---- */

static void widen(extent *e, pw_change c)
{
    e->least.log_ratio = fmin(e->least.log_ratio, c.log_ratio);
    e->most.log_ratio = fmax(e->most.log_ratio, c.log_ratio);
    e->least.degrees = fmin(e->least.degrees, c.degrees);
    e->most.degrees = fmax(e->most.degrees, c.degrees);
    e->least.delay_s = fmin(e->least.delay_s, c.delay_s);
    e->most.delay_s = fmax(e->most.delay_s, c.delay_s);
}

static void *work(void *argument)
{
    worker *w = argument;
    const pw_study *study = w->bench.study;
    for (int draw = w->from; draw < w->to; draw++) {
        if (!pw_bench_set(&w->bench, w->x + (size_t)draw * (size_t)study->n)) {
            w->unstable++;
            continue;
        }
        for (int row = 0; row < study->rows; row++)
            widen(&w->extent[row], pw_bench_at(&w->bench, row));
        w->unstable += pw_bench_unstable(&w->bench);
    }
    return NULL;
}

/* Shares a block out; a thread that the system refuses is worked here instead. */
static void run_block(worker *workers, int threads, const double *x, int draws)
{
    bool started[MOST_THREADS];
    for (int i = 0; i < threads; i++) {
        workers[i].x = x;
        workers[i].from = draws * i / threads;
        workers[i].to = draws * (i + 1) / threads;
        started[i] =
            i + 1 < threads && !pthread_create(&workers[i].thread, NULL, work, &workers[i]);
    }
    for (int i = threads - 1; i >= 0; i--) {
        if (started[i]) pthread_join(workers[i].thread, NULL);
        else work(&workers[i]);
    }
}

static int thread_count(const pw_spread_options *options)
{
    long n = options->threads > 0 ? options->threads : sysconf(_SC_NPROCESSORS_ONLN);
    return n < 1 ? 1 : n > MOST_THREADS ? MOST_THREADS : (int)n;
}

static void make_workers(const pw_study *study, worker *workers, int threads)
{
    for (int i = 0; i < threads; i++) {
        workers[i] = (worker){0};
        pw_bench_make(study, &workers[i].bench);
        workers[i].extent =
            pw_arena_take(&workers[i].bench.arena, (size_t)study->rows * sizeof(extent));
    }
}

static void take_extents(const pw_study *study, worker *w, pw_spread *out)
{
    for (int i = 0; i < study->rows; i++) {
        pw_spread_row *row = &out->row[i];
        const extent *e = &w->extent[i];
        row->db.low = fmin(row->db.low, row->db.nominal + e->least.log_ratio * 20 / M_LN10);
        row->db.high = fmax(row->db.high, row->db.nominal + e->most.log_ratio * 20 / M_LN10);
        row->deg.low = fmin(row->deg.low, row->deg.nominal + e->least.degrees);
        row->deg.high = fmax(row->deg.high, row->deg.nominal + e->most.degrees);
        row->delay_s.low = fmin(row->delay_s.low, row->delay_s.nominal + e->least.delay_s);
        row->delay_s.high = fmax(row->delay_s.high, row->delay_s.nominal + e->most.delay_s);
    }
    out->unstable += w->unstable;
    pw_bench_free(&w->bench);
}

/* Places the draws of a block: Sobol's points come in order only, so one thread takes them. */
static void place_block(const pw_study *study, gsl_qrng *sobol, int64_t first, int draws, double *x)
{
    double points[PW_SOBOL_PARTS];
    for (int i = 0; i < draws; i++) {
        gsl_qrng_get(sobol, points);
        pw_study_place(study, first + i, points, x + (size_t)i * (size_t)study->n);
    }
}

static void draw_all(const pw_study *study, const pw_spread_options *options, pw_spread *out)
{
    int threads = thread_count(options),
        sobol_parts = study->n < PW_SOBOL_PARTS ? study->n : PW_SOBOL_PARTS;
    double points[PW_SOBOL_PARTS], *x = pw_take((size_t)BLOCK * (size_t)study->n * sizeof *x);
    gsl_qrng *sobol = gsl_qrng_alloc(gsl_qrng_sobol, (unsigned)sobol_parts);
    worker *workers = pw_take((size_t)threads * sizeof *workers);
    pw_progress progress;
    make_workers(study, workers, threads);
    pw_progress_begin(&progress, "drawing tolerances", (double)out->drawn, "draws", options->quiet);
    for (int64_t i = 0; i < out->done[0].from; i++) gsl_qrng_get(sobol, points);
    for (int64_t i = out->done[0].from; i < out->done[0].to; i += BLOCK) {
        int draws = out->done[0].to - i < BLOCK ? (int)(out->done[0].to - i) : BLOCK;
        place_block(study, sobol, i, draws, x);
        run_block(workers, threads, x, draws);
        pw_progress_step(&progress, (double)(i + draws - out->done[0].from));
    }
    pw_progress_end(&progress);
    for (int i = 0; i < threads; i++) take_extents(study, &workers[i], out);
    gsl_qrng_free(sobol);
    free(workers);
    free(x);
}

/* ---- The whole ---- */

static pw_spread *new_spread(const pw_stage *stage, const pw_study *study,
                             const pw_spread_options *options)
{
    pw_spread *out = pw_take(sizeof *out);
    int64_t draws = stage->spread.draws, shards = options->shards > 0 ? options->shards : 1;
    int64_t shard = options->shards > 0 ? options->shard - 1 : 0;
    memcpy(out->sha256, stage->sha256, sizeof out->sha256);
    out->seed = stage->spread.seed;
    out->draws = draws;
    out->parts = study->n;
    out->floor_db = stage->limits.floor_db;
    out->rows = study->rows;
    out->row = pw_take((size_t)study->rows * sizeof *out->row);
    out->done = pw_take(sizeof *out->done);
    out->done[0] = (pw_draws){draws * shard / shards, draws * (shard + 1) / shards};
    out->dones = 1;
    out->drawn = out->done[0].to - out->done[0].from;
    return out;
}

static pw_status spread_study(const pw_stage *stage, const pw_roots *analog, pw_study *study,
                              const pw_spread_options *options, pw_spread **out,
                              pw_messages *messages)
{
    if (!study->n) return PW_OK;
    pw_spread *spread = new_spread(stage, study, options);
    for (int i = 0; i < study->rows; i++) fill_nominal(analog, &spread->row[i], study->hz[i]);
    if (!pw_study_nominal(study) || !pw_study_corners(study, spread->row)) {
        pw_error(messages, stage->analog.at,
                 "the circuit has no response at a corner of its tolerances; "
                 "expected smaller tolerances");
        pw_spread_free(spread);
        return PW_FAILED;
    }
    draw_all(study, options, spread);
    pw_spread_finish(spread);
    *out = spread;
    return PW_OK;
}

pw_status pw_spread_compute_at(const pw_stage *stage, const pw_roots *analog, const double *hz,
                               int n, const pw_spread_options *options, pw_spread **out,
                               pw_messages *messages)
{
    pw_arena arena = {0};
    pw_circuit_list list;
    pw_study study = {0};
    *out = NULL;
    pw_status status = pw_circuits_of(&stage->analog, &arena, &list, messages);
    if (!status && n > 0) {
        pw_study_begin(stage, &list, hz, n, &study);
        status = spread_study(stage, analog, &study, options, out, messages);
        pw_study_end(&study);
    }
    pw_arena_free(&arena);
    return status;
}

pw_status pw_spread_compute(const pw_stage *stage, const pw_roots *analog,
                            const pw_spread_options *options, pw_spread **out,
                            pw_messages *messages)
{
    double hz[PW_SPREAD_ROWS], low = stage->limits.band_hz[0], high = stage->limits.band_hz[1];
    for (int i = 0; i < PW_SPREAD_ROWS; i++)
        hz[i] = i == PW_SPREAD_ROWS - 1 ? high : low * pow(high / low, i / (PW_SPREAD_ROWS - 1.0));
    return pw_spread_compute_at(stage, analog, hz, PW_SPREAD_ROWS, options, out, messages);
}

void pw_spread_free(pw_spread *spread)
{
    if (!spread) return;
    free(spread->row);
    free(spread->done);
    free(spread);
}

bool pw_spread_applies(const pw_stage *stage)
{
    pw_arena arena = {0};
    pw_messages unheard = {0};
    pw_circuit_list list;
    bool any = false;
    if (!pw_circuits_of(&stage->analog, &arena, &list, &unheard))
        for (int i = 0; i < list.count; i++)
            for (int k = 0; k < list.circuit[i].parts; k++)
                any |= list.circuit[i].part[k].tolerance > 0;
    pw_messages_free(&unheard);
    pw_arena_free(&arena);
    return any;
}
