/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What is read off a spread, and shards as files. */
#include <inttypes.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "analog/spread.h"
#include "base/arena.h"

#define MOST_ROWS 1000000
#define HEAD "polewright-spread-1"

/* ---- Figures ---- */

static double reach(const pw_range *r)
{
    double most = fmax(r->high, r->corner_high) - r->nominal;
    return fmax(most, r->nominal - fmin(r->low, r->corner_low));
}

void pw_spread_finish(pw_spread *spread)
{
    double largest = -INFINITY;
    for (int i = 0; i < spread->rows; i++) largest = fmax(largest, spread->row[i].db.nominal);
    spread->worst_db = spread->worst_deg = 0;
    spread->worst_db_hz = spread->worst_deg_hz = spread->rows ? spread->row[0].hz : 0;
    for (int i = 0; i < spread->rows; i++) {
        const pw_spread_row *row = &spread->row[i];
        if (row->db.nominal < largest - spread->floor_db) continue;
        if (reach(&row->db) > spread->worst_db) {
            spread->worst_db = reach(&row->db);
            spread->worst_db_hz = row->hz;
        }
        if (reach(&row->deg) > spread->worst_deg) {
            spread->worst_deg = reach(&row->deg);
            spread->worst_deg_hz = row->hz;
        }
    }
}

double pw_spread_share_db(const pw_spread *spread, double error_db)
{
    return error_db / spread->worst_db;
}

double pw_spread_share_deg(const pw_spread *spread, double error_deg)
{
    return error_deg / spread->worst_deg;
}

static void both(const pw_range *a, const pw_range *b, double part, double out[2])
{
    double low[] = {fmin(a->low, a->corner_low), fmin(b->low, b->corner_low)};
    double high[] = {fmax(a->high, a->corner_high), fmax(b->high, b->corner_high)};
    out[0] = low[0] + (low[1] - low[0]) * part;
    out[1] = high[0] + (high[1] - high[0]) * part;
}

void pw_spread_envelope(const pw_spread *spread, double hz, double db[2], double deg[2],
                        double delay_s[2])
{
    int i = 0;
    while (i + 2 < spread->rows && spread->row[i + 1].hz < hz) i++;
    const pw_spread_row *a = &spread->row[i], *b = &spread->row[i + (spread->rows > 1)];
    double part = b->hz > a->hz ? log(hz / a->hz) / log(b->hz / a->hz) : 0;
    part = fmin(1, fmax(0, part));
    both(&a->db, &b->db, part, db);
    both(&a->deg, &b->deg, part, deg);
    both(&a->delay_s, &b->delay_s, part, delay_s);
}

/* ---- Files ---- */

static void put_range(const pw_range *r, pw_text *out)
{
    pw_text_print(out, " %.17g %.17g %.17g %.17g %.17g", r->nominal, r->low, r->high, r->corner_low,
                  r->corner_high);
}

void pw_spread_write(const pw_spread *spread, pw_text *out)
{
    pw_text_print(out,
                  HEAD "\nstage %s\nseed %" PRIu64 "\ndraws %" PRId64 "\nparts %d\nfloor %.17g\n"
                       "unstable %" PRId64 "\n",
                  spread->sha256[0] ? spread->sha256 : "-", spread->seed, spread->draws,
                  spread->parts, spread->floor_db, spread->unstable);
    pw_text_print(out, "done %d\n", spread->dones);
    for (int i = 0; i < spread->dones; i++)
        pw_text_print(out, "%" PRId64 " %" PRId64 "\n", spread->done[i].from, spread->done[i].to);
    pw_text_print(
        out,
        "rows %d\n# hz, then nominal low high corner-low corner-high of dB, degrees, delay in s\n",
        spread->rows);
    for (int i = 0; i < spread->rows; i++) {
        pw_text_print(out, "%.17g", spread->row[i].hz);
        put_range(&spread->row[i].db, out);
        put_range(&spread->row[i].deg, out);
        put_range(&spread->row[i].delay_s, out);
        pw_text_add(out, "\n");
    }
    pw_text_add(out, "end\n");
}

/* The number at *at, which moves behind it. */
static bool take_number(const char **at, double *out)
{
    char *end;
    *out = strtod(*at, &end);
    bool good = end != *at && isfinite(*out);
    *at = end;
    return good;
}

static bool take_range(const char **at, pw_range *r)
{
    return take_number(at, &r->nominal) && take_number(at, &r->low) && take_number(at, &r->high)
           && take_number(at, &r->corner_low) && take_number(at, &r->corner_high);
}

static bool read_rows(const char *at, pw_spread *out)
{
    out->row = pw_take((size_t)out->rows * sizeof *out->row);
    for (int i = 0; i < out->rows; i++) {
        pw_spread_row *row = &out->row[i];
        if (!take_number(&at, &row->hz) || !take_range(&at, &row->db) || !take_range(&at, &row->deg)
            || !take_range(&at, &row->delay_s) || *at++ != '\n') return false;
    }
    return !strcmp(at, "end\n");
}

