/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/tolerance.h"

#include <inttypes.h>

#include "analog/spread.h"
#include "report/figures.h"
#include "report/json_value.h"

static void add_share(const char *of, double share, pw_text *out)
{
    if (share < 0.001) pw_text_print(out, "less than 0.1 %% of it in %s", of);
    else pw_text_print(out, "%.3g %% of it in %s", share * 100, of);
}

void pw_phrase_spread(const pw_results *results, pw_text *out)
{
    const pw_spread *s = results->spread;
    const pw_error_figures *e = &results->response.total;
    char db[PW_FIGURE_ROOM], deg[PW_FIGURE_ROOM], hz[2][PW_FIGURE_ROOM], parts[PW_FIGURE_ROOM];
    if (!s) return;
    pw_text_print(out, "tolerances of %s move the stage itself by up to %s at %s and %s at %s "
                  "(%" PRId64 " draws, seed %" PRIu64 ", and the worst corners)",
                  pw_count(parts, s->parts, "part"), pw_figure(db, s->worst_db, "dB"),
                  pw_figure(hz[0], s->worst_db_hz, "Hz"), pw_figure(deg, s->worst_deg, "deg"),
                  pw_figure(hz[1], s->worst_deg_hz, "Hz"), s->drawn, s->seed);
    pw_text_add(out, "; the replacement's own error is ");
    add_share("magnitude", pw_spread_share_db(s, e->magnitude_db.max), out);
    pw_text_add(out, " and ");
    add_share("phase", pw_spread_share_deg(s, e->phase_deg.max), out);
    if (s->unstable) pw_text_print(out, "; %" PRId64 " of the draws are unstable", s->unstable);
}

static json_t *range(const pw_range *r)
{
    json_t *o = json_object();
    pw_json_put(o, "nominal", pw_json_number(r->nominal));
    pw_json_put(o, "low", pw_json_number(r->low));
    pw_json_put(o, "high", pw_json_number(r->high));
    pw_json_put(o, "corner_low", pw_json_number(r->corner_low));
    pw_json_put(o, "corner_high", pw_json_number(r->corner_high));
    return o;
}

static json_t *worst(double max, double at_hz)
{
    json_t *o = json_object();
    pw_json_put(o, "max", pw_json_number(max));
    pw_json_put(o, "at_hz", pw_json_number(at_hz));
    return o;
}

static json_t *table(const pw_spread *s)
{
    json_t *list = json_array();
    for (int i = 0; i < s->rows; i++) {
        json_t *o = json_object();
        pw_json_put(o, "hz", pw_json_number(s->row[i].hz));
        pw_json_put(o, "db", range(&s->row[i].db));
        pw_json_put(o, "deg", range(&s->row[i].deg));
        pw_json_put(o, "delay_s", range(&s->row[i].delay_s));
        json_array_append_new(list, o);
    }
    return list;
}

json_t *pw_json_spread(const pw_results *results)
{
    const pw_spread *s = results->spread;
    const pw_error_figures *e = &results->response.total;
    if (!s) return json_null();
    json_t *o = json_object(), *share = json_object();
    pw_json_put(share, "magnitude", pw_json_number(pw_spread_share_db(s, e->magnitude_db.max)));
    pw_json_put(share, "phase", pw_json_number(pw_spread_share_deg(s, e->phase_deg.max)));
    pw_json_put(o, "parts", json_integer(s->parts));
    pw_json_put(o, "draws", json_integer(s->drawn));
    pw_json_put(o, "seed", json_integer((json_int_t)s->seed));
    pw_json_put(o, "unstable_draws", json_integer(s->unstable));
    pw_json_put(o, "magnitude_db", worst(s->worst_db, s->worst_db_hz));
    pw_json_put(o, "phase_deg", worst(s->worst_deg, s->worst_deg_hz));
    pw_json_put(o, "error_share", share);
    pw_json_put(o, "table", table(s));
    return o;
}
