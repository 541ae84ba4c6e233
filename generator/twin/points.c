/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Measured points against what the stage allows. */
#include <math.h>
#include <stdlib.h>

#include "analog/spread.h"
#include "report/response.h"
#include "twin/compare.h"

static double degrees(double complex h) { return carg(h) * 180 / M_PI; }

/* deg by whole turns, as near to the other as can be. */
static double turned_to(double deg, double other) { return deg - 360 * round((deg - other) / 360); }

void pw_point_models(const pw_results *results, pw_point *point)
{
    double rate = results->stage->rate_hz;
    double complex h = pw_analog_at(&results->analog, point->hz);
    point->analog_db = 20 * log10(cabs(h));
    point->analog_deg = degrees(h);
    point->twin_db = point->twin_deg = NAN;
    if (point->hz >= rate / 2) return;
    h = pw_realised_response(&results->realisation, rate, point->hz);
    point->twin_db = 20 * log10(cabs(h));
    point->twin_deg = turned_to(degrees(h), point->analog_deg);
}

static void allow_limits(const pw_limits *limits, pw_points *points)
{
    if (!limits->magnitude_db.given && !(points->phases && limits->phase_deg.given)) return;
    points->allowed = PW_ALLOWED_LIMITS;
    for (int i = 0; i < points->count; i++) {
        pw_point *p = &points->list[i];
        double db = limits->magnitude_db.given ? limits->magnitude_db.value : INFINITY;
        double deg = limits->phase_deg.given ? limits->phase_deg.value : INFINITY;
        p->low_db = p->analog_db - db, p->high_db = p->analog_db + db;
        p->low_deg = p->analog_deg - deg, p->high_deg = p->analog_deg + deg;
    }
}

static void allow_spread(const pw_spread *spread, pw_points *points)
{
    points->allowed = PW_ALLOWED_TOLERANCES;
    points->draws = spread->drawn;
    points->seed = spread->seed;
    for (int i = 0; i < points->count; i++) {
        const pw_spread_row *row = &spread->row[i];
        pw_point *p = &points->list[i];
        p->low_db = fmin(row->db.low, row->db.corner_low);
        p->high_db = fmax(row->db.high, row->db.corner_high);
        double turn = p->analog_deg - row->deg.nominal;   /* whole turns */
        p->low_deg = fmin(row->deg.low, row->deg.corner_low) + turn;
        p->high_deg = fmax(row->deg.high, row->deg.corner_high) + turn;
    }
}

static bool within(double v, double low, double high, double band)
{
    double slack = band + 1e-9;  /* of the envelope's own arithmetic */
    return v >= low - slack && v <= high + slack;
}

static void judge_point(pw_points *points, pw_point *p)
{
    p->inside = false;
    if (!p->excited || points->allowed == PW_ALLOWED_NOTHING) return;
    points->judged++;
    p->inside = within(p->db, p->low_db, p->high_db, p->band_db);
    if (points->phases && !isnan(p->deg)) {
        double middle = (isfinite(p->low_deg) ? p->low_deg + p->high_deg : 2 * p->analog_deg) / 2;
        p->inside =
            p->inside && within(turned_to(p->deg, middle), p->low_deg, p->high_deg, p->band_deg);
    }
    points->inside += p->inside;
}

pw_status pw_points_judge(const pw_results *results, bool quiet, double share, pw_points *points,
                          pw_messages *messages)
{
    pw_spread *spread = NULL;
    const pw_spread_options options = {.quiet = quiet};
    double *hz = pw_take((size_t)(points->count + 1) * sizeof *hz), most = -1;
    for (int i = 0; i < points->count; i++) {
        pw_point *p = &points->list[i];
        hz[i] = p->hz;
        p->low_db = p->high_db = p->low_deg = p->high_deg = NAN;
    }
    pw_status status = pw_spread_compute_at(results->stage, &results->analog, hz, points->count,
                                            &options, &spread, messages);
    free(hz);
    if (status) return status;
    if (spread) allow_spread(spread, points);
    else allow_limits(&results->stage->limits, points);
    pw_spread_free(spread);
    points->judged = points->inside = 0;
    points->worst = -1;
    for (int i = 0; i < points->count; i++) {
        pw_point *p = &points->list[i];
        double error = fabs(p->db - (isnan(p->twin_db) ? p->analog_db : p->twin_db));
        judge_point(points, p);
        if (p->excited && error > most) most = error, points->worst = i;
    }
    points->agrees = points->judged > 0 && points->inside >= share * points->judged;
    return PW_OK;
}

/* ---- A response file ---- */

static int by_hz(const void *left, const void *right)
{
    const pw_point *l = left, *r = right;
    return l->hz < r->hz ? -1 : l->hz > r->hz;
}

static pw_status take_point(const pw_record *record, const double *v, int64_t n, pw_points *out,
                            size_t *room)
{
    if (!(v[0] > 0))
        return pw_record_wrong(record->path, 0,
                               "point %lld is at %.9g Hz; expected frequencies above 0",
                               (long long)n + 1, v[0]);
    if (n == 1000000) return pw_record_wrong(record->path, 0, "has more than a million points");
    if ((size_t)n == *room) {
        *room = *room ? 2 * *room : 256;
        out->list = pw_retake(out->list, *room * sizeof *out->list);
    }
    out->list[n] = (pw_point){.hz = v[0],
                              .db = v[1],
                              .deg = record->columns > 2 ? v[2] : NAN,
                              .coherence = NAN,
                              .excited = true};
    out->count++;
    return PW_OK;
}

static pw_status read_points(pw_record *record, pw_points *out)
{
    double values[3 * 64];
    size_t got, room = 0;
    pw_status status;
    do {
        status = pw_record_read(record, values, 64, &got);
        for (size_t i = 0; i < got && !status; i++)
            status =
                take_point(record, values + i * (size_t)record->columns, out->count, out, &room);
    } while (got && !status);
    if (!status && !out->count)
        status = pw_record_wrong(record->path, 0, "holds no points; expected lines of hz,db[,deg]");
    return status;
}

pw_status pw_compare_response(const pw_results *results, const char *path, bool quiet,
                              pw_arena *arena, pw_points *out, pw_messages *messages)
{
    pw_record record;
    pw_points points = {.worst = -1};
    *out = points;
    pw_status status = pw_record_open(path, PW_RECORD_RESPONSE, 0, &record);
    if (status) return status;
    points.phases = record.columns > 2;
    status = read_points(&record, &points);
    pw_record_close(&record);
    if (!status) {
        *out = points;
        out->list = pw_arena_take(arena, (size_t)points.count * sizeof *out->list);
        for (int i = 0; i < points.count; i++) out->list[i] = points.list[i];
        qsort(out->list, (size_t)out->count, sizeof *out->list, by_hz);
        for (int i = 0; i < out->count; i++) {
            pw_point *p = &out->list[i];
            pw_point_models(results, p);
            if (!isnan(p->deg)) p->deg = turned_to(p->deg, p->analog_deg);
        }
        status = pw_points_judge(results, quiet, 1, out, messages);
    }
    free(points.list);
    return status;
}
