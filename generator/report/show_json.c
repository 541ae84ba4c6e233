/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/show.h"

#include <math.h>

#include "report/json_value.h"
#include "report/tolerance.h"

#define ROWS 61

static json_t *table(const pw_roots *analog, const double span_hz[2])
{
    json_t *list = json_array();
    for (int i = 0; i < ROWS; i++) {
        double hz = span_hz[0] * pow(span_hz[1] / span_hz[0], i / (double)(ROWS - 1));
        json_t *row = json_object();
        pw_show_point point = pw_show_at(analog, hz);
        pw_json_put(row, "hz", pw_json_number(hz));
        pw_json_put(row, "analog_db", pw_json_number(point.db));
        pw_json_put(row, "analog_deg", pw_json_number(point.deg));
        pw_json_put(row, "analog_delay_s", pw_json_number(pw_analog_group_delay(analog, hz)));
        json_array_append_new(list, row);
    }
    return list;
}

void pw_show_json(const pw_stage *stage, const pw_roots *analog, pw_text *out)
{
    double span[2];
    json_t *o = json_object();
    pw_show_span(stage, analog, span);
    pw_json_put(o, "format", pw_json_text("polewright-show-1"));
    pw_json_put(o, "stage", pw_json_text(stage->name));
    pw_json_put(o, "about", pw_json_text(stage->about));
    pw_json_put(o, "rate_hz", pw_json_number(stage->rate_hz));
    pw_json_put(o, "version", pw_json_text(PW_VERSION));
    pw_json_put(o, "stage_file_sha256", pw_json_text(stage->sha256));
    pw_json_put(o, "analog", pw_json_roots(analog));
    pw_json_put(o, "circuits", pw_json_circuits(stage));
    pw_json_put(o, "table", table(analog, span));
    pw_json_write(o, out);
}