static bool read_done(const char **at, pw_spread *out)
{
    int used = 0;
    if (sscanf(*at, "done %d\n%n", &out->dones, &used) != 1 || !used || out->dones < 1
        || out->dones > 1000000) return false;
    *at += used;
    out->done = pw_take((size_t)out->dones * sizeof *out->done);
    for (int i = 0; i < out->dones; i++) {
        pw_draws *d = &out->done[i];
        used = 0;
        if (sscanf(*at, "%" SCNd64 " %" SCNd64 "\n%n", &d->from, &d->to, &used) != 2 || !used)
            return false;
        if (d->from < (i ? out->done[i - 1].to : 0) || d->to < d->from || d->to > out->draws)
            return false;
        out->drawn += d->to - d->from;
        *at += used;
    }
    return true;
}

static bool read_all(const char *at, pw_spread *out)
{
    int used = 0;
    if (sscanf(at,
               HEAD "\nstage %64s\nseed %" SCNu64 "\ndraws %" SCNd64
                    "\nparts %d\nfloor %lf\nunstable %" SCNd64 "\n%n",
               out->sha256, &out->seed, &out->draws, &out->parts, &out->floor_db, &out->unstable,
               &used)
            != 6
        || !used)
        return false;
    if (!strcmp(out->sha256, "-")) out->sha256[0] = 0;
    at += used;
    if (!read_done(&at, out)) return false;
    used = 0;
    if (sscanf(at, "rows %d\n# %*[^\n]\n%n", &out->rows, &used) != 1 || !used || out->rows < 1
        || out->rows > MOST_ROWS) return false;
    return read_rows(at + used, out);
}

pw_status pw_spread_read(const char *name, const pw_text *text, pw_spread **out)
{
    pw_spread *spread = pw_take(sizeof *spread);
    *out = NULL;
    if (strlen(pw_text_string(text)) != text->size || !read_all(pw_text_string(text), spread)) {
        fprintf(stderr, "%s: is no whole shard of a spread; expected a file that --shard wrote\n",
                name);
        pw_spread_free(spread);
        return PW_WRONG;
    }
    pw_spread_finish(spread);
    *out = spread;
    return PW_OK;
}

/* ---- Merging ---- */

static bool same_range(const pw_range *a, const pw_range *b)
{
    return a->nominal == b->nominal && a->corner_low == b->corner_low
           && a->corner_high == b->corner_high;
}

bool pw_spread_same_stage(const pw_spread *a, const pw_spread *b)
{
    if (a->rows != b->rows) return false;
    for (int i = 0; i < a->rows; i++)
        if (a->row[i].hz != b->row[i].hz || !same_range(&a->row[i].db, &b->row[i].db)) return false;
    return true;
}

static const char *difference(const pw_spread *a, const pw_spread *b)
{
    if (strcmp(a->sha256, b->sha256)) return "is of another stage file";
    if (a->seed != b->seed) return "has another seed";
    if (a->draws != b->draws) return "is of a study with another number of draws";
    if (a->parts != b->parts || a->rows != b->rows) return "is of another study";
    if (!pw_spread_same_stage(a, b)) return "is of other part values or frequencies";
    for (int i = 0; i < a->dones; i++)
        for (int k = 0; k < b->dones; k++)
            if (a->done[i].from < b->done[k].to && b->done[k].from < a->done[i].to)
                return "has draws that are in already";
    return NULL;
}

static int by_start(const void *left, const void *right)
{
    const pw_draws *l = left, *r = right;
    return l->from < r->from ? -1 : l->from > r->from;
}

static void join_draws(pw_spread *into, const pw_spread *more)
{
    int n = into->dones + more->dones, kept = 0;
    into->done = pw_retake(into->done, (size_t)n * sizeof *into->done);
    memcpy(into->done + into->dones, more->done, (size_t)more->dones * sizeof *into->done);
    qsort(into->done, (size_t)n, sizeof *into->done, by_start);
    for (int i = 1; i < n; i++) {
        if (into->done[i].from == into->done[kept].to) into->done[kept].to = into->done[i].to;
        else into->done[++kept] = into->done[i];
    }
    into->dones = kept + 1;
    into->drawn += more->drawn;
}

static void widen(pw_range *a, const pw_range *b)
{
    a->low = fmin(a->low, b->low);
    a->high = fmax(a->high, b->high);
}

pw_status pw_spread_merge(pw_spread *into, const pw_spread *more, const char *name)
{
    const char *fault = difference(into, more);
    if (fault) {
        fprintf(stderr, "%s: %s; expected shards of one study\n", name, fault);
        return PW_WRONG;
    }
    for (int i = 0; i < into->rows; i++) {
        widen(&into->row[i].db, &more->row[i].db);
        widen(&into->row[i].deg, &more->row[i].deg);
        widen(&into->row[i].delay_s, &more->row[i].delay_s);
    }
    into->unstable += more->unstable;
    join_draws(into, more);
    pw_spread_finish(into);
    return PW_OK;
}
